//! Numbered pins under the strip, each a link to its finding; pins that would touch are merged.

use super::share;
use crate::report::facts::Facts;
use maud::{Markup, html};

/// Pins nearer than this are merged.
const APART: f64 = 14.0;
/// Width of a figure.
const FIGURE: f64 = 7.6;

/// The pins for a strip of this width, shown on screens of this class.
pub(super) fn pins(facts: &Facts<'_>, width: f64, class: &str) -> Markup {
    let at = |number: usize| facts.finding(number).map(|case| share(facts, case.place) * width);
    html! {
        @for (first, last) in merged(facts.findings.len(), at) {
            @if let Some(x) = middle((first, last), at) {
                a class={ "pin " (class) } style={ "left:" (format!("{:.2}", x / width * 100.0)) "%" } href={ "#F" (link(facts, first, last)) } {
                    span.vh { "finding " }
                    (first) @if last > first { "–" (last) }
                }
            }
        }
    }
}

/// The row to which a pin leads: its first finding, or the last that has a row.
fn link(facts: &Facts<'_>, first: usize, last: usize) -> usize {
    let rows = crate::report::findings::rows(facts);
    rows.iter().copied().find(|number| (first..=last).contains(number)).or_else(|| rows.last().copied()).unwrap_or(first)
}

/// First and last number of each pin. Pins that are too near, or whose figures would touch, become one; that may bring others too
/// near in turn.
fn merged(findings: usize, at: impl Fn(usize) -> Option<f64>) -> Vec<(usize, usize)> {
    let mut pins: Vec<(usize, usize)> = (1..=findings).map(|number| (number, number)).collect();
    loop {
        let before = pins.len();
        let mut kept: Vec<(usize, usize)> = Vec::new();
        for pin in pins {
            match kept.last_mut() {
                Some(last) if touch(*last, pin, &at) => last.1 = pin.1,
                _ => kept.push(pin),
            }
        }
        if kept.len() == before {
            return kept;
        }
        pins = kept;
    }
}

fn touch(one: (usize, usize), next: (usize, usize), at: impl Fn(usize) -> Option<f64>) -> bool {
    let room = APART.max((figures(one) + figures(next)) * FIGURE / 2.0 + 5.0);
    matches!((middle(one, &at), middle(next, &at)), (Some(left), Some(right)) if right - left < room)
}

/// Where a pin stands: in the middle of its findings.
fn middle((first, last): (usize, usize), at: impl Fn(usize) -> Option<f64>) -> Option<f64> {
    Some((at(first)? + at(last)?) / 2.0)
}

/// How many figures stand under a pin.
fn figures((first, last): (usize, usize)) -> f64 {
    let digits = |number: usize| f64::from(number.checked_ilog10().unwrap_or(0) + 1);
    if last > first { digits(first) + 1.0 + digits(last) } else { digits(first) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pins_that_would_touch_become_one() {
        let places = [10.0, 40.0, 45.0, 52.0, 200.0];
        let at = |number: usize| places.get(number - 1).copied();
        assert_eq!(merged(5, at), [(1, 1), (2, 4), (5, 5)]);
    }
}
