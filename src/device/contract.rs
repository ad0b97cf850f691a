//! The contract between the bench and whatever is under test.

use crate::base::{Channel, Instant, NotYet, Pulse, Signal};

/// A device that senses and paces, as the bench drives it.
///
/// # Who calls, who implements
/// The bench calls. The reference device implements it; so does a wrapper around your firmware's timing code.
///
/// # Time
/// Nothing reads a clock. The bench calls with instants that never go back; an earlier `now` counts as the latest one seen. A
/// late `poll` changes nothing but the moment the answer is fetched: a pulse carries the instant it was due.
///
/// # Order
/// Within an instant the bench first shows all signals, then polls until the answer is `None`. Whether a sense or an expiry on
/// the same tick wins is the device's own, declared business ([`Tie`](crate::base::Tie)).
///
/// # What is not promised
/// A device may be wrong in any way: emit pulses without time passing, answer a `next_at` that lies in the past. The bench
/// reports that and never waits for it.
pub trait Device {
    /// Shows the device a signal that begins `at` this instant.
    ///
    /// # Errors
    /// [`NotYet`] if something is due strictly before `at`, with its instant: poll up to there, then offer the signal again.
    /// Nothing has changed then.
    fn signal(&mut self, channel: Channel, signal: Signal, at: Instant) -> Result<(), NotYet>;

    /// The next pulse due at or before `now`, with the instant of its leading edge; `None` when nothing more is due.
    fn poll(&mut self, now: Instant) -> Option<(Instant, Pulse)>;

    /// When the device wants to be polled next, `None` if it waits for nothing. Later than `now` once `poll(now)` said `None`.
    fn next_at(&self) -> Option<Instant>;
}

impl<D: Device + ?Sized> Device for &mut D {
    fn signal(&mut self, channel: Channel, signal: Signal, at: Instant) -> Result<(), NotYet> {
        (**self).signal(channel, signal, at)
    }

    fn poll(&mut self, now: Instant) -> Option<(Instant, Pulse)> {
        (**self).poll(now)
    }

    fn next_at(&self) -> Option<Instant> {
        (**self).next_at()
    }
}
