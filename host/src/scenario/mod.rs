//! Scenario files: TOML with units in its texts, read into what the rooms of the library take.
//!
//! Every error is shown where it stands, with what was expected and the nearest valid name.

mod audit;
mod device;
mod fault;
mod heart;
mod lead;
mod param;
mod replay;
mod require;
mod scan;
mod schema;
mod steps;
pub mod units;
mod walk;
mod words;

pub use audit::AuditPart;
pub use device::{DevicePart, UNNAMED};
pub use fault::describe as describe_fault;
pub use heart::{Focus, HeartPart, MOST_FOCI, PlainAnatomy};
pub use require::Required;
pub use scan::Wrong;
pub use schema::key_names;
pub use steps::{MOST_STEPS, StepsPart};

use crate::refusal::{Complaint, Refusal, Source};
use phase4::base::{Channel, Instant, SiteId, Span};
use phase4::heart::FocusParams;
use phase4::heart::plain::{APEX, ATRIUM};
use phase4::lead::LeadParams;
use std::path::Path;
use toml::Spanned;
use toml::de::DeTable;
use units::span;
use walk::{Section, Walk};

/// A scenario, read and checked: nothing in it can be refused any more.
#[derive(Debug, Clone)]
pub struct Scenario {
    /// The file it came from.
    pub source: Source,
    /// Its name; the file's stem where it gives none.
    pub name: String,
    /// What it says about itself.
    pub note: Option<String>,
    /// The bench or team it names.
    pub bench: Option<String>,
    /// How long it runs.
    pub length: Span,
    /// The seed of every chance in it.
    pub seed: u64,
    /// The instant at which it starts.
    pub start: Instant,
    /// The heart.
    pub heart: HeartPart,
    /// The leads.
    pub lead: LeadParams,
    /// The device, if one is connected.
    pub device: Option<DevicePart>,
    /// How the device is judged.
    pub audit: Option<AuditPart>,
    /// The script.
    pub steps: StepsPart,
}

/// The longest run: instants stay far from the end of the time line.
const LONGEST_RUN: Span = Span::from_secs(10 * 366 * 86_400);
/// The latest start: 2⁶³ µs, half the time line.
const LATEST_START: Span = Span::from_micros(1 << 63);
/// How long a run goes on after the last beat of a replayed series, so that this beat is conducted and judged too.
const AFTER_REPLAY: Span = Span::from_secs(1);

/// Where the electrode of each channel sits.
const fn electrode(channel: Channel) -> SiteId {
    match channel {
        Channel::Atrial => ATRIUM,
        Channel::Ventricular => APEX,
    }
}

impl Scenario {
    /// Reads a scenario file and the files it names.
    ///
    /// # Errors
    /// Refuses what cannot be read or is wrong, with every place that is.
    pub fn load(path: &Path) -> Result<Self, Refusal> {
        let folder = path.parent().unwrap_or(Path::new(""));
        Self::parse(Source::read(path)?, folder)
    }

    /// Reads a scenario from its text; the paths in it count from `folder`.
    ///
    /// # Errors
    /// Refuses what is wrong, with every place that is.
    pub fn parse(source: Source, folder: &Path) -> Result<Self, Refusal> {
        let walk = Walk::new(&source);
        let table = match DeTable::parse(source.text()) {
            Ok(table) => table,
            Err(error) => return Err(Refusal::new(source.clone(), vec![not_toml(&error)])),
        };
        let scenario = read(&walk, &table, folder)?;
        match scenario {
            Some(scenario) if !walk.has_complaints() => Ok(scenario),
            _ => {
                let complaints = walk.into_complaints();
                Err(Refusal::new(source.clone(), complaints))
            }
        }
    }

    /// The foci as the heart takes them.
    pub fn foci(&self) -> Vec<FocusParams<'_>> {
        self.heart.foci.iter().map(Focus::params).collect()
    }
}

fn not_toml(error: &toml::de::Error) -> Complaint {
    let complaint = Complaint::new(format!("this is not TOML: {}", error.message().lines().next().unwrap_or_default()));
    match error.span() {
        Some(span) => complaint.at(span, "here"),
        None => complaint,
    }
}

fn read<'a>(walk: &Walk<'a>, table: &Spanned<DeTable<'a>>, folder: &Path) -> Result<Option<Scenario>, Refusal> {
    let source = walk.source;
    if table.get_ref().is_empty() {
        let complaint = Complaint::new(format!("{} is empty", source.name()));
        walk.complain(
            complaint.help("a scenario has at least [run] with a length; copy one of examples/scenarios to begin with"),
        );
        return Ok(None);
    }
    let file = Section::root(walk, &schema::FILE, table);
    let about = file.open("scenario", &schema::SCENARIO);
    let run = file.open("run", &schema::RUN);
    let device_table = file.open("device", &schema::DEVICE);
    let device = device::read(&device_table);
    let program = device.as_ref().map(|device| device.program);
    let leads = file.open("lead", &schema::LEADS);
    let lead = lead::read(&leads, program.map(|program| program.settings().mode), electrode);
    let heart_table = file.open("heart", &schema::HEART);
    let lead_tables = Channel::ALL.map(|channel| (electrode(channel), lead::open(&leads, channel)));
    let heart = heart::read(&heart_table, lead_tables, folder)?;
    let audit_table = file.open("audit", &schema::AUDIT);
    let audit = program.map(|program| audit::read(&audit_table, &device_table, &program));
    let (length, seed, start) = read_run(&run, heart.as_ref());
    let Some(heart) = heart else { return Ok(None) };
    // A device that was refused leaves its words unknown: steps that name its windows would be refused for the wrong reason.
    let steps = if device_table.exists() && device.is_none() {
        StepsPart::default()
    } else {
        let words = steps::vocabulary(&lead, program.as_ref().zip(audit.as_ref().map(|audit| &audit.settings)));
        let tables = file.open_each("step", &schema::STEP);
        steps::read(&tables, &words, &heart, &lead, program.as_ref(), source)
    };
    let text = |section: &Section<'_, '_>, key: &str| section.text(key).map(|text| text.value.trim().to_owned());
    let stem = || Path::new(source.name()).file_stem().map(|stem| stem.to_string_lossy().into_owned()).unwrap_or_default();
    Ok(length.map(|length| Scenario {
        source: source.clone(),
        name: text(&about, "name").unwrap_or_else(stem),
        note: text(&about, "note"),
        bench: text(&about, "bench"),
        length,
        seed,
        start,
        heart,
        lead,
        device,
        audit,
        steps,
    }))
}

fn read_run(run: &Section<'_, '_>, heart: Option<&HeartPart>) -> (Option<Span>, u64, Instant) {
    let series = heart.and_then(|heart| {
        heart.foci.iter().find_map(|focus| match focus {
            Focus::Replay { intervals, repeat: false } => {
                let sum = intervals.iter().fold(Span::ZERO, |sum, interval| sum.saturating_add(*interval));
                Some(FocusParams::REPLAY_LEAD.saturating_add(sum).saturating_add(AFTER_REPLAY))
            }
            _ => None,
        })
    });
    let length = match (run.read("length", span), series) {
        (Some(length), Some(series)) => Some(length.min(series)),
        (Some(length), None) => Some(length),
        (None, Some(series)) if !run.has("length") => Some(series),
        _ => {
            if !run.has("length") {
                run.missing("length");
            }
            None
        }
    };
    let check = |key: &str, value: Span, least: Span, greatest: Span| {
        if value < least || value > greatest {
            let message = format!("[run] {key} is {}", units::show_micros(value.as_micros()));
            let range = (units::show_micros(least.as_micros()), units::show_micros(greatest.as_micros()));
            let label = format!("accepted is {} to {}", range.0, range.1);
            run.complain(Complaint::new(message).at(run.place(key), label));
        }
    };
    if let Some(length) = length {
        check("length", length, Span::from_micros(1), LONGEST_RUN);
    }
    let start = run.read("start", span).unwrap_or(Span::ZERO);
    check("start", start, Span::ZERO, LATEST_START);
    (length, run.whole("seed").unwrap_or(1), Instant::from_micros(start.as_micros()))
}
