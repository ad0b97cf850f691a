//! The row of steps, what lasts of each, and whether gates are open or shut.

use super::canvas::Canvas;
use super::labels::Rank;
use super::layout::{AXIS, Tier};
use crate::report::facts::Facts;
use crate::report::svg::Anchor;
use crate::report::text::short;
use crate::run_data::RunData;
use phase4::base::{Instant, Kind, Record};

/// What a step leaves behind, read from its words.
#[derive(Debug, Clone, PartialEq, Eq)]
enum Lasting {
    /// A tract is shut.
    Shut(u8),
    /// A tract is open again.
    Open(u8),
    /// Something about the cell of this name.
    Cell(String),
    /// Everything is.
    Quiet,
}

fn lasting(run: &RunData, record: &Record) -> Option<Lasting> {
    let step = run.steps.get(usize::from(record.place))?;
    let mut words = step.act.split_whitespace();
    let (verb, name) = (words.next()?, words.next());
    let tract = |name: &str| run.names.tracts.iter().position(|tract| tract == name).and_then(|row| u8::try_from(row).ok());
    match (verb, name) {
        ("shut", Some(name)) => tract(name).map(Lasting::Shut),
        ("open", Some(name)) => tract(name).map(Lasting::Open),
        ("arrest" | "release", Some(name)) => Some(Lasting::Cell(name.to_owned())),
        ("quiet", None) => Some(Lasting::Quiet),
        _ => None,
    }
}

/// When each step acted for the first time: those that change something lastingly before the others.
pub(super) fn first_of_each(facts: &Facts<'_>) -> Vec<Instant> {
    let run = facts.run;
    let steps = run.records.iter().filter(|record| record.kind == Kind::Step && record.a <= 1 && record.at > run.start);
    let (lasting, others): (Vec<&Record>, Vec<&Record>) = steps.partition(|record| lasting(run, record).is_some());
    let mut instants: Vec<Instant> = lasting.into_iter().chain(others).map(|record| record.at).collect();
    instants.dedup();
    instants
}

/// Draws gates and steps.
pub(super) fn draw(canvas: &mut Canvas<'_>) {
    let steps: Vec<&Record> = canvas.facts.run.records.iter().filter(|record| record.kind == Kind::Step).collect();
    gates(canvas, &steps);
    let inside: Vec<&Record> = steps.into_iter().filter(|record| canvas.frame.holds(record.at)).collect();
    for record in inside.iter().take(60) {
        label(canvas, record);
    }
}

/// Gates of tiers that have room for them: dotted while open, a double line while shut.
fn gates(canvas: &mut Canvas<'_>, steps: &[&Record]) {
    let run = canvas.facts.run;
    for tier in &canvas.layout.tiers {
        let changes: Vec<(Instant, bool)> = steps
            .iter()
            .filter_map(|record| match lasting(run, record)? {
                Lasting::Shut(tract) if tract == tier.tract => Some((record.at, true)),
                Lasting::Open(tract) if tract == tier.tract => Some((record.at, false)),
                Lasting::Quiet => Some((record.at, true)),
                _ => None,
            })
            .collect();
        let node = tier.bottom - tier.top > 60.0;
        if node || changes.iter().any(|(_, shut)| *shut) {
            gate(canvas, tier, &changes);
        }
    }
}

fn gate(canvas: &mut Canvas<'_>, tier: &Tier, changes: &[(Instant, bool)]) {
    let y = tier.gate_y();
    let mut from = f64::NEG_INFINITY;
    let mut shut = false;
    let ends = changes.iter().map(|(at, shut)| (canvas.frame.x(*at), *shut)).chain([(f64::INFINITY, false)]);
    for (x, next) in ends.collect::<Vec<_>>() {
        let (left, right) = (from.max(0.0), x.min(canvas.width()));
        if right > left {
            if shut {
                canvas.svg.line("shut", (left, y - 1.5), (right, y - 1.5));
                canvas.svg.line("shut", (left, y + 1.5), (right, y + 1.5));
            } else {
                canvas.svg.line("gate", (left, y), (right, y));
            }
        }
        (from, shut) = (x, next);
    }
}

fn label(canvas: &mut Canvas<'_>, record: &Record) {
    let (number, x) = (usize::from(record.place) + 1, canvas.frame.x(record.at));
    let lasts = lasting(canvas.facts.run, record);
    let reach = lasts.as_ref().and_then(|lasting| reach(canvas, lasting));
    canvas.line("step", (x, AXIS + 6.0), (x, reach.unwrap_or(AXIS + 24.0)));
    let words = canvas.facts.run.steps.get(usize::from(record.place)).map(|step| short(&step.act, 32));
    let (rank, class, text) = match (lasts, words) {
        (Some(_), Some(words)) => (Rank::Origin, "halo", format!("Step {number}: {words}")),
        _ => (Rank::Note, "t2 halo", format!("Step {number}")),
    };
    let places = vec![((x + 6.0, AXIS + 18.0), Anchor::Start), ((x - 6.0, AXIS + 18.0), Anchor::End)];
    canvas.labels.want(rank, class, &text, places);
}

/// How far down the line of a lasting step reaches: through the tiers it touches.
fn reach(canvas: &Canvas<'_>, lasting: &Lasting) -> Option<f64> {
    let tiers = &canvas.layout.tiers;
    let names = &canvas.facts.run.names.sites;
    match lasting {
        Lasting::Shut(tract) | Lasting::Open(tract) => tiers.iter().find(|tier| tier.tract == *tract).map(|tier| tier.bottom),
        Lasting::Cell(name) => {
            let site = names.iter().position(|site| site == name).and_then(|row| u8::try_from(row).ok())?;
            canvas.layout.site_y(site)
        }
        Lasting::Quiet => (!tiers.is_empty()).then_some(canvas.layout.heart.1),
    }
}
