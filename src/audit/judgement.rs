//! A judgement: one window of the device, what was expected in it, what was seen, and which rule decided.

use super::{RuleId, RuleSet};
use crate::base::{Channel, Deviation, Instant};

/// One judged window: a pulse that came, a pulse that did not, or a silence that was rightly kept.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct Judgement {
    /// When it was settled: the pulse's instant, or the instant at which waiting ended.
    pub at: Instant,
    /// The channel that was judged.
    pub channel: Channel,
    /// The answer.
    pub outcome: Outcome,
    /// What happened.
    pub how: How,
    /// The rule that decided; for a finding the one whose smallest change would explain it.
    pub rule: RuleId,
    /// Other rules that would explain a finding by just as small a change, and envelope rules broken by the same event.
    pub also: RuleSet,
    /// What the window counts from, where that is known.
    pub anchor: Option<Anchor>,
    /// Where the pulse was expected, where that is known.
    pub window: Option<Window>,
    /// The pulse, if there was one.
    pub seen: Option<Instant>,
    /// The pulse's distance from the window's nominal instant.
    pub deviation: Option<Deviation>,
    /// Why it could not be decided.
    pub hint: Option<Hint>,
}

/// The answer of a judgement.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Outcome {
    /// The rule held.
    Held,
    /// The rule was broken.
    Broken,
    /// It could not be decided.
    Undecided,
}

/// What happened in a judged window.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum How {
    /// A pulse inside its window.
    OnTime,
    /// A pulse before its window.
    Early,
    /// A pulse after its window.
    Late,
    /// No pulse where one was due.
    Missing,
    /// A pulse where none was due at all.
    Unexpected,
    /// No pulse, rightly: a beat came first.
    Withheld,
}

/// What a window counts from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Anchor {
    /// Its earliest possible instant; the same as `latest` for a pulse.
    pub earliest: Instant,
    /// Its latest possible instant.
    pub latest: Instant,
    /// Of what sort it is.
    pub kind: AnchorKind,
}

/// The sorts of anchor.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum AnchorKind {
    /// A sensed beat.
    Sensed,
    /// A pulse.
    Paced,
    /// The start of the run.
    Start,
}

/// Where a pulse was expected: both limits belong to it, tolerance included.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Window {
    /// The earliest accepted instant.
    pub earliest: Instant,
    /// The nominal instant, rounded to nearest.
    pub nominal: Instant,
    /// The latest accepted instant.
    pub latest: Instant,
}

/// Why something could not be decided.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[non_exhaustive]
pub enum Hint {
    /// A signal between the two limits of sensitivity: it may or may not have been seen.
    NearThreshold,
    /// A signal at a window's edge, within tolerance and uncertainty.
    AtEdge,
    /// A signal that begins inside blanking and outlasts it.
    Straddles,
    /// A signal too close to an expiry to tell which came first.
    NearTie,
    /// Within the measurement uncertainty of the limit.
    WithinUncertainty,
    /// The state of the device was not known: the run began mid-cycle, or a finding came just before.
    UnknownState,
    /// Too many explanations at once: some were merged to stay within the cap.
    Loosened,
    /// The run ended before it was settled.
    EndOfRun,
}
