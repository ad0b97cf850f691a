//! Quantities written with their units, read exactly: decimal digits to whole microseconds, microvolts, thousandths, without a
//! floating-point number on the way.

use super::scan::{Scan, Wrong};
use phase4::base::{Deviation, Interval, MicroVolts, MilliVolts, Rate, Span};
use std::fmt;
use std::ops::Range;

/// What a unit measures.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Dimension {
    /// In microseconds.
    Time,
    /// In thousandths per minute.
    Rate,
    /// In microvolts.
    Voltage,
    /// In millionths.
    Share,
}

impl Dimension {
    const fn noun(self) -> &'static str {
        match self {
            Self::Time => "a time",
            Self::Rate => "a rate",
            Self::Voltage => "a voltage",
            Self::Share => "a share",
        }
    }

    /// What the numbers of this dimension are counted in.
    const fn finest(self) -> &'static str {
        match self {
            Self::Time => "1 us",
            Self::Rate => "0.001 /min",
            Self::Voltage => "1 uV",
            Self::Share => "0.0001 %",
        }
    }
}

struct Unit {
    name: &'static str,
    dimension: Dimension,
    scale: u64,
}

const fn unit(name: &'static str, dimension: Dimension, scale: u64) -> Unit {
    Unit { name, dimension, scale }
}

const UNITS: [Unit; 14] = [
    unit("us", Dimension::Time, 1),
    unit("µs", Dimension::Time, 1), // micro sign
    unit("μs", Dimension::Time, 1), // Greek mu: looks the same
    unit("ms", Dimension::Time, 1_000),
    unit("s", Dimension::Time, 1_000_000),
    unit("min", Dimension::Time, 60_000_000),
    unit("h", Dimension::Time, 3_600_000_000),
    unit("d", Dimension::Time, 86_400_000_000),
    unit("/min", Dimension::Rate, 1_000),
    unit("uV", Dimension::Voltage, 1),
    unit("µV", Dimension::Voltage, 1),
    unit("μV", Dimension::Voltage, 1),
    unit("mV", Dimension::Voltage, 1_000),
    unit("V", Dimension::Voltage, 1_000_000),
];
const PERCENT: Unit = unit("%", Dimension::Share, 10_000);

/// Other spellings that people write, each with what is accepted.
const OTHER_SPELLINGS: [(&str, &str); 14] = [
    ("bpm", "/min"),
    ("ppm", "/min"),
    ("per", "/min"),
    ("msec", "ms"),
    ("millis", "ms"),
    ("usec", "us"),
    ("sec", "s"),
    ("secs", "s"),
    ("seconds", "s"),
    ("mins", "min"),
    ("minutes", "min"),
    ("hours", "h"),
    ("days", "d"),
    ("volts", "V"),
];

/// What sorts of quantity a place accepts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Wanted {
    /// A time.
    Time,
    /// A time that is usually long.
    Duration,
    /// A rate, or the interval that it stands for.
    Rate,
    /// A voltage.
    Voltage,
    /// A share of a whole.
    Share,
}

impl Wanted {
    /// The thing in words, with examples.
    pub const fn expected(self) -> &'static str {
        match self {
            Self::Time => "a time with its unit, such as \"160 ms\"",
            Self::Duration => "a time with its unit, such as \"5 min\"",
            Self::Rate => "a rate or an interval with its unit, such as \"60 /min\" or \"1000 ms\"",
            Self::Voltage => "a voltage with its unit, such as \"2.5 mV\"",
            Self::Share => "a share, such as \"90 %\"",
        }
    }

    /// The unit to suggest for a bare number.
    pub const fn usual_unit(self) -> &'static str {
        match self {
            Self::Time => "ms",
            Self::Duration => "s",
            Self::Rate => "/min",
            Self::Voltage => "mV",
            Self::Share => "%",
        }
    }

    const fn accepts(self, dimension: Dimension) -> bool {
        match self {
            Self::Time | Self::Duration => matches!(dimension, Dimension::Time),
            Self::Rate => matches!(dimension, Dimension::Time | Dimension::Rate),
            Self::Voltage => matches!(dimension, Dimension::Voltage),
            Self::Share => matches!(dimension, Dimension::Share),
        }
    }

    fn unit_names(self) -> Vec<&'static str> {
        let fits = |unit: &&Unit| self.accepts(unit.dimension) && unit.name.is_ascii();
        UNITS.iter().chain([&PERCENT]).filter(fits).map(|unit| unit.name).collect()
    }
}

/// A decimal number as written: `digits` over a power of ten.
#[derive(Debug, Clone)]
pub(super) struct Decimal {
    digits: u128,
    decimals: u32,
    pub(super) range: Range<usize>,
}

const A_NUMBER: &str = "expected a number here";

/// Says more where just a number was missing.
pub(super) fn instead_of_a_number(wrong: Wrong, label: impl Into<String>) -> Wrong {
    if wrong.label == A_NUMBER { Wrong { label: label.into(), ..wrong } } else { wrong }
}

/// Reads an unsigned decimal number.
pub(super) fn decimal(scan: &mut Scan<'_>) -> Result<Decimal, Wrong> {
    const MOST_DIGITS: usize = 18;
    let Some((whole, range)) = scan.digits() else {
        return Err(scan.wrong(A_NUMBER));
    };
    let mut fraction = "";
    let mut end = range.end;
    // A second point belongs to a range, `210..290`.
    let mut ahead = scan.clone();
    if !ahead.take("..") && ahead.take(".") {
        let Some((digits, place)) = ahead.digits() else {
            return Err(ahead.wrong("expected digits after the point"));
        };
        (fraction, end) = (digits, place.end);
        *scan = ahead;
    }
    let range = range.start..end;
    if whole.len().saturating_add(fraction.len()) > MOST_DIGITS {
        return Err(Wrong::new(range, format!("more than {MOST_DIGITS} digits")));
    }
    let decimals = u32::try_from(fraction.len()).unwrap_or(u32::MAX);
    // At most 18 digits: they always fit.
    let digits = format!("{whole}{fraction}").parse().unwrap_or(u128::MAX);
    Ok(Decimal { digits, decimals, range })
}

/// A unit that was found and fits.
#[derive(Debug, Clone)]
pub(super) struct Found {
    dimension: Dimension,
    scale: u64,
}

/// Reads a unit that fits what is wanted.
pub(super) fn unit_for(scan: &mut Scan<'_>, wanted: Wanted) -> Result<Found, Wrong> {
    let names = || crate::refusal::list(wanted.unit_names());
    let Some((name, range)) = scan.unit() else {
        let place = scan.here();
        return Err(Wrong::new(place, format!("expected a unit here: {}", names())));
    };
    let tight: String = name.chars().filter(|c| !c.is_whitespace()).collect();
    let found = UNITS.iter().chain([&PERCENT]).find(|unit| unit.name == tight);
    match found {
        Some(unit) if wanted.accepts(unit.dimension) => Ok(Found { dimension: unit.dimension, scale: unit.scale }),
        Some(unit) => {
            Err(Wrong::new(range, format!("{} is {}, expected {}", unit.name, unit.dimension.noun(), wanted.expected())))
        }
        None => {
            let lower = tight.to_lowercase();
            let other = OTHER_SPELLINGS.iter().find(|(spelling, _)| *spelling == lower).map(|(_, unit)| *unit);
            let meant = other
                .filter(|unit| wanted.unit_names().contains(unit))
                .or_else(|| wanted.unit_names().into_iter().find(|unit| unit.to_lowercase() == lower))
                .or_else(|| crate::refusal::nearest(&tight, wanted.unit_names()));
            Err(Wrong::instead(range, "no such unit here", meant).help(format!("expected {}", names())))
        }
    }
}

impl Decimal {
    /// The number times the unit, in the unit's base.
    pub(super) fn times(&self, unit: &Found) -> Result<u64, Wrong> {
        let product = self.digits.checked_mul(u128::from(unit.scale));
        let parts = 10_u128.checked_pow(self.decimals);
        let (Some(product), Some(parts)) = (product, parts) else {
            return Err(Wrong::new(self.range.clone(), "too large"));
        };
        if product.checked_rem(parts) != Some(0) {
            return Err(Wrong::new(self.range.clone(), format!("finer than {}: it would be rounded", unit.dimension.finest())));
        }
        let whole = product.checked_div(parts).and_then(|whole| u64::try_from(whole).ok());
        whole.ok_or_else(|| Wrong::new(self.range.clone(), "too large"))
    }

    /// The number itself, where a whole one is wanted.
    pub(super) fn whole(&self) -> Option<u64> {
        if self.decimals == 0 { u64::try_from(self.digits).ok() } else { None }
    }
}

fn quantity(scan: &mut Scan<'_>, wanted: Wanted) -> Result<(u64, Found, Range<usize>), Wrong> {
    let number = decimal(scan).map_err(|wrong| instead_of_a_number(wrong, format!("expected {}", wanted.expected())))?;
    let unit = unit_for(scan, wanted)?;
    Ok((number.times(&unit)?, unit, number.range.start..scan.position()))
}

/// Reads a time.
pub(super) fn scan_span(scan: &mut Scan<'_>) -> Result<Span, Wrong> {
    quantity(scan, Wanted::Time).map(|(micros, ..)| Span::from_micros(micros))
}

/// Reads a voltage.
pub(super) fn scan_microvolts(scan: &mut Scan<'_>) -> Result<MicroVolts, Wrong> {
    let (value, _, range) = quantity(scan, Wanted::Voltage)?;
    u32::try_from(value).map(MicroVolts).map_err(|_| Wrong::new(range, "more than 4294 V"))
}

fn whole_text<T>(text: &str, read: impl FnOnce(&mut Scan<'_>) -> Result<T, Wrong>) -> Result<T, Wrong> {
    let mut scan = Scan::new(text);
    let value = read(&mut scan)?;
    scan.finish()?;
    Ok(value)
}

/// A time: `"160 ms"`, `"5 min"`, `"1.5 s"`.
///
/// # Errors
/// Says where the text goes wrong. A time finer than a microsecond is refused, not rounded.
pub fn span(text: &str) -> Result<Span, Wrong> {
    whole_text(text, scan_span)
}

/// An interval, written as one or as the rate it belongs to: `"1000 ms"`, `"60 /min"`.
///
/// # Errors
/// Says where the text goes wrong.
pub fn interval(text: &str) -> Result<Interval, Wrong> {
    whole_text(text, |scan| {
        let (value, unit, range) = quantity(scan, Wanted::Rate)?;
        if value == 0 {
            return Err(Wrong::new(range, "zero: accepted is anything above"));
        }
        let too_long = || Wrong::new(range.clone(), "longer than 71 min 34 s, the longest interval");
        match unit.dimension {
            Dimension::Rate => {
                let milli = u32::try_from(value).map_err(|_| Wrong::new(range.clone(), "faster than any rate"))?;
                // Below 0.014 /min the interval would be cut off at the longest one.
                if milli < 14 {
                    return Err(too_long());
                }
                Ok(Interval::from_rate_nearest(Rate::from_milli_per_minute(milli)))
            }
            _ => Interval::from_span(Span::from_micros(value)).ok_or_else(too_long),
        }
    })
}

/// A voltage in microvolts: `"2.5 mV"`.
///
/// # Errors
/// Says where the text goes wrong.
pub fn microvolts(text: &str) -> Result<MicroVolts, Wrong> {
    whole_text(text, scan_microvolts)
}

/// A voltage in whole millivolts: `"3.5 V"`.
///
/// # Errors
/// Says where the text goes wrong.
pub fn millivolts(text: &str) -> Result<MilliVolts, Wrong> {
    let MicroVolts(micro) = microvolts(text)?;
    if micro.checked_rem(1_000) != Some(0) {
        return Err(Wrong::new(0..text.len(), "finer than 1 mV: it would be rounded"));
    }
    Ok(MilliVolts(micro.checked_div(1_000).unwrap_or(0)))
}

/// A share of a whole in millionths, at most the whole: `"90 %"` or `"0.9"`.
///
/// # Errors
/// Says where the text goes wrong.
pub fn share_millionths(text: &str) -> Result<u32, Wrong> {
    whole_text(text, |scan| {
        let number =
            decimal(scan).map_err(|wrong| instead_of_a_number(wrong, format!("expected {}", Wanted::Share.expected())))?;
        let bare = Found { dimension: Dimension::Share, scale: 1_000_000 };
        let unit = if scan.is_done() { bare } else { unit_for(scan, Wanted::Share)? };
        let value = number.times(&unit)?;
        match u32::try_from(value) {
            Ok(value) if value <= 1_000_000 => Ok(value),
            _ => Err(Wrong::new(0..text.len(), "more than the whole: accepted is 0 % to 100 %")),
        }
    })
}

/// A time from one value to another, `"150..400 ms"`, as used for windows.
///
/// # Errors
/// Says where the text goes wrong.
pub fn span_range(text: &str) -> Result<(Span, Span), Wrong> {
    whole_text(text, |scan| {
        let from = decimal(scan)?;
        if !scan.take("..") {
            return Err(scan.wrong("expected `..` and the end, such as \"150..400 ms\""));
        }
        let to = decimal(scan)?;
        let unit = unit_for(scan, Wanted::Time)?;
        let (from, to) = (from.times(&unit)?, to.times(&unit)?);
        if from > to {
            return Err(Wrong::new(0..text.len(), "ends before it begins"));
        }
        Ok((Span::from_micros(from), Span::from_micros(to)))
    })
}

/// A time with a sign, `"-20 ms"`.
///
/// # Errors
/// Says where the text goes wrong.
pub fn deviation(text: &str) -> Result<Deviation, Wrong> {
    whole_text(text, |scan| {
        let negative = scan.take("-");
        if !negative {
            scan.take("+");
        }
        let (value, _, range) = quantity(scan, Wanted::Time)?;
        signed(value, negative, &range)
    })
}

/// `value` of this unit in microseconds and so on, with a sign.
pub(super) fn signed(value: u64, negative: bool, at: &Range<usize>) -> Result<Deviation, Wrong> {
    let value = i64::try_from(value).map_err(|_| Wrong::new(at.clone(), "too large"))?;
    Ok(Deviation::from_micros(if negative { value.saturating_neg() } else { value }))
}

/// A number of thousandths as a decimal number without needless zeros.
pub(super) struct Thousandths(pub(super) u64);

impl fmt::Display for Thousandths {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (whole, part) = (self.0.checked_div(1_000).unwrap_or(0), self.0.checked_rem(1_000).unwrap_or(0));
        if part == 0 {
            return write!(f, "{whole}");
        }
        let digits = format!("{part:03}");
        write!(f, "{whole}.{}", digits.trim_end_matches('0'))
    }
}

/// Microseconds as a person writes them, and as [`span`] reads them back: `"160 ms"`, `"1 s"`, `"400 us"`.
pub fn show_micros(micros: u64) -> String {
    const MINUTE: u64 = 60_000_000;
    const HOUR: u64 = 60 * MINUTE;
    const DAY: u64 = 24 * HOUR;
    match micros {
        0 => "0 ms".to_owned(),
        1..1_000 => format!("{micros} us"),
        1_000..10_000_000 if micros.checked_rem(1_000_000) != Some(0) => format!("{} ms", Thousandths(micros)),
        _ if micros > DAY && micros.checked_rem(DAY) == Some(0) => format!("{} d", micros.checked_div(DAY).unwrap_or(0)),
        _ if micros.checked_rem(HOUR) == Some(0) => format!("{} h", micros.checked_div(HOUR).unwrap_or(0)),
        _ if micros.checked_rem(MINUTE) == Some(0) => format!("{} min", micros.checked_div(MINUTE).unwrap_or(0)),
        _ if micros.checked_rem(1_000) == Some(0) => format!("{} s", Thousandths(micros.checked_div(1_000).unwrap_or(0))),
        _ => format!("{} ms", Thousandths(micros)),
    }
}

/// Microvolts as a person writes them.
pub fn show_microvolts(micro: u64) -> String {
    match micro {
        1..100 => format!("{micro} uV"),
        0 | 100..1_000_000 => format!("{} mV", Thousandths(micro)),
        _ if micro.checked_rem(1_000) == Some(0) => format!("{} V", Thousandths(micro.checked_div(1_000).unwrap_or(0))),
        _ => format!("{} mV", Thousandths(micro)),
    }
}

/// The rate of an interval in microseconds, to a thousandth per minute, as a person writes it.
pub fn show_rate(micros: u64) -> String {
    let milli = 60_000_000_000_u64.saturating_add(micros.checked_div(2).unwrap_or(0)).checked_div(micros).unwrap_or(0);
    format!("{} /min", Thousandths(milli))
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn quantities_are_read_exactly() {
        for (text, micros) in [
            ("160 ms", 160_000),
            ("160ms", 160_000),
            ("0.4 ms", 400),
            ("10 s", 10_000_000),
            ("5 min", 300_000_000),
            ("24 h", 86_400_000_000),
            ("1.000001 s", 1_000_001),
            ("7 µs", 7),
            ("7 μs", 7),
            (" 7\u{a0}us ", 7),
        ] {
            assert_eq!(span(text), Ok(Span::from_micros(micros)), "{text}");
        }
        assert_eq!(microvolts("2.5 mV"), Ok(MicroVolts(2_500)));
        assert_eq!(millivolts("3.5 V"), Ok(MilliVolts(3_500)));
        assert_eq!(share_millionths("90 %"), Ok(900_000));
        assert_eq!(share_millionths("0.9"), Ok(900_000));
        assert_eq!(span_range("150..400 ms"), Ok((Span::from_millis(150), Span::from_millis(400))));
    }

    #[test]
    fn a_rate_and_its_interval_are_the_same() {
        assert_eq!(interval("60 /min"), interval("1000 ms"));
        assert_eq!(interval("72.5/min"), Ok(Interval::from_rate_nearest(Rate::from_milli_per_minute(72_500))));
    }

    #[test]
    fn what_cannot_be_read_is_refused_where_it_goes_wrong() {
        let refused = |text: &str| span(text).map_err(|wrong| (wrong.at, wrong.label, wrong.help)).unwrap_err();
        assert_eq!(refused("160").1, "expected a unit here: us, ms, s, min, h or d");
        assert_eq!(refused("160 mss").1, "did you mean `ms`?");
        assert_eq!(refused("160 MS").1, "did you mean `ms`?");
        assert_eq!(refused("10 sec").1, "did you mean `s`?");
        assert_eq!(refused("10 fortnights").1, "no such unit here");
        assert_eq!(refused("10 fortnights").2.as_deref(), Some("expected us, ms, s, min, h or d"));
        assert_eq!(refused("2 mV").1, "mV is a voltage, expected a time with its unit, such as \"160 ms\"");
        assert_eq!(refused("0.0001 ms").1, "finer than 1 us: it would be rounded");
        assert_eq!(refused("-5 ms").1, "expected a time with its unit, such as \"160 ms\"");
        assert_eq!(refused("5 ms or so").0, 5..10);
        assert_eq!(refused("99999999999999999999 d").1, "more than 18 digits");
        assert_eq!(refused("999999999999999999 d").1, "too large");
        assert_eq!(interval("72 bpm").unwrap_err().label, "did you mean `/min`?");
        assert!(interval("0 /min").is_err() && interval("0 ms").is_err());
        assert!(interval("0.013 /min").is_err() && interval("72 min").is_err());
        assert!(share_millionths("101 %").is_err() && share_millionths("1.1").is_err());
    }

    proptest! {
        #[test]
        fn what_is_shown_is_read_back(micros in prop_oneof![0..2_000_u64, 0..20_000_000_u64, 0..10_u64.pow(15)]) {
            prop_assert_eq!(span(&show_micros(micros)), Ok(Span::from_micros(micros)));
        }

        #[test]
        fn voltages_too(micro in prop_oneof![0..2_000_u32, any::<u32>()]) {
            prop_assert_eq!(microvolts(&show_microvolts(micro.into())), Ok(MicroVolts(micro)));
        }

        #[test]
        fn any_decimal_is_exact_or_refused(whole in 0..1_000_000_u64, part in 0..100_000_u64) {
            let read = span(&format!("{whole}.{part:05} ms"));
            if part % 100 == 0 {
                prop_assert_eq!(read, Ok(Span::from_micros(whole * 1_000 + part / 100)));
            } else {
                prop_assert!(read.is_err());
            }
        }

        #[test]
        fn nothing_makes_it_panic(text in any::<String>()) {
            let _ = (span(&text), interval(&text), microvolts(&text), millivolts(&text), share_millionths(&text), span_range(&text));
        }

        #[test]
        fn an_error_points_into_the_text(text in "[0-9. µa-z%/-]{0,12}") {
            if let Err(wrong) = interval(&text) {
                prop_assert!(wrong.at.end <= text.len() && wrong.at.start <= wrong.at.end, "{:?}", wrong);
                prop_assert!(text.get(wrong.at.clone()).is_some());
            }
        }
    }
}
