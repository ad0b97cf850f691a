//! The ladder on paper: cut into rows between gauges, each drawn by reference to the one drawing.

use super::canvas::Canvas;
use maud::{Markup, html};

/// A row is about this wide.
const ROW: f64 = 620.0;
/// A cut may move this far to find a gap.
const SLACK: f64 = 130.0;

/// The rows.
pub(super) fn rows(canvas: &Canvas<'_>, height: f64, lab: &str, art: &str) -> Markup {
    let cuts = cuts(canvas.width(), &canvas.whole);
    let widest = cuts.iter().zip(cuts.iter().skip(1)).map(|(from, to)| to - from).fold(0.0, f64::max);
    html! {
        div.onpaper aria-hidden="true" {
            @for (from, to) in cuts.iter().zip(cuts.iter().skip(1)) {
                div.row {
                    svg.lab viewBox={ "0 0 100 " (height) } { use href={ "#" (lab) } {} }
                    svg.pic style={ "flex-grow:" (to - from) } viewBox={ (from) " 0 " (to - from) " " (height) } { use href={ "#" (art) } {} }
                    @if widest - (to - from) >= 1.0 { i style={ "flex:" (widest - (to - from)) " 1 0" } {} }
                }
            }
        }
    }
}

/// Where rows begin and end: evenly, each cut moved to the nearest place that goes through nothing whole.
fn cuts(width: f64, whole: &[(f64, f64)]) -> Vec<f64> {
    let rows = (width / ROW).ceil().max(1.0);
    let mut cuts = vec![0.0];
    for row in 1..rows as u32 {
        let even = (width * f64::from(row) / rows).round();
        let through = |x: f64| whole.iter().filter(|(left, right)| *left < x && x < *right).count();
        let mut tried = (0..=SLACK as i32).flat_map(|by| [even - f64::from(by), even + f64::from(by)]);
        let best = tried.find(|x| through(*x) == 0).unwrap_or(even);
        if cuts.last().is_some_and(|last| best - last > 60.0) && width - best > 60.0 {
            cuts.push(best);
        }
    }
    cuts.push(width);
    cuts
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cut_goes_through_nothing_whole_where_that_is_possible() {
        assert_eq!(cuts(600.0, &[]), [0.0, 600.0]);
        assert_eq!(cuts(1_200.0, &[(560.0, 650.0)]), [0.0, 560.0, 1_200.0]);
        assert_eq!(cuts(1_200.0, &[(0.0, 1_200.0)]), [0.0, 600.0, 1_200.0], "nowhere to go: evenly");
    }
}
