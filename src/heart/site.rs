//! Tissue: a site that fires as one, is refractory, and answers a pulse or not.

use super::check::{sound, span_within, within};
use crate::base::{MilliVolts, NoCapture, ParamError, Pulse, Span, low_u32, wide};

/// The tissue of one site.
///
/// # Model
/// A site fires as a whole. For `refractory` after that nothing fires it; for `relative` more, waves and rhythms do, but a pulse
/// needs [`SiteParams::RELATIVE_FACTOR`] times the usual strength. (Tissue never answers twice within its refractory period:
/// textbook. That a stronger stimulus is needed shortly after it: textbook; a step of twice the strength is ours, from no source.)
///
/// A pulse fires it if its amplitude reaches the strength–duration law of Weiss,
/// `threshold = rheobase · (1 + chronaxie / width)` (Weiss 1901; the same form is recommended with rectangular pulses by Geddes,
/// IEEE Trans Biomed Eng 2004: checked). What counts is the moment of the leading edge. The site then fires `latency` later, unless
/// something else fires it first.
///
/// Chronic endocardial leads in people: chronaxie 0.2–0.5 ms, rheobase 0.3–1 V (from memory; print disagrees tenfold).
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct SiteParams {
    /// Absolute refractory period, 1 µs to 2 s. At its very end the site can fire again.
    pub refractory: Span,
    /// Relative refractory period, counted from the end of the absolute one: up to 2 s.
    pub relative: Span,
    /// Threshold of an endlessly wide pulse, 1 mV to 20 V.
    pub rheobase: MilliVolts,
    /// Width at which the threshold is twice the rheobase, 1 µs to 20 ms.
    pub chronaxie: Span,
    /// From the leading edge of a pulse to the activation, 1 µs to 100 ms; longer than the widest pulse that will come.
    pub latency: Span,
}

impl SiteParams {
    /// By how much the threshold is raised in the relative refractory period. Ours, from no source.
    pub const RELATIVE_FACTOR: u32 = 2;

    /// Tissue of this absolute refractory period. The rest: no relative one, 0.5 V, 0.3 ms, and 3 ms of latency, which exceeds
    /// every pulse width a [`Program`](crate::base::Program) may have (ours, from no source).
    pub const fn new(refractory: Span) -> Self {
        Self {
            refractory,
            relative: Span::ZERO,
            rheobase: MilliVolts(500),
            chronaxie: Span::from_micros(300),
            latency: Span::from_millis(3),
        }
    }

    /// The same with this relative refractory period.
    #[must_use]
    pub const fn with_relative(self, relative: Span) -> Self {
        Self { relative, ..self }
    }

    /// The same with this strength–duration curve.
    #[must_use]
    pub const fn with_threshold(self, rheobase: MilliVolts, chronaxie: Span) -> Self {
        Self { rheobase, chronaxie, ..self }
    }

    /// The same with this latency.
    #[must_use]
    pub const fn with_latency(self, latency: Span) -> Self {
        Self { latency, ..self }
    }

    pub(super) const fn check(&self) -> Result<(), ParamError> {
        const TWO_SECONDS: Span = Span::from_secs(2);
        sound!(span_within("refractory", self.refractory, Span::from_micros(1), TWO_SECONDS));
        sound!(span_within("relative", self.relative, Span::ZERO, TWO_SECONDS));
        sound!(within("rheobase", wide(self.rheobase.0), 1, 20_000));
        sound!(span_within("chronaxie", self.chronaxie, Span::from_micros(1), Span::from_millis(20)));
        span_within("latency", self.latency, Span::from_micros(1), Span::from_millis(100))
    }

    /// True if nothing fires the site when it last fired so long ago.
    pub(super) fn is_refractory(&self, since_fired: Span) -> bool {
        since_fired < self.refractory
    }

    /// What a pulse finds when the site last fired so long ago: nothing, or why it is not answered and by how much.
    pub(super) fn resists(&self, pulse: &Pulse, since_fired: Span) -> Option<(NoCapture, u32)> {
        if self.is_refractory(since_fired) {
            let left = self.refractory.saturating_sub(since_fired).as_micros();
            return Some((NoCapture::Refractory, low_u32(left))); // at most the 2 s that `refractory` may last
        }
        let raised = since_fired < self.refractory.saturating_add(self.relative);
        let factor = if raised { Self::RELATIVE_FACTOR } else { 1 };
        let missing = self.missing(pulse, factor);
        if missing == 0 { None } else { Some((NoCapture::TooWeak, missing)) }
    }

    /// How many millivolts are missing, rounded up, to `factor` times the threshold of Weiss; multiplied out by the width, so
    /// that nothing is divided where the pulse is strong enough.
    fn missing(&self, pulse: &Pulse, factor: u32) -> u32 {
        let width = pulse.width.as_micros().min(wide(u32::MAX));
        // Each product stays below 2^64: a factor of 2, a rheobase below 2^15, chronaxie plus width below 2^33.
        let needed = wide(self.rheobase.0.wrapping_mul(factor)).wrapping_mul(width.wrapping_add(self.chronaxie.as_micros()));
        let given = wide(pulse.amplitude.0).wrapping_mul(width);
        divide_up(needed.saturating_sub(given), width)
    }
}

/// `number / by`, rounded up, at most `u32::MAX`, which is also the answer for a `by` of nothing: bit by bit, because a 64-bit
/// division is half a kilobyte of code and a thousand instructions on the smallest cores.
fn divide_up(number: u64, by: u64) -> u32 {
    if number == 0 {
        return 0;
    }
    let mut rest = number;
    let mut quotient: u32 = 0;
    for bit in (0..32).rev() {
        let part = by.checked_shl(bit).filter(|part| part.wrapping_shr(bit) == by);
        if let Some(part) = part.filter(|&part| part != 0 && part <= rest) {
            rest = rest.wrapping_sub(part);
            quotient |= 1_u32.wrapping_shl(bit);
        }
    }
    // Still too large: the answer is beyond 32 bits, or there is none.
    if rest >= by { u32::MAX } else { quotient.saturating_add(u32::from(rest != 0)) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Channel;

    #[test]
    fn the_hand_made_division_is_a_division() {
        for number in [0, 1, 2, 399, 400, 401, 875_000, u64::from(u32::MAX), 1 << 47] {
            for by in [1, 2, 3, 400, 65_535, 1 << 20, u64::from(u32::MAX)] {
                let exact = number.div_ceil(by);
                assert_eq!(u64::from(divide_up(number, by)), exact.min(u64::from(u32::MAX)), "{number} / {by}");
            }
        }
        assert_eq!(divide_up(1, 0), u32::MAX);
    }

    #[test]
    fn a_sites_own_curve_and_latency_hold() {
        let steep = SiteParams::new(Span::from_millis(250)).with_threshold(MilliVolts(1_000), Span::from_micros(600));
        let pulse = Pulse { channel: Channel::Ventricular, amplitude: MilliVolts(2_499), width: Span::from_micros(400) };
        assert_eq!(steep.resists(&pulse, Span::from_secs(1)), Some((NoCapture::TooWeak, 1))); // 1 V · (1 + 0.6/0.4)
        assert_eq!(steep.with_latency(Span::from_millis(7)).latency, Span::from_millis(7));
    }

    #[test]
    fn a_pulse_misses_by_so_many_millivolts() {
        // 0.5 V · (1 + 0.3/0.4) = 0.875 V.
        let site = SiteParams::new(Span::from_millis(250)).with_relative(Span::from_millis(50));
        let pulse = |millivolts| Pulse {
            channel: Channel::Ventricular,
            amplitude: MilliVolts(millivolts),
            width: Span::from_micros(400),
        };
        let rested = Span::from_micros(u64::MAX);
        assert_eq!(site.resists(&pulse(875), rested), None);
        assert_eq!(site.resists(&pulse(874), rested), Some((NoCapture::TooWeak, 1)));
        assert_eq!(site.resists(&pulse(875), Span::from_millis(300)), None, "the relative period has just ended");
        assert_eq!(site.resists(&pulse(875), Span::from_micros(299_999)), Some((NoCapture::TooWeak, 875)));
        assert_eq!(site.resists(&pulse(1_750), Span::from_millis(250)), None, "twice the threshold, just relative");
        assert_eq!(site.resists(&pulse(9_000), Span::from_micros(249_999)), Some((NoCapture::Refractory, 1)));
    }
}
