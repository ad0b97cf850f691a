//! The scenario file as it was given.

use super::facts::Facts;
use super::number::count;
use super::page::Section;
use super::text::{clean, short};
use crate::run_data::StepText;
use maud::{Markup, html};

/// Lines beyond this one are counted and left out.
const MOST_LINES: usize = 400;
/// Bytes beyond these are left out as well.
const MOST_BYTES: usize = 40_000;

pub(super) fn section(facts: &Facts<'_>) -> Section {
    let side = html! {
        p { "The file as given." }
        @if !facts.run.steps.is_empty() { p { "Only the grey step numbers are added here." } }
    };
    Section { id: "scenario", name: "Scenario", title: "Scenario".to_owned(), side, body: body(facts), full: false }
}

fn body(facts: &Facts<'_>) -> Markup {
    let mut lines = Vec::new();
    let mut bytes = 0;
    let all: Vec<&str> = facts.run.scenario_text.lines().collect();
    for (place, text) in all.iter().enumerate().take(MOST_LINES) {
        let text = if text.len() > 1_000 { short(text, 300) } else { clean(text) };
        bytes += text.len() + 40;
        if bytes > MOST_BYTES {
            break;
        }
        lines.push(line(facts, &all, place + 1, &text));
    }
    let rest = all.len() - lines.len();
    html! {
        pre.scn { @for line in lines { (line) } }
        @if rest > 0 { p.cap { "and " (count(rest as u64)) " more lines in the file" } }
    }
}

fn line(facts: &Facts<'_>, all: &[&str], number: usize, text: &str) -> Markup {
    // A step is known by the line of its first key; the number belongs to the heading above it, where there is one.
    let heads = |step: &StepText| {
        let heading = step.line.checked_sub(2).and_then(|above| all.get(above)).is_some_and(|above| above.trim() == "[[step]]");
        step.line - usize::from(heading) == number
    };
    let step = facts.run.steps.iter().position(heads).map(|place| place + 1);
    let comment = text.find('#').filter(|_| text.trim_start().starts_with('#'));
    html! {
        span id=[step.map(|step| format!("step{step}"))] {
            @if text.is_empty() { "\u{200b}" } @else if comment.is_some() { i { (text) } } @else { (text) }
            @if let Some(step) = step { " " i { "# " (step) } }
        }
    }
}
