//! The findings, one row each.

use super::facts::{Case, Facts};
use super::number::{at, count, counted, signed_exact};
use super::sign::{Bar, State, bar};
use maud::{Markup, html};
use phase4::audit::{AnchorKind, How, Judgement};

/// More findings than this are counted and left to the log.
const MOST: usize = 50;

/// The table, if there is anything in it.
pub(super) fn table(facts: &Facts<'_>) -> Markup {
    let all = facts.findings.len();
    if all == 0 {
        return html! {};
    }
    let worst = facts.worst_finding();
    let shown = rows(facts);
    let left = all - shown.len();
    html! {
        table.stack.list role="table" {
            caption { (caption(facts)) }
            thead role="rowgroup" { tr role="row" {
                th role="columnheader" scope="col" { "no." }
                th.n role="columnheader" scope="col" { "at" }
                th role="columnheader" scope="col" { "rule" }
                th.n role="columnheader" scope="col" { "pulse" }
                th role="columnheader" scope="col" { "counted from" }
                th.n role="columnheader" scope="col" { "deviation" }
                th role="columnheader" scope="col" { "against its window" }
            } }
            tbody role="rowgroup" {
                @for number in shown { @if let Some(case) = facts.finding(number) { (row(facts, number, case, worst)) } }
            }
        }
        @if left > 0 { p.cap { "and " (count(left as u64)) " more in the log" } }
    }
}

/// Numbers of the findings that have a row.
pub(super) fn rows(facts: &Facts<'_>) -> Vec<usize> {
    shown(facts.findings.len(), facts.worst_finding())
}

/// Numbers of the findings that get a row: all, or the first ones with the worst and the last among them.
fn shown(all: usize, worst: Option<usize>) -> Vec<usize> {
    let mut numbers: Vec<usize> = (1..=all.min(MOST)).collect();
    if all > MOST {
        numbers.truncate(MOST - 2);
        numbers.extend(worst.into_iter().chain([all]));
        numbers.sort_unstable();
        numbers.dedup();
    }
    numbers
}

fn caption(facts: &Facts<'_>) -> String {
    let all = facts.findings.len() as u64;
    let first = facts.finding(1).map(|case| case.judgement.rule);
    let one_rule = first.filter(|rule| facts.numbered_findings().all(|(_, case)| case.judgement.rule == *rule));
    match one_rule {
        Some(rule) if all == 1 => format!("The one finding. It breaks {}.", rule.code()),
        Some(rule) => format!("The {} findings. All break {}.", count(all), rule.code()),
        None => format!("{}.", counted(all, "finding", "findings")),
    }
}

fn row(facts: &Facts<'_>, number: usize, case: &Case, worst: Option<usize>) -> Markup {
    let judgement = &case.judgement;
    let start = facts.run.start;
    let pulse = judgement.seen.and_then(|seen| facts.pulse_at(judgement.channel, seen)).map(|(number, _)| number as u64);
    let mark = match number {
        _ if Some(number) == worst && facts.findings.len() > 1 => " worst",
        _ if number == facts.findings.len() && number > MOST => " last",
        _ => "",
    };
    html! {
        tr role="row" id={ "F" (number) } {
            th.rid role="rowheader" scope="row" { (count(number as u64)) span.zero { (mark) } }
            td.n role="cell" data-l="at" { (at(start, case.place)) }
            td role="cell" {
                a href={ "#r-" (judgement.rule.code()) } { (judgement.rule.code()) }
                @for also in judgement.also.iter() { " or " (also.code()) }
            }
            td.n role="cell" data-l="pulse" { @match pulse { Some(pulse) => (count(pulse)), None => span.zero { "none" } } }
            td role="cell" data-l="since" { (counted_from(facts, judgement)) }
            td.n role="cell" data-l="dev." { (deviation(judgement)) }
            td.mcell role="cell" { @if let Some(place) = place(judgement) { (bar(Bar::TwoSided(place), State::Broken)) } }
        }
    }
}

fn deviation(judgement: &Judgement) -> String {
    match (judgement.deviation, judgement.how) {
        (Some(deviation), _) => signed_exact(deviation),
        (None, How::Missing) => "missing".to_owned(),
        (None, How::Unexpected) => "not due".to_owned(),
        (None, _) => String::new(),
    }
}

/// Where the pulse lies, in half widths of its window from the middle.
fn place(judgement: &Judgement) -> Option<f64> {
    let (window, seen) = (judgement.window?, judgement.seen?);
    let [earliest, latest, seen] = [window.earliest, window.latest, seen].map(|instant| instant.as_micros() as f64);
    let half = ((latest - earliest) / 2.0).max(1.0);
    Some((seen - (earliest + latest) / 2.0) / half)
}

/// What the window counts from, in words.
pub(super) fn counted_from(facts: &Facts<'_>, judgement: &Judgement) -> String {
    let Some(anchor) = judgement.anchor else { return "not known".to_owned() };
    let when = at(facts.run.start, anchor.earliest);
    match anchor.kind {
        AnchorKind::Start => "the start of the run".to_owned(),
        AnchorKind::Sensed => format!("a beat seen {when}"),
        AnchorKind::Paced => match facts.pulse_at(judgement.channel, anchor.earliest) {
            Some((number, _)) => format!("pulse {} at {when}", count(number as u64)),
            None => format!("a pulse at {when}"),
        },
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn few_findings_are_all_shown_and_many_keep_first_worst_and_last() {
        assert_eq!(shown(3, Some(2)), [1, 2, 3]);
        assert_eq!(shown(50, Some(50)).len(), 50);
        let many = shown(262, Some(100));
        assert_eq!((many.len(), many.first(), many.get(48), many.last()), (50, Some(&1), Some(&100), Some(&262)));
        assert_eq!(shown(262, Some(7)).len(), 49, "the worst is among the first already");
    }
}
