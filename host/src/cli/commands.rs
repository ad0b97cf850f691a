//! The commands: each reads its input, does its work, and answers in words or as JSON.

use super::args::{Judge, Run};
use super::progress::Progress;
use crate::assemble::{Outcome, run_data};
use crate::judge::{self, Circumstances, Judged};
use crate::log_file::{self, Usual};
use crate::output::{Folder, Summary, sentence};
use crate::refusal::{Complaint, Refusal};
use crate::run::{self, Failed, names};
use crate::run_data::{Canary, Coverage, RunData, Verdict};
use crate::scenario::{DevicePart, Scenario};
use crate::tally::{Tally, number};
use std::path::Path;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// What a command has to say, and how it ended.
#[derive(Debug)]
pub(super) struct Answer {
    pub(super) text: String,
    pub(super) verdict: Verdict,
}

fn refuse(message: impl ToString) -> Refusal {
    Refusal::plain(Complaint::new(message.to_string()))
}

/// `phase4 run`
pub(super) fn run(args: &Run) -> Result<Answer, Refusal> {
    let scenario = Scenario::load(&args.file)?;
    let seed = args.seed.unwrap_or(scenario.seed);
    let mut folder = args.out.as_deref().map(Folder::begin).transpose().map_err(refuse)?;
    let stop = stop_on_interrupt();
    let progress = Progress::new(scenario.start, scenario.length);
    let names = names(&scenario);
    let mut records = Vec::new();
    let finished = run::run(
        &scenario,
        seed,
        &stop,
        |record| match &mut folder {
            Some(folder) => {
                records.push(*record);
                folder.record(record, &names)
            }
            None => Ok(()),
        },
        |now| progress.at(now),
    );
    progress.done();
    let finished = finished.map_err(|failed| match failed {
        Failed::Refused(error) => refuse(format!("the scenario cannot be run: {error}")),
        Failed::Output(error) => refuse(format!("the log cannot be written: {error}")),
    })?;
    let command = command(&["run".to_owned(), quote(&args.file)], args.seed);
    let (tally, hash) = (finished.tally, finished.hash);
    let told = tell(&scenario, Told { command, tally, hash, records, judged: finished.judged });
    let summary = Summary::of(&told, tally.beats, tally.pulses).to_json();
    if let Some(folder) = folder {
        folder.put_in_place(&summary).map_err(refuse)?;
    }
    Ok(answer(&told, &tally, summary, args.json))
}

/// `phase4 judge`
pub(super) fn judge(args: &Judge) -> Result<Answer, Refusal> {
    let scenario = Scenario::load(&args.program)?;
    let judged_by = scenario.device.as_ref().zip(scenario.audit.as_ref());
    let usual = judged_by.map(|(device, _)| Usual::of(&device.program)).unwrap_or_default();
    let mut log = log_file::read(&args.log, &names(&scenario), usual)?;
    let hash = number(&mut log.records);
    let mut tally = Tally::default();
    log.records.iter().for_each(|record| tally.take(record));
    let judged = match judged_by {
        Some((device, audit)) => Some(judge::judge(&log, &device.program, audit).map_err(refuse)?),
        None => None,
    };
    let command = command(&["judge".to_owned(), quote(&args.log), "--program".to_owned(), quote(&args.program)], None);
    let told = tell(&scenario, Told { command, tally, hash, records: log.records, judged });
    let summary = Summary::of(&told, tally.beats, tally.pulses).to_json();
    Ok(answer(&told, &tally, summary, args.json))
}

/// What is known before the verdict.
struct Told {
    command: String,
    tally: Tally,
    hash: u64,
    records: Vec<phase4::base::Record>,
    judged: Option<Judged>,
}

fn tell(scenario: &Scenario, told: Told) -> RunData {
    let coverage: Option<Coverage> = None;
    let canary: Option<Canary> = None;
    let circumstances = Circumstances {
        canary_caught: canary.as_ref().is_none_or(|canary| canary.caught),
        required_missing: false,
        interrupted: told.tally.end_reason == crate::output::INTERRUPTED,
    };
    let verdict = match (&told.judged, &scenario.device, &scenario.audit) {
        (Some(judged), Some(DevicePart { program, .. }), Some(audit)) => {
            judge::verdict(judged, program, audit.settings.decide_thousandths, circumstances)
        }
        _ => Verdict::Unjudged,
    };
    let Told { command, tally, hash, records, judged } = told;
    run_data(scenario, Outcome { command, verdict, tally, hash, records, judged, coverage, canary })
}

fn answer(told: &RunData, tally: &Tally, summary: String, json: bool) -> Answer {
    let text = if json { summary } else { format!("{}\n", sentence(told, tally.beats, tally.pulses)) };
    Answer { text, verdict: told.verdict }
}

/// The command that gives the same again, as it can be typed.
fn command(words: &[String], seed: Option<u64>) -> String {
    let seed = seed.map_or(String::new(), |seed| format!(" --seed {seed}"));
    format!("phase4 {}{seed}", words.join(" "))
}

/// A path as it can be typed into a shell.
fn quote(path: &Path) -> String {
    let path = path.display().to_string();
    let plain = |c: char| c.is_alphanumeric() || matches!(c, '/' | '.' | '-' | '_' | '\\' | ':');
    if !path.is_empty() && path.chars().all(plain) { path } else { format!("'{}'", path.replace('\'', "'\\''")) }
}

/// True once the user asks the run to stop: it then ends where it is, and what it has is judged and written.
fn stop_on_interrupt() -> Arc<AtomicBool> {
    let stop = Arc::new(AtomicBool::new(false));
    let asked = Arc::clone(&stop);
    // Where no handler can be set an interrupt simply ends the process, and nothing has been put in place.
    let _ = ctrlc::set_handler(move || asked.store(true, Ordering::Relaxed));
    stop
}
