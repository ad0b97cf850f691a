//! Words in a drawing: placed in order of rank, turned to where there is room, dropped rather than laid over others.

use crate::report::svg::{Anchor, Point, Svg};

/// Which label yields: a later one to an earlier one.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Rank {
    Broken,
    Number,
    Origin,
    Held,
    Note,
}

/// A box that is taken.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Area {
    pub(super) left: f64,
    pub(super) right: f64,
    pub(super) top: f64,
    pub(super) bottom: f64,
}

impl Area {
    fn meets(&self, other: &Self) -> bool {
        self.left < other.right && other.left < self.right && self.top < other.bottom && other.top < self.bottom
    }

    /// The box of words at a point.
    pub(super) fn of_words(words: &str, bold: bool, (x, y): Point, anchor: Anchor) -> Self {
        let width = words.chars().count() as f64 * if bold { 7.6 } else { 6.8 };
        let left = match anchor {
            Anchor::Start => x,
            Anchor::Middle => x - width / 2.0,
            Anchor::End => x - width,
        };
        Self { left, right: left + width, top: y - 10.0, bottom: y + 3.0 }
    }
}

/// Words that want a place.
#[derive(Debug, Clone)]
struct Want {
    rank: Rank,
    class: &'static str,
    /// One or two lines, each with how far it stands below the point.
    lines: Vec<(f64, String)>,
    places: Vec<(Point, Anchor)>,
    /// A thin line that belongs to the words.
    tie: Option<(Point, Point)>,
}

/// All labels of a drawing.
#[derive(Debug, Default)]
pub(super) struct Labels {
    wants: Vec<Want>,
    /// Marks that words should not cover.
    marks: Vec<Area>,
    /// Words that have a place.
    taken: Vec<Area>,
}

impl Labels {
    /// Keeps words off a mark.
    pub(super) fn keep_off(&mut self, left: f64, right: f64, top: f64, bottom: f64) {
        self.marks.push(Area { left, right, top, bottom });
    }

    /// Keeps words off a slanted line.
    pub(super) fn keep_off_line(&mut self, (x1, y1): Point, (x2, y2): Point) {
        let pieces = ((y2 - y1).abs().max((x2 - x1).abs()) / 8.0).ceil().clamp(1.0, 40.0);
        for piece in 0..pieces as u32 {
            let at = |part: f64| (x1 + (x2 - x1) * part / pieces, y1 + (y2 - y1) * part / pieces);
            let ((ax, ay), (bx, by)) = (at(f64::from(piece)), at(f64::from(piece + 1)));
            self.keep_off(ax.min(bx) - 1.0, ax.max(bx) + 1.0, ay.min(by), ay.max(by));
        }
    }

    /// Takes words with the places they may have, the best first.
    pub(super) fn want(&mut self, rank: Rank, class: &'static str, words: &str, places: Vec<(Point, Anchor)>) {
        self.want_lines(rank, class, vec![(0.0, words.to_owned())], places);
    }

    /// The same for several lines that stay together.
    pub(super) fn want_lines(
        &mut self,
        rank: Rank,
        class: &'static str,
        lines: Vec<(f64, String)>,
        places: Vec<(Point, Anchor)>,
    ) {
        self.wants.push(Want { rank, class, lines, places, tie: None });
    }

    /// The same, with a thin line that is drawn if the words are.
    pub(super) fn want_tied(&mut self, lines: Vec<(f64, String)>, place: (Point, Anchor), tie: (Point, Point)) {
        self.wants.push(Want { rank: Rank::Note, class: "t2", lines, places: vec![place], tie: Some(tie) });
    }

    /// Places what has room and draws it.
    pub(super) fn place(&mut self, svg: &mut Svg, width: f64) {
        let mut wants = std::mem::take(&mut self.wants);
        wants.sort_by_key(|want| want.rank);
        for want in wants {
            // Where there is no room for all lines, the first alone may still have it.
            let Some((place, lines)) = (1..=want.lines.len()).rev().find_map(|lines| self.find(&want, lines, width)) else {
                continue;
            };
            self.taken.extend(areas(&want, lines, place));
            if let Some((from, to)) = want.tie {
                svg.line("tie", from, to);
            }
            let ((x, y), anchor) = place;
            for (below, words) in want.lines.iter().take(lines) {
                svg.text(want.class, (x, y + below), anchor, words);
            }
        }
    }

    /// The first place that has room for this many lines.
    fn find(&self, want: &Want, lines: usize, width: f64) -> Option<((Point, Anchor), usize)> {
        let inside = |area: &Area| area.left >= 1.0 && area.right <= width - 1.0;
        let free = |area: &Area, among: &[Area]| !among.iter().any(|other| area.meets(other));
        let fits = |place: &&(Point, Anchor)| areas(want, lines, **place).all(|area| inside(&area) && free(&area, &self.taken));
        let clear = |place: &&(Point, Anchor)| areas(want, lines, **place).all(|area| free(&area, &self.marks));
        let best = want.places.iter().filter(fits).find(clear);
        // A finding is named even where its words must lie over a mark; never over other words.
        let forced = || want.places.iter().find(fits).filter(|_| want.rank == Rank::Broken);
        best.or_else(forced).map(|place| (*place, lines))
    }

    /// Where words stand, for whoever wants to cut the drawing between them.
    pub(super) fn taken(&self) -> &[Area] {
        &self.taken
    }
}

/// The boxes of the first lines of some words at a place.
fn areas(want: &Want, lines: usize, ((x, y), anchor): (Point, Anchor)) -> impl Iterator<Item = Area> {
    let bold = want.class.contains("tb");
    want.lines.iter().take(lines).map(move |(below, words)| Area::of_words(words, bold, (x, y + below), anchor))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn placed(labels: &mut Labels, width: f64) -> String {
        let mut svg = Svg::new();
        labels.place(&mut svg, width);
        svg.as_str().to_owned()
    }

    #[test]
    fn the_lower_rank_yields_whatever_the_order() {
        let mut labels = Labels::default();
        let here = vec![((50.0, 20.0), Anchor::Start)];
        labels.want(Rank::Note, "t2", "note", here.clone());
        labels.want(Rank::Broken, "tb", "broken", here);
        let drawn = placed(&mut labels, 300.0);
        assert!(drawn.contains("broken") && !drawn.contains("note"));
        assert_eq!(labels.taken().len(), 1);
    }

    #[test]
    fn words_turn_inside_at_the_border_and_stay_off_marks() {
        let mut labels = Labels::default();
        labels.keep_off(40.0, 60.0, 0.0, 30.0);
        let places = vec![((80.0, 20.0), Anchor::Start), ((30.0, 20.0), Anchor::End)];
        labels.want(Rank::Number, "td", "1234", places.clone());
        assert!(placed(&mut labels, 100.0).contains("text-anchor=\"end\""), "no room to the right");
        let mut labels = Labels::default();
        labels.keep_off(0.0, 200.0, 0.0, 30.0);
        labels.want(Rank::Number, "td", "1234", places);
        assert_eq!(placed(&mut labels, 200.0), "", "dropped rather than laid over a mark");
    }
}
