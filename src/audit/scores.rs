//! The score of every rule, kept small.

use super::{RuleId, RuleSet, Score};
use crate::base::Deviation;

#[derive(Debug, Clone, Copy, Default)]
struct Tally {
    held: u32,
    broken: u32,
    undecided: u32,
    /// The case nearest to the limit: how far from nominal, and how far inside.
    worst: Option<(i32, i32)>,
}

/// What every rule has seen, but for those that are dropped.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Scores {
    rules: [Tally; RuleId::COUNT],
    blind: RuleSet,
}

/// A measured case: how far from nominal, and how far inside the limit; outside is negative.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Measure {
    pub(super) deviation: i32,
    pub(super) margin: i32,
}

impl Scores {
    /// From now on these rules see nothing.
    pub(super) const fn blind(&mut self, rules: RuleSet) {
        self.blind = rules;
    }

    /// True if this rule is dropped.
    pub(super) const fn is_blind(&self, rule: RuleId) -> bool {
        self.blind.has(rule)
    }

    pub(super) fn of(&self, rule: RuleId) -> Score {
        let Some(tally) = self.rules.get(usize::from(rule.number())) else { return Score::default() };
        Score {
            checked: tally.held.saturating_add(tally.broken).saturating_add(tally.undecided),
            held: tally.held,
            broken: tally.broken,
            undecided: tally.undecided,
            worst: tally.worst.map(|(deviation, _)| Deviation::from_micros(i64::from(deviation))),
            margin: tally.worst.map(|(_, margin)| Deviation::from_micros(i64::from(margin))),
        }
    }

    pub(super) fn held(&mut self, rule: RuleId, measure: Option<Measure>) {
        self.change(rule, measure, |tally| tally.held = tally.held.saturating_add(1));
    }

    pub(super) fn broken(&mut self, rule: RuleId, measure: Option<Measure>) {
        self.change(rule, measure, |tally| tally.broken = tally.broken.saturating_add(1));
    }

    pub(super) fn undecided(&mut self, rule: RuleId) {
        self.change(rule, None, |tally| tally.undecided = tally.undecided.saturating_add(1));
    }

    /// These rules held, nothing being measured.
    pub(super) fn all_held(&mut self, rules: RuleSet) {
        if !rules.is_empty() {
            rules.iter().for_each(|rule| self.held(rule, None));
        }
    }

    /// A case that was counted as held turned out otherwise.
    pub(super) fn take_back(&mut self, rule: RuleId) {
        self.change(rule, None, |tally| tally.held = tally.held.saturating_sub(1));
    }

    /// Nothing could be told about these rules.
    pub(super) fn all_undecided(&mut self, rules: RuleSet) {
        if !rules.is_empty() {
            rules.iter().for_each(|rule| self.undecided(rule));
        }
    }

    fn change(&mut self, rule: RuleId, measure: Option<Measure>, count: impl FnOnce(&mut Tally)) {
        if self.blind.has(rule) {
            return;
        }
        let Some(tally) = self.rules.get_mut(usize::from(rule.number())) else { return };
        count(tally);
        if let Some(Measure { deviation, margin }) = measure
            && tally.worst.is_none_or(|(_, least)| margin < least)
        {
            tally.worst = Some((deviation, margin));
        }
    }
}

impl Measure {
    /// A moment against a nominal one and a limit at or before which it must lie.
    pub(super) fn not_later(at: u32, nominal: u32, limit: u32) -> Self {
        Self { deviation: apart(at, nominal), margin: apart(limit, at) }
    }

    /// A moment against a nominal one and a limit at or after which it must lie.
    pub(super) fn not_earlier(at: u32, nominal: u32, limit: u32) -> Self {
        Self { deviation: apart(at, nominal), margin: apart(at, limit) }
    }
}

/// How far `a` lies after `b`.
fn apart(a: u32, b: u32) -> i32 {
    i32::try_from(i64::from(a).saturating_sub(i64::from(b))).unwrap_or(if a < b { i32::MIN } else { i32::MAX })
}
