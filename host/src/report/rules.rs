//! The rule table: every rule, what was tried of it, and how near its worst case came.

use super::applies::{applying, beside, why_not};
use super::facts::{Case, Facts, Since};
use super::number::{count, ms, ms_bare, peak, signed_tenth};
use super::page::Section;
use super::sign::{Bar, State, bar, sign_and_word};
use super::text::capital;
use crate::run_data::RunData;
use maud::{Markup, html};
use phase4::audit::{Decision, How, Outcome, RuleId, Score, Tolerance};
use phase4::base::{Deviation, Span};

/// How a rule stands.
pub(super) const fn state(score: &Score) -> State {
    match score {
        Score { checked: 0, .. } => State::NotExercised,
        Score { broken: 1.., .. } => State::Broken,
        Score { held: 1.., .. } => State::Holds,
        _ => State::Undecided,
    }
}

pub(super) fn section(facts: &Facts<'_>) -> Option<Section> {
    if !facts.is_judged() || facts.run.scores.is_empty() {
        return None;
    }
    let side = html! {
        p { "The window is drawn at one width for every rule; the mark shows how near the worst case came. A negative margin lies outside. Smallest margins first." }
        p { "A rule nobody tried is written " em { "not exercised" } ", never " em { "holds" } "." }
    };
    Some(Section { id: "rules", name: "Rules", title: "Rules".to_owned(), side, body: body(facts), full: false })
}

fn body(facts: &Facts<'_>) -> Markup {
    let heads = ["checked", "held", "broken", "undecided", "worst margin"];
    let (untried, tried): (Vec<_>, Vec<_>) = in_order(facts.run).into_iter().partition(|(_, score)| score.checked == 0);
    let beside: Vec<_> = beside(facts.run).map(RuleId::code).collect();
    html! {
        table.stack.rules role="table" {
            caption.vh { "Rules" }
            thead role="rowgroup" { tr role="row" {
                @for head in ["rule", "in plain words", "result"] { th role="columnheader" scope="col" { (head) } }
                @for head in heads { th.n role="columnheader" scope="col" { (head) } }
            } }
            tbody role="rowgroup" {
                @for (rule, score) in tried { (tried_row(facts, rule, &score)) }
                @for (rule, _) in untried { (untried_row(facts, rule)) }
            }
        }
        @if !beside.is_empty() {
            p.beside { "Do not apply to this program (" (beside.len()) "): " (beside.join(", ")) "." }
        }
    }
}

/// Broken, undecided, held with the smallest margin first, not exercised.
fn in_order(run: &RunData) -> Vec<(RuleId, Score)> {
    let mut rules: Vec<_> = applying(run).collect();
    let rank = |score: &Score| match state(score) {
        State::Broken => 0,
        State::Undecided => 1,
        State::Holds => 2,
        _ => 3,
    };
    // Margins are compared relative to their limits, in millionths.
    let margin = |rule: RuleId, score: &Score| {
        let limit = limit(rule, run).map_or(1_000_000, |limit| limit.span.as_micros().max(1));
        score.margin.map_or(i128::MAX, |margin| i128::from(margin.as_micros()) * 1_000_000 / i128::from(limit))
    };
    rules.sort_by_key(|(rule, score)| (rank(score), margin(*rule, score), *rule));
    rules
}

fn tried_row(facts: &Facts<'_>, rule: RuleId, score: &Score) -> Markup {
    let state = state(score);
    let number = |value: u32| html! { @if value == 0 { span.zero { "0" } } @else { (count(u64::from(value))) } };
    let counts = [("checked", score.checked), ("held", score.held), ("broken", score.broken), ("undecided", score.undecided)];
    html! {
        tr role="row" id={ "r-" (rule.code()) } class=[(state == State::Broken).then_some("bad")] {
            th.rid role="rowheader" scope="row" { (rule.code()) }
            td.line role="cell" {
                (capital(rule.line())) "."
                @if let Some(value) = value(rule, facts.run) { " " (value) "." }
                @if let Some(shared) = shared(facts, rule) { br; span.why { (shared) } }
            }
            td.st role="cell" { (sign_and_word(state)) }
            @for (name, value) in counts { td.n role="cell" data-l=(name) { (number(value)) } }
            td.n.mcell role="cell" data-l="worst margin" { (margin_cell(facts.run, rule, score, state)) }
        }
    }
}

fn margin_cell(run: &RunData, rule: RuleId, score: &Score, state: State) -> Markup {
    let drawn = score.margin.and_then(|margin| Some((margin, shape(limit(rule, run)?, score.worst, margin))));
    html! {
        span.mg {
            @match (drawn, score.margin) {
                (Some((margin, shape)), _) => { span { (signed_tenth(margin)) } (bar(shape, state)) },
                (None, Some(margin)) => { span { (signed_tenth(margin)) } span.mbar {} },
                (None, None) => { span.zero { "yes or no" } span.mbar {} },
            }
        }
    }
}

fn untried_row(facts: &Facts<'_>, rule: RuleId) -> Markup {
    html! {
        tr.off role="row" {
            th.rid role="rowheader" scope="row" { (rule.code()) }
            td.line role="cell" { (capital(rule.line())) "." }
            td.st role="cell" { (sign_and_word(State::NotExercised)) }
            td.line role="cell" colspan="5" { (why_untried(rule, facts.run)) }
        }
    }
}

/// Why a rule that applies was never tried, in one sentence.
fn why_untried(rule: RuleId, run: &RunData) -> String {
    if let Some(reason) = why_not(rule, run) {
        return format!("{}.", capital(reason));
    }
    let sentence = match rule {
        RuleId::Rf1 => "No signal fell into blanking or refractory.",
        RuleId::Rf2 => "No signal that must be seen came first after refractory.",
        RuleId::Se1 | RuleId::In1 => "No signal that must be seen came in the alert window.",
        RuleId::Se2 => "No signal was small enough.",
        RuleId::Hy1 => "No interval began with a seen beat.",
        RuleId::Hy2 | RuleId::Lr1 | RuleId::Lr2 | RuleId::Cm1 if run.judgements.iter().any(|case| case.how != How::Withheld) => {
            "Every pulse that was judged came under another rule."
        }
        RuleId::Hy2 | RuleId::Lr1 | RuleId::Lr2 | RuleId::Cm1 => "No pulse was due.",
        RuleId::En1 => "No two pulses followed one another.",
        RuleId::En4 => "No pulse left.",
        RuleId::En3 => "No pulse came near a signal that must be seen.",
        _ => "This run gave no occasion.",
    };
    sentence.to_owned()
}

/// What a rule's broken cases share: how often it held after each sort of anchor.
fn shared(facts: &Facts<'_>, rule: RuleId) -> Option<String> {
    let broken = |case: &&Case| case.judgement.outcome == Outcome::Broken && case.judgement.rule == rule;
    let broken: Vec<&Case> = facts.cases.iter().filter(broken).collect();
    if broken.is_empty() {
        return None;
    }
    let held: Vec<&Case> =
        facts.cases.iter().filter(|case| case.judgement.outcome == Outcome::Held && case.is_of_a_pulse()).collect();
    let special = super::wording::shared_cause(&broken, &held);
    // Where pulse and start together are the cause, each of them alone says nothing more.
    let anchors: &[Since] =
        if special == Some(Since::Unsensed) { &[Since::Sensed] } else { &[Since::Sensed, Since::Paced, Since::Start] };
    let sorts = special.into_iter().chain(anchors.iter().copied().filter(|since| Some(*since) != special));
    let parts: Vec<String> = sorts
        .filter_map(|since| {
            let of = |cases: &[&Case]| cases.iter().filter(|case| since.is_of(case)).count() as u64;
            let (broken, held) = (of(&broken), of(&held));
            (broken + held > 0).then(|| format!("{}: {} of {} held.", since.short(), count(held), count(broken + held)))
        })
        .collect();
    (!parts.is_empty()).then(|| parts.join(" "))
}

/// What a margin is measured against.
#[derive(Debug, Clone, Copy)]
struct Limit {
    side: Side,
    /// The limit itself, for one-sided rules; half the window, for two-sided ones.
    span: Span,
}

#[derive(Debug, Clone, Copy)]
enum Side {
    /// Both ends, with what is allowed early and late.
    Both(Span, Span),
    Latest,
    Earliest,
}

fn limit(rule: RuleId, run: &RunData) -> Option<Limit> {
    let (audit, program) = (run.audit?, run.program?);
    let settings = program.settings();
    let window = |tolerance: Tolerance, nominal: Span| {
        let share = nominal.as_micros().saturating_mul(u64::from(tolerance.share_millionths)) / 1_000_000;
        let extra = Span::from_micros(share).saturating_add(tolerance.tick);
        let (low, high) = (tolerance.low.saturating_add(extra), tolerance.high.saturating_add(extra));
        let half = Span::from_micros((low.as_micros() + high.as_micros()) / 2);
        Limit { side: Side::Both(low, high), span: half }
    };
    match rule {
        RuleId::Lr1 | RuleId::Lr2 | RuleId::Hy2 | RuleId::Cm1 => Some(window(audit.lower, settings.lower.nearest())),
        RuleId::Hy1 => Some(window(audit.hysteresis, program.escape_after_sense().nearest())),
        RuleId::En1 => Some(Limit { side: Side::Earliest, span: audit.limits.ceiling }),
        RuleId::En2 => {
            let derived =
                || program.escape_after_sense().nearest().max(settings.lower.nearest()).saturating_add(audit.lower.high);
            Some(Limit { side: Side::Latest, span: audit.limits.longest_pause.unwrap_or_else(derived) })
        }
        RuleId::En3 => audit.limits.vulnerable.map(|(_, to)| Limit { side: Side::Earliest, span: to }),
        RuleId::Rf1 => Some(Limit { side: Side::Latest, span: settings.refractory }),
        RuleId::Rf2 => Some(Limit { side: Side::Earliest, span: settings.refractory }),
        _ => None,
    }
}

fn shape(limit: Limit, worst: Option<Deviation>, margin: Deviation) -> Bar {
    let share = margin.as_micros() as f64 / limit.span.as_micros().max(1) as f64;
    match limit.side {
        Side::Both(low, high) => {
            let half = limit.span.as_micros().max(1) as f64;
            let middle = (high.as_micros() as f64 - low.as_micros() as f64) / 2.0;
            let seen = worst.map_or(half - margin.as_micros() as f64 + middle, |worst| worst.as_micros() as f64);
            Bar::TwoSided((seen - middle) / half)
        }
        Side::Latest => Bar::Latest(share),
        Side::Earliest => Bar::Earliest(share),
    }
}

/// The rule's figures under this program, in a few words.
fn value(rule: RuleId, run: &RunData) -> Option<String> {
    let (audit, program) = (run.audit?, run.program?);
    let settings = program.settings();
    let (low, high) = super::facts::sensitivity_band(run, &program);
    let volts = |value: u64| peak(u32::try_from(value).unwrap_or(u32::MAX));
    let guard = match audit.decision {
        Decision::Guarded => format!(", uncertainty {}", ms(audit.uncertainty)),
        Decision::Simple => String::new(),
    };
    let timer = |interval: Span, tolerance| format!("Here {} {}{guard}", ms(interval), super::manifest::tolerance(tolerance));
    match rule {
        RuleId::Lr1 | RuleId::Lr2 | RuleId::Hy2 => Some(timer(settings.lower.nearest(), audit.lower)),
        RuleId::Hy1 => Some(timer(program.escape_after_sense().nearest(), audit.hysteresis)),
        RuleId::En1 => Some(format!("Here {}", ms(audit.limits.ceiling))),
        RuleId::En2 => audit.limits.longest_pause.map(|pause| format!("Here {}", ms(pause))),
        RuleId::En3 => audit.limits.vulnerable.map(|(from, to)| format!("Here {} to {}", ms_bare(from), ms(to))),
        RuleId::Rf1 | RuleId::Rf2 => Some(format!("Here {}", ms(settings.refractory))),
        RuleId::Se1 => Some(format!("Here {}", volts(high))),
        RuleId::Se2 => Some(format!("Here {}", volts(low))),
        _ => None,
    }
}
