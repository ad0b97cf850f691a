//! How far each judged pulse fell from its nominal instant, drawn ten times wider than the axis.

use super::canvas::Canvas;
use super::labels::Rank;
use super::layout::Block;
use crate::report::facts::{Case, Ending, over};
use crate::report::number::{count, signed_tenth};
use crate::report::sign::{Brackets, State, arrow};
use crate::report::svg::Anchor;
use phase4::audit::{How, Outcome, Window};
use phase4::base::Deviation;

/// How much wider than the axis.
const WIDER: f64 = 10.0;
/// Half of a gauge in ms: while there is room, and where neighbours would overlap.
const HALVES: [f64; 2] = [40.0, 24.0];
const HEIGHT: f64 = 34.0;
/// Distance of the gauge, and of its two lines of words, from the lane.
const OFF: f64 = 32.0;

/// Half the width of a bold letter.
const HALF_LETTER: f64 = 3.85;
/// Room between neighbours.
const APART: f64 = 4.0;

/// A gauge to be drawn, or words alone where there is no window to draw.
struct Gauge<'a> {
    case: &'a Case,
    /// Number of its finding.
    finding: Option<usize>,
    /// Middle of the drawing, moved inside the frame where needed.
    middle: f64,
    /// Numbers of further findings that have no room of their own here.
    others: Vec<usize>,
}

impl Gauge<'_> {
    /// The window, where the pulse belongs to one.
    fn window(&self) -> Option<Window> {
        self.case.judgement.window.filter(|_| self.case.judgement.how != How::Unexpected)
    }

    /// Half of what it takes: its words, and the gauge itself where there is one, which takes this much.
    fn half(&self, reach: f64) -> f64 {
        let words = self.verdict().chars().count() as f64 * HALF_LETTER;
        if self.window().is_some() { reach.max(words) } else { words }
    }

    /// Its number and its verdict.
    fn verdict(&self) -> String {
        let judgement = &self.case.judgement;
        match (judgement.outcome, self.finding) {
            (Outcome::Broken, Some(number)) => {
                format!("{}{}: {} broken", count(number as u64), further(number, &self.others), judgement.rule.code())
            }
            (Outcome::Broken, None) => format!("{} broken", judgement.rule.code()),
            (Outcome::Undecided, _) => "undecided".to_owned(),
            (Outcome::Held, _) => "holds".to_owned(),
        }
    }
}

/// Draws the gauges of a channel, and the words under beats that came first.
pub(super) fn draw(canvas: &mut Canvas<'_>, block: &Block) {
    if !block.judged {
        return;
    }
    let facts = canvas.facts;
    let frame = canvas.frame;
    let first = facts.cases.partition_point(|case| frame.time(case.place) < frame.from);
    let number_of = |place: usize| facts.findings.iter().position(|finding| *finding == place).map(|before| before + 1);
    let inside = facts.cases.iter().enumerate().skip(first).take_while(|(_, case)| frame.holds(case.place));
    let mut gauges: Vec<Gauge<'_>> = inside
        .filter(|(_, case)| case.judgement.channel == block.channel && case.is_of_a_pulse())
        .filter(|(_, case)| case.judgement.outcome == Outcome::Broken || case.judgement.window.is_some())
        .map(|(place, case)| Gauge { case, finding: number_of(place), middle: 0.0, others: Vec::new() })
        .collect();
    let half = arrange(canvas, &mut gauges);
    for gauge in &gauges {
        draw_gauge(canvas, block, gauge, half);
    }
    in_the_lane(canvas, block);
    beats_first(canvas, block);
}

/// Gives every gauge its place; the narrower, and then only broken ones, where they would overlap. Returns half their width in ms.
fn arrange(canvas: &Canvas<'_>, gauges: &mut Vec<Gauge<'_>>) -> f64 {
    let [wide, narrow] = HALVES;
    let reach = |half: f64| half * canvas.frame.per_ms() * WIDER;
    for half in [wide, narrow] {
        put(canvas, gauges, reach(half));
        if gauges.iter().zip(gauges.iter().skip(1)).all(|(one, next)| !touch(one, next, reach(half))) {
            return half;
        }
    }
    gauges.retain(|gauge| gauge.finding.is_some());
    put(canvas, gauges, reach(narrow));
    // A finding that still has no room joins the one before it, by its number; longer words may bring others too near in turn.
    loop {
        let before = gauges.len();
        let mut kept: Vec<Gauge<'_>> = Vec::new();
        for gauge in gauges.drain(..) {
            match kept.last_mut() {
                Some(last) if touch(last, &gauge, reach(narrow)) => {
                    last.others.extend(gauge.finding.into_iter().chain(gauge.others))
                }
                _ => kept.push(gauge),
            }
        }
        *gauges = kept;
        if gauges.len() == before {
            return narrow;
        }
    }
}

fn touch(one: &Gauge<'_>, next: &Gauge<'_>, reach: f64) -> bool {
    next.middle - one.middle < one.half(reach) + next.half(reach) + APART
}

/// Every gauge stands around its nominal instant, inside the frame; in order from the left.
fn put(canvas: &Canvas<'_>, gauges: &mut [Gauge<'_>], reach: f64) {
    for gauge in gauges.iter_mut() {
        let at = gauge.window().map_or(gauge.case.place, |window| window.nominal);
        let half = gauge.half(reach) + 2.0;
        gauge.middle = canvas.frame.x(at).min(canvas.width() - half).max(half);
    }
    gauges.sort_by(|one, next| one.middle.total_cmp(&next.middle));
}

/// The instant of every broken pulse, across the lane.
fn in_the_lane(canvas: &mut Canvas<'_>, block: &Block) {
    for (_, case) in canvas.facts.numbered_findings() {
        let Some(seen) = case.judgement.seen.filter(|_| case.judgement.channel == block.channel) else { continue };
        let x = canvas.frame.x(seen);
        if canvas.has_room(x, 2.5) {
            canvas.svg.rect("dotb", (x - 1.5, block.lane_top() - 4.0), 3.0, 22.0);
        }
    }
}

fn draw_gauge(canvas: &mut Canvas<'_>, block: &Block, gauge: &Gauge<'_>, half: f64) {
    let judgement = gauge.case.judgement;
    let state = State::of(judgement.outcome);
    let per_ms = canvas.frame.per_ms() * WIDER;
    let reach = half * per_ms;
    let middle = gauge.middle;
    let top = block.top_of(OFF, HEIGHT);
    let bottom = top + HEIGHT;
    canvas.whole.push((middle - reach - 4.0, middle + reach + 4.0));
    let Some(window) = gauge.window() else {
        words(canvas, block, gauge, middle);
        return;
    };
    canvas.labels.keep_off(middle - reach, middle + reach, top, bottom);
    let [low, high] = [window.earliest, window.latest].map(|at| at.deviation_from(window.nominal).as_micros() as f64 / 1_000.0);
    lens(canvas, block, gauge, (half, reach));
    canvas.rect("lensf", middle - reach, middle + reach, top, HEIGHT);
    // A window wider than the gauge is cut there, without a bracket.
    let inside = |x: f64| x.max(middle - reach).min(middle + reach);
    let (left, right) = (inside(middle + low * per_ms), inside(middle + high * per_ms));
    canvas.rect("acc", left, right, top, HEIGHT);
    let guard = canvas.facts.guard().as_micros() as f64 / 1_000.0;
    for limit in [low, high].into_iter().filter(|_| guard > 0.0) {
        canvas.rect("edge", inside(middle + (limit - guard) * per_ms), inside(middle + (limit + guard) * per_ms), top, HEIGHT);
    }
    let brackets = match (low >= -half, high <= half) {
        (true, true) => Some(Brackets::Both),
        (true, false) => Some(Brackets::Left),
        (false, true) => Some(Brackets::Right),
        (false, false) => None,
    };
    if let Some(brackets) = brackets {
        brackets.draw(&mut canvas.svg, (left, right), (top, bottom));
    }
    canvas.svg.line("nom", (middle, top + 3.0), (middle, bottom - 3.0));
    let mark = match judgement.deviation {
        Some(deviation) => mark(canvas, state, deviation, (middle, reach, per_ms), top),
        None => middle,
    };
    // What lies too far out for the gauge has its words under the pulse itself.
    let mark = if (mark - middle).abs() > reach { canvas.frame.x(gauge.case.place) } else { mark };
    words(canvas, block, gauge, mark);
}

/// The mark of the instant seen; the place where its words hang.
fn mark(canvas: &mut Canvas<'_>, state: State, deviation: Deviation, (middle, reach, per_ms): (f64, f64, f64), top: f64) -> f64 {
    let x = middle + deviation.as_micros() as f64 / 1_000.0 * per_ms;
    let (left, right) = (middle - reach, middle + reach);
    let y = top + HEIGHT / 2.0;
    match state {
        State::Broken if x > right - 3.0 => arrow(&mut canvas.svg, (right - 26.0, y), right - 1.0),
        State::Broken if x < left + 3.0 => arrow(&mut canvas.svg, (left + 26.0, y), left + 1.0),
        State::Broken => canvas.svg.rect("dotb", (x - 2.5, top - 4.0), 5.0, HEIGHT + 4.0),
        State::Undecided => canvas.svg.rect("orgo", (x.max(left + 4.0).min(right - 4.0) - 4.0, y - 4.0), 8.0, 8.0),
        _ => canvas.svg.rect("dot", (x.max(left + 2.0).min(right - 2.0) - 1.5, top), 3.0, HEIGHT),
    }
    x
}

/// Two thin lines across the lane where the window lies, to scale, and the lens that widens it into the gauge.
fn lens(canvas: &mut Canvas<'_>, block: &Block, gauge: &Gauge<'_>, (half, reach): (f64, f64)) {
    let Some(window) = gauge.window() else { return };
    let (near, far) = (block.beyond(-18.0), block.beyond(4.0));
    for limit in [window.earliest, window.latest] {
        let x = canvas.frame.x(limit);
        if canvas.has_room(x, 1.0) {
            canvas.svg.line("brk", (x, near), (x, far));
        }
    }
    let width = canvas.width();
    let nominal = canvas.frame.x(window.nominal);
    let small = half * canvas.frame.per_ms();
    for side in [-1.0, 1.0] {
        let from = (nominal + side * small).max(0.0).min(width);
        canvas.svg.line("lensl", (from, block.beyond(1.0)), (gauge.middle + side * reach, block.beyond(31.0)));
    }
}

/// Number and verdict beyond the gauge.
fn words(canvas: &mut Canvas<'_>, block: &Block, gauge: &Gauge<'_>, x: f64) {
    let judgement = &gauge.case.judgement;
    let size = match (judgement.how, judgement.deviation) {
        (How::Missing, _) => "missing".to_owned(),
        (How::Unexpected, _) => "not due".to_owned(),
        (_, Some(deviation)) => signed_tenth(deviation),
        (_, None) => String::new(),
    };
    let (rank, class) = match judgement.outcome {
        Outcome::Broken => (Rank::Broken, "tb"),
        Outcome::Undecided | Outcome::Held => (Rank::Held, "t2"),
    };
    let verdict = gauge.verdict();
    let lines = vec![(0.0, size), (15.0, verdict)];
    // Below the heart the words stand under the gauge; above it they stand over it, in the same order.
    let y = if block.down > 0.0 { block.beyond(81.0) } else { block.beyond(90.0) };
    let width = canvas.width();
    let half = lines.iter().map(|(_, line)| line.chars().count()).max().unwrap_or(0) as f64 * 3.9;
    let middle = x.min(width - half - 3.0).max(half + 3.0);
    let aside = [0.0, -24.0, 24.0, -48.0, 48.0].map(|by| (middle + by).min(width - half - 3.0).max(half + 3.0));
    canvas.labels.want_lines(rank, class, lines, aside.map(|x| ((x, y), Anchor::Middle)).to_vec());
    if over(gauge.case).is_some() {
        canvas.whole.push((middle - half, middle + half));
    }
}

/// Numbers of further findings behind the first: in a row, or counted.
fn further(first: usize, others: &[usize]) -> String {
    let in_a_row = others.iter().enumerate().all(|(place, number)| *number == first + place + 1);
    match others.last() {
        None => String::new(),
        Some(last) if in_a_row => format!("–{}", count(*last as u64)),
        Some(_) => format!(" and {} more", count(others.len() as u64)),
    }
}

/// Under each seen beat: the pending pulse was withdrawn.
fn beats_first(canvas: &mut Canvas<'_>, block: &Block) {
    let frame = canvas.frame;
    let seen: Vec<f64> = canvas
        .facts
        .cycles
        .iter()
        .filter(|cycle| cycle.ends == Ending::Seen && frame.holds(cycle.to))
        .map(|cycle| frame.x(cycle.to))
        .collect();
    for x in seen.into_iter().take(60) {
        let lines = vec![(0.0, "beat first,".to_owned()), (15.0, "no pulse due".to_owned())];
        let y = if block.down > 0.0 { block.beyond(46.0) } else { block.beyond(58.0) };
        let tie = ((x, block.beyond(2.0)), (x, block.beyond(34.0)));
        canvas.labels.want_tied(lines, ((x, y), Anchor::Middle), tie);
    }
}
