//! When something last happened, if ever.

use crate::base::{Instant, Span};

/// The last time of something that may never have happened: never comes before every instant.
///
/// One word instead of the two of an `Option<Instant>`: the instant plus one, zero for never. The very last instant of the time
/// line is not told from the one before it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Last(u64);

impl Last {
    pub(super) const NEVER: Self = Self(0);

    pub(super) const fn at(instant: Instant) -> Self {
        Self(instant.as_micros().saturating_add(1))
    }

    /// How long ago it was at `now`: the longest span there is if never, nothing if it is still to come.
    pub(super) const fn since(self, now: Instant) -> Span {
        match self.0.checked_sub(1) {
            Some(then) => Span::from_micros(now.as_micros().saturating_sub(then)),
            None => Span::from_micros(u64::MAX),
        }
    }

    /// True if it happened at this very instant.
    pub(super) fn is(self, instant: Instant) -> bool {
        self == Self::at(instant)
    }
}
