//! What was covered: each cell a small picture of its timing window.

use super::facts::Facts;
use super::number::{THIN, count, ms, ms_bare};
use super::page::Section;
use super::text::short;
use crate::run_data::{Coverage, CoverageCell, CoverageEdge, CoverageRow, CoverageState, Need};
use maud::{Markup, html};

/// Rows beyond this one are counted and left out.
const MOST_ROWS: usize = 80;

pub(super) fn section(facts: &Facts<'_>) -> Option<Section> {
    let coverage = facts.run.coverage.as_ref().filter(|_| facts.is_judged())?;
    let side = html! {
        p { "Each box is a small picture of its timing window: filled in the middle when a signal fell well inside and was judged, at its ends when an edge was tried." }
    };
    Some(Section { id: "coverage", name: "Coverage", title: "Coverage".to_owned(), side, body: body(coverage), full: false })
}

fn body(coverage: &Coverage) -> Markup {
    let left_out = coverage.rows.len().saturating_sub(MOST_ROWS);
    html! {
        p.cap id="covsum" { (summary(coverage)) }
        div.scroll tabindex="0" role="region" aria-label="Coverage matrix, scrolls sideways" {
            table.cov aria-describedby="covsum" {
                thead { tr {
                    th scope="col" { span.vh { "window" } }
                    @for column in &coverage.columns { th scope="col" { (short(column, 24)) } }
                } }
                tbody { @for group in coverage.rows.get(..MOST_ROWS).unwrap_or(&coverage.rows).chunk_by(|one, next| one.anchor == next.anchor) {
                    (rows(coverage, group))
                } }
            }
        }
        @if left_out > 0 { p.cap { "and " (count(left_out as u64)) " more rows" } }
        (key())
        div.two {
            @if !coverage.edges.is_empty() { (edges(coverage)) }
            @if !coverage.whole_run.is_empty() { (whole_run(coverage)) }
        }
    }
}

fn summary(coverage: &Coverage) -> String {
    let required: Vec<_> = coverage.edges.iter().filter(|edge| !edge.void).collect();
    let tried = required.iter().filter(|edge| edge.before > 0 && edge.after > 0).count();
    let (hit, all) = (u64::from(coverage.hit), u64::from(coverage.required));
    let share = (hit * 100 + all / 2).checked_div(all).map_or_else(String::new, |share| format!(" ({share} per cent)"));
    let edges =
        if required.is_empty() { String::new() } else { format!(" Edges: {tried} of {} tried from both sides.", required.len()) };
    format!(
        "{} of {} required cells hit{share}.{edges} Coverage alone never changes the verdict, unless the scenario asks for a cell by name.",
        count(hit),
        count(all)
    )
}

fn rows(coverage: &Coverage, group: &[CoverageRow]) -> Markup {
    let anchor = group.first().map_or("", |row| row.anchor.as_str());
    html! {
        tr { th scope="rowgroup" colspan=(coverage.columns.len() + 1) { (short(anchor, 60)) } }
        @for row in group {
            tr {
                th.st1 scope="row" { (short(&row.window, 40)) span.zero { ", " (ms_bare(row.from)) " to " (ms(row.to)) } }
                @for cell in row.cells.iter().take(coverage.columns.len()) { td { (picture(cell)) } }
            }
        }
    }
}

fn picture(cell: &CoverageCell) -> Markup {
    let (symbol, words, hits): (&str, &str, u32) = match (cell.state, cell.need) {
        (CoverageState::Hit, _) => ("#c-core", "core hit", cell.core),
        (CoverageState::BandOnly, _) => ("#c-band", "band only", cell.band),
        (CoverageState::Empty, Need::Required) => ("#c-req", "required, not hit", 0),
        (CoverageState::Empty, Need::Optional) => ("#c-opt", "optional, not tried", 0),
        (CoverageState::Void, _) => ("#c-void", "void", 0),
        (CoverageState::NoStimulus, _) => ("#c-none", "no stimulus", 0),
        (CoverageState::Impossible, _) | (CoverageState::Empty, Need::Impossible) => return html! { span.vh { "impossible" } },
    };
    html! {
        span.cell {
            svg.cw viewBox="0 0 26 12" aria-hidden="true" { use href=(symbol) {} }
            small { @if hits > 0 { (compact(hits)) } }
        }
        span.vh { (words) }
    }
}

/// A count that fits beside its cell.
fn compact(hits: u32) -> String {
    match hits {
        0..1_000 => hits.to_string(),
        1_000..1_000_000 => format!("{}{THIN}k", hits / 1_000),
        _ => format!("{}{THIN}M", hits / 1_000_000),
    }
}

fn key() -> Markup {
    let entries = [
        ("#c-core", "core hit, with count"),
        ("#c-band", "band only: too near an end, proves nothing"),
        ("#c-req", "required, not hit"),
        ("#c-opt", "optional, not tried"),
        ("#c-void", "void: too narrow or absent under this program"),
        ("#c-none", "no stimulus: the bench cannot make it yet"),
    ];
    html! {
        ul.key {
            @for (symbol, words) in entries {
                li { svg.cw viewBox="0 0 26 12" aria-hidden="true" { use href=(symbol) {} } (words) }
            }
            li { "blank: impossible" }
        }
    }
}

fn edges(coverage: &Coverage) -> Markup {
    let mut columns: Vec<&str> = Vec::new();
    for edge in &coverage.edges {
        if !columns.contains(&edge.column.as_str()) {
            columns.push(&edge.column);
        }
    }
    let mut anchors: Vec<&str> = Vec::new();
    for edge in &coverage.edges {
        if !anchors.contains(&edge.anchor.as_str()) {
            anchors.push(&edge.anchor);
        }
    }
    html! {
        div {
            table.cov {
                caption { "Edges, each from both sides" }
                thead { tr { th scope="col" { span.vh { "edge" } } @for column in &columns { th scope="col" { (short(column, 24)) } } } }
                tbody { @for anchor in anchors.iter().take(MOST_ROWS) { (edge_rows(coverage, anchor, &columns)) } }
            }
        }
    }
}

fn edge_rows(coverage: &Coverage, anchor: &str, columns: &[&str]) -> Markup {
    let edges: Vec<&CoverageEdge> = coverage.edges.iter().filter(|edge| edge.anchor == anchor).take(MOST_ROWS).collect();
    let mut names: Vec<&str> = Vec::new();
    for edge in &edges {
        if !names.contains(&edge.edge.as_str()) {
            names.push(&edge.edge);
        }
    }
    html! {
        tr { th scope="rowgroup" colspan=(columns.len() + 1) { (short(anchor, 60)) } }
        @for name in names {
            tr {
                th.st1 scope="row" {
                    (short(name, 40))
                    @if let Some(edge) = edges.iter().find(|edge| edge.edge == name) { span.zero { ", " (ms(edge.at)) } }
                }
                @for column in columns {
                    td { @if let Some(edge) = edges.iter().find(|edge| edge.edge == name && edge.column == *column) { (edge_picture(edge)) } }
                }
            }
        }
    }
}

fn edge_picture(edge: &CoverageEdge) -> Markup {
    let words = match (edge.void, edge.before > 0, edge.after > 0) {
        (true, ..) => "void",
        (_, true, true) => "tried from both sides",
        (_, true, false) => "tried from before only",
        (_, false, true) => "tried from after only",
        _ => "not tried",
    };
    html! {
        span.cell { svg.cw viewBox="0 0 26 12" aria-hidden="true" {
            @if edge.void { use href="#c-void" {} } @else {
                use href="#c-req" {}
                @if edge.before > 0 { use href="#c-left" {} }
                @if edge.after > 0 { use href="#c-right" {} }
            }
        } }
        span.vh { (words) }
    }
}

fn whole_run(coverage: &Coverage) -> Markup {
    html! {
        div {
            table {
                caption { "Once in the whole run" }
                tbody { @for (name, hits) in coverage.whole_run.iter().take(MOST_ROWS) {
                    tr {
                        th.thin scope="row" { (short(name, 80)) }
                        td.st { @if *hits > 0 { "hit" } @else { span.st.not { "not hit" } } }
                    }
                } }
            }
        }
    }
}
