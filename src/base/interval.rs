//! Intervals with a carried fraction, the rates they come from, and instants that remember the remainder.

use super::convert::{low_u32, low_u64, wide, wider};
use super::{Instant, Span};
use fixed::types::U32F32;

/// How often something happens, in thousandths per minute; never zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Rate(u32);

impl Rate {
    /// A whole number of times per minute; zero counts as the slowest rate there is, one thousandth per minute.
    pub const fn per_minute(times: u16) -> Self {
        #[allow(clippy::as_conversions, reason = "lossless; `From` is not const yet")]
        Self::from_milli_per_minute((times as u32).saturating_mul(1_000))
    }

    /// Thousandths per minute; zero counts as one.
    pub const fn from_milli_per_minute(milli: u32) -> Self {
        Self(if milli == 0 { 1 } else { milli })
    }

    /// Thousandths per minute.
    pub const fn as_milli_per_minute(self) -> u32 {
        self.0
    }
}

/// A length of time with its fraction of a microsecond: what a timer of a given rate really lasts.
///
/// # Units
/// Microseconds in unsigned 32.32 fixed point: up to 71 min 34.967 s in steps of 2⁻³² µs. 65 per minute is
/// 923 076.923… µs; a bench that drops the fraction is off by 0.08 s a day.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Interval(U32F32);

impl Interval {
    /// The longest interval there is, just under 71 min 34.968 s.
    pub const MAX: Self = Self(U32F32::MAX);

    /// The interval of a rate, rounded to the nearest 2⁻³² µs and at most [`Interval::MAX`].
    pub const fn from_rate_nearest(rate: Rate) -> Self {
        const MINUTE: u128 = 60_000_000_000 << 32; // 60e6 µs times 1000, in 32.32
        let milli = wider(wide(rate.0));
        let bits = match MINUTE.saturating_add(milli >> 1).checked_div(milli) {
            Some(bits) => bits,
            None => u128::MAX,
        };
        Self(U32F32::from_bits(if bits > wider(u64::MAX) { u64::MAX } else { low_u64(bits) }))
    }

    /// A whole number of microseconds, or `None` from 2³² µs (71 min 34.967296 s) on.
    pub const fn from_span(span: Span) -> Option<Self> {
        let micros = span.as_micros();
        if micros > wide(u32::MAX) { None } else { Some(Self(U32F32::from_bits(micros << 32))) }
    }

    /// From the raw fixed-point number of microseconds.
    pub const fn from_fixed(micros: U32F32) -> Self {
        Self(micros)
    }

    /// The raw fixed-point number of microseconds.
    pub const fn as_fixed(self) -> U32F32 {
        self.0
    }

    /// The nearest whole number of microseconds; a half goes up.
    pub const fn nearest(self) -> Span {
        let bits = self.0.to_bits();
        Span::from_micros((bits >> 32).saturating_add((bits >> 31) & 1))
    }

    /// The whole number of microseconds that does not exceed it.
    pub const fn floor(self) -> Span {
        Span::from_micros(self.0.to_bits() >> 32)
    }

    /// The smallest whole number of microseconds that is not below it.
    pub const fn ceil(self) -> Span {
        let bits = self.0.to_bits();
        let more = if low_u32(bits) == 0 { 0 } else { 1 };
        Span::from_micros((bits >> 32).saturating_add(more))
    }
}

/// An instant with its fraction of a microsecond, for timers that must not drift.
///
/// Events happen at [`FineInstant::nearest`]; the fraction is carried to the next expiry and never dropped.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct FineInstant {
    micros: u64,
    fraction: u32,
}

impl FineInstant {
    /// Exactly at a whole microsecond.
    pub const fn at(instant: Instant) -> Self {
        Self { micros: instant.as_micros(), fraction: 0 }
    }

    /// The fine instant one interval later; at the end of the line it stays there.
    pub const fn plus(self, interval: Interval) -> Self {
        let bits = interval.0.to_bits();
        let (fraction, carry) = self.fraction.overflowing_add(low_u32(bits));
        let whole = (bits >> 32).saturating_add(if carry { 1 } else { 0 });
        Self { micros: self.micros.saturating_add(whole), fraction }
    }

    /// The nearest whole instant; a half goes up.
    pub const fn nearest(self) -> Instant {
        Instant::from_micros(self.micros.saturating_add(wide(self.fraction >> 31)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_rate_becomes_the_nearest_interval() {
        // 60 000 / r, standards.md H1 and H2 [derived]: the interval of a rate, to 2^-33 µs.
        for (rate, micros) in [(30, 2_000_000.0), (45, 1_333_333.333_333), (65, 923_076.923_077), (175, 342_857.142_857)] {
            let interval = Interval::from_rate_nearest(Rate::per_minute(rate)).as_fixed();
            assert!((interval.to_num::<f64>() - micros).abs() < 1e-6, "{rate} per minute");
        }
    }

    #[test]
    fn beats_of_a_fractional_rate_do_not_drift() {
        let interval = Interval::from_rate_nearest(Rate::per_minute(65));
        let mut fine = FineInstant::at(Instant::ZERO);
        for beat in 1..=93_600_u64 {
            fine = fine.plus(interval);
            let exact = (u128::from(beat) * 60_000_000 + 32) / 65;
            assert!(u128::from(fine.nearest().as_micros()).abs_diff(exact) <= 1, "beat {beat}");
        }
        assert_eq!(fine.nearest().as_micros(), 86_400_000_000, "24 h at 65 per minute end on the microsecond");
    }

    #[test]
    fn rounding_is_in_the_name() {
        let half = Interval::from_fixed(U32F32::from_num(2.5));
        assert_eq!(
            (half.floor(), half.nearest(), half.ceil()),
            (Span::from_micros(2), Span::from_micros(3), Span::from_micros(3))
        );
        assert_eq!(Interval::from_span(Span::from_micros(1 << 32)), None);
    }
}
