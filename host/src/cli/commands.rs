//! The commands: each reads its input, does its work, and answers in words or as JSON.

use super::args::{Judge, Run};
use super::progress::Progress;
use crate::assemble::{Outcome, run_data};
use crate::judge;
use crate::log_file::{self, Usual};
use crate::output::{Folder, Summary, sentence};
use crate::refusal::{Complaint, Refusal};
use crate::report;
use crate::run::{self, Failed, Finished, Order, names};
use crate::run_data::{RunData, Verdict};
use crate::scenario::Scenario;
use crate::tally::{Tally, number};
use phase4::audit::RuleSet;
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
    let stop = stop_on_interrupt();
    let mut folder = args.out.as_deref().map(Folder::begin).transpose().map_err(refuse)?;
    let progress = Progress::new(scenario.start, scenario.length);
    let names = names(&scenario);
    let mut records = Vec::new();
    let seed = args.seed.unwrap_or(scenario.seed);
    let order = Order { seed, blind: RuleSet::EMPTY, stop: &stop, keep: folder.is_some() };
    let finished = run::run(
        &scenario,
        order,
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
    let Finished { tally, hash, judged } = finished;
    let told = run_data(&scenario, Outcome { command, tally, hash, records, judged }, RuleSet::EMPTY).map_err(refuse)?;
    let summary = Summary::of(&told).to_json();
    if let Some(folder) = folder {
        folder.put_in_place(&summary, &report::page(&told)).map_err(refuse)?;
    }
    Ok(answer(&told, summary, args.json))
}

/// `phase4 judge`
pub(super) fn judge(args: &Judge) -> Result<Answer, Refusal> {
    let scenario = Scenario::load(&args.program)?;
    let usual = scenario.device.as_ref().map(|device| Usual::of(&device.program)).unwrap_or_default();
    let mut log = log_file::read(&args.log, &names(&scenario), usual)?;
    let hash = number(&mut log.records);
    let mut tally = Tally::default();
    log.records.iter().for_each(|record| tally.take(record));
    let judged = judge::judge(&log, &scenario).map_err(refuse)?;
    let command = command(&["judge".to_owned(), quote(&args.log), "--program".to_owned(), quote(&args.program)], None);
    let outcome = Outcome { command, tally, hash, records: log.records, judged };
    let told = run_data(&scenario, outcome, RuleSet::EMPTY).map_err(refuse)?;
    let summary = Summary::of(&told).to_json();
    Ok(answer(&told, summary, args.json))
}

fn answer(told: &RunData, summary: String, json: bool) -> Answer {
    let text = if json { summary } else { format!("{}\n", sentence(told)) };
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
