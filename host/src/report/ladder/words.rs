//! What is said about the seconds that are drawn.

use super::excerpt::{Excerpt, Reason};
use super::is_failing;
use crate::report::facts::{Case, Facts};
use crate::report::findings::counted_from;
use crate::report::number::{THIN, at, count, counted, listed, ms, signed_tenth};
use crate::report::text::short;
use phase4::audit::{How, Judgement, Outcome};
use phase4::base::{Kind, Record, Span};

/// Findings told one by one; more are counted.
const TOLD: usize = 6;

/// The section's name in the contents, and its title.
pub(super) fn title(excerpt: &Excerpt) -> (&'static str, String) {
    match excerpt.reason {
        Reason::Finding(_) => ("Failing seconds", "The failing seconds".to_owned()),
        Reason::Closest => ("Seconds", "Seconds around the closest pulse".to_owned()),
        Reason::Undecided => ("Seconds", "Seconds around the first undecided case".to_owned()),
        _ => ("Seconds", "Seconds of the run".to_owned()),
    }
}

/// The excerpt in one line.
pub(super) fn summary(facts: &Facts<'_>, excerpt: &Excerpt) -> String {
    let span = span(facts, excerpt);
    match excerpt.reason {
        Reason::Finding(number) => match facts.finding(number) {
            Some(case) => {
                format!("{span}, finding {}: {} {}", count(number as u64), case.judgement.rule.code(), deed(&case.judgement))
            }
            None => span,
        },
        Reason::Step => format!("{span}: {}", acts(facts, excerpt)),
        _ => format!("Ladder diagram, {span}"),
    }
}

/// What the steps do that these seconds are drawn for.
fn acts(facts: &Facts<'_>, excerpt: &Excerpt) -> String {
    let now = facts.run.records.iter().filter(|record| record.kind == Kind::Step && Some(record.at) == excerpt.focus);
    let words = |record: &Record| {
        let step = facts.run.steps.get(usize::from(record.place))?;
        Some(format!("step {}, {}", u32::from(record.place) + 1, short(&step.act, 40)))
    };
    listed(&now.filter_map(words).take(3).collect::<Vec<_>>())
}

fn deed(judgement: &Judgement) -> String {
    match (judgement.how, judgement.deviation) {
        (How::Missing, _) => "pulse missing".to_owned(),
        (How::Unexpected, _) => "no pulse due".to_owned(),
        (_, Some(deviation)) => signed_tenth(deviation),
        (_, None) => "broken".to_owned(),
    }
}

fn span(facts: &Facts<'_>, excerpt: &Excerpt) -> String {
    let tenth = |at| {
        let micros = phase4::base::Instant::saturating_since(at, facts.run.start).as_micros();
        format!("{}.{}", count(micros / 1_000_000), micros % 1_000_000 / 100_000)
    };
    format!("{} to {}{THIN}s", tenth(excerpt.from(facts)), tenth(excerpt.to(facts)))
}

/// What stands over the drawing.
pub(super) fn side(facts: &Facts<'_>, excerpt: &Excerpt) -> String {
    let inside = findings_in(facts, excerpt);
    let with = match inside.as_slice() {
        [] => String::new(),
        [(number, _)] => format!(", with finding {}", count(*number as u64)),
        many if many.len() <= TOLD => {
            format!(", with findings {}", listed(&many.iter().map(|(number, _)| count(*number as u64)).collect::<Vec<_>>()))
        }
        many => format!(", with {} findings", count(many.len() as u64)),
    };
    let span = span(facts, excerpt);
    if facts.heart.activations.is_empty() {
        return format!(
            "{span}{with}. The log holds no causes, so the heart is not drawn: only what the bench itself sees, and what the device was programmed to do."
        );
    }
    if !facts.is_judged() {
        return format!("{span}. Read each wave from its origin: downwards through the heart, or upwards from an escape beat.");
    }
    format!(
        "{span}{with}. Read each wave from its origin: downwards through the heart, or upwards from a pulse. Beside it, what the device was programmed to do, and how far each pulse fell from its nominal instant."
    )
}

/// Findings whose pulse or missing pulse lies in the drawn seconds.
pub(super) fn findings_in<'a>(facts: &'a Facts<'_>, excerpt: &Excerpt) -> Vec<(usize, &'a Case)> {
    facts.numbered_findings().filter(|(_, case)| excerpt.frame.holds(case.place)).collect()
}

/// What the drawing tells, for whoever does not see it.
pub(super) fn desc(facts: &Facts<'_>, excerpt: &Excerpt) -> String {
    let frame = excerpt.frame;
    let beats = facts
        .beat_site()
        .map(|site| facts.heart.activations.iter().filter(|beat| beat.site == site && frame.holds(beat.at)).count());
    let pulses = facts.pulses.iter().filter(|pulse| frame.holds(pulse.at)).count() as u64;
    let mut out = format!("From {}. ", span(facts, excerpt));
    if let Some(beats) = beats {
        out.push_str(&format!("The ventricle beats {}. ", counted(beats as u64, "time", "times")));
    }
    out.push_str(&format!("{}. ", counted(pulses, "pulse", "pulses")));
    let inside = findings_in(facts, excerpt);
    for (number, case) in inside.iter().take(TOLD) {
        let judgement = &case.judgement;
        let when = at(facts.run.start, case.place);
        out.push_str(&format!("Finding {number} at {when} breaks {}: {}. ", judgement.rule.code(), deed(judgement)));
    }
    if inside.len() > TOLD {
        out.push_str(&format!("{} more findings. ", count((inside.len() - TOLD) as u64)));
    }
    if inside.is_empty() && facts.is_judged() {
        out.push_str("No rule is broken in these seconds. ");
    }
    out.push_str("The table below the drawing lists every instant.");
    out
}

/// What to make of it.
pub(super) fn caption(facts: &Facts<'_>, excerpt: &Excerpt) -> Option<String> {
    let mut parts: Vec<String> = Vec::new();
    if is_failing(excerpt) || !facts.findings.is_empty() {
        for (number, case) in findings_in(facts, excerpt).iter().take(TOLD) {
            if case.judgement.anchor.is_some() {
                parts.push(format!("Finding {} counts from {}.", count(*number as u64), counted_from(facts, &case.judgement)));
            }
        }
    }
    let guard = facts.guard();
    if guard > Span::ZERO && facts.cases.iter().any(|case| case.judgement.outcome != Outcome::Undecided) {
        parts.push(format!("The hatched edges are the bench’s own uncertainty of {}.", ms(guard)));
    }
    (!parts.is_empty()).then(|| parts.join(" "))
}
