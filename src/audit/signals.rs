//! Judging signals: what each did to every state, and whether that could be told.

use super::auditor::{Auditor, Waiting};
use super::clock::Micros;
use super::history::Origin;
use super::hypothesis::Hypothesis;
use super::{Hint, How, Judgement, Outcome, RuleId, RuleSet, naming};

/// What a must-see signal in the alert window proves at once; taken back if a pulse shows otherwise.
pub(super) const SENSED: [RuleId; 3] = [RuleId::In1, RuleId::Se1, RuleId::Rf2];

impl<const H: usize> Auditor<H> {
    /// Settles the signal that waits longest, at this moment: a state that would have paced by now is there no more unless the
    /// signal was sensed. One that is settled before its time, for want of room, may have changed nothing, whatever it is.
    pub(super) fn settle_first(&mut self, at: Micros, before_its_time: bool) {
        if let Some(waiting) = self.signals.pop_front() {
            self.settle_signal(waiting, at, before_its_time);
        }
    }

    /// Settles this signal, none waiting before it.
    pub(super) fn settle_signal(&mut self, waiting: Waiting, at: Micros, before_its_time: bool) {
        let Waiting { signal, tied } = waiting;
        if self.states.is_empty() {
            // A pulse is overdue and everything it could have told is past: from here the device may be in any state.
            naming::begin(&mut self.states, &self.windows, Origin::Unknown(signal.at));
        }
        if let Some(state) = self.states.single().filter(|_| !before_its_time)
            && let Some(sensed) = self.windows.plain_sense(&state, &signal)
        {
            self.states.only(sensed);
            self.withhold(&sensed, Some(state));
            return;
        }
        let next = self.signals.front().map(|waiting| waiting.signal.at.saturating_add(self.windows.detect.lo));
        let mut alone: Option<Hypothesis> = None;
        let mut count = 0_u32;
        let mut sensed: Option<Hypothesis> = None;
        let mut stays: Option<Option<Hint>> = None;
        let mut why = None;
        let mut in_alert = true;
        let windows = &self.windows;
        let detected = signal.at.saturating_add(windows.detect.lo);
        // Past its expiry a state lives on only if the next signal may have come before it.
        let lives = |state: &Hypothesis| {
            let over = windows.expires(state).saturating_add(windows.uncertainty);
            before_its_time || over >= at || next.is_some_and(|next| next <= over)
        };
        self.states.retain(|state| {
            count = count.saturating_add(1);
            alone = Some(*state);
            let mut fate = windows.fate(state, &signal, None);
            fate.stays |= before_its_time;
            in_alert &= detected >= windows.refractory_of(state).1;
            if let Some(new) = fate.sensed() {
                sensed = Some(match sensed {
                    // All of them are the same signal's sense: their hull is as wide as the spread of the detection at most.
                    Some(other) => Hypothesis { lo: other.lo.min(new.lo), hi: other.hi.max(new.hi), ..other },
                    None => new,
                });
                why = why.or(fate.why);
            }
            if fate.stays && lives(state) {
                stays = Some(stays.flatten().or(state.why));
            }
            fate.stays
        });
        // If none is left, it is for silence to say so.
        if sensed.is_some() || stays.is_some() {
            self.states.retain(lives);
        }
        let alone = alone.filter(|_| count == 1);
        match (sensed, stays) {
            (Some(sensed), None) => {
                self.states.only(Hypothesis { why: None, ..sensed });
                self.withhold(&sensed, alone);
            }
            (Some(sensed), Some(other)) => {
                let hint =
                    if before_its_time { Hint::Loosened } else { why.or(sensed.why).or(other).unwrap_or(Hint::UnknownState) };
                if self.states.add(Hypothesis { why: Some(hint), ..sensed }) {
                    self.counts.loosened = self.counts.loosened.saturating_add(1);
                }
                self.cannot_tell(&sensed, alone, hint);
            }
            (None, Some(_)) if tied => {
                let at = Hypothesis { lo: detected, hi: detected, ..Hypothesis::paced(detected) };
                self.cannot_tell(&at, None, Hint::NearTie);
            }
            (None, Some(_)) => {
                if !self.windows.may_see(signal.peak) {
                    if in_alert {
                        self.owed = self.owed.with(RuleId::Se2);
                    }
                } else if !self.windows.may_miss(signal.peak) {
                    self.owed = self.owed.with(RuleId::Rf1);
                }
            }
            (None, None) => {}
        }
    }

    /// Settles the signals whose sense must have come before this pulse, and lets those whose sense may have come before it act as
    /// far as they did.
    pub(super) fn settle_before(&mut self, pulse: Micros) {
        while let Some(front) = self.signals.front().copied() {
            let windows = &self.windows;
            let reached = front.signal.at.saturating_add(windows.detect.lo) <= pulse.saturating_add(windows.uncertainty);
            if !reached || self.states.iter().any(|state| windows.fate(state, &front.signal, Some(pulse)).later) {
                break;
            }
            self.settle_first(pulse, false);
        }
        for waiting in &mut self.signals {
            waiting.tied |= self.states.show(&self.windows, &waiting.signal, Some(pulse));
        }
    }

    /// A beat came first: the window it ended was rightly left without a pulse.
    fn withhold(&mut self, sensed: &Hypothesis, before: Option<Hypothesis>) {
        for rule in SENSED {
            self.scores.held(rule, None);
        }
        // Whether an earlier signal had moved the window cannot be seen any more.
        self.owed = RuleSet::EMPTY;
        self.counts.decided = self.counts.decided.saturating_add(1);
        let judgement = self.judgement(sensed.hi, Outcome::Held, How::Withheld, RuleId::In1);
        self.say(match before {
            Some(state) => self.with_window(judgement, &state),
            None => judgement,
        });
    }

    /// Whether the signal ended the window cannot be told; the window is given if there was one only.
    fn cannot_tell(&mut self, at: &Hypothesis, before: Option<Hypothesis>, hint: Hint) {
        let rule = match hint {
            Hint::NearThreshold => RuleId::Se1,
            Hint::AtEdge | Hint::Straddles => RuleId::Rf2,
            _ => RuleId::In1,
        };
        self.scores.undecided(rule);
        self.counts.undecided = self.counts.undecided.saturating_add(1);
        let judgement = self.judgement(at.hi, Outcome::Undecided, How::Withheld, rule);
        let judgement = before.map_or(judgement, |state| self.with_window(judgement, &state));
        self.say(Judgement { hint: Some(hint), ..judgement });
    }
}
