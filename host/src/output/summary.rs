//! `summary.json`: a run for a machine to read.

use crate::run_data::{Coverage, CoverageState, Need, RunData};
use phase4::audit::{RuleId, Score};
use serde::Serialize;

/// A run in short. The names of its fields are part of the interface.
#[derive(Debug, Clone, Serialize)]
pub struct Summary<'a> {
    /// `holds`, `broken`, `undecided`, `void` or `unjudged`.
    pub verdict: &'static str,
    /// Ventricular activations.
    pub beats: u64,
    /// Pulses of the device.
    pub pulses: u64,
    /// How long the run lasted.
    pub simulated_us: u64,
    /// The running hash over all records, 16 hexadecimal digits.
    pub hash: String,
    /// The seed.
    pub seed: u64,
    /// Version of the rule set.
    pub rule_set: u32,
    /// Every rule with its score; empty if nothing was judged.
    pub rules: Vec<Rule>,
    /// What was covered; null if nothing was judged.
    pub coverage: Option<Covered<'a>>,
    /// Cases decided.
    pub decided: u64,
    /// Cases left undecided.
    pub undecided: u64,
    /// The planted fault that shows that the judge was awake; null if none was planted.
    pub canary: Option<Planted<'a>>,
    /// The scenario's name.
    pub name: &'a str,
    /// The scenario file as it was named.
    pub scenario: &'a str,
    /// The device's name; null if there was none.
    pub device: Option<&'a str>,
    /// The fault that was put into the device on purpose; null if none was.
    pub fault: Option<&'a str>,
    /// The instant at which the run started.
    pub start_us: u64,
    /// Why it ended: 0 its length was reached, 1 a step ended it, 2 interrupted, 3 the device spins.
    pub end_reason: u32,
    /// Version of the program that ran it.
    pub version: &'static str,
    /// The command that gives the same run again.
    pub command: &'a str,
    /// What this is not.
    pub caution: &'static str,
}

/// A rule's score.
#[derive(Debug, Clone, Serialize)]
pub struct Rule {
    /// Its id.
    pub id: &'static str,
    /// Cases judged or left undecided. 0 means that the rule was not exercised, not that it holds.
    pub checked: u32,
    /// Cases in which it held.
    pub held: u32,
    /// Cases in which it was broken.
    pub broken: u32,
    /// Cases that could not be decided.
    pub undecided: u32,
    /// The worst deviation, + is late; null for rules that measure no time or were not exercised.
    pub worst_us: Option<i64>,
}

impl Rule {
    fn of(rule: RuleId, score: &Score) -> Self {
        Self {
            id: rule.code(),
            checked: score.checked,
            held: score.held,
            broken: score.broken,
            undecided: score.undecided,
            worst_us: score.worst.map(|worst| worst.as_micros()),
        }
    }
}

/// What was covered.
#[derive(Debug, Clone, Serialize)]
pub struct Covered<'a> {
    /// Required cells hit.
    pub hit: u32,
    /// Required cells that can be hit under this program.
    pub required: u32,
    /// Every cell that is required or was hit.
    pub cells: Vec<Cell>,
    /// Cells of the run as a whole.
    pub whole_run: Vec<WholeRun<'a>>,
    /// Edges of windows that were tried from both sides, and those that can be.
    pub edges: Edges,
}

/// A coverage cell.
#[derive(Debug, Clone, Serialize)]
pub struct Cell {
    /// Its name, `VS/alert/PVC`: as it is written in `[audit] require`.
    pub cell: String,
    /// `hit`, `band only`, `empty`, `void` or `no stimulus`.
    pub state: &'static str,
    /// Whether it counts.
    pub required: bool,
    /// Hits well inside the window.
    pub core: u32,
    /// Hits that prove nothing: too near an end, or undecided.
    pub band: u32,
}

/// A coverage cell of the run as a whole.
#[derive(Debug, Clone, Serialize)]
pub struct WholeRun<'a> {
    /// Its name.
    pub cell: &'a str,
    /// How often it was hit.
    pub hits: u32,
}

/// Edges of windows.
#[derive(Debug, Clone, Copy, Serialize)]
pub struct Edges {
    /// Tried from both sides.
    pub hit: u32,
    /// All that can be.
    pub required: u32,
}

/// The planted fault.
#[derive(Debug, Clone, Serialize)]
pub struct Planted<'a> {
    /// Its number in the bank.
    pub fault: u8,
    /// What it is.
    pub line: &'a str,
    /// Whether the judge found it.
    pub caught: bool,
    /// The rules by which it was found.
    pub rules: Vec<&'static str>,
}

/// What every output says of itself.
const CAUTION: &str = "bench only: never connect to a person; not a medical device; by itself no evidence of conformity";

impl<'a> Summary<'a> {
    /// A run in short.
    pub fn of(run: &'a RunData) -> Self {
        Self {
            verdict: run.verdict.word(),
            beats: run.beats,
            pulses: run.pulses,
            simulated_us: run.simulated.as_micros(),
            hash: format!("{:016x}", run.hash),
            seed: run.seed,
            rule_set: run.rule_set,
            rules: run.scores.iter().map(|(rule, score)| Rule::of(*rule, score)).collect(),
            coverage: run.coverage.as_ref().map(Covered::of),
            decided: run.decided,
            undecided: run.undecided,
            canary: run.canary.as_ref().map(|canary| Planted {
                fault: canary.fault,
                line: &canary.line,
                caught: canary.caught,
                rules: canary.rules.iter().map(|rule| rule.code()).collect(),
            }),
            name: &run.name,
            scenario: &run.scenario_file,
            device: run.device_name.as_deref(),
            fault: run.fault.as_deref(),
            start_us: run.start.as_micros(),
            end_reason: run.end_reason,
            version: run.version,
            command: &run.command,
            caution: CAUTION,
        }
    }

    /// The summary as indented JSON with a line end.
    pub fn to_json(&self) -> String {
        let mut json = serde_json::to_string_pretty(self).unwrap_or_default();
        json.push('\n');
        json
    }
}

impl<'a> Covered<'a> {
    fn of(coverage: &'a Coverage) -> Self {
        let cells = coverage.rows.iter().flat_map(|row| {
            let named = row.cells.iter().zip(&coverage.columns);
            named.filter(|(cell, _)| cell.need == Need::Required || cell.core > 0).map(|(cell, column)| Cell {
                cell: format!("{}/{column}", row.code),
                state: state(cell.state),
                required: cell.need == Need::Required,
                core: cell.core,
                band: cell.band,
            })
        });
        let count = |edges: usize| u32::try_from(edges).unwrap_or(u32::MAX);
        let possible = coverage.edges.iter().filter(|edge| !edge.void);
        Self {
            hit: coverage.hit,
            required: coverage.required,
            cells: cells.collect(),
            whole_run: coverage.whole_run.iter().map(|(cell, hits)| WholeRun { cell, hits: *hits }).collect(),
            edges: Edges {
                hit: count(possible.clone().filter(|edge| edge.before > 0 && edge.after > 0).count()),
                required: count(possible.count()),
            },
        }
    }
}

const fn state(state: CoverageState) -> &'static str {
    match state {
        CoverageState::Hit => "hit",
        CoverageState::BandOnly => "band only",
        CoverageState::Empty => "empty",
        CoverageState::Void => "void",
        CoverageState::NoStimulus => "no stimulus",
        CoverageState::Impossible => "impossible",
    }
}
