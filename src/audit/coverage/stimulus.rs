//! What was tried: signals and pulses since the last judged window, with what stood behind them.

use super::origin::Origins;
use super::table::{After, Column};
use crate::base::{Cause, CauseKind, Channel, Instant, Kind, Record, Signal, Span};
use heapless::Deque;

/// Signals kept until the window they lie in is judged; of more than these the oldest are not counted.
const SIGNALS: usize = 24;
/// Pulses kept until the heart's answer is known.
const PULSES: usize = 4;

/// A signal that waits for its window to be judged.
#[derive(Debug, Clone, Copy)]
pub(super) struct Stimulus {
    pub(super) onset: Instant,
    pub(super) end: Instant,
    pub(super) column: Column,
    /// Another one began within 1 ms before it.
    pub(super) second: bool,
    /// Whether it was sensed could not be told; it may have ended this cycle.
    pub(super) may_have_ended: Option<Option<(After, Instant)>>,
}

impl Stimulus {
    /// True if what it did could not be told although its peak leaves no doubt. Of one near the threshold no more is asked than that
    /// the window's own verdict is decided.
    pub(super) fn is_undecided(&self) -> bool {
        self.may_have_ended.is_some() && self.column != Column::NearThreshold
    }
}

#[derive(Debug, Clone, Copy)]
struct Emitted {
    at: Instant,
    captured: Option<bool>,
}

/// The events of one channel that wait for a judgement.
#[derive(Debug, Clone)]
pub(super) struct Stimuli {
    channel: Option<Channel>,
    must_not_see: u32,
    must_see: u32,
    signals: Deque<Stimulus, SIGNALS>,
    pulses: Deque<Emitted, PULSES>,
    pub(super) origins: Origins,
    /// A signal or a pulse came about whose cause or answer the records do not tell.
    pub(super) guessed: bool,
}

impl Stimuli {
    pub(super) const fn new(channel: Option<Channel>, must_not_see: u32, must_see: u32) -> Self {
        Self {
            channel,
            must_not_see,
            must_see,
            signals: Deque::new(),
            pulses: Deque::new(),
            origins: Origins::new(),
            guessed: false,
        }
    }

    pub(super) fn record(&mut self, record: &Record) {
        self.origins.record(record);
        if let Some((channel, signal)) = record.as_signal() {
            // The beat that a pulse made itself lies in its own blanking: it is no event of the cycle.
            let own = self.channel.is_some_and(|paced| record.cause == Cause::new(CauseKind::Pulse, paced.number()));
            if Some(channel) == self.channel && !own {
                self.signal(record.at, signal, record.cause);
            }
        } else if let Some(pulse) = record.as_pulse() {
            if Some(pulse.channel) == self.channel {
                if self.pulses.is_full() {
                    let _ = self.pulses.pop_front();
                }
                let _ = self.pulses.push_back(Emitted { at: record.at, captured: None });
            }
        } else if matches!(record.kind, Kind::Activated | Kind::NotCaptured)
            && self.channel.is_some_and(|channel| record.cause == Cause::new(CauseKind::Pulse, channel.number()))
            && let Some(pulse) = self.pulses.back_mut()
            && pulse.captured.is_none()
        {
            pulse.captured = Some(record.kind == Kind::Activated);
        }
    }

    fn signal(&mut self, onset: Instant, signal: Signal, cause: Cause) {
        let column = if signal.peak.0 <= self.must_not_see && signal.peak.0 < self.must_see {
            Column::SubThreshold
        } else if signal.peak.0 < self.must_see {
            Column::NearThreshold
        } else {
            match self.origins.of(cause) {
                CauseKind::Focus | CauseKind::Script => Column::Premature,
                CauseKind::None => {
                    self.guessed = true;
                    Column::Beat
                }
                CauseKind::Own | CauseKind::Conducted | CauseKind::Pulse => Column::Beat,
            }
        };
        let second = self.signals.back().is_some_and(|last| onset.saturating_since(last.onset) <= Span::from_millis(1));
        if self.signals.is_full() {
            let _ = self.signals.pop_front();
        }
        let end = onset.saturating_add(signal.width);
        let _ = self.signals.push_back(Stimulus { onset, end, column, second, may_have_ended: None });
    }

    /// Whether the pulse at this instant captured; counted as captured, and flagged, where no record tells.
    pub(super) fn captured(&mut self, at: Instant) -> bool {
        let known = self.pulses.iter().find(|pulse| pulse.at == at).and_then(|pulse| pulse.captured);
        self.guessed |= known.is_none();
        known.unwrap_or(true)
    }

    /// Of the latest signal up to here it could not be told whether it ended this cycle.
    pub(super) fn could_not_tell(&mut self, until: Instant, cycle: Option<(After, Instant)>) {
        if let Some(last) = self.signals.iter_mut().filter(|signal| signal.onset <= until).last() {
            last.may_have_ended = Some(cycle);
        }
    }

    pub(super) fn iter(&self) -> impl Iterator<Item = &Stimulus> {
        self.signals.iter()
    }

    /// Forgets the signals of a window that was judged.
    pub(super) fn forget(&mut self, until: Instant) {
        while self.signals.front().is_some_and(|signal| signal.onset <= until) {
            let _ = self.signals.pop_front();
        }
    }
}
