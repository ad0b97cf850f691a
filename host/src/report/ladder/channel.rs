//! What crosses between heart and device on one channel, and the windows into which the program divides the time there.

use super::canvas::Canvas;
use super::labels::Rank;
use super::layout::Block;
use crate::report::facts::{Answer, Cycle, Ending, PulseFact, Sight, SignalFact, reason_word};
use crate::report::number::{count, peak};
use phase4::audit::{How, Judgement, Outcome};
use phase4::base::{Instant, Span};

/// Most pulses and signals drawn in a frame; what is beyond is counted in words.
const MOST: usize = 150;
/// Number of lines under which words on this channel stand.
const LINE: f64 = 14.0;

/// Draws one channel.
pub(super) fn draw(canvas: &mut Canvas<'_>, block: &Block) {
    if block.judged {
        windows(canvas, block);
    }
    let facts = canvas.facts;
    let frame = canvas.frame;
    let signals = facts.signals.iter().filter(|signal| signal.channel == block.channel && frame.holds(signal.at));
    for signal in signals.take(MOST) {
        draw_signal(canvas, block, signal);
    }
    let pulses: Vec<(usize, &PulseFact)> =
        facts.pulses.iter().enumerate().filter(|(_, pulse)| pulse.channel == block.channel && frame.holds(pulse.at)).collect();
    let left_out = pulses.len().saturating_sub(MOST);
    let mut before: Option<f64> = None;
    for (place, pulse) in pulses.into_iter().take(MOST) {
        draw_pulse(canvas, block, place + 1, pulse, before);
        before = Some(frame.x(pulse.at));
    }
    if left_out > 0 {
        let words = format!("and {} more pulses here", count(left_out as u64));
        let place = ((canvas.width() - 6.0, block.off(46.0)), crate::report::svg::Anchor::End);
        canvas.labels.want(Rank::Broken, "tb", &words, vec![place]);
    }
}

fn draw_signal(canvas: &mut Canvas<'_>, block: &Block, signal: &SignalFact) {
    let x = canvas.frame.x(signal.at);
    if !canvas.has_room(x, 5.5) {
        return;
    }
    let near = block.lane_near();
    let must = match signal.sight {
        Sight::Seen | Sight::Either => true,
        // Without a device it is one that a device could see.
        Sight::Unsensed => !canvas.facts.is_judged(),
        Sight::Blanked | Sight::Refractory | Sight::Small => false,
    };
    // A signal that changes nothing does not reach the lane and has no triangle.
    let (top, bottom) = (block.off(1.0), if must { near } else { near - 12.0 * block.down });
    canvas.svg.line(if signal.bare { "seen bare" } else { "seen" }, (x, top), (x, bottom));
    canvas.labels.keep_off(x - 1.5, x + 1.5, top.min(bottom), top.max(bottom));
    if must {
        let base = near - 24.0 * block.down;
        canvas.svg.shape("orgo", &[(x - 5.0, base), (x + 5.0, base), (x, base + 8.0 * block.down)]);
        canvas.labels.keep_off(x - 6.0, x + 6.0, base.min(base + 8.0 * block.down), base.max(base + 8.0 * block.down));
    }
    if signal.bare {
        let places = canvas.beside(x, block.off(16.0) + 4.0, 8.0);
        canvas.labels.want(Rank::Origin, "t2", &peak(signal.peak.0), places);
    }
}

fn draw_pulse(canvas: &mut Canvas<'_>, block: &Block, number: usize, pulse: &PulseFact, before: Option<f64>) {
    let x = canvas.frame.x(pulse.at);
    if !canvas.has_room(x, 7.5) {
        return;
    }
    let (edge, near) = (block.edge, block.lane_near());
    let far = |distance: f64| edge + block.down * distance;
    let captured = !matches!(pulse.answer, Answer::NotCaptured(..));
    if captured {
        canvas.svg.line("pul", (x, far(8.0)), (x, near));
        canvas.svg.shape("pulf", &[(x - 5.5, far(11.0)), (x, far(1.0)), (x + 5.5, far(11.0))]);
    } else {
        canvas.svg.line("pul", (x, far(17.0)), (x, near));
        canvas.svg.shape("pulo", &[(x - 5.5, far(17.0)), (x, far(7.0)), (x + 5.5, far(17.0))]);
        canvas.svg.line("pul", (x - 7.0, far(4.0)), (x + 7.0, far(4.0)));
    }
    let (top, bottom) = (far(1.0).min(near), far(1.0).max(near));
    canvas.labels.keep_off(x - 1.5, x + 1.5, top, bottom);
    canvas.labels.keep_off(x - 7.0, x + 7.0, far(1.0).min(far(17.0)), far(1.0).max(far(17.0)));
    let mut lines = vec![(0.0, format!("pulse {}", count(number as u64)))];
    if let Answer::NotCaptured(reason, _) = pulse.answer {
        lines.push((LINE, "not captured:".to_owned()));
        lines.push((2.0 * LINE, reason_word(reason).to_owned()));
    }
    // Above the heart the lines stand on the far side of the triangle as well, which is upwards there.
    let height = (lines.len() - 1) as f64 * LINE;
    let y = if block.down > 0.0 { far(17.0) } else { far(13.0) - height };
    let crowded = before.is_some_and(|before| x - before < 24.0);
    if !crowded {
        let places = canvas.beside(x, y, 11.0);
        canvas.labels.want_lines(Rank::Number, "td", lines, places);
    }
}

/// One bar per cycle, cut by the next seen beat or pulse; what is overdue in its own colour.
fn windows(canvas: &mut Canvas<'_>, block: &Block) {
    let facts = canvas.facts;
    let Some(program) = facts.run.program else { return };
    let settings = *program.settings();
    let senses = program.senses() == Some(block.channel);
    let first = facts.cycles.partition_point(|cycle| canvas.frame.time(cycle.to) < canvas.frame.from);
    for cycle in facts.cycles.get(first..).unwrap_or_default().iter().take(4 * MOST) {
        if canvas.frame.time(cycle.from) > canvas.frame.to {
            break;
        }
        let interval = if cycle.begins == Ending::Seen { program.escape_after_sense() } else { settings.lower };
        let spans = if senses {
            vec![
                ("blank", Span::ZERO, settings.blanking),
                ("refr", settings.blanking, settings.refractory),
                ("alert", settings.refractory, interval.ceil()),
            ]
        } else {
            vec![("refr all", Span::ZERO, interval.ceil())]
        };
        for (class, from, to) in spans {
            bar(canvas, block, class, cycle, cycle.from.saturating_add(from), cycle.from.saturating_add(to));
        }
    }
    overdue(canvas, block);
}

fn bar(canvas: &mut Canvas<'_>, block: &Block, class: &str, cycle: &Cycle, from: Instant, to: Instant) {
    let (left, right) = (canvas.frame.x(from), canvas.frame.x(to.min(cycle.to)));
    canvas.rect(class, left, right, block.lane_top(), 14.0);
}

/// From the latest accepted instant to the pulse, or to where waiting ended.
fn overdue(canvas: &mut Canvas<'_>, block: &Block) {
    for (_, case) in canvas.facts.numbered_findings() {
        let Judgement { window, how, channel, outcome, .. } = case.judgement;
        let late = channel == block.channel && outcome == Outcome::Broken && matches!(how, How::Late | How::Missing);
        let Some(window) = window.filter(|_| late) else { continue };
        let until = case.until;
        if canvas.frame.meets(window.latest, until) {
            let (left, right) = (canvas.frame.x(window.latest), canvas.frame.x(until));
            canvas.rect("late", left, right.max(left + 1.0), block.lane_top(), 14.0);
        }
    }
}
