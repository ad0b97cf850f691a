//! Marks of a plot: one for each value while they are few, columns with a median beyond.

use super::WIDTH;
use super::axis::Axis;
use super::series::{Entry, Series};
use crate::report::svg::{Px, Svg};
use std::fmt::Write;

/// What a value looks like.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Look {
    /// Ended by a beat: a ring.
    Beat,
    /// Ended by a pulse that holds: a dot.
    Pulse,
    /// Undecided: a hollow square.
    Undecided,
    /// Broken: a filled square.
    Broken,
}

/// Values beyond this number become columns.
pub(super) const MOST_SINGLE: usize = 2_000;
/// How many columns.
const COLUMNS: usize = 400;
/// Broken and undecided values stay single marks up to this number.
const MOST_SPECIAL: usize = 400;
/// Pixels a plot has for its whole length on a common screen.
const SCREEN: f64 = 750.0;

/// True if a value has too little room for a mark of full size.
pub(super) fn are_small(series: &Series) -> bool {
    SCREEN / (series.length.max(1) as f64) < 6.0
}

/// Draws the marks of a plot.
pub(super) fn draw(series: &Series, axis: &Axis) -> Svg {
    let mut svg = Svg::new();
    let x = |entry: &Entry| (entry.number as f64 - 0.5) / series.length.max(1) as f64 * WIDTH;
    let small = if are_small(series) { " s" } else { "" };
    let of = |look| series.entries.iter().filter(move |entry| entry.look == look);
    if series.entries.len() > MOST_SINGLE {
        columns(&mut svg, series, axis, x);
    } else {
        let path = |look| points(of(look).map(|entry| (x(entry), axis.y(entry.value))));
        let rings = path(Look::Beat);
        svg.raw_path(&format!("ns m1{small}"), &rings);
        if small.is_empty() {
            svg.raw_path("ns m2", &rings);
        }
        svg.raw_path(&format!("ns m3{small}"), &path(Look::Pulse));
    }
    for (look, outer, inner) in [(Look::Undecided, "ns q1", Some("ns q2")), (Look::Broken, "ns q3", None)] {
        let marks = thinned(of(look).map(|entry| (x(entry), axis.y(entry.value))).collect());
        svg.raw_path(outer, &marks);
        if let Some(inner) = inner {
            svg.raw_path(inner, &marks);
        }
    }
    svg
}

/// Points that a round or square cap makes visible.
fn points(places: impl Iterator<Item = (f64, f64)>) -> String {
    places.fold(String::new(), |mut path, (x, y)| {
        let _ = write!(path, "M{} {}h.01", Px(x), Px(y));
        path
    })
}

/// Single marks, or one per column from the highest to the lowest where there are too many.
fn thinned(places: Vec<(f64, f64)>) -> String {
    if places.len() <= MOST_SPECIAL {
        return points(places.into_iter());
    }
    let width = WIDTH / COLUMNS as f64;
    let column = |x: f64| ((x / width) as usize).min(COLUMNS - 1);
    let mut ends: Vec<Option<(f64, f64)>> = vec![None; COLUMNS];
    for (x, y) in places {
        if let Some(end) = ends.get_mut(column(x)) {
            *end = Some(end.map_or((y, y), |(top, bottom)| (top.min(y), bottom.max(y))));
        }
    }
    ends.into_iter().enumerate().fold(String::new(), |mut path, (column, end)| {
        if let Some((top, bottom)) = end {
            let _ = write!(path, "M{} {}V{}", Px((column as f64 + 0.5) * width), Px(top), Px(bottom + 0.1));
        }
        path
    })
}

fn columns(svg: &mut Svg, series: &Series, axis: &Axis, x: impl Fn(&Entry) -> f64) {
    let width = WIDTH / COLUMNS as f64;
    let mut values: Vec<Vec<f64>> = vec![Vec::new(); COLUMNS];
    for entry in &series.entries {
        if let Some(column) = values.get_mut(((x(entry) / width) as usize).min(COLUMNS - 1)) {
            column.push(entry.value);
        }
    }
    let (mut ranges, mut medians) = (String::new(), String::new());
    for (column, values) in values.iter_mut().enumerate() {
        values.sort_by(f64::total_cmp);
        let (Some(least), Some(most), Some(median)) = (values.first(), values.last(), values.get(values.len() / 2)) else {
            continue;
        };
        let middle = (column as f64 + 0.5) * width;
        let _ = write!(ranges, "M{} {}V{}", Px(middle), Px(axis.y(*most)), Px(axis.y(*least) + 0.1));
        let _ = write!(medians, "M{} {}h{}", Px(middle - width / 2.0), Px(axis.y(*median)), Px(width));
    }
    svg.raw_path("ns upright", &ranges);
    svg.raw_path("ns median", &medians);
}
