//! Time as an argument: instants, spans and signed deviations, all in whole microseconds.

/// A moment on the bench's own time line, in whole microseconds since its zero.
///
/// # Units
/// Microseconds in `u64`: the line does not wrap within 584 542 years, so instants have a total order.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Instant(u64);

impl Instant {
    /// The zero of the time line.
    pub const ZERO: Self = Self(0);
    /// The last instant there is.
    pub const MAX: Self = Self(u64::MAX);

    /// The instant that lies `micros` microseconds after [`Instant::ZERO`].
    pub const fn from_micros(micros: u64) -> Self {
        Self(micros)
    }

    /// Microseconds since [`Instant::ZERO`].
    pub const fn as_micros(self) -> u64 {
        self.0
    }

    /// The instant `span` later, at most [`Instant::MAX`].
    pub const fn saturating_add(self, span: Span) -> Self {
        Self(self.0.saturating_add(span.0))
    }

    /// The instant `span` earlier, at least [`Instant::ZERO`].
    pub const fn saturating_sub(self, span: Span) -> Self {
        Self(self.0.saturating_sub(span.0))
    }

    /// The instant `by` away, clamped to the time line.
    pub const fn shifted(self, by: Deviation) -> Self {
        Self(self.0.saturating_add_signed(by.0))
    }

    /// The span since `earlier`, or `None` if that lies later.
    pub const fn since(self, earlier: Self) -> Option<Span> {
        match self.0.checked_sub(earlier.0) {
            Some(micros) => Some(Span(micros)),
            None => None,
        }
    }

    /// The span since `earlier`, or nothing at all if that lies later.
    pub const fn saturating_since(self, earlier: Self) -> Span {
        Span(self.0.saturating_sub(earlier.0))
    }

    /// How far this instant lies from `nominal`; positive means later.
    pub const fn deviation_from(self, nominal: Self) -> Deviation {
        let apart = self.0.abs_diff(nominal.0);
        let size = if apart > i64::MAX.unsigned_abs() { i64::MAX } else { apart.cast_signed() };
        Deviation(if self.0 < nominal.0 { size.saturating_neg() } else { size })
    }
}

/// A length of time, never negative.
///
/// # Units
/// Whole microseconds in `u64`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Span(u64);

impl Span {
    /// No time at all.
    pub const ZERO: Self = Self(0);

    /// A span of whole microseconds.
    pub const fn from_micros(micros: u64) -> Self {
        Self(micros)
    }

    /// A span of whole milliseconds, at most what `u64` microseconds hold.
    pub const fn from_millis(millis: u64) -> Self {
        Self(millis.saturating_mul(1_000))
    }

    /// A span of whole seconds, at most what `u64` microseconds hold.
    pub const fn from_secs(secs: u64) -> Self {
        Self(secs.saturating_mul(1_000_000))
    }

    /// The span in microseconds.
    pub const fn as_micros(self) -> u64 {
        self.0
    }

    /// Both spans together, at most the longest there is.
    pub const fn saturating_add(self, other: Self) -> Self {
        Self(self.0.saturating_add(other.0))
    }

    /// What is left when `other` is taken away; nothing if that is longer.
    pub const fn saturating_sub(self, other: Self) -> Self {
        Self(self.0.saturating_sub(other.0))
    }

    /// The span `times` over, at most the longest there is.
    pub const fn saturating_mul(self, times: u64) -> Self {
        Self(self.0.saturating_mul(times))
    }

    /// The span as a deviation towards later, at most the largest there is.
    pub const fn as_deviation(self) -> Deviation {
        Deviation(if self.0 > i64::MAX.unsigned_abs() { i64::MAX } else { self.0.cast_signed() })
    }

    /// True if this is no time at all.
    pub const fn is_zero(self) -> bool {
        self.0 == 0
    }
}

/// A signed distance in time: positive means later than expected.
///
/// # Units
/// Whole microseconds in `i64`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Deviation(i64);

impl Deviation {
    /// On the spot.
    pub const ZERO: Self = Self(0);

    /// A deviation of whole microseconds; positive means later.
    pub const fn from_micros(micros: i64) -> Self {
        Self(micros)
    }

    /// A deviation of whole milliseconds, clamped to what `i64` microseconds hold.
    pub const fn from_millis(millis: i64) -> Self {
        Self(millis.saturating_mul(1_000))
    }

    /// The deviation in microseconds; positive means later.
    pub const fn as_micros(self) -> i64 {
        self.0
    }

    /// Its size without the sign.
    pub const fn size(self) -> Span {
        Span(self.0.unsigned_abs())
    }

    /// Both deviations together, clamped.
    pub const fn saturating_add(self, other: Self) -> Self {
        Self(self.0.saturating_add(other.0))
    }

    /// The same size towards the other side.
    pub const fn reversed(self) -> Self {
        Self(self.0.saturating_neg())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_line_ends_are_walls_not_wraps() {
        let last = Instant::MAX;
        assert_eq!(last.saturating_add(Span::from_micros(1)), last);
        assert_eq!(Instant::ZERO.saturating_sub(Span::from_micros(1)), Instant::ZERO);
        assert_eq!(Instant::ZERO.since(last), None);
        assert_eq!(Instant::ZERO.deviation_from(last).as_micros(), -i64::MAX);
        assert_eq!(last.deviation_from(Instant::ZERO).as_micros(), i64::MAX);
    }

    #[test]
    fn later_is_positive() {
        let (early, late) = (Instant::from_micros(10), Instant::from_micros(14));
        assert_eq!(late.deviation_from(early), Deviation::from_micros(4));
        assert_eq!(early.deviation_from(late), Deviation::from_micros(-4));
        assert_eq!(late.shifted(Deviation::from_micros(-4)), early);
    }
}
