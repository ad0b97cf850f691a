//! Quantities as Rust expressions that are constant.

use phase4::base::{Deviation, Interval, Rate, Span};
use phase4::heart::Fraction;

pub(super) fn span(span: Span) -> String {
    format!("base::Span::from_micros({})", span.as_micros())
}

pub(super) fn deviation(deviation: Deviation) -> String {
    format!("base::Deviation::from_micros({})", deviation.as_micros())
}

/// An interval as the rate it belongs to, or in whole microseconds. One of the two it is: nothing else can be written in a scenario.
pub(super) fn interval(interval: Interval) -> String {
    let bits = u128::from(interval.as_fixed().to_bits()).max(1);
    let milli = ((60_000_000_000_u128 << 32).saturating_add(bits >> 1)).checked_div(bits).unwrap_or(0);
    let milli = u32::try_from(milli).unwrap_or(u32::MAX);
    if interval != whole(interval) && Interval::from_rate_nearest(Rate::from_milli_per_minute(milli)) == interval {
        return format!("base::Interval::from_rate_nearest(base::Rate::from_milli_per_minute({milli}))");
    }
    let micros = interval.nearest().as_micros();
    format!(
        "match base::Interval::from_span(base::Span::from_micros({micros})) {{ Some(interval) => interval, None => base::Interval::MAX }}"
    )
}

fn whole(interval: Interval) -> Interval {
    Interval::from_span(interval.floor()).unwrap_or(Interval::MAX)
}

/// A fraction in millionths: as it was written.
pub(super) fn fraction(fraction: Fraction) -> String {
    let millionths = fraction.of(Span::from_secs(1)).as_micros();
    format!("sound(heart::Fraction::from_millionths({millionths}))")
}

/// `Some(..)` or `None`.
pub(super) fn option<T>(value: Option<T>, show: impl Fn(T) -> String) -> String {
    value.map_or_else(|| "None".to_owned(), |value| format!("Some({})", show(value)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn intervals_are_given_as_they_were_written() {
        let of = |text: &str| interval(crate::scenario::units::interval(text).unwrap());
        assert_eq!(of("72.5 /min"), "base::Interval::from_rate_nearest(base::Rate::from_milli_per_minute(72500))");
        assert!(of("60 /min").contains("from_micros(1000000)"));
        assert!(of("859 ms").contains("from_micros(859000)"));
    }

    #[test]
    fn every_rate_is_found_again() {
        for milli in (14..400_000).step_by(7) {
            let rate = Rate::from_milli_per_minute(milli);
            let text = interval(Interval::from_rate_nearest(rate));
            let again = text.split_once("minute(").and_then(|(_, rest)| rest.trim_end_matches(')').parse().ok());
            match again {
                Some(again) => assert_eq!(Rate::from_milli_per_minute(again), rate),
                None => assert!(text.contains("from_span"), "{text}"),
            }
        }
    }
}
