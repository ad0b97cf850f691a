//! What was covered, as the table that is printed and drawn.

use crate::run_data::{Coverage, CoverageCell, CoverageEdge, CoverageRow, CoverageState, Need};
use crate::scenario::{Focus, Scenario};
use phase4::audit::AuditSettings;
use phase4::audit::coverage::{self, CellId, CellState, Column, Row};
use phase4::base::{FocusId, Program, TractId};

/// Nothing covered yet of this program, with what is known of the scenario's heart.
pub fn coverage(scenario: &Scenario, program: &Program, settings: &AuditSettings) -> coverage::Coverage {
    let mut coverage = coverage::Coverage::new(program, settings);
    for (row, tract) in (0_u8..).zip(scenario.heart.anatomy.tracts()) {
        coverage.know_tract(TractId::new(row), tract.from, tract.to);
    }
    for (row, focus) in (0_u8..).zip(&scenario.heart.foci) {
        if matches!(focus, Focus::Replay { .. }) {
            coverage.know_rhythm(FocusId::new(row));
        }
    }
    coverage
}

/// The table of what an auditor's coverage has counted.
pub fn table(counted: &coverage::Coverage) -> Coverage {
    let channel = counted.channel();
    let edge = |edge: coverage::Edge| CoverageEdge {
        anchor: edge.after.line().to_owned(),
        edge: edge.kind.code().to_owned(),
        column: edge.column.code(channel).to_owned(),
        at: edge.at,
        before: edge.before,
        after: edge.beyond,
        void: edge.void,
    };
    let share = counted.score();
    Coverage {
        columns: Column::ALL.iter().map(|column| column.code(channel).to_owned()).collect(),
        rows: counted.rows().map(|row| show_row(counted, &row)).collect(),
        edges: counted.edges().map(edge).collect(),
        whole_run: counted.whole_run().map(|(cell, hits)| (cell.code().to_owned(), hits)).collect(),
        hit: share.hit,
        required: share.required,
    }
}

fn show_row(counted: &coverage::Coverage, row: &Row) -> CoverageRow {
    let cell = |column| {
        let cell = CellId { after: row.after, stretch: row.stretch, column };
        let (core, band) = counted.hits(cell);
        CoverageCell { need: need(counted.need(cell)), state: state(counted.state(cell)), core, band }
    };
    CoverageRow {
        code: format!("{}/{}", row.after.code(counted.channel()), row.stretch.code()),
        anchor: row.after.line().to_owned(),
        window: row.stretch.code().to_owned(),
        from: row.from,
        to: row.to,
        cells: Column::ALL.into_iter().map(cell).collect(),
    }
}

const fn need(need: coverage::Need) -> Need {
    match need {
        coverage::Need::Required => Need::Required,
        coverage::Need::Optional => Need::Optional,
        coverage::Need::Impossible => Need::Impossible,
    }
}

const fn state(state: CellState) -> CoverageState {
    match state {
        CellState::Hit => CoverageState::Hit,
        CellState::BandOnly => CoverageState::BandOnly,
        CellState::Untried => CoverageState::Empty,
        CellState::Void => CoverageState::Void,
        CellState::NoStimulus => CoverageState::NoStimulus,
        CellState::Impossible => CoverageState::Impossible,
    }
}
