//! The same seconds as a table.

use super::excerpt::{Excerpt, Frame};
use crate::report::facts::{Answer, Facts, Sight, reason_word};
use crate::report::number::{at, at_exact, count, ms, peak, signed_exact};
use crate::report::sign::{State, sign_and_word};
use crate::report::text::short;
use crate::report::waves::{WaveEnd, block_word};
use maud::{Markup, html};
use phase4::audit::{How, Judgement, Outcome};
use phase4::base::{CauseKind, Channel, Instant, Kind};

/// Rows beyond this one are counted.
const MOST: usize = 120;

/// A row: when, what, what became of it, which rule.
struct Row {
    at: Instant,
    what: String,
    became: String,
    judged: Vec<Judgement>,
}

pub(super) fn table(facts: &Facts<'_>, excerpt: &Excerpt) -> Markup {
    let rows = rows(facts, &excerpt.frame);
    let left_out = rows.len().saturating_sub(MOST);
    html! {
        details {
            summary { "The same seconds as a table (" (count(rows.len() as u64)) " rows)" }
            div.scroll tabindex="0" role="region" aria-label="Events of these seconds" {
                table.list {
                    thead { tr {
                        th.n scope="col" { "instant, s" }
                        @for head in ["what", "what became of it", "rule"] { th scope="col" { (head) } }
                    } }
                    tbody { @for row in rows.iter().take(MOST) {
                        tr {
                            td.n { (at_exact(facts.run.start, row.at)) }
                            th scope="row" { (row.what) }
                            td.line { (row.became) }
                            td { @for judgement in &row.judged { (sign_and_word(State::of(judgement.outcome))) " " (judgement.rule.code()) " " } }
                        }
                    } }
                }
            }
            @if left_out > 0 { p.cap { "and " (count(left_out as u64)) " more in the log" } }
        }
    }
}

fn rows(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    let mut rows: Vec<Row> = Vec::new();
    rows.extend(steps(facts, frame));
    rows.extend(origins(facts, frame));
    rows.extend(signals(facts, frame));
    rows.extend(pulses(facts, frame));
    rows.extend(missing(facts, frame));
    rows.sort_by_key(|row| row.at);
    rows
}

const fn letter(channel: Channel) -> &'static str {
    match channel {
        Channel::Atrial => "A",
        Channel::Ventricular => "V",
    }
}

fn steps(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    let records = facts.run.records.iter().filter(|record| record.kind == Kind::Step && frame.holds(record.at));
    let act = |place: u8| facts.run.steps.get(usize::from(place)).map_or_else(String::new, |step| short(&step.act, 80));
    let row = |(at, place): (Instant, u8)| Row {
        at,
        what: format!("step {}", u32::from(place) + 1),
        became: act(place),
        judged: Vec::new(),
    };
    records.map(|record| row((record.at, record.place))).collect()
}

/// Beats by what began them, with what became of the wave.
fn origins(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    let heart = &facts.heart;
    let site_name =
        |site: u8| facts.run.names.sites.get(usize::from(site)).map_or_else(|| format!("site {site}"), |name| short(name, 24));
    let beginnings = heart.activations.iter().enumerate().filter(|(place, beat)| beat.root == *place && frame.holds(beat.at));
    beginnings
        .filter(|(_, beat)| beat.cause.kind != CauseKind::Pulse)
        .map(|(place, beat)| {
            let site = site_name(beat.site);
            let what = match beat.cause.kind {
                CauseKind::Own if beat.site == facts.top_site() => format!("{site} fires"),
                CauseKind::Own => format!("escape beat, {site}"),
                CauseKind::Focus => {
                    let name = facts
                        .run
                        .names
                        .foci
                        .get(usize::from(beat.cause.id))
                        .map_or_else(|| "focus".to_owned(), |name| short(name, 24));
                    format!("{name}, {site}")
                }
                _ => format!("ectopic beat, {site}"),
            };
            Row { at: beat.at, what, became: fate(facts, place), judged: Vec::new() }
        })
        .collect()
}

/// What became of everything an activation began.
fn fate(facts: &Facts<'_>, root: usize) -> String {
    let heart = &facts.heart;
    let Some(begin) = heart.activations.get(root) else { return String::new() };
    let reach = begin.at.saturating_add(phase4::base::Span::from_secs(3));
    let mut parts: Vec<String> = Vec::new();
    let beat = facts.beat_site().filter(|site| *site != begin.site);
    let later = heart.activations.get(root + 1..).unwrap_or_default().iter().take_while(|activation| activation.at <= reach);
    if let Some(there) = later.clone().find(|activation| activation.root == root && Some(activation.site) == beat) {
        parts.push(format!("reaches the ventricle {}", at(facts.run.start, there.at)));
    }
    let tract =
        |row: u8| facts.run.names.tracts.get(usize::from(row)).map_or_else(|| format!("tract {row}"), |name| short(name, 30));
    let first = heart.waves.partition_point(|wave| wave_time(wave.end, wave.from) < begin.at);
    let waves = heart.waves.get(first..).unwrap_or_default().iter().take_while(|wave| wave_time(wave.end, wave.from) <= reach);
    for wave in waves.filter(|wave| wave.root == Some(root)) {
        match wave.end {
            WaveEnd::Blocked(reason) => parts.push(format!("blocked in {}: {}", tract(wave.tract), block_word(reason))),
            WaveEnd::Refused(_) => parts.push(format!("ends at the end of {}: the site there was refractory", tract(wave.tract))),
            WaveEnd::Met(when, _) => {
                parts.push(format!("meets another wave in {}, {}", tract(wave.tract), at(facts.run.start, when)))
            }
            WaveEnd::Arrived(_) => {}
        }
    }
    parts.truncate(4);
    parts.join("; ")
}

/// When the record was written with which a wave ended.
const fn wave_time(end: WaveEnd, from: Instant) -> Instant {
    match end {
        WaveEnd::Arrived(at) | WaveEnd::Refused(at) => at,
        WaveEnd::Blocked(_) | WaveEnd::Met(..) => from,
    }
}

fn signals(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    let row = |signal: &crate::report::facts::SignalFact| {
        let judged: Vec<Judgement> = judgements_at(facts, signal.at).filter(|judgement| judgement.how == How::Withheld).collect();
        let read = match signal.sight {
            Sight::Seen => "seen: the pending pulse is withdrawn",
            Sight::Blanked => "in blanking: changes nothing",
            Sight::Refractory => "in refractory: restarts nothing",
            Sight::Small => "too small to be seen",
            Sight::Either => "may be seen or not",
            Sight::Unsensed => "nothing is sensed on this channel",
        };
        let bare = if signal.bare { ", no beat behind it" } else { "" };
        Row {
            at: signal.at,
            what: format!("{} signal {}{bare}", letter(signal.channel), peak(signal.peak.0)),
            became: read.to_owned(),
            judged,
        }
    };
    facts.signals.iter().filter(|signal| frame.holds(signal.at)).map(row).collect()
}

fn pulses(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    let inside = facts.pulses.iter().enumerate().filter(|(_, pulse)| frame.holds(pulse.at));
    inside
        .map(|(place, pulse)| {
            let judged: Vec<Judgement> = judgements_at(facts, pulse.at)
                .filter(|judgement| judgement.seen == Some(pulse.at) && judgement.channel == pulse.channel)
                .collect();
            let mut parts = vec![match pulse.answer {
                Answer::Captured => "captured".to_owned(),
                Answer::NotCaptured(reason, _) => format!("not captured: {}", reason_word(reason)),
                Answer::Unknown => format!("{} {}", crate::report::number::ms(pulse.width), "wide"),
            }];
            let cycle = facts.cycles.partition_point(|cycle| cycle.to < pulse.at);
            if let Some(cycle) =
                facts.cycles.get(cycle).filter(|cycle| cycle.to == pulse.at && facts.channel() == Some(pulse.channel))
            {
                parts.push(format!("{} after the last seen beat or pulse", ms(cycle.span())));
            }
            if let Some(deviation) = judged.iter().find_map(|judgement| judgement.deviation) {
                parts.push(format!("{} from nominal", signed_exact(deviation)));
            }
            Row {
                at: pulse.at,
                what: format!("{} pulse {}", letter(pulse.channel), count(place as u64 + 1)),
                became: parts.join(", "),
                judged,
            }
        })
        .collect()
}

/// Pulses that did not come.
fn missing(facts: &Facts<'_>, frame: &Frame) -> Vec<Row> {
    facts
        .cases
        .iter()
        .filter(|case| case.judgement.outcome == Outcome::Broken && case.judgement.seen.is_none())
        .filter_map(|case| {
            let judgement = case.judgement;
            let due = judgement.window.map_or(judgement.at, |window| window.nominal);
            let became = format!("none came by {}", at(facts.run.start, case.until));
            frame.holds(due).then(|| Row { at: due, what: "pulse due".to_owned(), became, judged: vec![judgement] })
        })
        .collect()
}

fn judgements_at(facts: &Facts<'_>, at: Instant) -> impl Iterator<Item = Judgement> {
    let first = facts.cases.partition_point(|case| case.place < at);
    facts.cases.get(first..).unwrap_or_default().iter().take_while(move |case| case.place == at).map(|case| case.judgement)
}
