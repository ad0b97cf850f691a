//! Judging silence: a pulse that is overdue, a pause that is too long, a device that does not let time pass.

use super::auditor::Auditor;
use super::clock::Micros;
use super::history::Origin;
use super::hypothesis::Hypothesis;
use super::naming::{self, Ending};
use super::scores::Measure;
use super::{Anchor, Hint, How, Judgement, Outcome, RuleId, RuleSet, Window};
use crate::base::{Deviation, Instant, Span};

/// A finding that is open: a pulse is overdue and what became of it is not known yet. It counts in instants, since it may stay
/// open for long.
#[derive(Debug, Clone, Copy)]
pub(super) struct Overdue {
    pub(super) anchor: Anchor,
    pub(super) window: Window,
    /// Envelope rules broken by the same silence.
    also: RuleSet,
}

impl<const H: usize> Auditor<H> {
    /// No state is left that would not have paced by now.
    pub(super) fn judge_silence(&mut self, at: Micros) {
        // A signal on its way to its sense may have come first: silence then tells that it was sensed. One that no state can have
        // sensed excuses nothing.
        let first = self.signals.front().map(|waiting| waiting.signal.at.saturating_add(self.windows.detect.lo));
        if first.is_some_and(|first| first < at) {
            self.settle_first(at, false);
            return;
        }
        if self.overdue.is_some() {
            // No second finding while one is open; the next signal or pulse begins anew.
            self.states.clear();
            return;
        }
        let Some(last) = self.states.iter().copied().max_by_key(|state| self.windows.expires(state)) else { return };
        let found = self.with_window(self.judgement(at, Outcome::Broken, How::Missing, RuleId::Lr1), &last);
        if let (Some(anchor), Some(window)) = (found.anchor, found.window) {
            let also = if self.pause.take().is_some() { RuleSet::only(RuleId::En2) } else { RuleSet::EMPTY };
            self.overdue = Some(Overdue { anchor, window, also });
        }
        naming::begin(&mut self.states, &self.windows, Origin::Unknown(at));
    }

    /// The present pause has become longer than declared. It is a finding of its own only if no pulse becomes overdue in it.
    pub(super) fn judge_pause(&mut self) {
        let limit = self.envelope.pause_limit();
        self.envelope.pause_reported();
        self.scores.broken(RuleId::En2, None);
        match &mut self.overdue {
            Some(overdue) => overdue.also = overdue.also.with(RuleId::En2),
            None => self.pause = Some(self.clock.instant(limit)),
        }
    }

    /// The pause is over and no pulse was overdue in it.
    pub(super) fn close_pause(&mut self) {
        let Some(limit) = self.pause.take() else { return };
        self.counts.decided = self.counts.decided.saturating_add(1);
        let judgement = self.judgement(self.clock.offset(limit), Outcome::Broken, How::Missing, RuleId::En2);
        self.say(Judgement { at: limit, ..judgement });
    }

    /// A pulse came while one was overdue. True if it was that one, late, or the next of a series with one left out.
    pub(super) fn close_overdue(&mut self, at: Micros, broken: RuleSet) -> bool {
        let Some(overdue) = self.overdue else { return false };
        // The device was followed again since then, and this pulse is in its place: the overdue one never came.
        let followed = self.states.iter().any(|state| state.why != Some(Hint::UnknownState) && self.windows.allows(state, at));
        if followed {
            self.close_missing(at);
            return false;
        }
        let seen = self.clock.instant(at);
        let next = |from: Instant, escape: Micros| from.saturating_add(Span::from_micros(u64::from(escape)));
        let escape = self.windows.paced;
        let one_later =
            next(overdue.window.earliest, escape.earliest) <= seen && seen <= next(overdue.window.latest, escape.latest);
        self.overdue = None;
        let (rule, also) = naming::name(&self.whole, &self.history, Ending::Pulse(at), one_later, &self.scores);
        let deviation = seen.deviation_from(overdue.window.nominal);
        let mut judgement = self.overdue_judgement(&overdue, at, rule, also.and(broken));
        if !one_later {
            judgement = Judgement { how: How::Late, seen: Some(seen), deviation: Some(deviation), ..judgement };
        }
        let margin = overdue.window.latest.deviation_from(seen);
        let measure = Measure { deviation: clamp(deviation), margin: clamp(margin) };
        self.scores.broken(rule, Some(measure).filter(|_| matches!(rule, RuleId::Lr1 | RuleId::Hy1 | RuleId::Hy2)));
        self.say(judgement);
        self.states.only(Hypothesis::paced(at));
        true
    }

    /// Closes an open finding with the answer that the pulse never came.
    pub(super) fn close_missing(&mut self, at: Micros) {
        let Some(overdue) = self.overdue.take() else { return };
        let past = self.clock.offset(overdue.window.latest).saturating_add(self.windows.guard).saturating_add(1);
        let (rule, also) = naming::name(&self.whole, &self.history, Ending::Silence(past), true, &self.scores);
        self.scores.broken(rule, None);
        let judgement = self.overdue_judgement(&overdue, at, rule, also);
        self.say(judgement);
    }

    /// Closes an open finding because nothing can come any more.
    pub(super) fn close_at_end(&mut self, at: Micros) {
        let Some(overdue) = self.overdue.take() else { return };
        let (rule, also) = naming::name(&self.whole, &self.history, Ending::Silence(at), true, &self.scores);
        self.scores.broken(rule, None);
        let judgement = self.overdue_judgement(&overdue, at, rule, also);
        self.say(Judgement { hint: Some(Hint::EndOfRun), ..judgement });
    }

    pub(super) fn report_spinning(&mut self, at: Micros) {
        self.scores.broken(RuleId::En6, None);
        self.counts.decided = self.counts.decided.saturating_add(1);
        self.say(self.judgement(at, Outcome::Broken, How::Unexpected, RuleId::En6));
    }

    fn overdue_judgement(&mut self, overdue: &Overdue, at: Micros, rule: RuleId, also: RuleSet) -> Judgement {
        self.counts.decided = self.counts.decided.saturating_add(1);
        let judgement = self.judgement(at, Outcome::Broken, How::Missing, rule);
        Judgement { anchor: Some(overdue.anchor), window: Some(overdue.window), also: also.and(overdue.also), ..judgement }
    }
}

fn clamp(deviation: Deviation) -> i32 {
    let micros = deviation.as_micros();
    i32::try_from(micros).unwrap_or(if micros < 0 { i32::MIN } else { i32::MAX })
}
