//! Judging pulses: expected, unexpected, or on a channel that the mode does not pace.

use super::auditor::Auditor;
use super::clock::Micros;
use super::history::Event;
use super::hypothesis::Hypothesis;
use super::naming::{self, Ending};
use super::scores::Measure;
use super::signals::SENSED;
use super::{Anchor, AnchorKind, Hint, How, Judgement, Outcome, RuleId, RuleSet, Window};
use crate::base::{Channel, Deviation};

/// What the states that allow a pulse say about it together.
#[derive(Debug, Clone, Copy)]
struct Expected {
    earliest: Micros,
    latest: Micros,
    /// The one whose nominal instant is nearest.
    nearest: Hypothesis,
    nominal: Micros,
    why: Option<Hint>,
}

impl<const H: usize> Auditor<H> {
    /// Judges a pulse on the channel that paces.
    pub(super) fn judge_pulse(&mut self, at: Micros) {
        self.close_pause();
        let broken = self.envelope.pulse(at, &mut self.scores);
        self.scores.held(RuleId::En4, None);
        self.settle_before(at);
        let closed = self.close_overdue(at, broken);
        if !closed {
            match self.expected(at) {
                Some(expected) => {
                    self.judge_expected(at, &expected);
                    // Too close behind a pulse that was a finding already: the other side of that one.
                    let known = if self.after_finding { RuleSet::only(RuleId::En1) } else { RuleSet::EMPTY };
                    self.judge_envelope(at, broken.without(known));
                    self.after_finding = false;
                }
                None => {
                    self.judge_unexpected(at, broken);
                    self.after_finding = true;
                }
            }
        }
        self.owed = RuleSet::EMPTY;
        self.history.push(Event::Pulse(at));
    }

    /// A pulse on another channel, or in a mode that paces nothing.
    pub(super) fn judge_stray(&mut self, channel: Channel, at: Micros) {
        if self.scores.is_blind(RuleId::En4) {
            return;
        }
        self.close_missing(at);
        // It may be the pulse that was due, sent to the wrong place.
        if self.expected(at).is_some() {
            let sent = Hypothesis { why: Some(Hint::UnknownState), ..Hypothesis::paced(at) };
            self.states.add(sent);
            self.envelope.excuse(at);
        }
        self.scores.broken(RuleId::En4, None);
        self.counts.decided = self.counts.decided.saturating_add(1);
        let judgement = self.judgement(at, Outcome::Broken, How::Unexpected, RuleId::En4);
        self.say(Judgement { channel, seen: Some(self.clock.instant(at)), ..judgement });
    }

    /// What the states expected, if one of them allows a pulse here.
    fn expected(&self, at: Micros) -> Option<Expected> {
        let mut expected: Option<Expected> = None;
        for state in self.states.iter().filter(|state| self.windows.allows(state, at)) {
            let escape = self.windows.escape(state.kind);
            let nominal = state.middle().saturating_add(escape.nominal);
            let mine = Expected {
                earliest: state.lo.saturating_add(escape.earliest),
                latest: state.hi.saturating_add(escape.latest),
                nearest: *state,
                nominal,
                why: state.why,
            };
            expected = Some(match expected {
                None => mine,
                Some(other) => {
                    let nearest = if nominal.abs_diff(at) < other.nominal.abs_diff(at) { mine } else { other };
                    Expected {
                        earliest: mine.earliest.min(other.earliest),
                        latest: mine.latest.max(other.latest),
                        why: other.why.or(mine.why),
                        ..nearest
                    }
                }
            });
        }
        expected
    }

    fn judge_expected(&mut self, at: Micros, expected: &Expected) {
        let hint = self.doubt(at, expected);
        let late = Measure::not_later(at, expected.nominal, expected.latest);
        let early = Measure::not_earlier(at, expected.nominal, expected.earliest);
        let nearer = if late.margin < early.margin { late } else { early };
        let hysteresis = self.windows.hysteresis;
        let (rule, measured) = if hysteresis && expected.nearest.kind == AnchorKind::Sensed {
            (RuleId::Hy1, [Some((RuleId::Hy1, nearer)), None, None])
        } else {
            let after_pulse = Some((RuleId::Hy2, nearer)).filter(|_| hysteresis);
            let rule = if late.margin < early.margin { RuleId::Lr1 } else { RuleId::Lr2 };
            (rule, [Some((RuleId::Lr1, late)), Some((RuleId::Lr2, early)), after_pulse])
        };
        let measured = measured.into_iter().flatten();
        let outcome = if hint.is_none() {
            self.counts.decided = self.counts.decided.saturating_add(1);
            measured.for_each(|(rule, measure)| self.scores.held(rule, Some(measure)));
            self.scores.held(RuleId::Cm1, None);
            self.scores.all_held(self.owed);
            Outcome::Held
        } else {
            self.counts.undecided = self.counts.undecided.saturating_add(1);
            measured.for_each(|(rule, _)| self.scores.undecided(rule));
            self.scores.all_undecided(self.owed);
            Outcome::Undecided
        };
        let judgement = self.judgement(at, outcome, How::OnTime, rule);
        let judgement = Judgement { hint, ..self.with_window(judgement, &expected.nearest) };
        self.say(self.with_pulse(judgement, at, expected.nominal));
        self.states.only(Hypothesis::paced(at));
    }

    /// Why the timing of an expected pulse is undecided, if it is: the states that allow it leave more room than one window has, or it
    /// lies within the uncertainty of a limit.
    fn doubt(&self, at: Micros, expected: &Expected) -> Option<Hint> {
        let windows = &self.windows;
        let kind = expected.nearest.kind;
        let spread = match kind {
            AnchorKind::Sensed => windows.detect.hi.saturating_sub(windows.detect.lo),
            AnchorKind::Paced | AnchorKind::Start => 0,
        };
        let room = expected.latest.saturating_sub(expected.earliest);
        let from_limit = at.saturating_sub(expected.earliest).min(expected.latest.saturating_sub(at));
        if room > windows.escape(kind).width().saturating_add(spread) {
            Some(expected.why.unwrap_or(Hint::UnknownState))
        } else if from_limit < windows.guard {
            Some(Hint::WithinUncertainty)
        } else {
            None
        }
    }

    /// A pulse that no state allows.
    fn judge_unexpected(&mut self, at: Micros, broken: RuleSet) {
        let (rule, also) = naming::name(&self.whole, &self.history, Ending::Pulse(at), false, &self.scores);
        let nearest = self.states.iter().copied().min_by_key(|state| self.nominal_of(state).abs_diff(at));
        let how = if rule == RuleId::Cm1 { How::Unexpected } else { How::Early };
        if SENSED.contains(&rule) {
            self.scores.take_back(rule);
        }
        let mut judgement = self.judgement(at, Outcome::Broken, how, rule);
        judgement.seen = Some(self.clock.instant(at));
        let mut measure = None;
        if let Some(state) = nearest {
            let nominal = self.nominal_of(&state);
            judgement = self.with_pulse(self.with_window(judgement, &state), at, nominal);
            measure = Some(Measure::not_earlier(at, nominal, state.lo.saturating_add(self.windows.escape(state.kind).earliest)));
        }
        self.scores.broken(rule, measure.filter(|_| matches!(rule, RuleId::Lr2 | RuleId::Hy1)));
        self.counts.decided = self.counts.decided.saturating_add(1);
        self.say(Judgement { also: also.and(broken), ..judgement });
        // Either the device restarted with this pulse, or it was an extra one and the timers run on.
        if self.states.add(Hypothesis { why: Some(Hint::UnknownState), ..Hypothesis::paced(at) }) {
            self.counts.loosened = self.counts.loosened.saturating_add(1);
        }
    }

    /// A pulse that the program allows and the envelope does not.
    fn judge_envelope(&mut self, at: Micros, broken: RuleSet) {
        let Some(rule) = broken.iter().next() else { return };
        let judgement = self.judgement(at, Outcome::Broken, How::Early, rule);
        self.say(Judgement { seen: Some(self.clock.instant(at)), also: broken.without(RuleSet::only(rule)), ..judgement });
    }

    pub(super) const fn nominal_of(&self, state: &Hypothesis) -> Micros {
        state.middle().saturating_add(self.windows.escape(state.kind).nominal)
    }

    /// A judgement about the channel that paces, with nothing else in it yet.
    pub(super) fn judgement(&self, at: Micros, outcome: Outcome, how: How, rule: RuleId) -> Judgement {
        Judgement {
            at: self.clock.instant(at),
            channel: self.paces.unwrap_or(Channel::Ventricular),
            outcome,
            how,
            rule,
            also: RuleSet::EMPTY,
            anchor: None,
            window: None,
            seen: None,
            deviation: None,
            hint: None,
        }
    }

    /// The same with the anchor and the window of this state.
    pub(super) fn with_window(&self, judgement: Judgement, state: &Hypothesis) -> Judgement {
        let escape = self.windows.escape(state.kind);
        let instant = |at: Micros| self.clock.instant(at);
        Judgement {
            anchor: Some(Anchor { earliest: instant(state.lo), latest: instant(state.hi), kind: state.kind }),
            window: Some(Window {
                earliest: instant(state.lo.saturating_add(escape.earliest)),
                nominal: instant(self.nominal_of(state)),
                latest: instant(state.hi.saturating_add(escape.latest)),
            }),
            ..judgement
        }
    }

    /// The same with this pulse and its distance from the nominal instant.
    fn with_pulse(&self, judgement: Judgement, at: Micros, nominal: Micros) -> Judgement {
        let deviation = Deviation::from_micros(i64::from(at).saturating_sub(i64::from(nominal)));
        Judgement { seen: Some(self.clock.instant(at)), deviation: Some(deviation), ..judgement }
    }
}
