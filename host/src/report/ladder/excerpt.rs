//! Which seconds are drawn, and at what scale.

use crate::report::facts::{Case, Facts};
use crate::run_data::Verdict;
use phase4::audit::{Outcome, RuleId};
use phase4::base::{CauseKind, Instant};

/// A run up to this long is drawn whole.
const WHOLE: f64 = 7_600_000.0;
/// Of a longer one this much, in µs.
const PART: f64 = 7_000_000.0;
/// Pixels a second at rest, and at most.
const SCALE: (f64, f64) = (170.0, 440.0);
/// The shortest drawn cycle is at least this wide.
const CYCLE: f64 = 110.0;
/// The widest frame.
const WIDEST: f64 = 1_240.0;
/// Most excerpts of a run.
const MOST: usize = 6;
/// Most excerpts of a run without findings.
const MOST_QUIET: usize = 3;
/// A frame holds at most this many records.
const MOST_RECORDS: usize = 600;
/// Room before the start and after the end of the run, in µs.
const ROOM: f64 = 150_000.0;

/// A span of the run's time, in µs from its start, and its scale.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Frame {
    pub(super) from: f64,
    pub(super) to: f64,
    /// Pixels per µs.
    scale: f64,
    start: Instant,
}

impl Frame {
    pub(super) fn width(&self) -> f64 {
        ((self.to - self.from) * self.scale).round()
    }

    /// Pixels per millisecond.
    pub(super) fn per_ms(&self) -> f64 {
        self.scale * 1_000.0
    }

    pub(super) fn time(&self, at: Instant) -> f64 {
        at.deviation_from(self.start).as_micros() as f64
    }

    pub(super) fn x(&self, at: Instant) -> f64 {
        (self.time(at) - self.from) * self.scale
    }

    /// The place of a moment in µs from the start of the run.
    pub(super) fn place(&self, micros: f64) -> f64 {
        (micros - self.from) * self.scale
    }

    pub(super) fn holds(&self, at: Instant) -> bool {
        (self.from..=self.to).contains(&self.time(at))
    }

    /// True if a span has a part in the frame.
    pub(super) fn meets(&self, from: Instant, to: Instant) -> bool {
        self.time(to) >= self.from && self.time(from) <= self.to
    }
}

/// Why these seconds are drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Reason {
    /// The finding of this number.
    Finding(usize),
    /// The first case that could not be decided.
    Undecided,
    /// The pulse that came closest to a limit.
    Closest,
    /// A step of the script acts.
    Step,
    /// A beat out of turn.
    Ectopic,
    /// Nothing stands out: the beginning.
    Beginning,
}

/// Seconds that are drawn.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Excerpt {
    pub(super) frame: Frame,
    pub(super) reason: Reason,
    /// What they are drawn for.
    pub(super) focus: Option<Instant>,
}

impl Excerpt {
    pub(super) fn from(&self, facts: &Facts<'_>) -> Instant {
        instant(facts, self.frame.from)
    }

    pub(super) fn to(&self, facts: &Facts<'_>) -> Instant {
        instant(facts, self.frame.to).min(facts.end())
    }
}

fn instant(facts: &Facts<'_>, micros: f64) -> Instant {
    Instant::from_micros(facts.run.start.as_micros().saturating_add(micros.max(0.0) as u64))
}

/// The excerpts of a run; the one that matters most comes first.
pub(super) fn choose(facts: &Facts<'_>) -> Vec<Excerpt> {
    let mut excerpts: Vec<Excerpt> = Vec::new();
    let most = if facts.findings.is_empty() { MOST_QUIET } else { MOST };
    for (reason, from, at, to) in targets(facts) {
        let shown = |excerpt: &Excerpt| {
            let edge = 300_000.0;
            excerpt.frame.time(at) - edge >= excerpt.frame.from && excerpt.frame.time(to) + edge <= excerpt.frame.to
        };
        if excerpts.len() < most && !excerpts.iter().any(shown) {
            excerpts.push(Excerpt { frame: frame(facts, reason, from, at, to), reason, focus: Some(at) });
        }
    }
    excerpts
}

/// What is to be drawn: why, and from when to when with the moment that matters between.
fn targets(facts: &Facts<'_>) -> Vec<(Reason, Instant, Instant, Instant)> {
    let case = |reason, case: &Case| {
        let from = case.judgement.anchor.map_or(case.place, |anchor| anchor.earliest);
        (reason, from, case.place, case.until)
    };
    let moment = |reason, at| (reason, at, at, at);
    let numbers = chosen_findings(facts);
    if !numbers.is_empty() {
        return numbers.into_iter().filter_map(|number| Some(case(Reason::Finding(number), facts.finding(number)?))).collect();
    }
    if facts.run.verdict == Verdict::Undecided
        && let Some(first) = facts.cases.iter().find(|case| case.judgement.outcome == Outcome::Undecided)
    {
        return vec![case(Reason::Undecided, first)];
    }
    let closest = closest(facts);
    // Where every pulse is exact, none stands out: what the script does tells more.
    let exact = |case: &Case| case.judgement.deviation.is_none_or(|deviation| deviation.size().is_zero());
    if let Some(closest) = closest.filter(|case| !exact(case)) {
        return vec![case(Reason::Closest, closest)];
    }
    let steps: Vec<_> = super::step::first_of_each(facts).into_iter().map(|at| moment(Reason::Step, at)).collect();
    if !steps.is_empty() {
        return steps;
    }
    let out_of_turn = |kind| matches!(kind, CauseKind::Focus | CauseKind::Script);
    let top = facts.top_site();
    let ectopic = facts.heart.activations.iter().find(|beat| out_of_turn(beat.cause.kind) && beat.site != top);
    let first_pulse = || closest.map(|found| case(Reason::Beginning, found));
    let ectopic = ectopic.map(|beat| moment(Reason::Ectopic, beat.at));
    vec![ectopic.or_else(first_pulse).unwrap_or(moment(Reason::Beginning, facts.run.start))]
}

/// Per broken rule the first, the worst and the last finding; the worst of all before everything else.
fn chosen_findings(facts: &Facts<'_>) -> Vec<usize> {
    let mut chosen: Vec<usize> = facts.worst_finding().into_iter().collect();
    for rule in RuleId::ALL {
        let of_rule: Vec<(usize, &Case)> = facts.numbered_findings().filter(|(_, case)| case.judgement.rule == rule).collect();
        let size = |case: &Case| crate::report::facts::over(case).map_or(0, |span| span.as_micros());
        let worst = of_rule.iter().max_by_key(|(number, case)| (size(case), std::cmp::Reverse(*number)));
        for (number, _) in of_rule.first().into_iter().chain(worst).chain(of_rule.last()) {
            if !chosen.contains(number) {
                chosen.push(*number);
            }
        }
    }
    chosen
}

/// The held case with the largest deviation; the first of equals.
fn closest<'a>(facts: &'a Facts<'_>) -> Option<&'a Case> {
    let size = |case: &&Case| case.judgement.deviation.map_or(0, |deviation| deviation.size().as_micros());
    let timed = facts.cases.iter().filter(|case| case.judgement.outcome == Outcome::Held && case.judgement.deviation.is_some());
    timed.rev().max_by_key(size)
}

fn frame(facts: &Facts<'_>, reason: Reason, from: Instant, at: Instant, to: Instant) -> Frame {
    let start = facts.run.start;
    let length = facts.run.simulated.as_micros() as f64;
    let time = |at: Instant| at.deviation_from(start).as_micros() as f64;
    if length <= WHOLE && facts.run.records.len() <= MOST_RECORDS {
        let scale = SCALE.0 / 1e6;
        return Frame { from: -ROOM, to: length + ROOM, scale, start };
    }
    // What follows a step matters, what precedes a finding.
    let before = if matches!(reason, Reason::Step) { 0.25 } else { 0.45 };
    let place = |long: f64, scale: f64| {
        let lead = (time(to) - time(from) + ROOM).min(long - ROOM).max(long * before);
        let from = (time(to).max(time(at)) - lead).min(length + ROOM - long).max(-ROOM);
        Frame { from, to: (from + long).min(length + ROOM), scale, start }
    };
    let wide = place(PART.min(length + 2.0 * ROOM), SCALE.0 / 1e6);
    let scale = shortest_cycle(facts, &wide).map_or(SCALE.0, |cycle| (CYCLE / cycle * 1e6).clamp(SCALE.0, SCALE.1)) / 1e6;
    let mut long = (wide.to - wide.from).min(WIDEST / scale);
    while records_in(facts, &place(long, scale)) > MOST_RECORDS && long > 300_000.0 {
        long *= 0.7;
    }
    place(long, scale)
}

fn shortest_cycle(facts: &Facts<'_>, frame: &Frame) -> Option<f64> {
    let cycles = facts.cycles.iter().filter(|cycle| frame.holds(cycle.from) && frame.holds(cycle.to));
    cycles.map(|cycle| cycle.span().as_micros() as f64).filter(|cycle| *cycle > 0.0).min_by(f64::total_cmp)
}

fn records_in(facts: &Facts<'_>, frame: &Frame) -> usize {
    let (from, to) = (instant(facts, frame.from), instant(facts, frame.to));
    let first = facts.run.records.partition_point(|record| record.at < from);
    facts.run.records.partition_point(|record| record.at <= to) - first
}
