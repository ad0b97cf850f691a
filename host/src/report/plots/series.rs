//! The values of a plot, each with its place and its look.

use super::marks::Look;
use crate::report::facts::{Ending, Facts};
use crate::report::number::{count, ms_bare};
use phase4::audit::{Outcome, Tolerance};
use phase4::base::{Channel, Instant};
use std::collections::BTreeMap;

/// One value.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Entry {
    /// Number of its interval in the run, from 1.
    pub(super) number: usize,
    /// In µs.
    pub(super) value: f64,
    pub(super) look: Look,
}

/// Values over the numbers of their intervals.
#[derive(Debug)]
pub(super) struct Series {
    pub(super) entries: Vec<Entry>,
    /// How many intervals there are: the length of the axis.
    pub(super) length: usize,
    /// Numbers of intervals by the instant of the pulse that ended them.
    ended_at: BTreeMap<Instant, usize>,
}

impl Series {
    /// Intervals: from seen beat or pulse to the next, or from beat to beat where no device was judged.
    pub(super) fn of_intervals(facts: &Facts<'_>) -> Self {
        if !facts.is_judged() {
            return Self::of_beats(facts);
        }
        let outcomes = worst_outcomes(facts);
        let cycles: Vec<_> = facts.cycles.iter().filter(|cycle| cycle.ends != Ending::Run).collect();
        let mut ended_at = BTreeMap::new();
        let entries: Vec<Entry> = cycles
            .iter()
            .enumerate()
            .map(|(place, cycle)| {
                let number = place + 1;
                ended_at.insert(cycle.to, number);
                let look = match (cycle.ends, outcomes.get(&cycle.to)) {
                    (Ending::Pulse, Some(Outcome::Broken)) => Look::Broken,
                    (Ending::Pulse, Some(Outcome::Undecided)) => Look::Undecided,
                    (Ending::Pulse, _) => Look::Pulse,
                    _ => Look::Beat,
                };
                Entry { number, value: cycle.span().as_micros() as f64, look }
            })
            .collect();
        Self { length: entries.len(), entries, ended_at }
    }

    fn of_beats(facts: &Facts<'_>) -> Self {
        let site = facts.beat_site();
        let beats: Vec<Instant> =
            facts.heart.activations.iter().filter(|beat| Some(beat.site) == site).map(|beat| beat.at).collect();
        let spans = beats.iter().zip(beats.iter().skip(1)).map(|(from, to)| to.saturating_since(*from));
        let entries: Vec<Entry> = spans
            .enumerate()
            .map(|(place, span)| Entry { number: place + 1, value: span.as_micros() as f64, look: Look::Beat })
            .collect();
        Self { length: entries.len(), entries, ended_at: BTreeMap::new() }
    }

    /// Deviations of judged pulses, over the same numbers.
    pub(super) fn of_deviations(facts: &Facts<'_>, intervals: &Self) -> Self {
        let mut entries: Vec<Entry> = Vec::new();
        for case in &facts.cases {
            let judgement = &case.judgement;
            let (Some(seen), Some(deviation)) = (judgement.seen, judgement.deviation) else { continue };
            let Some(number) = intervals.ended_at.get(&seen) else { continue };
            let look = match judgement.outcome {
                Outcome::Held => Look::Pulse,
                Outcome::Broken => Look::Broken,
                Outcome::Undecided => Look::Undecided,
            };
            entries.push(Entry { number: *number, value: deviation.as_micros() as f64, look });
        }
        Self { entries, length: intervals.length, ended_at: BTreeMap::new() }
    }

    pub(super) fn values(&self) -> impl Iterator<Item = f64> {
        self.entries.iter().map(|entry| entry.value)
    }

    /// What the level axis counts.
    pub(super) fn numbering(&self) -> String {
        format!("interval number, 1 to {}", count(self.length as u64))
    }
}

/// The worst outcome among the judgements of each pulse.
fn worst_outcomes(facts: &Facts<'_>) -> BTreeMap<Instant, Outcome> {
    let rank = |outcome| match outcome {
        Outcome::Held => 0,
        Outcome::Undecided => 1,
        Outcome::Broken => 2,
    };
    let mut outcomes = BTreeMap::new();
    for case in &facts.cases {
        if let Some(seen) = case.judgement.seen {
            let outcome = outcomes.entry(seen).or_insert(case.judgement.outcome);
            if rank(case.judgement.outcome) > rank(*outcome) {
                *outcome = case.judgement.outcome;
            }
        }
    }
    outcomes
}

/// What is allowed around nominal, in µs: early (negative), late.
pub(super) fn tolerance(facts: &Facts<'_>) -> (f64, f64) {
    // As judged: from the first window there is, so that shares and ticks are in it.
    let window = facts.cases.iter().find_map(|case| case.judgement.window);
    let (low, high) = window.map_or((0, 0), |window| {
        let from = |instant: Instant| instant.deviation_from(window.nominal).as_micros();
        (from(window.earliest), from(window.latest))
    });
    (low as f64, high as f64)
}

/// Bands in which a pulse may end an interval, in µs.
pub(super) fn bands(facts: &Facts<'_>) -> Vec<(f64, f64)> {
    let (Some(program), Some(audit)) = (&facts.run.program, &facts.run.audit) else { return Vec::new() };
    if !facts.is_judged() || program.paces().is_none() {
        return Vec::new();
    }
    let band = |nominal: u64, tolerance: Tolerance| {
        let extra = nominal as f64 * f64::from(tolerance.share_millionths) / 1e6 + tolerance.tick.as_micros() as f64;
        (nominal as f64 - tolerance.low.as_micros() as f64 - extra, nominal as f64 + tolerance.high.as_micros() as f64 + extra)
    };
    let settings = program.settings();
    let lower = band(settings.lower.nearest().as_micros(), audit.lower);
    let hysteresis = settings.hysteresis.map(|interval| band(interval.nearest().as_micros(), audit.hysteresis));
    std::iter::once(lower).chain(hysteresis).collect()
}

/// Lines of the program across the plot of intervals, with words where they need some.
pub(super) fn guides(facts: &Facts<'_>) -> Vec<(f64, String)> {
    let Some(program) = facts.run.program.as_ref().filter(|program| facts.is_judged() && program.paces().is_some()) else {
        return Vec::new();
    };
    let settings = program.settings();
    let mut guides = vec![(settings.lower.nearest().as_micros() as f64, String::new())];
    if let Some(hysteresis) = settings.hysteresis {
        guides.push((hysteresis.nearest().as_micros() as f64, String::new()));
    }
    if program.senses().is_some_and(|channel| Channel::ALL.contains(&channel)) {
        let refractory = settings.refractory;
        guides.push((refractory.as_micros() as f64, format!("refractory ends, {}", ms_bare(refractory))));
    }
    guides
}
