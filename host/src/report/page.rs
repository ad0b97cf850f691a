//! The page as a whole: head, verdict, contents, sections.

use super::facts::Facts;
use super::number::{count, rate};
use super::sign::{SYMBOLS, State, sign};
use super::text::{self, short};
use super::wording::{Headline, headline};
use super::{applies, cautions, coverage, findings, ladder, lens, manifest, overview, plots, rules, scenario, style, undecided};
use crate::run_data::{RunData, Verdict};
use maud::{DOCTYPE, Markup, PreEscaped, html};

/// A section of the page.
#[derive(Debug)]
pub(super) struct Section {
    pub(super) id: &'static str,
    /// Its name in the contents.
    pub(super) name: &'static str,
    pub(super) title: String,
    /// What stands beside or above it.
    pub(super) side: Markup,
    pub(super) body: Markup,
    /// True if it takes the whole width.
    pub(super) full: bool,
}

/// Lays out the page of a run.
pub(super) fn lay_out(run: &RunData) -> Markup {
    let facts = Facts::read(run);
    let words = headline(&facts);
    let sections = sections(&facts);
    let first = sections.first().map_or("manifest", |section| section.id);
    html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width,initial-scale=1";
                meta name="color-scheme" content="light dark";
                title { (words.word) ": " (short(&run.name, 80)) " (phase4 report)" }
                style { (PreEscaped(style::SHEET)) }
            }
            body {
                a.skip href={ "#" (first) } { "Skip to the first section" }
                (SYMBOLS)
                div.page {
                    (top(&facts))
                    main {
                        (verdict(&facts, &words))
                        nav aria-label="Contents" {
                            ol { @for section in &sections { li { a href={ "#" (section.id) } { (section.name) } } } }
                        }
                        @for section in &sections { (place(section)) }
                    }
                }
                script { (PreEscaped(style::SCRIPT)) }
            }
        }
    }
}

fn sections(facts: &Facts<'_>) -> Vec<Section> {
    let all = [
        ladder::section(facts),
        Some(overview::section(facts, vec![findings::table(facts), plots::plots(facts)])),
        rules::section(facts),
        coverage::section(facts),
        undecided::section(facts),
        Some(scenario::section(facts)),
        Some(manifest::section(facts)),
        Some(cautions::section()),
    ];
    all.into_iter().flatten().collect()
}

fn place(section: &Section) -> Markup {
    let heading = format!("{}-h", section.id);
    html! {
        section id=(section.id) aria-labelledby=(heading) class=[section.full.then_some("full")] {
            div.side {
                h2 id=(heading) { (section.title) }
                @if section.full { div { (section.side) } } @else { (section.side) }
            }
            div.body { (section.body) }
        }
    }
}

fn top(facts: &Facts<'_>) -> Markup {
    let run = facts.run;
    let device = run.device_name.as_deref().map(|name| short(name, 40));
    let programmed =
        run.program.as_ref().map(|program| format!("{} {}", program.settings().mode, rate(program.settings().lower)));
    let device: Vec<_> = device.into_iter().chain(programmed).collect();
    html! {
        header.top {
            span { b { "phase4 report" } }
            span { (short(&run.name, 80)) }
            @if !device.is_empty() { span { (device.join(", ")) } }
            @if let Some(bench) = &run.bench { span { (short(bench, 60)) } }
            span.demo { "Bench only, never on a person." }
        }
    }
}

fn verdict(facts: &Facts<'_>, words: &Headline) -> Markup {
    let is_broken = facts.run.verdict == Verdict::Broken;
    let lens = lens::lens(facts).filter(|_| facts.is_judged());
    html! {
        div class=(if lens.is_some() { "verdict" } else { "verdict alone" }) {
            div {
                h1 { span class=[is_broken.then_some("w")] { (words.word) "." } " " (words.sentence) }
                @if let Some(second) = &words.second { p.worst { (second) } }
                (tally(facts))
                @for proof in proofs(facts) { p.proof { (proof) } }
            }
            @if let Some(lens) = lens { (lens) }
        }
    }
}

fn tally(facts: &Facts<'_>) -> Markup {
    if !facts.is_judged() {
        return html! {};
    }
    let state = |state| applies::applying(facts.run).filter(|(_, score)| rules::state(score) == state).count() as u64;
    let spans = facts.cases.iter().filter(|case| !case.is_decided()).count() as u64;
    let item = |state, number: u64, one: &'static str, many: &'static str| {
        html! { li { (sign(state)) span { b { (count(number)) } " " (if number == 1 { one } else { many }) } } }
    };
    let broken = state(State::Broken);
    html! {
        ul.tally {
            @if facts.run.verdict == Verdict::Void { li { (sign(State::Void)) span { "nothing counts" } } }
            @if broken > 0 { (item(State::Broken, broken, "rule broken", "rules broken")) }
            (item(State::Holds, state(State::Holds), "rule holds", "rules hold"))
            @if state(State::Undecided) > 0 { (item(State::Undecided, state(State::Undecided), "rule undecided", "rules undecided")) }
            @if state(State::NotExercised) > 0 { (item(State::NotExercised, state(State::NotExercised), "not exercised", "not exercised")) }
            @if spans > 0 { (item(State::Undecided, spans, "case undecided", "cases undecided")) }
        }
    }
}

/// Why the verdict can be believed, and what was arranged.
fn proofs(facts: &Facts<'_>) -> Vec<String> {
    let run = facts.run;
    let mut proofs = Vec::new();
    if let Some(note) = &run.note {
        proofs.push(short(note, 400));
    }
    if let Some(fault) = &run.fault {
        proofs.push(format!("A fault was planted in the device on purpose: {}.", text::fault(fault)));
    }
    if let Some(canary) = run.canary.as_ref().filter(|canary| canary.caught) {
        let line = text::fault(&canary.line);
        let cases = super::number::counted(run.decided + run.undecided, "case", "cases");
        proofs.push(format!(
            "The judge was checked in this run: a fault planted beside it, {line}, was caught. It decided {} of {cases}.",
            count(run.decided)
        ));
    }
    proofs
}
