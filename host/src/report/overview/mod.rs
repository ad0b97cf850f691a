//! The whole run on one strip: beats up, pulses down, findings, undecided places, steps.

mod pins;
mod strip;

use super::facts::Facts;
use super::number::{count, length};
use super::page::Section;
use maud::{Markup, PreEscaped, html};

/// The width for which marks are thinned and pins merged: that of the strip on a common screen.
const WIDTH: f64 = 980.0;
/// The same on a narrow one.
const NARROW: f64 = 340.0;

/// The section; what follows the strip in it is given.
pub(super) fn section(facts: &Facts<'_>, below: Vec<Markup>) -> Section {
    let side = html! {
        p {
            "Upper ticks: beats the heart made itself. "
            @if !facts.pulses.is_empty() { "Lower ticks: pulses. " }
            @if facts.cases.iter().any(|case| !case.is_decided()) { "Hatched: undecided. " }
            "Grey: the seconds drawn above."
            @if !facts.findings.is_empty() { " Numbers are findings." }
        }
        @if facts.is_judged() {
            p { "In the plots each interval stands over its place in the run, and the histogram shares its scale." }
        }
    };
    let body = html! {
        (strip(facts))
        @for part in below { (part) }
    };
    Section { id: "run", name: "Whole run", title: "The whole run".to_owned(), side, body, full: false }
}

fn strip(facts: &Facts<'_>) -> Markup {
    let own = strip::own_beats(facts);
    let desc = format!(
        "{} beats of the heart’s own and {} pulses in {}; {} findings.",
        count(own.len() as u64),
        count(facts.pulses.len() as u64),
        length(facts.run.simulated),
        count(facts.findings.len() as u64)
    );
    let svg = strip::draw(facts, &own);
    // A pin near an end stands where the ends of the axis have their words: those then stand lower.
    let at_an_end = facts.numbered_findings().any(|(_, case)| !(0.05..0.92).contains(&share(facts, case.place)));
    let foot = if at_an_end { "84px" } else { "68px" };
    html! {
        div.strip {
            div.box {
                svg viewBox="0 0 9800 62" preserveAspectRatio="none" role="img" aria-labelledby="ovt ovd" {
                    title #ovt { "The whole run" }
                    desc #ovd { (desc) }
                    (PreEscaped(svg.as_str()))
                }
                @for (left, width) in strip::undecided(facts) { span.und style={ "left:" (left) "%;width:" (width) "%" } {} }
                (pins::pins(facts, WIDTH, "broad"))
                (pins::pins(facts, NARROW, "slim"))
                span.at style={ "left:0;top:" (foot) } { "0" (super::number::THIN) "s" }
                span.at.r style={ "left:100%;top:" (foot) } { (length(facts.run.simulated)) }
                @for (left, words) in strip::step_labels(facts) { span.at.c.opt style={ "left:" (left) "%;top:-18px" } { (words) } }
            }
        }
    }
}

/// Where an instant lies, as a share of the run.
fn share(facts: &Facts<'_>, at: phase4::base::Instant) -> f64 {
    let length = facts.run.simulated.as_micros().max(1) as f64;
    (at.saturating_since(facts.run.start).as_micros() as f64 / length).min(1.0)
}
