//! The drawing beside the verdict: the worst pulse against its window.

use super::facts::{Case, Facts, over};
use super::number::{at, ms_tenth, ms_tenth_bare, signed_bare, signed_limit, signed_tenth};
use super::scale::{step_for, ticks};
use super::sign::{Brackets, State};
use super::svg::{Anchor, Svg};
use maud::{Markup, PreEscaped, html};
use phase4::audit::{How, Judgement, Outcome, Window};
use phase4::base::Deviation;

const WIDTH: f64 = 392.0;
const LEFT: f64 = 18.0;
const RIGHT: f64 = 374.0;
/// Top and bottom of the band.
const BAND: (f64, f64) = (54.0, 96.0);

/// The figure, if some judged case has a window to be drawn.
pub(super) fn lens(facts: &Facts<'_>) -> Option<Markup> {
    let case = chosen(facts)?;
    let judgement = &case.judgement;
    let window = judgement.window?;
    let seen = judgement.deviation.map(Deviation::as_micros);
    let svg = draw(facts, case, window, seen);
    let from = window.earliest.deviation_from(window.nominal);
    let to = window.latest.deviation_from(window.nominal);
    let nominal = at(facts.run.start, window.nominal);
    let was = match (judgement.deviation, over(case)) {
        (Some(deviation), Some(over)) => {
            format!("The pulse was seen {} from it, {} beyond the nearest limit.", signed_tenth(deviation), ms_tenth(over))
        }
        (Some(deviation), None) => format!("The pulse was seen {} from it.", signed_tenth(deviation)),
        (None, _) => "No pulse was seen.".to_owned(),
    };
    let desc = format!(
        "The window runs from {} to {} around the nominal instant {nominal}. {was}",
        signed_tenth(from),
        signed_tenth(to)
    );
    Some(html! {
        figure.lens {
            svg viewBox="0 8 392 130" role="img" aria-labelledby="lt ld" {
                title #lt { (title(judgement)) }
                desc #ld { (desc) }
                (PreEscaped(svg.as_str()))
            }
        }
    })
}

fn title(judgement: &Judgement) -> &'static str {
    match (judgement.outcome, judgement.how) {
        (_, How::Missing) => "The pulse that did not come, and its window",
        (Outcome::Broken, _) => "The worst pulse against its window",
        _ => "The closest pulse against its window",
    }
}

/// The worst finding that has a window; without findings the closest case that held.
fn chosen<'a>(facts: &'a Facts<'_>) -> Option<&'a Case> {
    let windowed = |case: &&Case| case.judgement.window.is_some();
    let worst = facts.worst_finding().and_then(|number| facts.finding(number)).filter(windowed);
    let any_broken = || facts.numbered_findings().map(|(_, case)| case).find(windowed);
    let size = |case: &&Case| case.judgement.deviation.map_or(0, |deviation| deviation.size().as_micros());
    let closest = || {
        let timed = facts.cases.iter().filter(|case| windowed(case) && case.judgement.deviation.is_some());
        timed.rev().max_by_key(size)
    };
    worst.or_else(any_broken).or_else(closest)
}

fn draw(facts: &Facts<'_>, case: &Case, window: Window, seen: Option<i64>) -> Svg {
    let low = window.earliest.deviation_from(window.nominal).as_micros();
    let high = window.latest.deviation_from(window.nominal).as_micros();
    let reach = low.abs().max(high).max(seen.map_or(0, i64::abs)).max(1_000);
    let half = reach as f64 * 1.22;
    let x = |micros: f64| (LEFT + RIGHT) / 2.0 + micros / half * (RIGHT - LEFT) / 2.0;
    let mut svg = Svg::new();
    axis(&mut svg, half, x);
    let from_zero = format!("ms from the nominal instant, {}", at(facts.run.start, window.nominal));
    svg.text("t3", (WIDTH / 2.0, 133.0), Anchor::Middle, &from_zero);
    let (left, right) = (x(low as f64), x(high as f64));
    svg.rect("acc", (left, BAND.0), right - left, BAND.1 - BAND.0);
    let guard = facts.guard().as_micros() as f64;
    for limit in [low, high] {
        let from = x(limit as f64 - guard);
        svg.rect("edge", (from, BAND.0), x(limit as f64 + guard) - from, BAND.1 - BAND.0);
    }
    Brackets::Both.draw(&mut svg, (left, right), BAND);
    svg.line("nom", (x(0.0), BAND.0 + 4.0), (x(0.0), BAND.1));
    match seen {
        Some(seen) => mark(&mut svg, case, x(seen as f64), seen, (left, right)),
        None => svg.text("tb halo", (x(0.0), 79.0), Anchor::Middle, "no pulse seen"),
    }
    let inside = (x(low as f64 + guard), x(high as f64 - guard));
    allowed(&mut svg, (low, high), inside, seen.map(|seen| x(seen as f64)));
    svg
}

/// What is allowed, in words: over the band, or inside it where the words of a mark close by take that place.
fn allowed(svg: &mut Svg, (low, high): (i64, i64), (left, right): (f64, f64), mark: Option<f64>) {
    let words = format!("allowed {} to {}", signed_limit(low), signed_limit(high));
    let half = 3.5 * words.chars().count() as f64;
    let middle = ((left + right) / 2.0).clamp(half, WIDTH - half);
    let Some(mark) = mark.filter(|mark| (mark - middle).abs() <= half + 44.0) else {
        return svg.text("t2", (middle, 45.0), Anchor::Middle, &words);
    };
    let sides = [(mark, right), (left, mark)];
    if let Some((from, to)) = sides.into_iter().find(|(from, to)| to - from > 2.0 * half + 14.0) {
        svg.text("t2", ((from + to) / 2.0, 79.0), Anchor::Middle, &words);
    } else {
        let below = if mark > WIDTH / 2.0 { (LEFT, Anchor::Start) } else { (RIGHT, Anchor::End) };
        svg.text("t2", (below.0, 45.0), below.1, &words);
    }
}

fn axis(svg: &mut Svg, half: f64, x: impl Fn(f64) -> f64) {
    svg.line("base", (LEFT, BAND.1), (RIGHT, BAND.1));
    for value in ticks(-half, half, step_for(2.0 * half, 9)) {
        let place = x(value);
        svg.line("min", (place, BAND.1), (place, BAND.1 + 5.0));
        svg.text("t2", (place, 115.0), Anchor::Middle, &signed_bare(value as i64));
    }
}

fn mark(svg: &mut Svg, case: &Case, x: f64, seen: i64, (left, right): (f64, f64)) {
    let words = signed_tenth(Deviation::from_micros(seen));
    // The figure is large and bold.
    let half = 6.4 * words.chars().count() as f64;
    let text_x = x.clamp(half, WIDTH - half);
    let state = State::of(case.judgement.outcome);
    match state {
        State::Broken => svg.rect("dotb", (x - 2.5, BAND.0 - 6.0), 5.0, BAND.1 - BAND.0 + 6.0),
        State::Undecided => svg.rect("orgo", (x - 4.0, 71.0), 8.0, 8.0),
        _ => svg.rect("dot", (x - 1.5, BAND.0), 3.0, BAND.1 - BAND.0),
    }
    svg.text(if state == State::Broken { "tb big" } else { "big" }, (text_x, 25.0), Anchor::Middle, &words);
    svg.text("t2", (text_x, 41.0), Anchor::Middle, "pulse seen");
    let Some(over) = over(case).filter(|_| state == State::Broken) else { return };
    let (from, to) = if seen > 0 { (right + 3.0, x - 4.0) } else { (left - 3.0, x + 4.0) };
    let label = format!("{} over", ms_tenth_bare(over));
    let room = (to - from).abs();
    if room > 24.0 {
        let inward = if to > from { 5.0 } else { -5.0 };
        svg.line("dim", (from, 75.0), (to, 75.0));
        svg.path("dim", &[(from + inward, 71.0), (from, 75.0), (from + inward, 79.0)]);
        svg.path("dim", &[(to - inward, 71.0), (to, 75.0), (to - inward, 79.0)]);
    }
    if room > 7.2 * label.chars().count() as f64 {
        svg.text("tb halo", ((from + to) / 2.0, 68.0), Anchor::Middle, &label);
    } else if seen > 0 && x + 70.0 < WIDTH {
        svg.text("tb", (x + 7.0, 68.0), Anchor::Start, &label);
    } else if seen < 0 && x > 70.0 {
        svg.text("tb", (x - 7.0, 68.0), Anchor::End, &label);
    }
}
