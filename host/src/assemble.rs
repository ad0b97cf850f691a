//! Puts together everything a run has to tell.

use crate::judge::Judged;
use crate::run::{names, tract_shapes};
use crate::run_data::{Canary, Coverage, RunData, Verdict};
use crate::scenario::{Scenario, describe_fault};
use crate::tally::Tally;
use phase4::audit::RULE_SET;
use phase4::base::Record;

/// The version of this program.
pub const VERSION: &str = env!("CARGO_PKG_VERSION");

/// What a run or a judged log has come to, besides its scenario.
#[derive(Debug)]
pub struct Outcome {
    /// The command that gives it again.
    pub command: String,
    /// The verdict.
    pub verdict: Verdict,
    /// Counts over the records.
    pub tally: Tally,
    /// The hash over the records.
    pub hash: u64,
    /// The records, if they were kept.
    pub records: Vec<Record>,
    /// What the auditor made of it.
    pub judged: Option<Judged>,
    /// What was covered.
    pub coverage: Option<Coverage>,
    /// The planted fault.
    pub canary: Option<Canary>,
}

/// Everything a run of this scenario has to tell.
pub fn run_data(scenario: &Scenario, outcome: Outcome) -> RunData {
    let device = scenario.device.as_ref();
    let judged = outcome.judged.unwrap_or_default();
    RunData {
        name: scenario.name.clone(),
        note: scenario.note.clone(),
        bench: scenario.bench.clone(),
        scenario_text: scenario.source.text().to_owned(),
        scenario_file: scenario.source.name().to_owned(),
        command: outcome.command,
        verdict: outcome.verdict,
        program: device.map(|device| device.program),
        device_name: device.map(|device| device.name.clone()),
        fault: device.and_then(|device| device.fault).map(describe_fault),
        audit: scenario.audit.as_ref().map(|audit| audit.settings),
        decide_thousandths: scenario.audit.as_ref().map_or(0, |audit| audit.settings.decide_thousandths),
        records: outcome.records,
        judgements: judged.judgements,
        scores: judged.scores,
        decided: judged.decided,
        undecided: judged.undecided,
        coverage: outcome.coverage,
        canary: outcome.canary,
        steps: scenario.steps.texts.clone(),
        names: names(scenario),
        tracts: tract_shapes(scenario),
        seed: outcome.tally.seed,
        hash: outcome.hash,
        rule_set: RULE_SET,
        version: VERSION,
        start: outcome.tally.start(),
        simulated: outcome.tally.simulated(),
        end_reason: outcome.tally.end_reason,
    }
}
