//! How every other run is told: good news is quiet, and what was not looked at is said.

use crate::report::facts::{Case, Facts};
use crate::report::number::{at, count, counted, length, limit, ms_tenth};
use phase4::audit::{Hint, Judgement, Outcome};
use phase4::base::Span;

/// A sentence and the one after it.
type Words = (String, Option<String>);

pub(super) fn holds(facts: &Facts<'_>) -> Words {
    let untried = crate::report::untried(facts.run) as u64;
    let rest = match untried {
        0 => "every rule held.".to_owned(),
        1 => "every rule that was tried held; 1 was not tried.".to_owned(),
        many => format!("every rule that was tried held; {} were not tried.", count(many)),
    };
    (format!("In {} {rest}", length(facts.run.simulated)), Some(closest(facts)))
}

/// The case that came closest to a limit.
fn closest(facts: &Facts<'_>) -> String {
    let timed: Vec<&Case> =
        facts.cases.iter().filter(|case| case.judgement.outcome == Outcome::Held && case.judgement.deviation.is_some()).collect();
    let margin = |case: &&&Case| (margin(&case.judgement), case.judgement.at);
    let Some(nearest) = timed.iter().min_by_key(margin) else {
        return "No pulse was due.".to_owned();
    };
    let judgement = &nearest.judgement;
    let deviation = judgement.deviation.unwrap_or_default();
    if timed.iter().all(|case| case.judgement.deviation.is_some_and(|deviation| deviation.size().is_zero())) {
        return match timed.len() {
            1 => "The one pulse that was judged came at its nominal instant, to the microsecond.".to_owned(),
            many => {
                format!("All {} pulses that were judged came at their nominal instants, to the microsecond.", count(many as u64))
            }
        };
    }
    let (side, span) = match (judgement.window, deviation.as_micros() >= 0) {
        (Some(window), true) => ("after", window.latest.saturating_since(window.nominal)),
        (Some(window), false) => ("before", window.nominal.saturating_since(window.earliest)),
        (None, _) => ("from", Span::ZERO),
    };
    let seen = nearest.place;
    let name = facts
        .pulse_at(judgement.channel, seen)
        .map_or_else(|| "a pulse".to_owned(), |(number, _)| format!("pulse {}", count(number as u64)));
    let (when, size) = (at(facts.run.start, seen), ms_tenth(deviation.size()));
    format!(
        "The closest is {name} at {when}: {size} {side} its nominal instant, where rule {} allows {}.",
        judgement.rule.code(),
        limit(span)
    )
}

/// Signed room to the nearest limit, in µs.
fn margin(judgement: &Judgement) -> i64 {
    let (Some(window), Some(seen)) = (judgement.window, judgement.seen) else { return i64::MAX };
    window.latest.deviation_from(seen).as_micros().min(seen.deviation_from(window.earliest).as_micros())
}

pub(super) fn undecided(facts: &Facts<'_>) -> Words {
    let run = facts.run;
    let all = run.decided + run.undecided;
    let asked = u64::from(run.decide_thousandths);
    let when = length(run.simulated);
    let sentence = match run.end_reason {
        2 => format!("The run was interrupted after {when}; what was tried until then held."),
        3 => format!("The run was stopped after {when}: the device went on without time passing."),
        4 => format!("The run was stopped after {when}: more happened than the bench takes in."),
        _ if all == 0 => "Nothing could be judged.".to_owned(),
        _ if run.decided * 1_000 < asked * all => {
            let wanted = crate::report::number::ms_bare(Span::from_micros(asked * 100));
            format!("Only {} of {} cases could be decided; {wanted} per cent were asked for.", count(run.decided), count(all))
        }
        _ => "Coverage that the scenario asks for was not reached.".to_owned(),
    };
    (
        sentence,
        most_frequent_hint(facts).map(|(hint, number)| {
            format!("The most frequent reason, {}: {}", super::times(number), crate::report::undecided::why(facts, hint))
        }),
    )
}

fn most_frequent_hint(facts: &Facts<'_>) -> Option<(Hint, usize)> {
    let mut hints: Vec<Hint> =
        facts.cases.iter().filter(|case| !case.is_decided()).filter_map(|case| case.judgement.hint).collect();
    hints.sort_unstable();
    let groups = hints.chunk_by(|one, next| one == next).filter_map(|group| Some((*group.first()?, group.len())));
    groups.max_by_key(|(hint, number)| (*number, std::cmp::Reverse(*hint)))
}

pub(super) fn void(facts: &Facts<'_>) -> Words {
    match &facts.run.canary {
        Some(canary) => (
            format!("The judge missed its own planted fault (no. {}), so nothing here counts.", canary.fault),
            Some(format!("The fault was: {}.", crate::report::text::fault(&canary.line))),
        ),
        None => ("The judge could not be checked, so nothing here counts.".to_owned(), None),
    }
}

pub(super) fn unjudged(facts: &Facts<'_>) -> Words {
    let sentence = match &facts.run.program {
        Some(program) => format!("The device is set to {}, which does nothing that could be judged.", program.settings().mode),
        None => "No device was connected.".to_owned(),
    };
    let beats = facts.beat_site().map(|site| facts.heart.activations.iter().filter(|activation| activation.site == site).count());
    let told = beats.map(|beats| {
        format!("In {} the ventricle beat {}.", length(facts.run.simulated), counted(beats as u64, "time", "times"))
    });
    (sentence, told)
}
