//! Marks of the strip: single ticks while there is room, columns of shares beyond.

use super::{WIDTH, share};
use crate::report::facts::Facts;
use crate::report::ladder;
use crate::report::svg::Svg;
use crate::report::text::short;
use phase4::audit::Outcome;
use phase4::base::{CauseKind, Instant, Kind};
use std::fmt::Write;

/// Units of the drawing per pixel of a common screen.
const FINE: f64 = 10.0;
/// A beat needs this much room to be a tick of its own.
const ROOM: f64 = 3.0;
/// Most single marks of findings; beyond, columns.
const MOST_MARKS: usize = 400;
const MOST_UNDECIDED: usize = 120;
const MOST_LABELS: usize = 12;

/// Instants of ventricular activations that no pulse began.
pub(super) fn own_beats(facts: &Facts<'_>) -> Vec<Instant> {
    let Some(site) = facts.beat_site() else { return Vec::new() };
    let beats = facts.heart.activations.iter().filter(|activation| activation.site == site);
    beats.filter(|beat| facts.heart.origin(beat).kind != CauseKind::Pulse).map(|beat| beat.at).collect()
}

pub(super) fn draw(facts: &Facts<'_>, own: &[Instant]) -> Svg {
    let mut svg = Svg::new();
    for (from, to) in ladder::drawn(facts) {
        let (left, right) = (share(facts, from) * WIDTH * FINE, share(facts, to) * WIDTH * FINE);
        svg.rect("drawn", (left, 0.0), (right - left).max(FINE), 62.0);
    }
    let pulses: Vec<Instant> = facts.pulses.iter().map(|pulse| pulse.at).collect();
    let many = (own.len() + pulses.len()) as f64 * ROOM > WIDTH;
    if many {
        columns(&mut svg, facts, own, &pulses);
    } else {
        svg.raw_path("ns up", &tick_path(facts, own, 6.0, 28.0));
        svg.raw_path("ns down", &tick_path(facts, &pulses, 34.0, 56.0));
    }
    broken(&mut svg, facts);
    svg
}

fn tick_path(facts: &Facts<'_>, instants: &[Instant], top: f64, bottom: f64) -> String {
    instants.iter().fold(String::new(), |mut path, at| {
        let _ = write!(path, "M{:.0} {top}V{bottom}", share(facts, *at) * WIDTH * FINE);
        path
    })
}

/// One column per two pixels: the share of own beats up, of pulses down.
fn columns(svg: &mut Svg, facts: &Facts<'_>, own: &[Instant], pulses: &[Instant]) {
    let columns = (WIDTH / 2.0) as usize;
    let mut counts = vec![(0_u32, 0_u32); columns];
    let place = |at: Instant| ((share(facts, at) * columns as f64) as usize).min(columns - 1);
    for at in own {
        if let Some((beats, _)) = counts.get_mut(place(*at)) {
            *beats += 1;
        }
    }
    for at in pulses {
        if let Some((_, pulses)) = counts.get_mut(place(*at)) {
            *pulses += 1;
        }
    }
    let (mut up, mut down) = (String::new(), String::new());
    for (column, (beats, pulses)) in counts.into_iter().enumerate().filter(|(_, (beats, pulses))| beats + pulses > 0) {
        let x = column as f64 * 2.0 * FINE + FINE;
        let share = f64::from(beats) / f64::from(beats + pulses);
        if beats > 0 {
            let _ = write!(up, "M{x:.0} 30v-{:.0}", 4.0 + 22.0 * share);
        }
        if pulses > 0 {
            let _ = write!(down, "M{x:.0} 32v{:.0}", 4.0 + 22.0 * (1.0 - share));
        }
    }
    svg.raw_path("ns up col", &up);
    svg.raw_path("ns down col", &down);
}

/// Broken pulses, longer than the others; drawn last and never thinned: what shares a pixel shares a mark and a pin with its numbers.
fn broken(svg: &mut Svg, facts: &Facts<'_>) {
    let mut places: Vec<u64> =
        facts.numbered_findings().map(|(_, case)| (share(facts, case.place) * WIDTH * FINE) as u64).collect();
    if places.len() > MOST_MARKS {
        // One mark per two pixels: the pins below carry the numbers.
        places.iter_mut().for_each(|place| *place = *place / 20 * 20 + 10);
    }
    places.sort_unstable();
    places.dedup();
    let path = places.iter().fold(String::new(), |mut path, place| {
        let _ = write!(path, "M{place} 32V61");
        path
    });
    svg.raw_path("ns found", &path);
}

/// Undecided places in per cent: left end and width, each as written, neighbours joined.
pub(super) fn undecided(facts: &Facts<'_>) -> Vec<(String, String)> {
    let cases = facts.cases.iter().filter(|case| case.judgement.outcome == Outcome::Undecided);
    let mut spans: Vec<(f64, f64)> = Vec::new();
    let count = facts.cases.iter().filter(|case| !case.is_decided()).count();
    // The fewer marks are allowed, the farther apart places may lie and still count as one.
    let near = if count > MOST_UNDECIDED { 1.0 / MOST_UNDECIDED as f64 } else { 0.004 };
    for place in cases.map(|case| share(facts, case.judgement.at)) {
        match spans.last_mut() {
            Some((_, end)) if place - *end <= near => *end = place,
            _ => spans.push((place, place)),
        }
    }
    spans.into_iter().map(|(from, to)| (format!("{:.2}", from * 100.0), format!("{:.2}", (to - from) * 100.0))).collect()
}

/// Words over the strip for steps, as many as have room, each with its place in per cent.
pub(super) fn step_labels(facts: &Facts<'_>) -> Vec<(String, String)> {
    let steps = facts.run.records.iter().filter(|record| record.kind == Kind::Step);
    let mut labels = Vec::new();
    let mut free_from = 0.0;
    for record in steps {
        let Some(text) = facts.run.steps.get(usize::from(record.place)) else { continue };
        let words = short(&text.act, 28);
        let half = 3.6 * words.chars().count() as f64;
        let x = share(facts, record.at) * WIDTH;
        let middle = x.clamp(half, (WIDTH - half).max(half));
        if middle - half >= free_from && labels.len() < MOST_LABELS && (middle - x).abs() < half {
            labels.push((format!("{:.2}", middle / WIDTH * 100.0), words));
            free_from = middle + half + 12.0;
        }
    }
    labels
}
