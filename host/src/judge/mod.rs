//! Judging: what an auditor makes of a run's records, and whether it was awake.

mod canary;
mod coverage;

pub use canary::canary;
pub use coverage::{coverage, table as coverage_table};

use crate::log_file::LogFile;
use crate::scenario::{DevicePart, Scenario};
use phase4::audit::{Auditor, Coverage, Findings, Judgement, RuleId, Score, Verdict};
use phase4::base::{Instant, Kind, Mode, ParamError, Program};

/// How many hypotheses the auditor of a host may hold.
pub const HYPOTHESES: usize = 256;

/// What an auditor made of a run.
#[derive(Debug, Clone, Default)]
pub struct Judged {
    /// Every judgement, in the order in which it was settled.
    pub judgements: Vec<Judgement>,
    /// Every rule with its score.
    pub scores: Vec<(RuleId, Score)>,
    /// How often any rule was broken.
    pub broken: u32,
    /// Cases decided.
    pub decided: u64,
    /// Cases left undecided.
    pub undecided: u64,
    /// What was covered.
    pub coverage: Option<Coverage>,
}

impl Judged {
    /// What a settled auditor has to say, with the judgements that were fetched from it and what they cover.
    pub fn of<const H: usize>(auditor: &Auditor<H>, judgements: Vec<Judgement>, coverage: Option<Coverage>) -> Self {
        Self {
            judgements,
            coverage,
            scores: RuleId::ALL.into_iter().map(|rule| (rule, auditor.score(rule))).collect(),
            broken: auditor.broken(),
            decided: auditor.decided(),
            undecided: auditor.undecided(),
        }
    }
}

/// Judges a log by a scenario's program, as the bench does, instant by instant; `None` if the scenario has no device. A log without a
/// start is of a device that was running already; one without an end ends with its last record.
///
/// # Errors
/// What the auditor refuses in its settings.
pub fn judge(log: &LogFile, scenario: &Scenario) -> Result<Option<Judged>, ParamError> {
    let Some((DevicePart { program, .. }, audit)) = scenario.device.as_ref().zip(scenario.audit.as_ref()) else {
        return Ok(None);
    };
    let Some(first) = log.records.first() else { return Ok(None) };
    let begin = if log.has_start { Auditor::new } else { Auditor::joining };
    let mut judge = Judge {
        auditor: Box::new(begin(program, &audit.settings, first.at)?),
        coverage: coverage(scenario, program, &audit.settings),
        judgements: Vec::new(),
    };
    for same_instant in log.records.chunk_by(|one, next| one.at == next.at) {
        for record in same_instant {
            judge.auditor.observe(record);
            judge.coverage.record(record);
        }
        if let Some(last) = same_instant.last() {
            judge.settle(last.at);
        }
    }
    if let Some(last) = log.records.last().filter(|last| last.kind != Kind::End) {
        judge.auditor.finish(last.at);
        judge.settle(last.at);
    }
    Ok(Some(Judged::of(&judge.auditor, judge.judgements, Some(judge.coverage))))
}

struct Judge {
    auditor: Box<Auditor<HYPOTHESES>>,
    coverage: Coverage,
    judgements: Vec<Judgement>,
}

impl Judge {
    /// Fetches what is settled by now.
    fn settle(&mut self, now: Instant) {
        while let Some(judgement) = self.auditor.poll(now) {
            self.coverage.judged(&judgement);
            self.judgements.push(judgement);
        }
    }
}

/// True if a device in this mode gives an auditor something to do.
pub fn is_judged(program: &Program) -> bool {
    program.settings().mode != Mode::Ooo
}

/// The verdict of a run.
pub fn verdict(judged: &Judged, program: &Program, decide_thousandths: u32, run: Circumstances) -> Verdict {
    Verdict::of(&Findings {
        judged: is_judged(program),
        canary_caught: run.canary_caught,
        broken: judged.broken,
        decided: judged.decided,
        undecided: judged.undecided,
        decide_thousandths,
        required_missing: run.required_missing,
        interrupted: run.interrupted,
    })
}

/// What besides the auditor's counts enters a verdict.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Circumstances {
    /// False if a canary was planted and not caught.
    pub canary_caught: bool,
    /// True if a coverage cell that was asked for was not hit.
    pub required_missing: bool,
    /// True if the run was stopped before its end.
    pub interrupted: bool,
}
