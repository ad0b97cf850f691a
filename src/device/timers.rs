//! How long each timer runs: from the program, and how a fault bends it. All of it at construction, none on the event path.

use crate::base::{Deviation, Instant, Interval, Program, Span};
use fixed::types::U32F32;

/// How long each timer of the device runs.
#[derive(Debug, Clone, Copy)]
pub(super) struct Timers {
    pub(super) lower: Interval,
    pub(super) after_sense: Interval,
    pub(super) refractory: Span,
    pub(super) blanking: Span,
}

impl Timers {
    pub(super) const fn of(program: &Program) -> Self {
        let settings = program.settings();
        Self {
            lower: settings.lower,
            after_sense: program.escape_after_sense(),
            refractory: settings.refractory,
            blanking: settings.blanking,
        }
    }

    fn each_escape(&mut self, bend: impl Fn(u64) -> u64) {
        for escape in [&mut self.lower, &mut self.after_sense] {
            *escape = Interval::from_fixed(U32F32::from_bits(bend(escape.as_fixed().to_bits())));
        }
    }

    pub(super) fn lengthen_escape(&mut self, by: Span) {
        self.each_escape(|bits| bits.saturating_add(in_fixed(by)));
    }

    /// A timer in a register that cannot hold its interval runs for what is left in the register, at least a millisecond.
    /// False, and nothing is changed, if the register holds the lower rate interval.
    pub(super) fn cut_escape_to(&mut self, register: Span) -> bool {
        const SHORTEST: u64 = 1_000 << 32;
        if self.lower.ceil() < register {
            return false;
        }
        self.each_escape(|bits| bits.checked_rem(in_fixed(register)).unwrap_or(bits).max(SHORTEST));
        true
    }

    /// Every timer lasts longer by this share: the clock is slow.
    pub(super) fn slow_down(&mut self, millionths: u32) {
        self.each_escape(|bits| longer_by(bits, millionths));
        for span in [&mut self.refractory, &mut self.blanking] {
            *span = Span::from_micros(longer_by(span.as_micros(), millionths));
        }
    }

    pub(super) fn divide_escape(&mut self, by: u32) {
        self.each_escape(|bits| bits.checked_div(u64::from(by)).unwrap_or(bits));
    }

    pub(super) const fn shift_refractory(&mut self, by: Deviation) {
        self.refractory = Instant::ZERO.saturating_add(self.refractory).shifted(by).saturating_since(Instant::ZERO);
    }

    pub(super) const fn blind_beyond_refractory(&mut self, longer: Span) {
        self.blanking = self.refractory.saturating_add(longer);
    }
}

/// A span in 32.32 microseconds, at most what that holds.
fn in_fixed(span: Span) -> u64 {
    Interval::from_span(span).unwrap_or(Interval::MAX).as_fixed().to_bits()
}

fn longer_by(length: u64, millionths: u32) -> u64 {
    let more = u128::from(length).saturating_mul(u128::from(millionths)).checked_div(1_000_000).unwrap_or(0);
    length.saturating_add(u64::try_from(more).unwrap_or(u64::MAX))
}
