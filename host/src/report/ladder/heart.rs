//! Waves, where they end, and where they begin.

use super::canvas::Canvas;
use super::layout::Tier;
use crate::report::text::short;
use crate::report::waves::{Activation, Wave, WaveEnd};
use phase4::base::{CauseKind, Instant, Span};

/// How long before the frame a wave may have set out and still reach into it: far more than any tract takes.
const REACH: Span = Span::from_secs(3);
/// Distance of a blocking bar from its gate.
const OFF_GATE: f64 = 5.0;

/// What a site's mark means.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Origin {
    /// The sinus node, or a series that stands in for it.
    Sinus,
    /// A cell further down that was left to itself.
    Escape,
    /// A focus or the script.
    Ectopic(String),
}

/// What began here, if something did.
pub(super) fn origin(canvas: &Canvas<'_>, activation: &Activation) -> Option<Origin> {
    let top = activation.site == canvas.facts.top_site();
    match activation.cause.kind {
        CauseKind::Own if top => Some(Origin::Sinus),
        CauseKind::Own => Some(Origin::Escape),
        CauseKind::Focus if top => Some(Origin::Sinus),
        CauseKind::Focus => {
            let name = canvas.facts.run.names.foci.get(usize::from(activation.cause.id));
            Some(Origin::Ectopic(name.map_or_else(|| "ectopic".to_owned(), |name| short(name, 20))))
        }
        CauseKind::Script => Some(Origin::Ectopic("ectopic".to_owned())),
        CauseKind::Conducted | CauseKind::Pulse | CauseKind::None => None,
    }
}

/// Draws the heart.
pub(super) fn draw(canvas: &mut Canvas<'_>) {
    let facts = canvas.facts;
    let mut met: Vec<(u8, Instant)> = Vec::new();
    for wave in &facts.heart.waves {
        if let Some(tier) = canvas.layout.tiers.iter().find(|tier| tier.tract == wave.tract).copied() {
            draw_wave(canvas, &tier, wave, &mut met);
        }
    }
    let from = facts.run.start.as_micros().saturating_add(canvas.frame.from.max(0.0) as u64);
    let first = facts.heart.activations.partition_point(|activation| activation.at.as_micros() < from);
    for activation in facts.heart.activations.get(first..).unwrap_or_default() {
        if !canvas.frame.holds(activation.at) {
            break;
        }
        draw_origin(canvas, activation);
    }
}

/// When a wave was over, as far as that is known.
fn ended(wave: &Wave, tier: &Tier) -> Instant {
    match wave.end {
        WaveEnd::Arrived(at) | WaveEnd::Refused(at) | WaveEnd::Met(at, _) => at,
        WaveEnd::Blocked(_) => wave.from.saturating_add(tier.shape.forward_base.max(tier.shape.backward_base)),
    }
}

fn draw_wave(canvas: &mut Canvas<'_>, tier: &Tier, wave: &Wave, met: &mut Vec<(u8, Instant)>) {
    let ended = ended(wave, tier);
    if !canvas.frame.meets(wave.from, ended) || wave.from.saturating_add(REACH) < ended {
        return;
    }
    let (x, entry) = (canvas.frame.x(wave.from), if wave.backward { tier.bottom } else { tier.top });
    let exit = if wave.backward { tier.top } else { tier.bottom };
    match wave.end {
        WaveEnd::Arrived(at) => canvas.line("wave", (x, entry), (canvas.frame.x(at), exit)),
        WaveEnd::Refused(at) => {
            let inside = if wave.backward { exit + 3.0 } else { exit - 3.0 };
            canvas.line("hid", (x, entry), (canvas.frame.x(at), inside));
            stop(canvas, canvas.frame.x(at), inside);
        }
        WaveEnd::Blocked(_) => draw_blocked(canvas, tier, wave, (x, entry)),
        WaveEnd::Met(at, part) => {
            let place = (canvas.frame.x(at), tier.y(part));
            canvas.line("wave", (x, entry), place);
            if !met.contains(&(wave.tract, at)) && canvas.has_room(place.0, 6.0) {
                met.push((wave.tract, at));
                let (x, y) = place;
                canvas.line("stop", (x - 5.0, y - 5.0), (x + 5.0, y + 5.0));
                canvas.line("stop", (x - 5.0, y + 5.0), (x + 5.0, y - 5.0));
                canvas.name("collision", x, y + 4.0, 11.0);
            }
        }
    }
}

/// The part that entered and did not come out, and the bar across it before the gate.
fn draw_blocked(canvas: &mut Canvas<'_>, tier: &Tier, wave: &Wave, (x, entry): (f64, f64)) {
    let gate = tier.gate_y();
    let end =
        if wave.backward { (gate + OFF_GATE).min(tier.bottom - OFF_GATE) } else { (gate - OFF_GATE).max(tier.top + OFF_GATE) };
    let part = (end - entry).abs() / (tier.bottom - tier.top);
    let delay = if wave.backward { tier.shape.backward_base } else { tier.shape.forward_base };
    let there = x + part * delay.as_micros() as f64 * canvas.frame.per_ms() / 1_000.0;
    canvas.line("hid", (x, entry), (there, end));
    stop(canvas, there, end);
    if canvas.has_room(there, 6.0) {
        canvas.name("blocked", there, end - 4.0, 10.0);
    }
}

fn stop(canvas: &mut Canvas<'_>, x: f64, y: f64) {
    if canvas.has_room(x, 6.0) {
        canvas.line("stop", (x - 5.0, y), (x + 5.0, y));
    }
}

fn draw_origin(canvas: &mut Canvas<'_>, activation: &Activation) {
    let (Some(origin), Some(y)) = (origin(canvas, activation), canvas.layout.site_y(activation.site)) else { return };
    let x = canvas.frame.x(activation.at);
    if !canvas.has_room(x, 6.5) {
        return;
    }
    canvas.labels.keep_off(x - 6.0, x + 6.0, y - 6.0, y + 6.0);
    match &origin {
        Origin::Sinus => canvas.svg.circle("org", (x, y), 3.2),
        Origin::Escape => {
            canvas.svg.circle("orgo", (x, y), 4.6);
            canvas.name("escape", x, y - 7.0, 8.0);
        }
        Origin::Ectopic(name) => {
            canvas.svg.shape("orgo", &[(x, y - 5.5), (x + 5.5, y), (x, y + 5.5), (x - 5.5, y)]);
            canvas.name(name, x, y - 7.0, 8.0);
        }
    }
}
