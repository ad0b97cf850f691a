//! The histogram that lies sideways beside a plot, on the same scale; its counts grow as the square root.

use super::axis::Axis;
use super::marks::Look;
use super::series::Series;
use crate::report::number::count;
use crate::report::svg::Svg;

/// Height of a bin in pixels.
const BIN: f64 = 2.5;
/// Share of the width that the highest bin takes.
const FULL: f64 = 78.0;
/// Counts written beside the bars.
const NAMED: usize = 5;

/// Bars, and counts with their places: x in per cent, y in pixels.
pub(super) fn draw(series: &Series, axis: &Axis) -> (Svg, Vec<(f64, f64, String)>) {
    let bins = (axis.height / BIN) as usize;
    let looks = [Look::Beat, Look::Pulse, Look::Undecided, Look::Broken];
    let classes = ["hb", "hp", "hu", "late"];
    let mut counts = vec![[0_u32; 4]; bins];
    for entry in &series.entries {
        let kind = looks.iter().position(|look| *look == entry.look).unwrap_or(0);
        if let Some(count) = counts.get_mut(axis.bin(entry.value, bins)).and_then(|bin| bin.get_mut(kind)) {
            *count += 1;
        }
    }
    let total = |bin: &[u32; 4]| bin.iter().sum::<u32>();
    let most = f64::from(counts.iter().map(total).max().unwrap_or(0).max(1)).sqrt();
    let width = |number: u32| f64::from(number).sqrt() / most * FULL;
    let mut svg = Svg::new();
    for (place, bin) in counts.iter().enumerate() {
        // The bar as a whole has the square root of the whole count; its parts share it by their counts.
        let whole = total(bin);
        let mut x = 0.0;
        for (class, number) in classes.iter().zip(bin).filter(|(_, number)| **number > 0) {
            let part = (width(whole) * f64::from(*number) / f64::from(whole)).max(1.4);
            svg.rect(class, (x, place as f64 * BIN), part, BIN - 0.3);
            x += part;
        }
    }
    (svg, labels(&counts, total, width))
}

/// The highest bins with their counts, none on top of another.
fn labels(counts: &[[u32; 4]], total: impl Fn(&[u32; 4]) -> u32, width: impl Fn(u32) -> f64) -> Vec<(f64, f64, String)> {
    let mut order: Vec<usize> = (0..counts.len()).collect();
    let of = |place: usize| counts.get(place).map_or(0, &total);
    order.sort_by_key(|place| (std::cmp::Reverse(of(*place)), *place));
    let mut chosen: Vec<usize> = Vec::new();
    for place in order {
        let free = chosen.iter().all(|other| place.abs_diff(*other) as f64 * BIN >= 14.0);
        if free && of(place) > 1 && chosen.len() < NAMED {
            chosen.push(place);
        }
    }
    chosen.into_iter().map(|place| (width(of(place)) + 3.0, (place as f64 + 0.5) * BIN, count(u64::from(of(place))))).collect()
}
