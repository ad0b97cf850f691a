//! How numbers are written: true minus, thin no-break space before units and in thousands, a sign on every deviation.

use phase4::base::{Deviation, Instant, Interval, Span};

/// The thin no-break space that stands before units and between thousands.
pub(super) const THIN: char = '\u{202f}';
/// A whole number with its thousands set apart.
pub(super) fn count(number: u64) -> String {
    let digits = number.to_string();
    let mut out = String::with_capacity(digits.len() + digits.len() / 3 * 3);
    for (place, digit) in digits.chars().enumerate() {
        if place > 0 && (digits.len() - place).is_multiple_of(3) {
            out.push(THIN);
        }
        out.push(digit);
    }
    out
}

/// A count with its noun: `1 pulse`, `2 pulses`.
pub(super) fn counted(number: u64, one: &str, many: &str) -> String {
    format!("{} {}", count(number), if number == 1 { one } else { many })
}

/// Thousandths as a decimal number with `places` of them shown, rounded half away from zero; the thousands set apart.
fn decimal(thousandths: u64, places: u32) -> String {
    let drop = 10_u64.pow(3_u32.saturating_sub(places));
    let rounded = (thousandths + drop / 2) / drop;
    let unit = 10_u64.pow(places);
    match places {
        0 => count(rounded),
        _ => format!("{}.{:0width$}", count(rounded / unit), rounded % unit, width = places as usize),
    }
}

/// Microseconds as milliseconds with `places` decimals, without unit and sign.
fn millis(micros: u64, places: u32) -> String {
    decimal(micros, places)
}

/// A span in milliseconds with no more decimals than it needs: `8 ms`, `292.683 ms`.
pub(super) fn ms(span: Span) -> String {
    format!("{}{THIN}ms", ms_bare(span))
}

/// As [`ms`], without the unit.
pub(super) fn ms_bare(span: Span) -> String {
    let micros = span.as_micros();
    let places = [(1_000, 0), (100, 1), (10, 2)].into_iter().find(|(unit, _)| micros.is_multiple_of(*unit));
    millis(micros, places.map_or(3, |(_, places)| places))
}

/// A span in milliseconds to 0.1 ms, finer where that would show nothing: `31.8 ms`, `0.020 ms`.
pub(super) fn ms_tenth(span: Span) -> String {
    format!("{}{THIN}ms", ms_tenth_bare(span))
}

/// As [`ms_tenth`], without the unit.
pub(super) fn ms_tenth_bare(span: Span) -> String {
    let micros = span.as_micros();
    millis(micros, if micros > 0 && micros < 50 { 3 } else { 1 })
}

/// A signed deviation to 0.1 ms: `+31.8 ms`.
pub(super) fn signed_tenth(deviation: Deviation) -> String {
    format!("{}{}", sign(deviation), ms_tenth(deviation.size()))
}

/// A signed deviation to a microsecond: `+31.842 ms`.
pub(super) fn signed_exact(deviation: Deviation) -> String {
    format!("{}{}{THIN}ms", sign(deviation), millis(deviation.size().as_micros(), 3))
}

/// A signed number of milliseconds with no more decimals than it needs and no unit: `+8`, `0`, `−0.5`.
pub(super) fn signed_bare(micros: i64) -> String {
    let deviation = Deviation::from_micros(micros);
    format!("{}{}", sign(deviation), ms_bare(deviation.size()))
}

/// A limit in milliseconds: to 0.1 ms, or exactly where it is below a millisecond, with no more decimals than that needs.
pub(super) fn limit(span: Span) -> String {
    format!("{}{THIN}ms", limit_bare(span))
}

fn limit_bare(span: Span) -> String {
    let micros = span.as_micros();
    ms_bare(Span::from_micros(if micros < 1_000 { micros } else { (micros + 50) / 100 * 100 }))
}

/// As [`limit`], signed and without the unit.
pub(super) fn signed_limit(micros: i64) -> String {
    let deviation = Deviation::from_micros(micros);
    format!("{}{}", sign(deviation), limit_bare(deviation.size()))
}

fn sign(deviation: Deviation) -> &'static str {
    match deviation.as_micros() {
        1.. => "+",
        0 => "",
        _ => "\u{2212}",
    }
}

/// A moment of the run in seconds to the millisecond, counted from its start: `20.887 s`.
pub(super) fn at(start: Instant, instant: Instant) -> String {
    seconds(instant.saturating_since(start), 3)
}

/// A moment of the run in seconds to the microsecond, without unit.
pub(super) fn at_exact(start: Instant, instant: Instant) -> String {
    let micros = instant.saturating_since(start).as_micros();
    format!("{}.{:06}", count(micros / 1_000_000), micros % 1_000_000)
}

/// A span in seconds with this many decimals, at most three.
pub(super) fn seconds(span: Span, places: u32) -> String {
    format!("{}{THIN}s", decimal((span.as_micros() + 500) / 1_000, places))
}

/// A length of time as one says it: `25 s`, `5 min 12 s`, `2 h 10 min`.
pub(super) fn length(span: Span) -> String {
    let seconds = (span.as_micros() + 500_000) / 1_000_000;
    let (hours, minutes, rest) = (seconds / 3_600, seconds / 60 % 60, seconds % 60);
    match (hours, minutes, rest) {
        (0, 0, _) if !span.as_micros().is_multiple_of(1_000_000) => self::seconds(span, 1),
        (0, 0, rest) => format!("{rest}{THIN}s"),
        (0, minutes, 0) => format!("{minutes}{THIN}min"),
        (0, minutes, rest) => format!("{minutes}{THIN}min {rest}{THIN}s"),
        (hours, 0, _) => format!("{}{THIN}h", count(hours)),
        (hours, minutes, _) => format!("{}{THIN}h {minutes}{THIN}min", count(hours)),
    }
}

/// The rate of an interval, per minute, with at most two decimals: `60 /min`.
pub(super) fn rate(interval: Interval) -> String {
    let micros = interval.nearest().as_micros().max(1);
    let hundredths = (6_000_000_000 + micros / 2) / micros;
    let text = match (hundredths % 100, hundredths % 10) {
        (0, _) => count(hundredths / 100),
        (part, 0) => format!("{}.{}", count(hundredths / 100), part / 10),
        (part, _) => format!("{}.{part:02}", count(hundredths / 100)),
    };
    format!("{text}{THIN}/min")
}

/// Microvolts as millivolts: `6 mV`, `2.4 mV`.
pub(super) fn peak(microvolts: u32) -> String {
    format!("{}{THIN}mV", ms_bare(Span::from_micros(u64::from(microvolts))))
}

/// Words in a row: `a`, `a and b`, `a, b and c`.
pub(super) fn listed(words: &[String]) -> String {
    match words {
        [] => String::new(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn plain(text: &str) -> String {
        text.replace(THIN, " ").replace('\u{2212}', "-")
    }

    #[test]
    fn milliseconds_keep_only_the_decimals_they_need() {
        let written = |micros| plain(&ms(Span::from_micros(micros)));
        assert_eq!(written(8_000), "8 ms");
        assert_eq!(written(292_683), "292.683 ms");
        assert_eq!(written(1_000_500), "1 000.5 ms");
        assert_eq!(written(0), "0 ms");
    }

    #[test]
    fn deviations_carry_a_sign_and_round_half_away_from_zero() {
        let tenth = |micros| plain(&signed_tenth(Deviation::from_micros(micros)));
        assert_eq!(tenth(31_842), "+31.8 ms");
        assert_eq!(tenth(-31_850), "-31.9 ms");
        assert_eq!(tenth(-20), "-0.020 ms", "a deviation never shows as nothing");
        assert_eq!(tenth(0), "0.0 ms");
        assert_eq!(plain(&signed_exact(Deviation::from_micros(-1_234_567))), "-1 234.567 ms");
        assert_eq!(plain(&signed_bare(-8_000)), "-8");
    }

    #[test]
    fn lengths_and_moments_read_as_one_says_them() {
        let said = |secs| plain(&length(Span::from_secs(secs)));
        assert_eq!(
            [said(25), said(60), said(312), said(7_800), said(86_400)],
            ["25 s", "1 min", "5 min 12 s", "2 h 10 min", "24 h"]
        );
        assert_eq!(plain(&length(Span::from_millis(7_500))), "7.5 s");
        assert_eq!(plain(&at(Instant::from_micros(1_000_000), Instant::from_micros(21_886_842))), "20.887 s");
        assert_eq!(at_exact(Instant::ZERO, Instant::from_micros(20_886_842)), "20.886842");
    }

    #[test]
    fn rates_and_peaks_have_their_units() {
        assert_eq!(plain(&rate(Interval::from_span(Span::from_secs(1)).unwrap())), "60 /min");
        assert_eq!(plain(&rate(Interval::from_span(Span::from_millis(1_200)).unwrap())), "50 /min");
        assert_eq!(plain(&rate(Interval::from_span(Span::from_millis(935)).unwrap())), "64.17 /min");
        assert_eq!(plain(&peak(2_400)), "2.4 mV");
        assert_eq!(plain(&count(1_234_567)), "1 234 567");
    }
}
