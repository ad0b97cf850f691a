//! What drawings and sentences need to know of a run, read once from its records and judgements.

mod case;
mod cycle;
mod pulse;
mod signal;

pub(super) use case::{Case, Since, over};
pub(super) use cycle::{Cycle, Ending};
pub(super) use pulse::{Answer, PulseFact, reason_word};
pub(super) use signal::{Sight, SignalFact};

use super::waves::HeartStory;
use crate::run_data::{RunData, Verdict};
use phase4::audit::{Decision, Outcome};
use phase4::base::{Channel, Instant, Kind, Program, Record, Span};

/// A run and what was read from it.
#[derive(Debug)]
pub(super) struct Facts<'a> {
    pub(super) run: &'a RunData,
    /// Waves and activations.
    pub(super) heart: HeartStory,
    /// Pulses in order; the number of one is its place, from 1.
    pub(super) pulses: Vec<PulseFact>,
    /// Signals in order, on both channels.
    pub(super) signals: Vec<SignalFact>,
    /// Cycles of the judged channel, as the program divides its time.
    pub(super) cycles: Vec<Cycle>,
    /// Judgements with what lies in their interval.
    pub(super) cases: Vec<Case>,
    /// Places of the broken ones among the cases; the number of a finding is its place here, from 1.
    pub(super) findings: Vec<usize>,
}

impl<'a> Facts<'a> {
    pub(super) fn read(run: &'a RunData) -> Self {
        let signals = signal::read(run);
        let pulses = pulse::read(run);
        let cycles = cycle::read(run, &signals, &pulses);
        let cases = case::read(run, &signals, &cycles);
        let is_broken = |case: &Case| case.judgement.outcome == Outcome::Broken;
        let findings = cases.iter().enumerate().filter(|(_, case)| is_broken(case)).map(|(place, _)| place).collect();
        Self { heart: HeartStory::read(&run.records, &run.tracts), pulses, signals, cycles, cases, findings, run }
    }

    /// The channel that is judged.
    pub(super) fn channel(&self) -> Option<Channel> {
        judged_channel(self.run)
    }

    /// True if a device was connected that does something.
    pub(super) fn is_judged(&self) -> bool {
        self.run.verdict != Verdict::Unjudged
    }

    /// The case behind the finding of this number, from 1.
    pub(super) fn finding(&self, number: usize) -> Option<&Case> {
        self.cases.get(*self.findings.get(number.checked_sub(1)?)?)
    }

    /// All findings with their numbers.
    pub(super) fn numbered_findings(&self) -> impl Iterator<Item = (usize, &Case)> {
        self.findings.iter().enumerate().filter_map(|(place, case)| Some((place + 1, self.cases.get(*case)?)))
    }

    /// Number of the finding that lies farthest outside its window; the first among equals.
    pub(super) fn worst_finding(&self) -> Option<usize> {
        let size = |case: &Case| over(case).map_or(0, Span::as_micros);
        // Numbers compared backward, so that the first of equals is the greatest.
        let by_size = self.numbered_findings().max_by_key(|(number, case)| (size(case), std::cmp::Reverse(*number)));
        by_size.map(|(number, _)| number)
    }

    /// The pulse that left on this channel at this instant, with its number.
    pub(super) fn pulse_at(&self, channel: Channel, at: Instant) -> Option<(usize, &PulseFact)> {
        let first = self.pulses.partition_point(|pulse| pulse.at < at);
        let same = self.pulses.get(first..)?.iter().take_while(|pulse| pulse.at == at);
        same.enumerate().find(|(_, pulse)| pulse.channel == channel).map(|(place, pulse)| (first + place + 1, pulse))
    }

    /// Row of the site that begins the chain of conduction: the one no tract leads to.
    pub(super) fn top_site(&self) -> u8 {
        let tracts = &self.run.tracts;
        tracts.iter().map(|tract| tract.from).find(|site| tracts.iter().all(|tract| tract.to != *site)).unwrap_or(0)
    }

    /// Row of the site whose activations are beats: the ventricle by its name, else the lower end of the last tract but one.
    pub(super) fn beat_site(&self) -> Option<u8> {
        let named = self.run.names.sites.iter().position(|name| name == "ventricle");
        let row = named.or_else(|| self.run.names.sites.len().checked_sub(1))?;
        u8::try_from(row).ok()
    }

    /// When the run ended.
    pub(super) fn end(&self) -> Instant {
        self.run.start.saturating_add(self.run.simulated)
    }

    /// Uncertainty within which nothing is decided at a limit: none under the simple rule.
    pub(super) fn guard(&self) -> Span {
        match &self.run.audit {
            Some(audit) if audit.decision == Decision::Guarded => audit.uncertainty,
            _ => Span::ZERO,
        }
    }

    /// The device's name for a sentence.
    pub(super) fn device(&self) -> String {
        self.run.device_name.as_deref().map_or_else(|| "The device".to_owned(), |name| super::text::short(name, 40))
    }
}

/// The channel that is paced, or else sensed, under the run's program.
pub(super) fn judged_channel(run: &RunData) -> Option<Channel> {
    let program = run.program.as_ref()?;
    program.paces().or(program.senses())
}

/// Limits of sensitivity: at or below the first nothing may be seen, at or above the second everything must.
pub(super) fn sensitivity_band(run: &RunData, program: &Program) -> (u64, u64) {
    let thousandths = run.audit.map_or(0, |audit| u64::from(audit.sensitivity_thousandths));
    let nominal = u64::from(program.settings().sensitivity.0);
    (nominal * 1_000_u64.saturating_sub(thousandths) / 1_000, (nominal * (1_000 + thousandths)).div_ceil(1_000))
}

fn of_kind(run: &RunData, kind: Kind) -> impl Iterator<Item = &Record> {
    run.records.iter().filter(move |record| record.kind == kind)
}
