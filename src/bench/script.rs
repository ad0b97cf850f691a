//! The words of a script: when something happens, and what.

use crate::base::{CellId, Channel, Deviation, Signal, SiteId, Span, TractId};
use crate::heart::Ways;
use crate::lead::LeadChange;

/// One step: an act, and when it happens.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Step {
    /// When it acts.
    pub when: When,
    /// What it does.
    pub act: Act,
    /// How often it acts, at least 1. A sweep has a value for each; past its last value it begins again.
    pub times: u32,
}

/// When a step acts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum When {
    /// This long after the start of the run, once.
    At(Span),
    /// Every such span, first one span after the start.
    Every(Span),
    /// After the `nth` event from now on (1 is the next), coupled to it. Counting begins anew when the step has acted.
    After {
        /// The event.
        event: Event,
        /// Which one, from 1.
        nth: u32,
        /// How long after it.
        coupling: Coupling,
    },
    /// When no such event has come for this long; the wait begins at the start and anew with each event and each act.
    Without {
        /// The event.
        event: Event,
        /// For how long.
        span: Span,
    },
}

/// What a step can wait for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum Event {
    /// A pulse leaves on this channel.
    Pulse(Channel),
    /// A signal begins on this channel.
    Signal(Channel),
    /// This site fires, whatever the cause.
    Activation(SiteId),
    /// A pulse fires this site.
    Capture(SiteId),
    /// A pulse at this site finds no answer.
    NoCapture(SiteId),
    /// A wave is blocked in this tract.
    Block(TractId),
}

/// How long after its event a step acts: the end of a program window where one is named, moved by an amount. At least 1 µs results.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Coupling {
    /// Counted from this window's end, resolved from the program in force; `None` counts from the event itself.
    pub window: Option<WindowEnd>,
    /// By how much later, or earlier where negative.
    pub shift: Amount,
}

/// The ends of a single-chamber program's windows, each counted from the event that started it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum WindowEnd {
    /// Of blanking.
    Blanking,
    /// Of the refractory period.
    Refractory,
    /// Of the lower rate interval.
    Lower,
    /// Of the hysteresis interval; of the lower rate interval where hysteresis is off.
    Hysteresis,
}

/// A number that is fixed, swept or drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Amount {
    /// Always the same.
    Fixed(Deviation),
    /// From `from` by `step` up or down to `to`, one value each time; both ends belong to it.
    Sweep {
        /// The first value.
        from: Deviation,
        /// The last value, where the steps reach it.
        to: Deviation,
        /// The size of a step, at least 1 µs.
        step: Span,
    },
    /// Drawn evenly between both ends, from a stream of the step's own.
    Random {
        /// The least value.
        from: Deviation,
        /// The greatest value.
        to: Deviation,
    },
}

/// What a step does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Act {
    /// Fires a site, if it is not refractory.
    Beat(SiteId),
    /// Shows a channel a signal that has no beat behind it.
    Signal(Channel, Signal),
    /// Stops a cell.
    Arrest(CellId),
    /// Lets a cell run again, from the start of an interval.
    Release(CellId),
    /// Stops every cell and focus and shuts every tract.
    Quiet,
    /// Shuts a tract.
    Shut(TractId, Ways),
    /// Opens a tract.
    Open(TractId, Ways),
    /// Changes what a lead makes of the beats to come.
    Lead(Channel, LeadChange),
    /// Ends the run.
    End,
}
