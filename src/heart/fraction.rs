//! A share from nothing to the whole, both ends included.

use crate::base::{ParamError, Problem, Span, wide};

/// A share of something, from 0 to 1 with both ends exact.
///
/// # Rounding
/// In steps of 2⁻³². The complement is exact, so that a tract turned round behaves as the same tract.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Fraction(u64);

impl Fraction {
    /// Nothing.
    pub const ZERO: Self = Self(0);
    /// The whole.
    pub const ONE: Self = Self(1 << 32);

    /// So many millionths, rounded to the nearest 2⁻³².
    ///
    /// # Errors
    /// Refuses more than a million, as parameter `fraction`.
    pub const fn from_millionths(millionths: u32) -> Result<Self, ParamError> {
        const MILLION: u64 = 1_000_000;
        let value = wide(millionths);
        if value > MILLION {
            return Err(ParamError::new("fraction", Problem::OutOfRange { value, least: 0, greatest: MILLION }));
        }
        // At most 2^32 · 10^6 + 10^6/2, far below 2^64.
        match (value << 32).saturating_add(MILLION >> 1).checked_div(MILLION) {
            Some(bits) => Ok(Self(bits)),
            None => Ok(Self::ZERO), // not reached: a million is not zero
        }
    }

    /// What is missing to the whole.
    #[must_use]
    pub const fn complement(self) -> Self {
        Self(Self::ONE.0.wrapping_sub(self.0)) // never above one, so this never wraps
    }

    /// This share of a span, to the nearest microsecond. Right for spans below 2³¹ µs (35 min); longer ones count as that.
    pub const fn of(self, span: Span) -> Span {
        const LONGEST: u64 = (1 << 31) - 1;
        let micros = if span.as_micros() > LONGEST { LONGEST } else { span.as_micros() };
        // Below 2^31 · 2^32 + 2^31.
        Span::from_micros(micros.wrapping_mul(self.0).wrapping_add(1 << 31) >> 32)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_ends_and_the_complement_are_exact() {
        let span = Span::from_micros(1_999_999);
        assert_eq!(Fraction::ZERO.of(span), Span::ZERO);
        assert_eq!(Fraction::ONE.of(span), span);
        assert_eq!(Fraction::from_millionths(1_000_000).unwrap(), Fraction::ONE);
        let fifth = Fraction::from_millionths(190_000).unwrap();
        assert_eq!(fifth.complement().complement(), fifth);
        assert_eq!(fifth.of(Span::from_secs(1)), Span::from_millis(190));
        assert!(Fraction::from_millionths(1_000_001).is_err());
    }
}
