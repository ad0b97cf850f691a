//! What could not be decided, why, and what would decide it.

use super::facts::{Case, Facts, sensitivity_band};
use super::number::{at, count, ms, peak};
use super::page::Section;
use maud::{Markup, html};
use phase4::audit::{Hint, RuleId};

/// Instants named in one row; the rest are counted.
const NAMED: usize = 4;

/// The section, if anything was left undecided.
pub(super) fn section(facts: &Facts<'_>) -> Option<Section> {
    let groups = groups(facts);
    if groups.is_empty() || !facts.is_judged() {
        return None;
    }
    let side = html! { p { "Neither good nor bad: the evidence did not reach. Each has a way out." } };
    let body = html! {
        table.stack role="table" {
            thead role="rowgroup" { tr role="row" {
                @for head in ["when", "rule", "why it could not be decided", "what would decide it"] { th role="columnheader" scope="col" { (head) } }
            } }
            tbody role="rowgroup" { @for group in &groups { (row(facts, group)) } }
        }
    };
    Some(Section { id: "undecided", name: "Undecided", title: "Undecided".to_owned(), side, body, full: false })
}

/// Cases of one rule that could not be decided for one reason.
struct Group<'a> {
    rule: RuleId,
    hint: Option<Hint>,
    cases: Vec<&'a Case>,
}

/// In order of their first instants.
fn groups<'a>(facts: &'a Facts<'_>) -> Vec<Group<'a>> {
    let mut groups: Vec<Group<'a>> = Vec::new();
    for case in facts.cases.iter().filter(|case| !case.is_decided()) {
        let (rule, hint) = (case.judgement.rule, case.judgement.hint);
        match groups.iter_mut().find(|group| (group.rule, group.hint) == (rule, hint)) {
            Some(group) => group.cases.push(case),
            None => groups.push(Group { rule, hint, cases: vec![case] }),
        }
    }
    groups
}

fn row(facts: &Facts<'_>, group: &Group<'_>) -> Markup {
    let mut when: Vec<String> = group.cases.iter().take(NAMED).map(|case| at(facts.run.start, case.judgement.at)).collect();
    let rest = group.cases.len().saturating_sub(NAMED);
    if rest > 0 {
        when.push(format!("{} more", count(rest as u64)));
    }
    html! {
        tr role="row" {
            th.rid.when role="rowheader" scope="row" { (super::number::listed(&when)) }
            td role="cell" data-l="rule" { (group.rule.code()) }
            td.line.why role="cell" { (group.hint.map_or_else(|| "The evidence did not reach.".to_owned(), |hint| why(facts, hint))) }
            td.line.why role="cell" { (group.hint.map_or("", way_out)) }
        }
    }
}

/// What would decide it: one act.
const fn way_out(hint: Hint) -> &'static str {
    match hint {
        Hint::NearThreshold => "To test sensing, show a peak outside the band.",
        Hint::AtEdge => "Move the signal away from the edge, or declare a smaller tolerance.",
        Hint::Straddles => "Declare how a straddling signal is read, or shorten the signal.",
        Hint::NearTie => "Move the signal away from the end of the interval, or declare the reading of a tie.",
        Hint::WithinUncertainty => "Measure with a smaller uncertainty, or declare the simple decision rule.",
        Hint::UnknownState => "Let the record begin with the device’s start; after a finding, a pulse later all is known again.",
        Hint::Loosened => "Give the device fewer ambiguous signals in a row.",
        Hint::EndOfRun => "Let the run last an interval longer.",
        _ => "",
    }
}

/// Why, in one sentence.
pub(super) fn why(facts: &Facts<'_>, hint: Hint) -> String {
    let band = facts.run.program.as_ref().map(|program| sensitivity_band(facts.run, program));
    match (hint, band) {
        (Hint::NearThreshold, Some((low, high))) => format!(
            "The signal lies between what must not be seen ({}) and what must be seen ({}). Whatever the device does is right.",
            peak(u32::try_from(low).unwrap_or(u32::MAX)),
            peak(u32::try_from(high).unwrap_or(u32::MAX))
        ),
        (Hint::NearThreshold, None) => "The signal lies between what must not and what must be seen.".to_owned(),
        (Hint::AtEdge, _) => "The signal lies at a window’s edge, within tolerance and uncertainty.".to_owned(),
        (Hint::Straddles, _) => "The signal began inside blanking and lasted beyond it.".to_owned(),
        (Hint::NearTie, _) => "The signal lies so near the end of the interval that either may have come first.".to_owned(),
        (Hint::WithinUncertainty, _) => {
            format!("The pulse lies nearer to its limit than the bench can measure (U = {}).", ms(facts.guard()))
        }
        (Hint::UnknownState, _) => {
            "What the device had seen was not known: the record began mid-cycle, or a finding came just before.".to_owned()
        }
        (Hint::Loosened, _) => "There were more explanations at once than the judge keeps apart; some were merged.".to_owned(),
        (Hint::EndOfRun, _) => "The run ended before it was settled.".to_owned(),
        _ => "The evidence did not reach.".to_owned(),
    }
}
