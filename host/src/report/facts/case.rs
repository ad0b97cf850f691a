//! Judgements, with what lies in the interval each of them judges.

use super::{Cycle, Sight, SignalFact, judged_channel};
use crate::run_data::RunData;
use phase4::audit::{AnchorKind, How, Judgement, Outcome};
use phase4::base::{Instant, Span};

/// A judgement and what lies in its interval.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Case {
    pub(crate) judgement: Judgement,
    /// Where it is marked: its pulse, the nominal instant of one that never came, else when it was settled.
    pub(crate) place: Instant,
    /// When waiting was over: the pulse, or for one that never came the next seen beat or pulse after its window.
    pub(crate) until: Instant,
    /// A signal in blanking lies between its anchor and its pulse.
    blanked: bool,
    /// A signal in the refractory period does.
    refractory: bool,
    /// A signal too small to be seen does.
    small: bool,
}

/// What a case can follow: a cause that broken cases may share.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Since {
    Refractory,
    Small,
    Start,
    Sensed,
    Paced,
    /// A pulse or the start, which counts as one.
    Unsensed,
    Blanked,
}

impl Since {
    /// Every one, the most telling first: a signal in blanking says least, since every captured pulse is followed by one.
    pub(crate) const ALL: [Self; 7] =
        [Self::Refractory, Self::Small, Self::Start, Self::Sensed, Self::Paced, Self::Unsensed, Self::Blanked];

    /// The words with which a sentence about it begins.
    pub(crate) const fn words(self) -> &'static str {
        match self {
            Self::Blanked => "After a signal in blanking",
            Self::Refractory => "After a signal in its refractory period",
            Self::Small => "After a signal too small to be seen",
            Self::Sensed => "After a beat it has seen",
            Self::Paced => "After its own pulses",
            Self::Unsensed => "With no beat since its last pulse",
            Self::Start => "In its first cycle",
        }
    }

    /// The same without a device to speak of.
    pub(crate) const fn short(self) -> &'static str {
        match self {
            Self::Blanked => "After a signal in blanking",
            Self::Refractory => "After a signal in refractory",
            Self::Small => "After a signal too small to be seen",
            Self::Sensed => "After a seen beat",
            Self::Paced => "After a pulse",
            Self::Unsensed => "With no beat since the last pulse",
            Self::Start => "In the first cycle",
        }
    }

    /// True if the case follows such a thing.
    pub(crate) fn is_of(self, case: &Case) -> bool {
        let anchored = |kind| case.judgement.anchor.is_some_and(|anchor| anchor.kind == kind);
        match self {
            Self::Blanked => case.blanked,
            Self::Refractory => case.refractory,
            Self::Small => case.small,
            Self::Sensed => anchored(AnchorKind::Sensed),
            Self::Paced => anchored(AnchorKind::Paced),
            Self::Start => anchored(AnchorKind::Start),
            Self::Unsensed => anchored(AnchorKind::Paced) || anchored(AnchorKind::Start),
        }
    }
}

impl Case {
    /// True if a pulse was due or came: the cases in which timing was judged.
    pub(crate) fn is_of_a_pulse(&self) -> bool {
        self.judgement.how != How::Withheld
    }

    pub(crate) fn is_decided(&self) -> bool {
        self.judgement.outcome != Outcome::Undecided
    }
}

/// How far outside its window a case lies; `None` if it has no window or lies inside.
pub(crate) fn over(case: &Case) -> Option<Span> {
    let window = case.judgement.window?;
    let beyond = |span: &Span| !span.is_zero();
    let late = case.until.since(window.latest).filter(beyond);
    match case.judgement.how {
        How::Missing => late,
        _ => late.or_else(|| window.earliest.since(case.judgement.seen?).filter(beyond)),
    }
}

/// Reads the judgements of a run in order of their places.
pub(super) fn read(run: &RunData, signals: &[SignalFact], cycles: &[Cycle]) -> Vec<Case> {
    let channel = judged_channel(run);
    let on_channel: Vec<&SignalFact> = signals.iter().filter(|signal| Some(signal.channel) == channel).collect();
    let mut cases = Vec::with_capacity(run.judgements.len());
    for judgement in run.judgements.iter().copied() {
        let from = judgement.anchor.map_or(judgement.at, |anchor| anchor.latest);
        let to = judgement.seen.unwrap_or(judgement.at);
        let first = on_channel.partition_point(|signal| signal.at <= from);
        let inside = on_channel.get(first..).unwrap_or_default().iter().take_while(|signal| signal.at < to);
        let has = |sight| inside.clone().any(|signal| signal.sight == sight);
        let until = judgement.seen.unwrap_or_else(|| match judgement.window {
            Some(window) if judgement.how == How::Missing => {
                let next = cycles.partition_point(|cycle| cycle.to <= window.latest);
                cycles.get(next).map_or(judgement.at, |cycle| cycle.to.min(judgement.at))
            }
            _ => judgement.at,
        });
        let (blanked, refractory, small) = (has(Sight::Blanked), has(Sight::Refractory), has(Sight::Small));
        let place = match (judgement.seen, judgement.window) {
            (Some(seen), _) => seen,
            (None, Some(window)) if judgement.how == How::Missing => window.nominal,
            _ => judgement.at,
        };
        cases.push(Case { judgement, place, until, blanked, refractory, small });
    }
    cases.sort_by_key(|case| case.place);
    cases
}
