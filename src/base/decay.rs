//! The decaying exponential e^(−t/τ) in Q0.32, in integers only.

use super::convert::{index, low_u32, low_u64, wide, wider};
use super::{Interval, ParamError, Problem, Span};
use fixed::types::{U0F32, U32F32};

/// How fast something decays: a time constant, prepared so that no later use divides.
///
/// # Rounding
/// [`Decay::factor`] is within [`Decay::ERROR`] of e^(−t/τ), never increases with time, and is exactly 0 from 23 τ on.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Decay {
    tau: Span,
    /// log₂(e)/τ as a mantissa of 32 bits …
    mantissa: u32,
    /// … such that `elapsed · mantissa >> shift` is t/τ · log₂(e) in 32.32.
    shift: u32,
}

impl Decay {
    /// The largest distance from the true value: 4 · 2⁻³², asserted over the whole domain.
    pub const ERROR: U0F32 = U0F32::from_bits(4);
    /// The shortest time constant.
    pub const SHORTEST: Span = Span::from_millis(1);
    /// The longest time constant: 23 of it stay below the 2³² µs that `elapsed` is cut to.
    pub const LONGEST: Span = Span::from_secs(180);

    /// A decay with this time constant.
    ///
    /// # Errors
    /// Refuses a time constant outside [`Decay::SHORTEST`] to [`Decay::LONGEST`], as parameter `tau`.
    pub const fn new(tau: Span) -> Result<Self, ParamError> {
        let (value, least, greatest) = (tau.as_micros(), Self::SHORTEST.as_micros(), Self::LONGEST.as_micros());
        if value < least || value > greatest {
            return Err(ParamError::new("tau", Problem::OutOfRange { value, least, greatest }));
        }
        const LOG2_E: u128 = 6_653_256_548_922_161_246; // in 2.62
        let mut bits = match (LOG2_E << 32).checked_div(wider(value)) {
            Some(bits) => bits,
            None => 0, // not reached: value is at least 1000
        };
        let mut shift: u32 = 62; // bits = 2^94 · log2(e)/tau, and elapsed · bits >> 62 is in 32.32
        while bits >= 1 << 33 {
            bits >>= 1;
            shift = shift.wrapping_sub(1);
        }
        // One bit more than fits: round it away.
        let mantissa = (low_u64(bits) >> 1).wrapping_add(low_u64(bits) & 1);
        Ok(Self { tau, mantissa: low_u32(mantissa), shift: shift.wrapping_sub(1) })
    }

    /// The time constant.
    pub const fn tau(self) -> Span {
        self.tau
    }

    /// e^(−elapsed/τ); the largest number below 1 when no time has passed.
    pub const fn factor(self, elapsed: Span) -> U0F32 {
        let elapsed = elapsed.as_micros();
        if elapsed > wide(u32::MAX) {
            return U0F32::ZERO;
        }
        U0F32::from_bits(two_to_minus(elapsed.wrapping_mul(wide(self.mantissa)) >> self.shift))
    }

    /// `gain` · e^(−elapsed/τ), with its fraction of a microsecond: a gain of 4 s is off by less than 4 ns.
    pub const fn scaled(self, gain_us: u32, elapsed: Span) -> Interval {
        Interval::from_fixed(U32F32::from_bits(wide(gain_us).wrapping_mul(wide(self.factor(elapsed).to_bits()))))
    }
}

/// 2^(−x), x in 32.32, the answer in Q0.32.
const fn two_to_minus(x: u64) -> u32 {
    let octave = low_u32(x >> 32);
    if octave > 31 {
        return 0;
    }
    let fraction = low_u32(x);
    let (from, to) = table_row(fraction >> 25);
    // 2^-rest = e^-z with z below 0.0055, so that three terms are good to 2^-34.
    const LN_2: u64 = 2_977_044_472; // in 0.32
    const SIXTH: u64 = 715_827_883; // in 0.32
    let z = (wide(fraction & 0x01FF_FFFF).wrapping_mul(LN_2)) >> 32;
    let square = z.wrapping_mul(z); // in 0.64
    let cube = (square >> 32).wrapping_mul(z) >> 32;
    let share = (1_u64 << 32).wrapping_sub(z).wrapping_add(square >> 33).wrapping_sub(cube.wrapping_mul(SIXTH) >> 32);
    let product = wide(from).wrapping_mul(share) >> 32;
    // Never below the next row: rounding must not make the curve rise again at a seam.
    let value = if product < wide(to) { wide(to) } else { product };
    low_u32(value >> octave)
}

/// 2^(−row/128) and 2^(−(row + 1)/128) in Q0.32.
const fn table_row(row: u32) -> (u32, u32) {
    let row = index(row);
    // A mask instead of a check: `row` has 7 bits, and the table 129 entries.
    match TABLE.split_at_checked(row) {
        Some((_, [from, to, ..])) => (*from, *to),
        _ => (0, 0),
    }
}

static TABLE: [u32; 129] = table();

const fn table() -> [u32; 129] {
    const STEP: u128 = 18_347_121_020_861_646_924; // 2^(-1/128) in 0.64
    let mut table = [u32::MAX; 129]; // the first entry is 1, which Q0.32 cannot hold
    let mut value: u128 = 1 << 64;
    let mut rest: &mut [u32] = &mut table;
    let mut first = true;
    while let [entry, more @ ..] = rest {
        if !first {
            *entry = low_u32(low_u64((value.wrapping_add(1 << 31)) >> 32));
        }
        first = false;
        value = value.wrapping_mul(STEP).wrapping_add(1 << 63) >> 64;
        rest = more;
    }
    table
}

#[cfg(test)]
mod tests {
    use super::*;

    fn exact(elapsed: u64, tau: u64) -> f64 {
        (-(elapsed as f64) / tau as f64).exp() * 4_294_967_296.0
    }

    #[test]
    fn it_is_within_its_error_over_the_whole_domain() {
        let mut worst = 0.0_f64;
        for tau in [1_000, 1_733, 59_600, 110_000, 999_999, 4_000_000, 30_000_000, 60_000_000, 180_000_000] {
            let decay = Decay::new(Span::from_micros(tau)).unwrap();
            for step in 0..400_000_u64 {
                let elapsed = u64::try_from(u128::from(step) * u128::from(tau) * 24 / 400_000).unwrap();
                let got = f64::from(decay.factor(Span::from_micros(elapsed)).to_bits());
                worst = worst.max((got - exact(elapsed, tau)).abs());
            }
        }
        assert!(worst <= f64::from(Decay::ERROR.to_bits()), "off by {worst:.2} of 2^-32");
    }

    #[test]
    fn it_never_rises() {
        // Every row seam of the table from both sides, and a dense walk of the first octaves.
        for row in 1..=(32 * 128_u64) {
            let seam = row << 25;
            for (before, after) in [(seam - 1, seam), (seam, seam + 1), (seam - 2, seam - 1)] {
                assert!(two_to_minus(before) >= two_to_minus(after), "at row {row}");
            }
        }
        let decay = Decay::new(Span::from_millis(110)).unwrap();
        let mut last = decay.factor(Span::ZERO);
        for elapsed in 1..3_000_000 {
            let next = decay.factor(Span::from_micros(elapsed));
            assert!(next <= last, "rises at {elapsed} us");
            last = next;
        }
    }

    #[test]
    fn the_ends_are_as_promised() {
        let decay = Decay::new(Decay::LONGEST).unwrap();
        assert_eq!(decay.factor(Span::ZERO), U0F32::MAX);
        assert_eq!(decay.factor(Span::from_micros(u64::MAX)), U0F32::ZERO);
        assert_eq!(decay.factor(Span::from_secs(23 * 180)), U0F32::ZERO);
        assert!(Decay::new(Span::ZERO).is_err());
        assert!(Decay::new(Span::from_secs(181)).is_err());
    }
}
