//! `[heart]`: the anatomy, its cells, tissue and tracts, and the foci beside them.

use super::device::{interval_or_off, set};
use super::param::{Written, complaint};
use super::replay;
use super::schema::{PREMATURE, REPLAY, SITE, TRACT, WAY};
use super::units::{millivolts, span};
use super::walk::Section;
use crate::refusal::{Complaint, Refusal};
use phase4::base::{CellId, Decay, Instant, ParamError, SiteId, Span};
use phase4::heart::plain::{CELL_NAMES, CELLS, SINUS, SINUS_CELL, SITE_NAMES, SITES, TRACT_NAMES, TRACTS, TRACTS_VA};
use phase4::heart::{Anatomy, CellParams, FocusParams, Fraction, Heart, SiteParams, TractParams, Way};
use std::ops::Range;
use std::path::Path;

/// Sites, tracts and cells of the plain heart.
pub type PlainAnatomy = Anatomy<5, 4, 3>;

/// The heart of a scenario.
#[derive(Debug, Clone)]
pub struct HeartPart {
    /// The checked anatomy.
    pub anatomy: PlainAnatomy,
    /// The foci, in the order of the file: a replayed series first.
    pub foci: Vec<Focus>,
    /// Cells that are silent from the start, each with the place that says so.
    pub off: Vec<(CellId, Range<usize>)>,
}

/// A focus with what it needs of its own.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Focus {
    /// A premature beat.
    Premature {
        /// Where it fires.
        site: SiteId,
        /// The site whose beats it follows.
        after: SiteId,
        /// By how much.
        coupling: Span,
        /// After each, every other …
        every: u32,
    },
    /// A recorded series in the sinus cell's place.
    Replay {
        /// The intervals.
        intervals: Vec<Span>,
        /// Whether it begins again after its end.
        repeat: bool,
    },
}

impl Focus {
    /// The focus as the heart takes it.
    pub fn params(&self) -> FocusParams<'_> {
        match self {
            Self::Premature { site, after, coupling, every } => FocusParams::premature_after(*site, *after, *coupling, *every),
            Self::Replay { intervals, repeat } => FocusParams::replay(SINUS, intervals, *repeat, SINUS_CELL),
        }
    }

    /// Its name in logs and reports.
    pub fn name(&self, row: usize) -> String {
        match self {
            Self::Premature { .. } => format!("premature-{}", row.saturating_add(1)),
            Self::Replay { .. } => "replay".to_owned(),
        }
    }
}

/// The most foci a scenario may have.
pub const MOST_FOCI: usize = 4;

/// Where each part of the heart is written in the file.
struct Places<'a, 'w> {
    heart: &'w Section<'a, 'w>,
    sites: Vec<(usize, Section<'a, 'w>)>,
    tracts: Vec<(usize, Section<'a, 'w>)>,
    leads: [(SiteId, Section<'a, 'w>); 2],
}

/// Reads the heart; `None` if a complaint was made that leaves none. `leads` are the tables of both channels, atrial first, with the
/// sites at which they pace: they too can tell the tissue there its strength–duration curve.
pub(super) fn read<'a, 'w>(
    heart: &'w Section<'a, 'w>,
    leads: [(SiteId, Section<'a, 'w>); 2],
    folder: &Path,
) -> Result<Option<HeartPart>, Refusal> {
    let va = heart.choice("anatomy") == Some("plain-va");
    let (mut sites, mut tracts, mut cells) = (SITES, if va { TRACTS_VA } else { TRACTS }, CELLS);
    let places = Places {
        heart,
        sites: heart.open_named("site", "site", &SITE_NAMES, &SITE),
        tracts: heart.open_named("tract", "tract", &TRACT_NAMES, &TRACT),
        leads,
    };
    let off = read_cells(heart, &mut cells);
    for (row, table) in &places.sites {
        if let Some(site) = sites.get_mut(*row) {
            read_site(table, site);
        }
    }
    for (site, table) in &places.leads {
        if let Some(tissue) = sites.get_mut(usize::from(site.row())) {
            read_lead(&places, table, usize::from(site.row()), tissue);
        }
    }
    for (row, table) in &places.tracts {
        if let Some(tract) = tracts.get_mut(*row) {
            read_tract(table, tract);
        }
    }
    let foci = read_foci(heart, folder)?;
    let anatomy = match Anatomy::new(sites, tracts, cells) {
        Ok(anatomy) => anatomy,
        Err(error) => {
            heart.complain(complaint(&error, |parameter| places.find(&error, parameter)));
            return Ok(None);
        }
    };
    check_foci(heart, &anatomy, &foci);
    Ok(Some(HeartPart { anatomy, foci, off }))
}

fn read_cells(heart: &Section<'_, '_>, cells: &mut [CellParams; 3]) -> Vec<(CellId, Range<usize>)> {
    let mut off = Vec::new();
    for ((row, name), cell) in (0_u8..).zip(CELL_NAMES).zip(cells) {
        match heart.read(name, interval_or_off) {
            Some(Some(interval)) => cell.interval = interval,
            Some(None) => off.push((CellId::new(row), heart.place(name))),
            None => {}
        }
    }
    off
}

fn read_site(table: &Section<'_, '_>, site: &mut SiteParams) {
    set(&mut site.refractory, table.read("refractory", span));
    set(&mut site.relative, table.read("relative", span));
    set(&mut site.rheobase, table.read("rheobase", millivolts));
    set(&mut site.chronaxie, table.read("chronaxie", span));
    set(&mut site.latency, table.read("latency", span));
}

fn read_lead(places: &Places<'_, '_>, lead: &Section<'_, '_>, row: usize, site: &mut SiteParams) {
    let tissue = places.sites.iter().find(|(site, _)| *site == row).map(|(_, table)| table);
    for key in ["rheobase", "chronaxie"] {
        if let Some(tissue) = tissue.filter(|tissue| tissue.has(key) && lead.has(key)) {
            let message = format!("{key} of the tissue at the electrode is given twice");
            let complaint = Complaint::new(message).at(lead.place(key), "here");
            lead.complain(complaint.at(tissue.place(key), "and here").help("keep one of them"));
        }
    }
    set(&mut site.rheobase, lead.read("rheobase", millivolts));
    set(&mut site.chronaxie, lead.read("chronaxie", span));
}

fn read_tract(table: &Section<'_, '_>, tract: &mut TractParams) {
    set(&mut tract.gate, table.share_millionths("gate").and_then(|share| Fraction::from_millionths(share).ok()));
    for (key, way) in [("forward", &mut tract.forward), ("backward", &mut tract.backward)] {
        let title = format!("{} {key}", table.title());
        read_way(&table.open_as(key, &WAY, title), way);
    }
}

fn read_way(table: &Section<'_, '_>, way: &mut Way) {
    set(&mut way.base, table.read("base", span));
    set(&mut way.gain, table.read("gain", span));
    set(&mut way.theta, table.read("theta", span));
    if let Some(tau) = table.read("tau", span) {
        match Decay::new(tau) {
            Ok(decay) => way.tau = Some(decay),
            Err(error) => table.complain(complaint(&error, |parameter| Written::new(table, parameter))),
        }
    }
    set(&mut way.conceal, table.share_millionths("conceal").and_then(|share| Fraction::from_millionths(share).ok()));
    set(&mut way.shut, table.switch("shut"));
}

impl Places<'_, '_> {
    /// Where a parameter of the row that an error names was written.
    fn find(&self, error: &ParamError, parameter: &str) -> Written {
        let row = usize::from(error.row.unwrap_or(0));
        let of = |tables: &[(usize, Section<'_, '_>)], kind: &str, names: &[&str], key: &str| {
            let name = names.get(row).copied().unwrap_or_default();
            match tables.iter().find(|(site, _)| *site == row) {
                Some((_, table)) => Written::new(table, key),
                None => Written { place: self.heart.span(), name: format!("[heart.{kind}.{name}] {key}"), text: None },
            }
        };
        let cell = |row: usize| CELL_NAMES.get(row).copied().unwrap_or_default();
        // A conflict of a cell with its site's tissue counts rows of cells.
        let of_cell = error.parameter == "interval";
        match parameter.split_once('.') {
            Some((way, key)) => {
                let table = self.tracts.iter().find(|(tract, _)| *tract == row).map(|(_, table)| table);
                match table.filter(|table| table.has(way)) {
                    Some(table) => Written::new(&table.open_as(way, &WAY, format!("{} {way}", table.title())), key),
                    None => of(&self.tracts, "tract", &TRACT_NAMES, parameter),
                }
            }
            None if parameter == "interval" && of_cell => Written::new(self.heart, cell(row)),
            None if parameter == "interval" => Written::new(self.heart, "sinus"),
            None if of_cell => {
                let site = CELLS.get(row).map_or(0, |cell| usize::from(cell.site.row()));
                let moved = ParamError::new(error.parameter, error.problem).in_row(u8::try_from(site).unwrap_or(0));
                self.find_site(&moved, parameter)
            }
            None => self.find_site(error, parameter),
        }
    }

    fn find_site(&self, error: &ParamError, parameter: &str) -> Written {
        let row = usize::from(error.row.unwrap_or(0));
        let lead = self.leads.iter().find(|(site, table)| usize::from(site.row()) == row && table.has(parameter));
        match (self.sites.iter().find(|(site, _)| *site == row), lead) {
            (Some((_, table)), _) if table.has(parameter) => Written::new(table, parameter),
            (_, Some((_, table))) => Written::new(table, parameter),
            _ => {
                let name = SITE_NAMES.get(row).copied().unwrap_or_default();
                Written { place: self.heart.span(), name: format!("[heart.site.{name}] {parameter}"), text: None }
            }
        }
    }
}

fn read_foci(heart: &Section<'_, '_>, folder: &Path) -> Result<Vec<Focus>, Refusal> {
    let mut foci = Vec::new();
    if let Some(replay) = read_replay(heart, folder)? {
        foci.push(replay);
    }
    for table in heart.open_each("premature", &PREMATURE) {
        for key in ["site", "coupling"] {
            if !table.has(key) {
                table.missing(key);
            }
        }
        let site = table.name("site", "site", &SITE_NAMES).and_then(|row| u8::try_from(row).ok()).map(SiteId::new);
        let after = table.name("after", "site", &SITE_NAMES).and_then(|row| u8::try_from(row).ok()).map(SiteId::new);
        let every = table.whole("every").unwrap_or(1);
        let every = u32::try_from(every).unwrap_or(u32::MAX);
        if let (Some(site), Some(coupling)) = (site, table.read("coupling", span)) {
            foci.push(Focus::Premature { site, after: after.unwrap_or(site), coupling, every });
        }
    }
    Ok(foci)
}

fn read_replay(heart: &Section<'_, '_>, folder: &Path) -> Result<Option<Focus>, Refusal> {
    let table = heart.has_table("replay").then(|| heart.open("replay", &REPLAY));
    let (file, repeat) = match &table {
        Some(table) => {
            if !table.has("file") {
                table.missing("file");
            }
            (table.text("file"), table.switch("repeat").unwrap_or(false))
        }
        None => (heart.text("replay"), false),
    };
    let Some(file) = file else { return Ok(None) };
    let path = folder.join(file.value);
    if !path.is_file() {
        let message = format!("there is no file {}", path.display());
        let complaint = Complaint::new(message).at(file.span, "named here");
        heart.complain(complaint.help("the path counts from the folder of the scenario file"));
        return Ok(None);
    }
    let intervals = replay::read(&path)?;
    if heart.has("sinus") {
        let complaint = Complaint::new("the series takes the place of the sinus cell: both cannot be given");
        let complaint = complaint.at(heart.place("sinus"), "never used");
        heart.complain(complaint.at(heart.place("replay"), "takes its place"));
    }
    Ok(Some(Focus::Replay { intervals, repeat }))
}

fn check_foci(heart: &Section<'_, '_>, anatomy: &PlainAnatomy, foci: &[Focus]) {
    let tables = heart.open_each("premature", &PREMATURE);
    let replays = foci.iter().filter(|focus| matches!(focus, Focus::Replay { .. })).count();
    for (row, focus) in foci.iter().enumerate() {
        let table = row.checked_sub(replays).and_then(|row| tables.get(row));
        if let Err(error) = Heart::<5, 4, 3, 1>::new(anatomy, &[focus.params()], Instant::ZERO) {
            heart.complain(complaint(&error, |parameter| match table {
                Some(table) => Written::new(table, if parameter == "trigger" { "after" } else { parameter }),
                None => Written::new(heart, "replay"),
            }));
        }
    }
    if foci.len() > MOST_FOCI {
        let message = format!("{} foci, and at most {MOST_FOCI} fit", foci.len());
        heart.complain(Complaint::new(message).at(heart.place("premature"), "too many"));
    }
}
