//! What a fault can do beyond the table and the timers' lengths. A clean device has none of it.

use crate::base::{FineInstant, Instant, Interval, Span};

/// The places where the engine asks whether it is to go wrong.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Hooks {
    /// The escape timer's register.
    pub(super) wrap: Option<Wrap>,
    /// Any signal in the last such span before an expiry makes the device miss it.
    pub(super) loses_expiry_within: Option<Span>,
    /// A sense in the last such span before an expiry restarts the timer, and the pulse comes all the same.
    pub(super) paces_in_spite_within: Option<Span>,
    /// Each pulse is followed by another one.
    pub(super) paces_again_after: Option<Span>,
}

/// A register that begins anew at zero whenever it is full, in the hands of a device that does not know.
#[derive(Debug, Clone, Copy)]
pub(super) struct Wrap {
    register: Span,
    next_at: Instant,
}

impl Wrap {
    /// A register that held zero at the zero of the time line. `None` if it holds nothing.
    pub(super) fn new(register: Span, start: Instant) -> Option<Self> {
        let into = start.as_micros().checked_rem(register.as_micros())?;
        let next_at = start.saturating_sub(Span::from_micros(into)).saturating_add(register);
        Some(Self { register, next_at })
    }

    /// When a timer started `at` an instant expires: one that spans a wrap counts anew from there.
    pub(super) fn due(&mut self, at: FineInstant, interval: Interval) -> FineInstant {
        // One step is enough: no cycle is as long as the shortest register.
        if self.next_at <= at.nearest() {
            self.next_at = self.next_at.saturating_add(self.register);
        }
        let due = at.plus(interval);
        if due.nearest() < self.next_at { due } else { FineInstant::at(self.next_at).plus(interval) }
    }
}
