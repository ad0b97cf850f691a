//! Judging: what an auditor makes of a run's records, and whether it was awake.

use crate::log_file::LogFile;
use crate::scenario::AuditPart;
use phase4::audit::{Auditor, Findings, Judgement, RuleId, Score, Verdict};
use phase4::base::{Kind, Mode, ParamError, Program, Record};

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
}

impl Judged {
    /// What a settled auditor has to say, with the judgements that were fetched from it.
    pub fn of<const H: usize>(auditor: &Auditor<H>, judgements: Vec<Judgement>) -> Self {
        Self {
            judgements,
            scores: RuleId::ALL.into_iter().map(|rule| (rule, auditor.score(rule))).collect(),
            broken: auditor.broken(),
            decided: auditor.decided(),
            undecided: auditor.undecided(),
        }
    }
}

/// Judges a log: as the bench does, instant by instant. A log without a start is of a device that was running already; one without
/// an end ends with its last record.
///
/// # Errors
/// What the auditor refuses in its settings.
pub fn judge(log: &LogFile, program: &Program, audit: &AuditPart) -> Result<Judged, ParamError> {
    let Some(first) = log.records.first() else { return Ok(Judged::default()) };
    let begin = if log.has_start { Auditor::<HYPOTHESES>::new } else { Auditor::joining };
    let mut auditor = Box::new(begin(program, &audit.settings, first.at)?);
    let mut judgements = Vec::new();
    for same_instant in log.records.chunk_by(|one, next| one.at == next.at) {
        for record in same_instant {
            auditor.observe(record);
        }
        let Some(Record { at, .. }) = same_instant.last() else { continue };
        judgements.extend(std::iter::from_fn(|| auditor.poll(*at)));
    }
    if let Some(last) = log.records.last().filter(|last| last.kind != Kind::End) {
        auditor.finish(last.at);
        judgements.extend(std::iter::from_fn(|| auditor.poll(last.at)));
    }
    Ok(Judged::of(&auditor, judgements))
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
