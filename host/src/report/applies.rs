//! Which rules a program can exercise at all.

use crate::run_data::RunData;
use phase4::audit::{RuleId, Score};
use phase4::base::Channel;

/// `None` if the rule can be tried under this run's program and settings; otherwise why it does not apply.
pub(super) fn why_not(rule: RuleId, run: &RunData) -> Option<&'static str> {
    let Some(program) = &run.program else { return Some("no device was connected") };
    let senses = program.senses().is_some();
    let paces_ventricle = program.paces() == Some(Channel::Ventricular);
    let vulnerable = run.audit.is_some_and(|audit| audit.limits.vulnerable.is_some());
    match rule {
        _ if program.paces().is_none() => Some("the mode paces nothing"),
        RuleId::Hy1 | RuleId::Hy2 if program.settings().hysteresis.is_none() => Some("hysteresis is off"),
        RuleId::Hy1 | RuleId::In1 | RuleId::Rf1 | RuleId::Rf2 | RuleId::Se1 | RuleId::Se2 if !senses => {
            Some("the mode senses nothing")
        }
        RuleId::En3 if !(senses && paces_ventricle && vulnerable) => Some("no vulnerable window is declared for this mode"),
        _ => None,
    }
}

/// Rules that were tried, or could have been, with their scores in the order of the rule set.
pub(super) fn applying(run: &RunData) -> impl Iterator<Item = (RuleId, Score)> {
    run.scores.iter().copied().filter(|(rule, score)| score.checked > 0 || why_not(*rule, run).is_none())
}

/// Rules that neither were tried nor could have been.
pub(super) fn beside(run: &RunData) -> impl Iterator<Item = RuleId> {
    run.scores.iter().filter(|(rule, score)| score.checked == 0 && why_not(*rule, run).is_some()).map(|(rule, _)| *rule)
}
