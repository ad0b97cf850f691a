//! `[audit] require`: coverage cells that a run must hit.

use super::walk::{Section, Text};
use crate::refusal::{Complaint, list, nearest};
use phase4::audit::AuditSettings;
use phase4::audit::coverage::{After, CellId, CellState, Column, Coverage, Need, Stretch, WholeRun};
use phase4::base::Program;

/// A coverage cell that must be hit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Required {
    /// Of the table.
    Cell(CellId),
    /// Of the run as a whole.
    Whole(WholeRun),
}

impl Required {
    /// True if it was hit.
    pub fn is_hit(self, coverage: &Coverage) -> bool {
        match self {
            Self::Cell(cell) => coverage.hits(cell).0 > 0,
            Self::Whole(cell) => coverage.whole_run().any(|(one, hits)| one == cell && hits > 0),
        }
    }
}

/// Reads the cells asked for. One that can never be hit would leave every run undecided: it is refused.
pub(super) fn read(section: &Section<'_, '_>, program: &Program, settings: &AuditSettings) -> Vec<Required> {
    let coverage = Coverage::new(program, settings);
    section.texts("require").iter().filter_map(|text| read_cell(section, text, &coverage)).collect()
}

fn read_cell(section: &Section<'_, '_>, text: &Text<'_>, coverage: &Coverage) -> Option<Required> {
    if let Some(whole) = WholeRun::ALL.into_iter().find(|whole| whole.code() == text.value) {
        return Some(Required::Whole(whole));
    }
    let Some(cell) = CellId::from_name(text.value, coverage.channel()) else {
        section.complain(no_such(text, coverage));
        return None;
    };
    let why = if coverage.need(cell) == Need::Impossible || !coverage.cells().any(|one| one == cell) {
        "this program has no such cell, or nothing can hit it"
    } else {
        match coverage.state(cell) {
            CellState::Void => "too narrow to be hit under this program and its tolerance",
            CellState::NoStimulus => "the bench cannot bring this about yet",
            CellState::Impossible => "nothing can hit it",
            _ => return Some(Required::Cell(cell)),
        }
    };
    section.complain(Complaint::new(format!("{} cannot be required", text.value)).at(text.span.clone(), why));
    None
}

fn no_such(text: &Text<'_>, coverage: &Coverage) -> Complaint {
    let channel = coverage.channel();
    let names: Vec<String> = coverage.cells().map(|cell| cell.name(channel).to_string()).collect();
    let all = names.iter().map(String::as_str).chain(WholeRun::ALL.map(WholeRun::code));
    let label = match nearest(text.value, all) {
        Some(name) => format!("did you mean \"{name}\"?"),
        None => "not the name of a cell".to_owned(),
    };
    let help = format!(
        "a cell is named such as \"VS/alert/PVC\": what the cycle begins with ({}), the window ({}), the event ({}); \
         or it is of the whole run ({})",
        list(After::ALL.map(|after| after.code(channel))),
        list(coverage.rows().map(|row| row.stretch).fold(Vec::new(), distinct).into_iter().map(Stretch::code)),
        list(Column::ALL.map(|column| column.code(channel))),
        list(WholeRun::ALL.map(WholeRun::code)),
    );
    Complaint::new(format!("there is no coverage cell \"{}\"", text.value)).at(text.span.clone(), label).help(help)
}

fn distinct(mut seen: Vec<Stretch>, next: Stretch) -> Vec<Stretch> {
    if !seen.contains(&next) {
        seen.push(next);
    }
    seen
}
