//! How a broken run is told.

use super::{range, times};
use crate::report::facts::{Case, Facts, Since, over};
use crate::report::number::{at, counted, limit, listed, ms_tenth, signed_tenth};
use phase4::audit::{How, Outcome, RuleId};
use phase4::base::{Deviation, Span};

/// The sentence, and the one after it.
pub(super) fn say(facts: &Facts<'_>) -> (String, Option<String>) {
    let broken: Vec<&Case> = facts.numbered_findings().map(|(_, case)| case).collect();
    let held: Vec<&Case> = facts.cases.iter().filter(|case| is_held_pulse(case)).collect();
    let cause = shared_cause(&broken, &held);
    let everywhere = held.is_empty();
    let sentence = match deed(&broken) {
        Some(deed) if cause.is_some() || everywhere => {
            let device = facts.device();
            let number = broken.len();
            let count = format!("{} out of {number}", times(number));
            match cause {
                Some(cause) => format!("{}, {device} {deed}, {count}.", cause.words()),
                None => format!("{device} {deed}, {count}."),
            }
        }
        _ => by_rules(facts, &broken),
    };
    (sentence, second(facts, &held))
}

/// What every broken case follows and no held one does. With nothing held there is nothing to tell them apart by.
pub(in crate::report) fn shared_cause(broken: &[&Case], held: &[&Case]) -> Option<Since> {
    let shared = |since: &Since| broken.iter().all(|case| since.is_of(case)) && !held.iter().any(|case| since.is_of(case));
    if broken.is_empty() || held.is_empty() { None } else { Since::ALL.into_iter().find(shared) }
}

fn is_held_pulse(case: &Case) -> bool {
    case.judgement.outcome == Outcome::Held && case.is_of_a_pulse()
}

/// What the device does, where all broken cases are of one kind, or on one side.
fn deed(broken: &[&Case]) -> Option<String> {
    let all = |kinds: &[How]| !broken.is_empty() && broken.iter().all(|case| kinds.contains(&case.judgement.how));
    let sized = |way| {
        let sizes = broken.iter().filter(|case| case.judgement.how != How::Missing).map(|case| case.judgement.deviation);
        let sizes = sizes.map(|deviation| deviation.map(Deviation::size)).collect::<Option<Vec<_>>>()?;
        Some(format!("paces {} {way}", range(sizes.into_iter())?))
    };
    if all(&[How::Late]) {
        sized("late")
    } else if all(&[How::Early]) {
        sized("early")
    } else if all(&[How::Missing]) {
        Some("leaves out a pulse that is due".to_owned())
    } else if all(&[How::Unexpected]) {
        Some("paces where no pulse is due".to_owned())
    } else if all(&[How::Late, How::Missing]) {
        sized("late or not at all")
    } else if all(&[How::Early, How::Unexpected]) {
        Some("paces before a pulse is due".to_owned())
    } else {
        None
    }
}

/// The sentence that names rules: where broken cases share nothing that held ones lack.
fn by_rules(facts: &Facts<'_>, broken: &[&Case]) -> String {
    let device = facts.device();
    let up_to = broken.iter().filter_map(|case| over(case)).max();
    let size = up_to.map_or_else(String::new, |span| format!(", by up to {}", ms_tenth(span)));
    let rules = broken_rules(facts, broken);
    match rules.as_slice() {
        [] => format!("{device} broke a rule."),
        [(rule, number)] => {
            let score = facts.run.scores.iter().find(|(other, _)| other == rule).map(|(_, score)| *score).unwrap_or_default();
            let decided = u64::from(score.held) + u64::from(score.broken);
            let out_of = if decided >= *number as u64 {
                format!(" out of {}", crate::report::number::count(decided))
            } else {
                String::new()
            };
            format!("{device} broke {} {}{out_of}{size}.", rule.code(), times(*number))
        }
        [_, _] | [_, _, _] => {
            let each: Vec<_> = rules.iter().map(|(rule, number)| format!("{} {}", rule.code(), times(*number))).collect();
            format!("{device} broke {}{size}.", listed(&each))
        }
        _ => format!("{device} broke {}, {}{size}.", counted(rules.len() as u64, "rule", "rules"), times(broken.len())),
    }
}

/// Broken rules, the most often broken first.
fn broken_rules(facts: &Facts<'_>, broken: &[&Case]) -> Vec<(RuleId, usize)> {
    let count = |rule: RuleId| broken.iter().filter(|case| case.judgement.rule == rule).count();
    let mut rules: Vec<_> = RuleId::ALL.into_iter().map(|rule| (rule, count(rule))).filter(|(_, number)| *number > 0).collect();
    if rules.is_empty() {
        rules = facts
            .run
            .scores
            .iter()
            .filter(|(_, score)| score.broken > 0)
            .map(|(rule, score)| (*rule, score.broken as usize))
            .collect();
    }
    rules.sort_by_key(|(_, number)| std::cmp::Reverse(*number));
    rules
}

fn second(facts: &Facts<'_>, held: &[&Case]) -> Option<String> {
    let worst = facts.finding(facts.worst_finding()?)?;
    let alone = facts.findings.len() == 1;
    let first = tell_worst(facts, worst, if alone { "It is" } else { "The worst is" });
    Some(match kept_time(held) {
        Some(kept) => format!("{first} {kept}"),
        None => first,
    })
}

fn tell_worst(facts: &Facts<'_>, case: &Case, opening: &str) -> String {
    let judgement = &case.judgement;
    let start = facts.run.start;
    let rule = judgement.rule.code();
    let pulse = judgement.seen.and_then(|seen| facts.pulse_at(judgement.channel, seen));
    let name = pulse
        .map_or_else(|| "the pulse".to_owned(), |(number, _)| format!("pulse {}", crate::report::number::count(number as u64)));
    let timed = judgement.deviation.filter(|_| judgement.how != How::Unexpected);
    match (judgement.seen, timed, judgement.window) {
        (Some(seen), Some(deviation), Some(window)) => {
            let late = deviation.as_micros() >= 0;
            let (side, span) = if late {
                ("after", window.latest.saturating_since(window.nominal))
            } else {
                ("before", window.nominal.saturating_since(window.earliest))
            };
            let size = ms_tenth(deviation.size());
            format!(
                "{opening} {name} at {}: {size} {side} its nominal instant, where rule {rule} allows {}.",
                at(start, seen),
                limit(span)
            )
        }
        (Some(seen), ..) => format!("{opening} {name} at {}, where no pulse was due: rule {rule}.", at(start, seen)),
        (None, _, Some(window)) => {
            let (due, until) = (at(start, window.nominal), at(start, case.until));
            format!("{opening} the pulse due at {due}: none came by {until}. Rule {rule}.")
        }
        (None, ..) => format!("{opening} at {}: rule {rule}.", at(start, judgement.at)),
    }
}

/// Where the device kept time, if it did anywhere.
fn kept_time(held: &[&Case]) -> Option<String> {
    let deviations: Vec<Deviation> = held.iter().filter_map(|case| case.judgement.deviation).collect();
    let (least, most) = (deviations.iter().min()?, deviations.iter().max()?);
    let common = [Since::Sensed, Since::Paced].into_iter().find(|since| held.iter().all(|case| since.is_of(case)));
    let place = common.map_or_else(String::new, |since| format!("{} ", since.words()));
    let subject = if place.is_empty() { "In the other cases it" } else { "the device" };
    let cases = counted(deviations.len() as u64, "decided case", "decided cases");
    let how_well = if least.size().max(most.size()) == Span::ZERO {
        "to the microsecond".to_owned()
    } else {
        format!("{} to {}", signed_tenth(*least), signed_tenth(*most))
    };
    Some(format!("{place}{subject} kept time, {how_well} in {cases}."))
}
