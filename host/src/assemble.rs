//! Puts together everything a run has to tell, its verdict first.

use crate::judge::{self, Circumstances, Judged, canary, coverage_table, is_judged};
use crate::output::INTERRUPTED;
use crate::run::{names, tract_shapes};
use crate::run_data::{RunData, Verdict};
use crate::scenario::{Scenario, describe_fault};
use crate::tally::Tally;
use phase4::audit::{RULE_SET, RuleSet};
use phase4::base::{ParamError, Record};

/// The version of this program.
pub const VERSION: &str = env!("CARGO_PKG_VERSION");

/// What a run or a judged log has come to, besides its scenario.
#[derive(Debug)]
pub struct Outcome {
    /// The command that gives it again.
    pub command: String,
    /// Counts over the records.
    pub tally: Tally,
    /// The hash over the records.
    pub hash: u64,
    /// The records, if they were kept.
    pub records: Vec<Record>,
    /// What the auditor made of it; `None` where there was no device.
    pub judged: Option<Judged>,
}

/// Everything a run of this scenario has to tell. The canary is planted here; its judge is blind to the same rules as the run's.
///
/// # Errors
/// What the auditor refuses in its settings.
pub fn run_data(scenario: &Scenario, outcome: Outcome, blind: RuleSet) -> Result<RunData, ParamError> {
    let device = scenario.device.as_ref();
    let tally = outcome.tally;
    let mut canary = None;
    let mut verdict = Verdict::Unjudged;
    if let (Some(judged), Some(device), Some(audit)) = (&outcome.judged, device, &scenario.audit) {
        canary = self::canary(&device.program, &audit.settings, tally.seed, blind)?;
        let circumstances = Circumstances {
            canary_caught: canary.as_ref().is_none_or(|canary| canary.caught),
            required_missing: audit
                .require
                .iter()
                .any(|cell| !judged.coverage.as_ref().is_some_and(|coverage| cell.is_hit(coverage))),
            interrupted: tally.end_reason == INTERRUPTED,
        };
        verdict = judge::verdict(judged, &device.program, audit.settings.decide_thousandths, circumstances);
    }
    let judged = outcome.judged.unwrap_or_default();
    Ok(RunData {
        name: scenario.name.clone(),
        note: scenario.note.clone(),
        bench: scenario.bench.clone(),
        scenario_text: scenario.source.text().to_owned(),
        scenario_file: scenario.source.name().to_owned(),
        command: outcome.command,
        verdict,
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
        coverage: judged
            .coverage
            .as_ref()
            .filter(|_| device.is_some_and(|device| is_judged(&device.program)))
            .map(coverage_table),
        canary,
        steps: scenario.steps.texts.clone(),
        names: names(scenario),
        tracts: tract_shapes(scenario),
        beats: tally.beats,
        pulses: tally.pulses,
        seed: tally.seed,
        hash: outcome.hash,
        rule_set: RULE_SET,
        version: VERSION,
        start: tally.start(),
        simulated: tally.simulated(),
        end_reason: tally.end_reason,
    })
}
