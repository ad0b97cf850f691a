//! `[[step]]`: the script.

use super::heart::HeartPart;
use super::param::{Written, complaint};
use super::walk::Section;
use super::words::{self, Vocabulary};
use crate::refusal::{Complaint, Source};
use crate::run_data::StepText;
use phase4::audit::AuditSettings;
use phase4::base::{Channel, Instant, ParamError, Problem, Program, Span};
use phase4::bench::{Act, Event, Script, Step, When};
use phase4::heart::plain::CELL_NAMES;
use phase4::lead::LeadParams;
use std::ops::Range;

/// The script of a scenario.
#[derive(Debug, Clone, Default)]
pub struct StepsPart {
    /// The steps.
    pub steps: Vec<Step>,
    /// Their words, row by row.
    pub texts: Vec<StepText>,
}

/// The most steps a script may have, those of the file and one for each cell that is off from the start.
pub const MOST_STEPS: usize = 64;

/// A step as it was read, with the places of its parts.
struct Read {
    step: Step,
    text: StepText,
    places: [(&'static str, Written); 3],
    act: Range<usize>,
}

/// Reads the steps; a cell that is off from the start becomes a step of its own behind them.
pub(super) fn read(
    tables: &[Section<'_, '_>],
    words: &Vocabulary,
    heart: &HeartPart,
    leads: &LeadParams,
    program: Option<&Program>,
    source: &Source,
) -> StepsPart {
    let mut rows: Vec<Read> = tables.iter().filter_map(|table| read_step(table, words)).collect();
    for (table, row) in tables.iter().zip(&rows) {
        check_leads(table, row, leads);
    }
    for (cell, place) in &heart.off {
        let name = CELL_NAMES.get(usize::from(cell.row())).copied().unwrap_or_default();
        let (line, _) = source.line_and_column(place.start);
        let written = || Written { place: place.clone(), name: format!("[heart] {name}"), text: Some("\"off\"".to_owned()) };
        rows.push(Read {
            step: Step { when: When::At(Span::ZERO), act: Act::Arrest(*cell), times: 1 },
            text: StepText { when: "at 0 ms".to_owned(), act: format!("arrest {name}"), times: Some(1), line },
            places: [("when", written()), ("act", written()), ("times", written())],
            act: place.clone(),
        });
    }
    let steps: Vec<Step> = rows.iter().map(|row| row.step).collect();
    if let Err(error) = Script::<MOST_STEPS>::new(&steps, program, 0, Instant::ZERO)
        && let Some(table) = tables.first()
    {
        table.complain(refused(&error, &rows));
    }
    StepsPart { steps, texts: rows.into_iter().map(|row| row.text).collect() }
}

fn read_step(table: &Section<'_, '_>, words: &Vocabulary) -> Option<Read> {
    for key in ["when", "act"] {
        if !table.has(key) {
            table.missing(key);
        }
    }
    let when = table.read("when", |text| words::when(text, words));
    let act = table.read("act", |text| words::act(text, words));
    let times = table.whole("times").map(|times| u32::try_from(times).unwrap_or(u32::MAX));
    let ((when, usual), act) = (when?, act?);
    if let Act::Lead(_, change) = act
        && let Err(error) = change.check()
    {
        table.complain(complaint(&error, |parameter| Written {
            place: table.place("act"),
            name: format!("[[step]] act: {parameter}"),
            text: Some(String::new()),
        }));
    }
    let text = |key: &str| table.text(key).map(|text| text.value.to_owned()).unwrap_or_default();
    let (line, _) = table.source().line_and_column(table.place("when").start);
    let times = times.unwrap_or(usual);
    let shown = (times != u32::MAX).then_some(times);
    Some(Read {
        step: Step { when, act, times },
        text: StepText { when: text("when"), act: text("act"), times: shown, line },
        places: ["when", "act", "times"].map(|key| (key, Written::new(table, key))),
        act: table.place("act"),
    })
}

/// A step that waits for or changes what no lead shows would wait for ever, in silence.
fn check_leads(table: &Section<'_, '_>, row: &Read, leads: &LeadParams) {
    let connected = |channel| match channel {
        Channel::Atrial => leads.atrial.is_some(),
        Channel::Ventricular => leads.ventricular.is_some(),
    };
    let waits_for = match row.step.when {
        When::After { event: Event::Signal(channel), .. } | When::Without { event: Event::Signal(channel), .. } => Some(channel),
        _ => None,
    };
    let changes = if let Act::Lead(channel, _) = row.step.act { Some(channel) } else { None };
    for (channel, key) in [(waits_for, "when"), (changes, "act")] {
        if let Some(channel) = channel.filter(|channel| !connected(*channel)) {
            let lead = super::lead::key(channel);
            let complaint = Complaint::new(format!("no lead shows the {lead}: this step would never act"));
            let complaint = complaint.at(table.place(key), "names its channel");
            table.complain(
                complaint.help(format!("a lead is connected where the mode uses its channel, or with a table [lead.{lead}]")),
            );
        }
    }
}

/// The complaint for a script that the bench refuses.
fn refused(error: &ParamError, rows: &[Read]) -> Complaint {
    let row_of = |row: u64| usize::try_from(row).ok().and_then(|row| rows.get(row));
    let row = error.row.and_then(|row| row_of(u64::from(row)));
    match (error.problem, row) {
        (Problem::Conflict { other, rule, .. }, Some(row)) if error.parameter == "step" => {
            let other = row_of(other).unwrap_or(row);
            let message = format!("`{}` contradicts `{}`: {rule}", row.text.act, other.text.act);
            Complaint::new(message).at(row.act.clone(), "this step").at(other.act.clone(), "and this one")
        }
        (Problem::OutOfRange { value, greatest, .. }, _) if error.parameter == "step" => {
            Complaint::new(format!("{value} steps, and at most {greatest} fit in a script"))
        }
        (Problem::OutOfRange { least: 1, greatest: 1, .. }, Some(row)) if error.parameter == "times" => {
            let place = written(row, "times").place;
            Complaint::new("a step `at` an instant acts once").at(place, "leave `times` out")
        }
        (_, Some(row)) => complaint(error, |parameter| written(row, parameter)),
        (_, None) => Complaint::new(format!("the script is refused: {error}")),
    }
}

fn written(row: &Read, parameter: &str) -> Written {
    let found = row.places.iter().find(|(key, _)| *key == parameter).or_else(|| row.places.first());
    found.map_or_else(
        || Written { place: row.act.clone(), name: "[[step]]".to_owned(), text: None },
        |(_, written)| written.clone(),
    )
}

/// The words that the steps of this scenario may use.
pub(super) fn vocabulary(leads: &LeadParams, judged: Option<(&Program, &AuditSettings)>) -> Vocabulary {
    use phase4::heart::plain::{SITE_NAMES, TRACT_NAMES};
    use phase4::lead::NearField;
    let width = |params: Option<phase4::lead::ChannelParams>, usual: NearField| params.map_or(usual, |params| params.near).width;
    let senses = judged.filter(|(program, _)| program.senses().is_some());
    Vocabulary {
        sites: &SITE_NAMES,
        tracts: &TRACT_NAMES,
        cells: &CELL_NAMES,
        limits: senses.map(|(program, audit)| {
            let (must_not_see, must_see) = audit.sensitivity_limits(program.settings().sensitivity);
            (must_see, must_not_see)
        }),
        widths: [width(leads.atrial, NearField::ATRIAL), width(leads.ventricular, NearField::VENTRICULAR)],
    }
}
