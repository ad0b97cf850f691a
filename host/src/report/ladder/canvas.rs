//! The drawing under work: its frame, its rows, its words, and the marks so far.

use super::excerpt::Frame;
use super::labels::{Labels, Rank};
use super::layout::{AXIS, Layout};
use crate::report::facts::Facts;
use crate::report::number::{THIN, count};
use crate::report::svg::{Anchor, Point, Svg, clip};
use std::collections::BTreeSet;
use std::fmt::Write;

/// A ladder under work.
#[derive(Debug)]
pub(super) struct Canvas<'a> {
    pub(super) facts: &'a Facts<'a>,
    pub(super) layout: &'a Layout,
    pub(super) frame: Frame,
    pub(super) svg: Svg,
    pub(super) labels: Labels,
    /// Kinds of mark that have their words already: each is named once.
    named: BTreeSet<String>,
    /// Spans that a cut of the drawing must not go through.
    pub(super) whole: Vec<(f64, f64)>,
}

impl<'a> Canvas<'a> {
    pub(super) fn new(facts: &'a Facts<'a>, layout: &'a Layout, frame: Frame) -> Self {
        let (svg, labels) = (Svg::new(), Labels::default());
        Self { facts, layout, frame, svg, labels, named: BTreeSet::new(), whole: Vec::new() }
    }

    pub(super) fn width(&self) -> f64 {
        self.frame.width()
    }

    /// A line, cut at the borders of the frame, that words keep off.
    pub(super) fn line(&mut self, class: &str, from: Point, to: Point) {
        if let Some((from, to)) = clip(from, to, 0.0, self.width()) {
            self.svg.line(class, from, to);
            self.labels.keep_off_line(from, to);
        }
    }

    /// A filled box, cut at the borders.
    pub(super) fn rect(&mut self, class: &str, left: f64, right: f64, top: f64, height: f64) {
        let (left, right) = (left.max(0.0), right.min(self.width()));
        self.svg.rect(class, (left, top), right - left, height);
    }

    /// True if a mark of this half width lies wholly inside.
    pub(super) fn has_room(&self, x: f64, half: f64) -> bool {
        x >= half && x <= self.width() - half
    }

    /// Words for a kind of mark, unless it has been named before. They stand right of it, or left where that has no room.
    pub(super) fn name(&mut self, words: &str, x: f64, y: f64, off: f64) {
        if self.named.insert(words.to_owned()) {
            let places = self.beside(x, y, off);
            self.labels.want(Rank::Origin, "halo", words, places);
        }
    }

    /// Places right and left of a mark; the left first where the right border is near.
    pub(super) fn beside(&self, x: f64, y: f64, off: f64) -> Vec<(Point, Anchor)> {
        let mut places = vec![((x + off, y), Anchor::Start), ((x - off, y), Anchor::End)];
        if x > self.width() - 46.0 {
            places.reverse();
        }
        places
    }

    /// Axis, hairlines at whole seconds, borders of the tiers.
    pub(super) fn draw_axis(&mut self) {
        let (frame, width) = (self.frame, self.width());
        let lane = self.layout.below.filter(|block| block.judged);
        let end = lane.map_or(self.layout.height - 4.0, |block| block.beyond(0.0));
        let mut small = String::new();
        let first = (frame.from / 100_000.0).ceil() as i64;
        let last = (frame.to / 100_000.0).floor() as i64;
        for tenth in first..=last {
            let x = frame.place(tenth as f64 * 100_000.0);
            if tenth % 10 == 0 && tenth >= 0 {
                self.svg.line("sec", (x, AXIS), (x, end));
                if self.has_room(x, 20.0) {
                    self.svg.text("t2", (x, 15.0), Anchor::Middle, &format!("{}{THIN}s", count((tenth / 10).unsigned_abs())));
                }
            } else {
                let _ = write!(small, "M{} {AXIS}V{}", crate::report::svg::Px(x), if tenth % 5 == 0 { 18 } else { 21 });
            }
        }
        self.svg.raw_path("min", &small);
        self.svg.line("tier", (0.0, AXIS), (width, AXIS));
        for (_, y) in &self.layout.sites {
            self.svg.line("tier", (0.0, *y), (width, *y));
        }
    }

    /// Places the words.
    pub(super) fn finish(&mut self) {
        self.labels.place(&mut self.svg, self.frame.width());
        self.whole.extend(self.labels.taken().iter().map(|area| (area.left, area.right)));
    }
}
