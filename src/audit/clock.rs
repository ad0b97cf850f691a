//! Instants as 32-bit offsets: half the memory of a state that is kept many times over.

use crate::base::{Instant, Span};

/// A moment or a span in microseconds, relative to the auditor's own zero. All arithmetic on it saturates.
pub(super) type Micros = u32;

/// A span that never ends: added to anything it lies beyond every moment there is.
pub(super) const FOREVER: Micros = Micros::MAX;

/// Room before the zero, so that a state that began before the run has its place: 67 s, more than any interval a program accepts.
const LEAD: Micros = 1 << 26;
/// The zero moves on when the present is this far from it.
const MOVE_AT: u64 = 1 << 30;
/// How far behind the present it then lies: 537 s, longer than anything that is measured from a past event.
const BEHIND: u64 = 1 << 29;

/// The zero of the offsets.
#[derive(Debug, Clone, Copy)]
pub(super) struct Clock {
    zero: u64,
}

impl Clock {
    pub(super) const fn new(start: Instant) -> Self {
        Self { zero: start.as_micros() }
    }

    /// The offset of an instant that lies no further from the zero than the offsets reach; clamped to them.
    pub(super) fn offset(&self, at: Instant) -> Micros {
        let ahead = at.as_micros().saturating_add(u64::from(LEAD)).saturating_sub(self.zero);
        Micros::try_from(ahead).unwrap_or(Micros::MAX)
    }

    /// The instant of an offset; before the time line's zero it is that zero.
    pub(super) fn instant(&self, offset: Micros) -> Instant {
        Instant::from_micros(self.zero.saturating_add(u64::from(offset)).saturating_sub(u64::from(LEAD)))
    }

    /// Moves the zero if `now` has come far from it; the answer is what every offset must then lose.
    pub(super) fn follow(&mut self, now: Instant) -> Option<Micros> {
        let ahead = now.as_micros().saturating_sub(self.zero);
        if ahead < MOVE_AT {
            return None;
        }
        let by = ahead.saturating_sub(BEHIND);
        self.zero = self.zero.saturating_add(by);
        Some(Micros::try_from(by).unwrap_or(Micros::MAX))
    }
}

/// A span as an offset, cut to what an offset holds.
pub(super) fn short(span: Span) -> Micros {
    Micros::try_from(span.as_micros()).unwrap_or(Micros::MAX)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn offsets_keep_their_instants_when_the_zero_moves() {
        let start = Instant::from_micros((1 << 32) - 3_000_000);
        let mut clock = Clock::new(start);
        let past = Instant::from_micros(start.as_micros() - 10_000_000);
        assert_eq!(clock.instant(clock.offset(past)), past, "a state that began before the run has its place");
        let late = start.saturating_add(Span::from_secs(1_074));
        let anchor = start.saturating_add(Span::from_secs(1_000));
        let before = clock.offset(anchor);
        let by = clock.follow(late).unwrap();
        assert_eq!(clock.instant(before - by), anchor);
        assert_eq!(clock.instant(clock.offset(late)), late);
        assert_eq!(clock.follow(late), None);
    }
}
