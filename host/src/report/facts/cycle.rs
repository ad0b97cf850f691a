//! The cycles into which the program divides the time of the judged channel: from a seen beat or a pulse to the next.

use super::{PulseFact, Sight, SignalFact, judged_channel};
use crate::run_data::RunData;
use phase4::base::{Instant, Span};

/// From one seen beat or pulse to the next.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Cycle {
    pub(crate) from: Instant,
    /// What it begins with.
    pub(crate) begins: Ending,
    pub(crate) to: Instant,
    /// What ends it.
    pub(crate) ends: Ending,
}

/// What ends a cycle and begins the next.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Ending {
    /// A seen beat.
    Seen,
    /// A pulse.
    Pulse,
    /// The start or the end of the run.
    Run,
}

impl Cycle {
    pub(crate) fn span(&self) -> Span {
        self.to.saturating_since(self.from)
    }
}

/// Divides the run into cycles. Without a device there are none.
pub(super) fn read(run: &RunData, signals: &[SignalFact], pulses: &[PulseFact]) -> Vec<Cycle> {
    let Some(channel) = judged_channel(run) else { return Vec::new() };
    let seen = signals.iter().filter(|signal| signal.sight == Sight::Seen).map(|signal| (signal.at, Ending::Seen));
    let paced = pulses.iter().filter(|pulse| pulse.channel == channel).map(|pulse| (pulse.at, Ending::Pulse));
    let mut events: Vec<_> = seen.chain(paced).collect();
    // Stable, so that within an instant a signal comes before a pulse.
    events.sort_by_key(|(at, _)| *at);
    events.push((run.start.saturating_add(run.simulated), Ending::Run));
    let begins = std::iter::once((run.start, Ending::Run)).chain(events.iter().copied());
    begins.zip(events.iter()).map(|((from, begins), (to, ends))| Cycle { from, begins, to: *to, ends: *ends }).collect()
}
