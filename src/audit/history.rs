//! What was seen lately, bounded: enough to replay from a few pulses back and ask which rule alone would explain a finding.

use super::clock::Micros;
use super::sense::Shown;
use heapless::Deque;

/// Events kept. Fewer than three cycles may fit when signals come thick; a replay then begins in an unknown state.
const KEPT: usize = 24;

/// Something seen on the channel.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Event {
    Signal(Shown),
    Pulse(Micros),
}

impl Event {
    /// The signal, if it is one.
    pub(super) const fn signal(self) -> Option<Shown> {
        match self {
            Self::Signal(signal) => Some(signal),
            Self::Pulse(_) => None,
        }
    }
}

/// Where a replay begins.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Origin {
    /// The start of the run, which counts as a pulse.
    Start(Micros),
    /// A pulse.
    Pulse(Micros),
    /// Any state a device can be in at this moment.
    Unknown(Micros),
}

/// The latest events, in the order in which they came.
#[derive(Debug, Clone)]
pub(super) struct History {
    events: Deque<Event, KEPT>,
    /// The state before the first event kept.
    origin: Origin,
}

impl History {
    pub(super) const fn new(origin: Origin) -> Self {
        Self { events: Deque::new(), origin }
    }

    pub(super) fn push(&mut self, event: Event) {
        if self.events.is_full() {
            match self.events.pop_front() {
                Some(Event::Pulse(at)) => self.origin = Origin::Pulse(at),
                Some(Event::Signal(signal)) => self.origin = Origin::Unknown(signal.at),
                None => {}
            }
        }
        let _ = self.events.push_back(event);
    }

    /// The state at the `back`-th pulse from the end, and the place of the first event after it; everything kept where there are
    /// fewer pulses.
    pub(super) fn since(&self, back: usize) -> (Origin, usize) {
        let pulses = self.events.iter().enumerate().rev().filter_map(|(place, event)| match event {
            Event::Pulse(at) => Some((Origin::Pulse(*at), place.saturating_add(1))),
            Event::Signal(_) => None,
        });
        pulses.take(back).last().unwrap_or((self.origin, 0))
    }

    /// The events from this place on.
    pub(super) fn from(&self, first: usize) -> impl Iterator<Item = Event> + '_ {
        self.events.iter().skip(first).copied()
    }

    pub(super) fn shift(&mut self, by: Micros) {
        for event in &mut self.events {
            match event {
                Event::Signal(signal) => signal.at = signal.at.saturating_sub(by),
                Event::Pulse(at) => *at = at.saturating_sub(by),
            }
        }
        match &mut self.origin {
            Origin::Start(at) | Origin::Pulse(at) | Origin::Unknown(at) => *at = at.saturating_sub(by),
        }
    }
}
