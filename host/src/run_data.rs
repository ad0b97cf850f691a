//! Everything one run has to tell: what was asked, what happened, how it was judged. The summary, the log files and the report
//! are drawn from this and from nothing else.

pub use phase4::audit::Verdict;
use phase4::audit::{AuditSettings, Judgement, RuleId, Score};
use phase4::base::{Instant, Program, Record, Span};

/// One finished run, or one judged log.
#[derive(Debug, Clone)]
pub struct RunData {
    /// The scenario's own name; the file's stem where it has none.
    pub name: String,
    /// What the scenario says about itself, one paragraph.
    pub note: Option<String>,
    /// Who ran it, as the scenario says.
    pub bench: Option<String>,
    /// The scenario file's whole text.
    pub scenario_text: String,
    /// The scenario file as it was named on the command line.
    pub scenario_file: String,
    /// The command that gives the same run again.
    pub command: String,
    /// The answer.
    pub verdict: Verdict,
    /// What the device was set to; `None` if no device was connected.
    pub program: Option<Program>,
    /// The device's name, `reference device` where the scenario gives none; `None` if no device was connected.
    pub device_name: Option<String>,
    /// The fault planted in the device, in one plain line.
    pub fault: Option<String>,
    /// How it was judged; `None` if nothing was.
    pub audit: Option<AuditSettings>,
    /// The least share of decided cases that the scenario asks for, in thousandths.
    pub decide_thousandths: u32,
    /// Every record in the order of the log; the numbers are given.
    pub records: Vec<Record>,
    /// Every judgement in the order in which it was settled.
    pub judgements: Vec<Judgement>,
    /// Every rule of the rule set with its score; a rule with `checked` 0 was not exercised.
    pub scores: Vec<(RuleId, Score)>,
    /// Cases decided.
    pub decided: u64,
    /// Cases left undecided.
    pub undecided: u64,
    /// What was covered; `None` if nothing was judged.
    pub coverage: Option<Coverage>,
    /// The planted fault that shows that the judge was awake; `None` if nothing was judged.
    pub canary: Option<Canary>,
    /// The script's steps, as the scenario words them.
    pub steps: Vec<StepText>,
    /// Names of the anatomy's parts, each by its row.
    pub names: Names,
    /// What a drawing needs of each tract, by its row.
    pub tracts: Vec<TractShape>,
    /// Ventricular activations.
    pub beats: u64,
    /// Pulses of the device.
    pub pulses: u64,
    /// The seed.
    pub seed: u64,
    /// The running hash over all records.
    pub hash: u64,
    /// Version of the rule set.
    pub rule_set: u32,
    /// Version of the program that ran it.
    pub version: &'static str,
    /// The instant at which the run started: instants in records count from the same zero, times shown count from here.
    pub start: Instant,
    /// How long it ran.
    pub simulated: Span,
    /// Why it ended, as the [`End`](phase4::base::Kind::End) record says: 0 length reached, 1 a step, 2 interrupted, 3 the device spins.
    pub end_reason: u32,
}

/// A step of the script in the scenario's words.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct StepText {
    /// When it acts.
    pub when: String,
    /// What it does.
    pub act: String,
    /// How often it may act; `None` for as often as its `when` comes.
    pub times: Option<u32>,
    /// The line of the scenario file it begins on, from 1.
    pub line: usize,
}

/// Names of the anatomy's parts, each by its row.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Names {
    /// Of sites.
    pub sites: Vec<String>,
    /// Of tracts.
    pub tracts: Vec<String>,
    /// Of cells.
    pub cells: Vec<String>,
    /// Of foci.
    pub foci: Vec<String>,
}

/// What a drawing needs of a tract.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TractShape {
    /// Row of the site at its upper end.
    pub from: u8,
    /// Row of the site at its lower end.
    pub to: u8,
    /// Where along it the gate lies, 0 at `from` and 1 at `to`.
    pub gate: f64,
    /// The shortest delay forward, what it has when fully recovered.
    pub forward_base: Span,
    /// The same backward.
    pub backward_base: Span,
}

/// The second, short run with a planted fault that proves that this run's judge can catch one.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Canary {
    /// The fault's number in the bank.
    pub fault: u8,
    /// The fault in one plain line.
    pub line: String,
    /// True if the judge found it.
    pub caught: bool,
    /// The rules by which it was found.
    pub rules: Vec<RuleId>,
}

/// What was covered, as a table ready to be drawn.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Coverage {
    /// Names of the columns: kinds of stimulus.
    pub columns: Vec<String>,
    /// One row per anchor and window.
    pub rows: Vec<CoverageRow>,
    /// One row per window edge and anchor.
    pub edges: Vec<CoverageEdge>,
    /// Cells of the run as a whole (first cycle after the start, longest silence …) and how often each was hit.
    pub whole_run: Vec<(String, u32)>,
    /// Required cells hit.
    pub hit: u32,
    /// Required cells that are not void.
    pub required: u32,
}

/// A row of the coverage table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct CoverageRow {
    /// Its short name, `VS/alert`; with a slash and a column's name that of a cell.
    pub code: String,
    /// What the window counts from, in words.
    pub anchor: String,
    /// The window's name.
    pub window: String,
    /// Where it begins and ends, from its anchor.
    pub from: Span,
    /// Its end.
    pub to: Span,
    /// A cell per column.
    pub cells: Vec<CoverageCell>,
}

/// A cell of the coverage table.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct CoverageCell {
    /// Whether it is asked for.
    pub need: Need,
    /// How it stands.
    pub state: CoverageState,
    /// Hits well inside the window, with a decided answer.
    pub core: u32,
    /// Hits too near an end to prove anything.
    pub band: u32,
}

/// Whether a coverage cell is asked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Need {
    /// It counts.
    Required,
    /// It is shown and does not count.
    Optional,
    /// It cannot be hit or means nothing.
    Impossible,
}

/// How a coverage cell stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum CoverageState {
    /// At least one core hit.
    Hit,
    /// Hits in the band at an end only.
    BandOnly,
    /// Nothing yet.
    Empty,
    /// The window is too narrow under this program and tolerance: out of the count.
    Void,
    /// The bench has no such stimulus yet: stays in the count.
    NoStimulus,
    /// Impossible or meaningless.
    Impossible,
}

/// An edge of a window: tried if there is a decided hit close before it and one close after it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct CoverageEdge {
    /// What it counts from, in words.
    pub anchor: String,
    /// The edge's name.
    pub edge: String,
    /// The stimulus that tried it.
    pub column: String,
    /// Where it lies, from its anchor.
    pub at: Span,
    /// Decided hits close before it.
    pub before: u32,
    /// Decided hits close after it.
    pub after: u32,
    /// True if the edge is too close to others to be tried.
    pub void: bool,
}
