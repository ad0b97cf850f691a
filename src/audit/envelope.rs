//! The envelope rules: a few declared limits, no hypotheses.

use super::clock::{FOREVER, Micros, short};
use super::scores::{Measure, Scores};
use super::windows::Windows;
use super::{AuditSettings, RuleId, RuleSet};
use crate::base::Program;

/// What the envelope rules remember.
#[derive(Debug, Clone, Copy)]
pub(super) struct Envelope {
    ceiling: Micros,
    /// The longest span without a pulse or a signal that may have been seen.
    pause: Micros,
    vulnerable: Option<(Micros, Micros)>,
    guard: Micros,
    /// A signal no further before a pulse than this may not have been sensed yet.
    fresh: Micros,
    /// How long after anything that may have started it some blind window may still run.
    blinds: Micros,
    last_pulse: Option<Micros>,
    /// The last pulse or signal that may have been seen.
    heard: Micros,
    /// The present pause was reported.
    reported: bool,
    blind_until: Micros,
    /// The latest two signals that any device must have sensed.
    sensed: [Option<Micros>; 2],
}

impl Envelope {
    /// At the start of a device, which counts as a pulse, or, joining one that runs already, before the first pulse is known.
    pub(super) fn new(program: &Program, settings: &AuditSettings, windows: &Windows, start: Micros, joins: bool) -> Self {
        let limits = &settings.limits;
        let sense = windows.latest_sense();
        let derived = windows.paced.latest.max(windows.sensed.latest).saturating_add(sense);
        let shortest = windows.paced.earliest.min(windows.sensed.earliest);
        let blinds = windows.refractory.hi.max(windows.blanking.hi).saturating_add(sense).saturating_add(windows.uncertainty);
        Self {
            ceiling: short(limits.ceiling).min(windows.paced.earliest),
            pause: limits.longest_pause.map_or(derived, short),
            vulnerable: match (program.senses(), limits.vulnerable) {
                (Some(_), Some((from, to))) => Some((short(from), short(to).min(shortest.saturating_sub(1)))),
                _ => None,
            },
            guard: windows.guard,
            fresh: windows.detect.hi.saturating_add(windows.uncertainty),
            blinds,
            last_pulse: if joins { None } else { Some(start) },
            heard: start,
            reported: false,
            blind_until: start.saturating_add(blinds),
            sensed: [None; 2],
        }
    }

    /// When the present pause becomes too long, if that was not said yet.
    pub(super) const fn pause_ends(&self) -> Option<Micros> {
        if self.reported {
            return None;
        }
        let end = self.heard.saturating_add(self.pause).saturating_add(self.guard);
        if end == FOREVER { None } else { Some(end.saturating_add(1)) }
    }

    /// The last instant of the longest pause accepted.
    pub(super) const fn pause_limit(&self) -> Micros {
        self.heard.saturating_add(self.pause)
    }

    pub(super) const fn pause_reported(&mut self) {
        self.reported = true;
    }

    /// A signal on the channel that paces.
    pub(super) fn signal(&mut self, at: Micros, peak: u32, windows: &Windows, scores: &mut Scores) {
        if !windows.may_see(peak) {
            return;
        }
        self.hear(at, scores);
        if at >= self.blind_until && !windows.may_miss(peak) {
            self.sensed = [Some(at), self.sensed[0]];
        }
        self.blind_until = at.saturating_add(self.blinds);
    }

    /// A pulse on the channel that paces; the answer is what it breaks.
    pub(super) fn pulse(&mut self, at: Micros, scores: &mut Scores) -> RuleSet {
        let mut broken = RuleSet::EMPTY;
        let mut judge = |rule: RuleId, case: Case| match case {
            Case::Held(measure) => scores.held(rule, measure),
            Case::Undecided => scores.undecided(rule),
            Case::Broken(measure) => {
                scores.broken(rule, measure);
                broken = if scores.is_blind(rule) { broken } else { broken.with(rule) };
            }
        };
        if let Some(last) = self.last_pulse {
            judge(RuleId::En1, self.after_ceiling(at, last.saturating_add(self.ceiling)));
        }
        if let Some((from, to)) = self.vulnerable {
            // So close before a pulse it may not have been sensed, nor need it ever be: the pulse's blanking may have come first.
            let fresh = self.fresh;
            self.sensed = self.sensed.map(|onset| onset.filter(|onset| at.saturating_sub(*onset) > fresh));
            let spans = self.sensed.iter().flatten().map(|onset| at.saturating_sub(*onset));
            if let Some(case) = spans.map(|span| self.outside(span, from, to)).max_by_key(|case| case.rank()) {
                judge(RuleId::En3, case);
            }
        }
        self.hear(at, scores);
        self.last_pulse = Some(at);
        self.blind_until = at.saturating_add(self.blinds);
        broken
    }

    /// Something took the place of the pulse that was due: no second finding for the pause that it leaves.
    pub(super) const fn excuse(&mut self, at: Micros) {
        self.heard = at;
    }

    fn hear(&mut self, at: Micros, scores: &mut Scores) {
        if !self.reported {
            scores.held(RuleId::En2, Some(Measure::not_later(at, at, self.pause_limit())));
        }
        self.heard = at;
        self.reported = false;
    }

    fn after_ceiling(&self, at: Micros, limit: Micros) -> Case {
        let measure = Measure::not_earlier(at, limit, limit);
        if at >= limit.saturating_add(self.guard) {
            Case::Held(Some(measure))
        } else if at.saturating_add(self.guard) < limit {
            Case::Broken(Some(measure))
        } else {
            Case::Undecided
        }
    }

    const fn outside(&self, span: Micros, from: Micros, to: Micros) -> Case {
        if span.saturating_add(self.guard) < from || span > to.saturating_add(self.guard) {
            Case::Held(None)
        } else if span >= from.saturating_add(self.guard) && span.saturating_add(self.guard) <= to {
            Case::Broken(None)
        } else {
            Case::Undecided
        }
    }

    pub(super) fn shift(&mut self, by: Micros) {
        let moved = |at: Micros| at.saturating_sub(by);
        self.last_pulse = self.last_pulse.map(moved);
        self.heard = moved(self.heard);
        self.blind_until = moved(self.blind_until);
        self.sensed = self.sensed.map(|at| at.map(moved));
    }
}

/// One case of an envelope rule.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Case {
    Held(Option<Measure>),
    Undecided,
    Broken(Option<Measure>),
}

impl Case {
    const fn rank(self) -> u8 {
        match self {
            Self::Held(_) => 0,
            Self::Undecided => 1,
            Self::Broken(_) => 2,
        }
    }
}
