//! The mode table: per mode, what each event does to each timer.

use crate::base::{Channel, Mode};

/// What happens on the device's own channel.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Event {
    /// The device emits a pulse; its start counts as one.
    Pulse,
    /// A signal is detected outside blanking and refractory.
    Sense,
    /// A signal is detected inside the refractory period, outside blanking.
    Refractory,
    /// A signal falls inside blanking that a pulse started.
    BlankedByPulse,
    /// A signal falls inside blanking that a sense started.
    BlankedBySense,
}

/// How long the escape timer runs once it is started.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Escape {
    /// For the lower rate interval.
    Lower,
    /// For the hysteresis interval, where rate hysteresis is on; else for the lower rate interval.
    AfterSense,
}

/// What one event does to the three timers. A timer that runs already is restarted: what was pending is inhibited by that.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Reaction {
    /// Restarts the escape timer, at whose end a pulse is emitted.
    pub(super) escape: Option<Escape>,
    /// Restarts the refractory period.
    pub(super) refractory: bool,
    /// Restarts blanking.
    pub(super) blanking: bool,
}

impl Reaction {
    const NONE: Self = Self { escape: None, refractory: false, blanking: false };
    const CYCLE_AT_LOWER: Self = Self { escape: Some(Escape::Lower), refractory: true, blanking: true };
    const CYCLE_AFTER_SENSE: Self = Self { escape: Some(Escape::AfterSense), refractory: true, blanking: true };

    /// True if the event leaves no trace.
    pub(super) fn is_none(self) -> bool {
        self == Self::NONE
    }
}

/// A mode's row of the table.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Row {
    pub(super) paces: Option<Channel>,
    pub(super) senses: Option<Channel>,
    pub(super) on_pulse: Reaction,
    pub(super) on_sense: Reaction,
    pub(super) on_refractory: Reaction,
    pub(super) on_blanked_by_pulse: Reaction,
    pub(super) on_blanked_by_sense: Reaction,
}

impl Row {
    /// The row of a mode.
    ///
    /// | mode | paces | senses | pulse restarts | sense restarts | refractory or blanked signal |
    /// |---|---|---|---|---|---|
    /// | OOO | – | – | – | – | – |
    /// | AOO, VOO | A, V | – | lower | – | – |
    /// | AAI, VVI | A, V | A, V | lower, refractory, blanking | hysteresis, refractory, blanking | nothing |
    pub(super) const fn of(mode: Mode) -> Self {
        let (on_pulse, on_sense) = match (mode.paces(), mode.senses()) {
            (None, _) => (Reaction::NONE, Reaction::NONE),
            (Some(_), None) => (Reaction { escape: Some(Escape::Lower), ..Reaction::NONE }, Reaction::NONE),
            (Some(_), Some(_)) => (Reaction::CYCLE_AT_LOWER, Reaction::CYCLE_AFTER_SENSE),
        };
        Self {
            paces: mode.paces(),
            senses: mode.senses(),
            on_pulse,
            on_sense,
            on_refractory: Reaction::NONE,
            on_blanked_by_pulse: Reaction::NONE,
            on_blanked_by_sense: Reaction::NONE,
        }
    }

    pub(super) const fn on(&self, event: Event) -> Reaction {
        match event {
            Event::Pulse => self.on_pulse,
            Event::Sense => self.on_sense,
            Event::Refractory => self.on_refractory,
            Event::BlankedByPulse => self.on_blanked_by_pulse,
            Event::BlankedBySense => self.on_blanked_by_sense,
        }
    }
}
