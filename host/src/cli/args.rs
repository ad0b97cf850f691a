//! The arguments.

use clap::{Parser, Subcommand};
use std::path::PathBuf;

const CAUTION: &str = "\
Bench use only. Never connect anything that this drives to a person. It is not a medical device, and what it prints is by itself
no evidence of conformity with any standard. Mind isolation and your local electrical codes; licensed practice and the maker's own
process decide.";

const EXIT_CODES: &str = "\
Exit codes: 0 holds or unjudged, 1 broken, 2 bad input or output not writable, 3 undecided, 4 void.";

/// The heart side of a test bench for devices that sense and pace the heart.
///
/// A scenario goes in; heart and device run in a closed loop; every interval is judged against what was programmed; a report comes
/// out.
#[derive(Debug, Parser)]
#[command(name = "phase4", version, max_term_width = 100, after_help = CAUTION, subcommand_required = true)]
pub(super) struct Args {
    #[command(subcommand)]
    pub(super) command: Command,
}

#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Run a scenario and judge the device in it.
    #[command(after_help = format!("{EXIT_CODES}\n\n{CAUTION}"))]
    Run(Run),
    /// Judge a recorded log against a program.
    #[command(after_help = format!("{EXIT_CODES}\n\n{CAUTION}"))]
    Judge(Judge),
}

#[derive(Debug, clap::Args)]
pub(super) struct Run {
    /// The scenario, a TOML file; examples/scenarios has some to begin with.
    #[arg(value_name = "FILE")]
    pub(super) file: PathBuf,
    /// Write summary.json, log.jsonl, log.csv and report.html into this folder; without it nothing is written.
    #[arg(long, value_name = "DIR")]
    pub(super) out: Option<PathBuf>,
    /// Print the summary as JSON instead of the verdict in words.
    #[arg(long)]
    pub(super) json: bool,
    /// Use this seed instead of the scenario's.
    #[arg(long, value_name = "N")]
    pub(super) seed: Option<u64>,
}

#[derive(Debug, clap::Args)]
pub(super) struct Judge {
    /// The log, as JSON Lines or comma-separated values: at least at_us, what, where and cause in every line.
    #[arg(value_name = "LOG")]
    pub(super) log: PathBuf,
    /// The scenario whose [device] tells what was programmed, and whose [audit] tells how to judge.
    #[arg(long, value_name = "FILE")]
    pub(super) program: PathBuf,
    /// Print the summary as JSON instead of the verdict in words.
    #[arg(long)]
    pub(super) json: bool,
}
