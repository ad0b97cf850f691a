//! The ladder diagram: the heart's waves, what crosses between heart and device, the device's windows, and how far each judged pulse
//! fell from its nominal instant.

mod canvas;
mod channel;
mod excerpt;
mod gauge;
mod heart;
mod key;
mod labels;
mod layout;
mod paper;
mod step;
mod table;
mod words;

use super::facts::Facts;
use super::page::Section;
use canvas::Canvas;
use excerpt::{Excerpt, Reason};
use layout::Layout;
use maud::{Markup, PreEscaped, html};
use phase4::base::Instant;

/// The section with the seconds that matter, if the log holds anything to draw.
pub(super) fn section(facts: &Facts<'_>) -> Option<Section> {
    let excerpts = excerpt::choose(facts);
    let layout = Layout::of(facts);
    let (first, rest) = excerpts.split_first()?;
    let (name, title) = words::title(first);
    let open = usize::from(!facts.is_judged());
    let body = html! {
        (figure(facts, &layout, first, 0))
        @for (place, excerpt) in rest.iter().enumerate() {
            details open[place < open] {
                summary { (words::summary(facts, excerpt)) }
                (figure(facts, &layout, excerpt, place + 1))
            }
        }
    };
    let side = html! { p { (words::side(facts, first)) } };
    Some(Section { id: "seconds", name, title, side, body, full: true })
}

/// The spans of time that are drawn, in order and without overlap.
pub(super) fn drawn(facts: &Facts<'_>) -> Vec<(Instant, Instant)> {
    let mut spans: Vec<_> = excerpt::choose(facts).iter().map(|excerpt| (excerpt.from(facts), excerpt.to(facts))).collect();
    spans.sort_unstable();
    let mut merged: Vec<(Instant, Instant)> = Vec::new();
    for (from, to) in spans {
        match merged.last_mut() {
            Some((_, end)) if from <= *end => *end = to.max(*end),
            _ => merged.push((from, to)),
        }
    }
    merged
}

fn figure(facts: &Facts<'_>, layout: &Layout, excerpt: &Excerpt, number: usize) -> Markup {
    let canvas = draw(facts, layout, excerpt);
    let (width, height) = (canvas.frame.width(), layout.height);
    let labels = layout.labels();
    let [lab, art, title, desc] = ["lab", "art", "ladt", "ladd"].map(|name| format!("{name}{number}"));
    let focus = excerpt.focus.map(|at| format!("{:.0}", canvas.frame.x(at)));
    html! {
        figure {
            div.frame.onscreen tabindex="0" role="region" aria-label="Ladder diagram, scrolls sideways" {
                svg.lab viewBox={ "0 0 100 " (height) } aria-hidden="true" { g id=(lab) { (PreEscaped(labels.as_str())) } }
                svg.pic viewBox={ "0 0 " (width) " " (height) } style={ "flex-grow:" (width) ";min-width:" (format!("{:.0}", width * 0.9)) "px" } role="img" aria-labelledby={ (title) " " (desc) } data-x=[focus] {
                    title id=(title) { (words::summary(facts, excerpt)) }
                    desc id=(desc) { (words::desc(facts, excerpt)) }
                    g id=(art) { (PreEscaped(canvas.svg.as_str())) }
                }
            }
            (paper::rows(&canvas, height, &lab, &art))
            (key::key(canvas.svg.as_str()))
            @if let Some(caption) = words::caption(facts, excerpt) { figcaption { (caption) } }
            (table::table(facts, excerpt))
        }
    }
}

fn draw<'a>(facts: &'a Facts<'a>, layout: &'a Layout, excerpt: &Excerpt) -> Canvas<'a> {
    let mut canvas = Canvas::new(facts, layout, excerpt.frame);
    canvas.draw_axis();
    step::draw(&mut canvas);
    heart::draw(&mut canvas);
    for block in layout.blocks() {
        channel::draw(&mut canvas, block);
        gauge::draw(&mut canvas, block);
    }
    canvas.finish();
    canvas
}

/// What a drawing of these seconds is for.
const fn is_failing(excerpt: &Excerpt) -> bool {
    matches!(excerpt.reason, Reason::Finding(_))
}
