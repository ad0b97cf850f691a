//! A plain writer of SVG: well-formed by construction, numbers to a tenth of a pixel.

use super::text::clean;
use maud::Escaper;
use std::fmt::{self, Write};

/// A length or place in a drawing. Written with at most one decimal and never as `-0`.
#[derive(Debug, Clone, Copy)]
pub(super) struct Px(pub(super) f64);

impl fmt::Display for Px {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let tenths = (self.0 * 10.0).round();
        if !tenths.is_finite() || tenths == 0.0 {
            return f.write_str("0");
        }
        if tenths % 10.0 == 0.0 { write!(f, "{:.0}", tenths / 10.0) } else { write!(f, "{:.1}", tenths / 10.0) }
    }
}

/// Where a text hangs on its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Anchor {
    /// The point is at its left.
    Start,
    /// In its middle.
    Middle,
    /// At its right.
    End,
}

/// A point in a drawing.
pub(super) type Point = (f64, f64);

/// The inside of one drawing.
#[derive(Debug, Default)]
pub(super) struct Svg {
    out: String,
}

impl Svg {
    pub(super) fn new() -> Self {
        Self::default()
    }

    pub(super) fn line(&mut self, class: &str, (x1, y1): Point, (x2, y2): Point) {
        self.push(format_args!("<path class=\"{class}\" d=\"M{} {}L{} {}\"/>", Px(x1), Px(y1), Px(x2), Px(y2)));
    }

    /// A path through points, open.
    pub(super) fn path(&mut self, class: &str, points: &[Point]) {
        self.raw_path(class, &through(points));
    }

    /// A path whose description is already written.
    pub(super) fn raw_path(&mut self, class: &str, description: &str) {
        if !description.is_empty() {
            self.push(format_args!("<path class=\"{class}\" d=\"{description}\"/>"));
        }
    }

    /// A filled shape through points, closed.
    pub(super) fn shape(&mut self, class: &str, points: &[Point]) {
        self.push(format_args!("<path class=\"{class}\" d=\"{}z\"/>", through(points)));
    }

    pub(super) fn rect(&mut self, class: &str, (x, y): Point, width: f64, height: f64) {
        if width > 0.0 && height > 0.0 {
            let (x, y, width, height) = (Px(x), Px(y), Px(width), Px(height));
            self.push(format_args!("<rect class=\"{class}\" x=\"{x}\" y=\"{y}\" width=\"{width}\" height=\"{height}\"/>"));
        }
    }

    pub(super) fn circle(&mut self, class: &str, (x, y): Point, radius: f64) {
        self.push(format_args!("<circle class=\"{class}\" cx=\"{}\" cy=\"{}\" r=\"{}\"/>", Px(x), Px(y), Px(radius)));
    }

    pub(super) fn text(&mut self, class: &str, (x, y): Point, anchor: Anchor, words: &str) {
        let anchor = match anchor {
            Anchor::Start => "",
            Anchor::Middle => " text-anchor=\"middle\"",
            Anchor::End => " text-anchor=\"end\"",
        };
        let class = if class.is_empty() { String::new() } else { format!(" class=\"{class}\"") };
        self.push(format_args!("<text{class} x=\"{}\" y=\"{}\"{anchor}>", Px(x), Px(y)));
        self.escaped(words);
        self.out.push_str("</text>");
    }

    pub(super) fn as_str(&self) -> &str {
        &self.out
    }

    fn escaped(&mut self, words: &str) {
        // Writing into a string cannot fail.
        let _ = Escaper::new(&mut self.out).write_str(&clean(words));
    }

    fn push(&mut self, piece: fmt::Arguments<'_>) {
        let _ = self.out.write_fmt(piece);
    }
}

fn through(points: &[Point]) -> String {
    let mut out = String::new();
    for (place, (x, y)) in points.iter().enumerate() {
        let _ = write!(out, "{}{} {}", if place == 0 { 'M' } else { 'L' }, Px(*x), Px(*y));
    }
    out
}

/// The part of a straight line that lies between two upright borders.
pub(super) fn clip((x1, y1): Point, (x2, y2): Point, left: f64, right: f64) -> Option<(Point, Point)> {
    let at = |x: f64| if x2 == x1 { y1 } else { y1 + (y2 - y1) * (x - x1) / (x2 - x1) };
    let inside = |x: f64, y: f64| {
        if x < left {
            (left, at(left))
        } else if x > right {
            (right, at(right))
        } else {
            (x, y)
        }
    };
    let misses = (x1 < left && x2 < left) || (x1 > right && x2 > right);
    (!misses).then(|| (inside(x1, y1), inside(x2, y2)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short_and_never_minus_nothing() {
        let written = |x| Px(x).to_string();
        assert_eq!(written(12.0), "12");
        assert_eq!(written(12.34), "12.3");
        assert_eq!(written(-0.04), "0");
        assert_eq!(written(f64::NAN), "0");
    }

    #[test]
    fn a_line_is_cut_at_the_borders() {
        assert_eq!(clip((-10.0, 0.0), (10.0, 20.0), 0.0, 5.0), Some(((0.0, 10.0), (5.0, 15.0))));
        assert_eq!(clip((6.0, 0.0), (10.0, 20.0), 0.0, 5.0), None);
        assert_eq!(clip((3.0, 0.0), (3.0, 20.0), 0.0, 5.0), Some(((3.0, 0.0), (3.0, 20.0))));
    }

    #[test]
    fn words_from_outside_stay_words() {
        let mut svg = Svg::new();
        svg.text("t2", (1.0, 2.0), Anchor::End, "</text><script>&\u{0}");
        assert_eq!(
            svg.as_str(),
            "<text class=\"t2\" x=\"1\" y=\"2\" text-anchor=\"end\">&lt;/text&gt;&lt;script&gt;&amp;\u{fffd}</text>"
        );
    }
}
