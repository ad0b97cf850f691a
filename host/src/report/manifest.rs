//! Enough to get the same page again.

use super::facts::Facts;
use super::number::{THIN, count, length, ms, peak, rate};
use super::page::Section;
use super::text::{self, short};
use crate::run_data::Canary;
use maud::{Markup, html};
use phase4::audit::{AuditSettings, Decision, Tolerance};
use phase4::base::{Edge, Program, Straddle, Tie};

pub(super) fn section(facts: &Facts<'_>) -> Section {
    let run = facts.run;
    let side = html! { p { "Enough to get the same page again." } };
    let body = html! {
        dl {
            (row("Verdict", &format!("{}, exit code {}", run.verdict.word(), run.verdict.exit_code())))
            (row("phase4", &format!("{}, rule set {}", run.version, run.rule_set)))
            (row("Scenario", &short(&run.scenario_file, 300)))
            (row("Seed", &run.seed.to_string()))
            dt { "Log" }
            dd { (count(run.records.len() as u64)) " records, running hash " span.code { (format!("{:016x}", run.hash)) } }
            (row("Length", &format!("{}, ended because {}", length(run.simulated), end_reason(run.end_reason))))
            @if let Some(program) = &run.program { (row("Device", &device(facts, program))) }
            @if let Some(fault) = &run.fault { (row("Fault planted in it", &short(fault, 200))) }
            @if let Some(audit) = &run.audit {
                (row("Tolerances", &tolerances(audit)))
                (row("Decision", &decision(audit)))
            }
            @if let Some(canary) = &run.canary {
                (row("Planted check fault", &check_fault(canary)))
            }
            (row("Wall clock", "not recorded, so that the same run gives the same page"))
            dt { "Run again" }
            dd { code.cmd { (text::clean(&run.command)) } }
        }
    };
    Section { id: "manifest", name: "Manifest", title: "Manifest".to_owned(), side, body, full: false }
}

fn row(name: &str, words: &str) -> Markup {
    html! { dt { (name) } dd { (words) } }
}

fn check_fault(canary: &Canary) -> String {
    let rules = canary.rules.iter().map(|rule| rule.code()).collect::<Vec<_>>().join(" ");
    let fate = match (canary.caught, rules.is_empty()) {
        (true, false) => format!("caught in its own short run by {rules}"),
        (true, true) => "caught in its own short run".to_owned(),
        (false, _) => "missed".to_owned(),
    };
    format!("no. {}, {}; {fate}", canary.fault, text::fault(&canary.line))
}

const fn end_reason(reason: u32) -> &'static str {
    match reason {
        0 => "its length was reached",
        1 => "a step ended it",
        2 => "it was interrupted",
        3 => "the device went on without time passing",
        _ => "more happened than the bench takes in",
    }
}

fn device(facts: &Facts<'_>, program: &Program) -> String {
    let settings = program.settings();
    let hysteresis = settings.hysteresis.map_or_else(|| "off".to_owned(), rate);
    let readings = [
        match settings.edge {
            Edge::Outside => "an event at a window’s end lies outside",
            Edge::Inside => "an event at a window’s end lies inside",
        },
        match settings.tie {
            Tie::SenseFirst => "a sense goes before an expiry in the same tick",
            Tie::ExpiryFirst => "an expiry goes before a sense in the same tick",
        },
        match settings.straddle {
            Straddle::Onset => "a signal’s onset decides whether blanking hides it",
            Straddle::End => "what outlasts blanking is seen",
        },
    ];
    format!(
        "{}: {} at {}, hysteresis {hysteresis}, refractory {}, blanking {}, sensitivity {}, pulse {}{THIN}V × {}; {}",
        facts.device(),
        settings.mode,
        rate(settings.lower),
        ms(settings.refractory),
        ms(settings.blanking),
        peak(settings.sensitivity.0),
        super::number::ms_bare(phase4::base::Span::from_micros(u64::from(settings.amplitude.0))),
        ms(settings.width),
        readings.join("; ")
    )
}

fn tolerances(audit: &AuditSettings) -> String {
    let named = [
        ("lower rate interval", audit.lower),
        ("hysteresis", audit.hysteresis),
        ("refractory", audit.refractory),
        ("blanking", audit.blanking),
    ];
    let sensitivity = audit.sensitivity_thousandths;
    let timers = if named.iter().all(|(_, tolerance)| *tolerance == audit.lower) {
        format!("every timer {}", tolerance(audit.lower))
    } else {
        named.map(|(name, each)| format!("{name} {}", tolerance(each))).join(", ")
    };
    format!("{timers}; sensitivity ±{}.{} per cent", sensitivity / 10, sensitivity % 10)
}

/// A tolerance as it is set: `±8 ms`, `−1 to +8 ms`.
pub(super) fn tolerance(tolerance: Tolerance) -> String {
    let mut words = if tolerance.low == tolerance.high {
        format!("±{}", ms(tolerance.low))
    } else {
        format!("\u{2212}{} to +{}", super::number::ms_bare(tolerance.low), ms(tolerance.high))
    };
    if tolerance.share_millionths > 0 {
        words.push_str(&format!(" and {} millionths of it", count(u64::from(tolerance.share_millionths))));
    }
    if !tolerance.tick.is_zero() {
        words.push_str(&format!(" and a tick of {}", ms(tolerance.tick)));
    }
    words
}

fn decision(audit: &AuditSettings) -> String {
    let uncertainty = ms(audit.uncertainty);
    match audit.decision {
        Decision::Simple => format!("simple: holds inside the limits, broken outside them; uncertainty {uncertainty}"),
        Decision::Guarded => format!(
            "guarded: holds inside limits shrunk by {uncertainty}, broken outside limits widened by {uncertainty}, undecided between"
        ),
    }
}
