//! Intervals over the run and deviations of pulses, each with its histogram on the same scale.

mod axis;
mod histogram;
mod marks;
mod series;

use super::facts::Facts;
use super::number::{count, ms_bare, ms_tenth, signed_limit, signed_tenth};
use axis::Axis;
use maud::{Markup, PreEscaped, html};
use phase4::base::{Deviation, Span};
use series::{Entry, Series};

/// Width of the drawing's own units; it is stretched to the screen.
const WIDTH: f64 = 1_000.0;
const INTERVALS: f64 = 230.0;
const DEVIATIONS: f64 = 130.0;

/// Both plots with their key; without an interval nothing.
pub(super) fn plots(facts: &Facts<'_>) -> Markup {
    let series = Series::of_intervals(facts);
    if series.entries.is_empty() {
        return html! {};
    }
    let deviations = Series::of_deviations(facts, &series);
    html! {
        (intervals(facts, &series))
        @if !deviations.entries.is_empty() { (deviation_plot(facts, &deviations)) }
        (key(facts, &series))
    }
}

fn intervals(facts: &Facts<'_>, series: &Series) -> Markup {
    let bands = series::bands(facts);
    let axis = Axis::over(series.values().chain(bands.iter().flat_map(|(low, high)| [*low, *high])), INTERVALS);
    let title = if facts.is_judged() { "Intervals from beat or pulse to the next" } else { "Intervals from beat to beat" };
    let mut under = super::svg::Svg::new();
    for (low, high) in &bands {
        under.rect("acc", (0.0, axis.y(*high)), WIDTH, (axis.y(*low) - axis.y(*high)).max(1.0));
    }
    let guides = series::guides(facts).into_iter().filter(|(value, _)| axis.holds(*value)).collect::<Vec<_>>();
    for (value, _) in &guides {
        under.line("ns guide", (0.0, axis.y(*value)), (WIDTH, axis.y(*value)));
    }
    let labels = axis.ticks(26.0).map(|value| (axis.y(value), ms_bare(Span::from_micros(value as u64)))).collect();
    let desc = describe(series, |micros| ms_tenth(Span::from_micros(micros.max(0) as u64)));
    let notes =
        guides.iter().filter(|(_, words)| !words.is_empty()).map(|(value, words)| (axis.y(*value), words.clone())).collect();
    let foot = None;
    figure(&Figure { id: "iv", title, axis: &axis, height: INTERVALS, labels, notes, foot, desc }, &under, series)
}

fn deviation_plot(facts: &Facts<'_>, series: &Series) -> Markup {
    let band = series::tolerance(facts);
    let axis = Axis::over(series.values().chain([band.0, band.1, 0.0]), DEVIATIONS);
    let mut under = super::svg::Svg::new();
    under.rect("acc", (0.0, axis.y(band.1)), WIDTH, axis.y(band.0) - axis.y(band.1));
    under.line("ns guide", (0.0, axis.y(0.0)), (WIDTH, axis.y(0.0)));
    // The limits and zero come first; round values fill what room they leave.
    let mut labels: Vec<(f64, String)> = Vec::new();
    for value in [0.0, band.0, band.1].into_iter().chain(axis.ticks(22.0)) {
        let y = axis.y(value);
        if axis.holds(value) && labels.iter().all(|(other, _)| (other - y).abs() >= 14.0) {
            labels.push((y, signed_limit(value as i64)));
        }
    }
    let desc = describe(series, |micros| signed_tenth(Deviation::from_micros(micros)));
    let foot = Some(series.numbering());
    let title = "Deviation of each pulse from its nominal instant";
    figure(&Figure { id: "dv", title, axis: &axis, height: DEVIATIONS, labels, notes: Vec::new(), foot, desc }, &under, series)
}

fn describe(series: &Series, write: impl Fn(i64) -> String) -> String {
    let ends = |entry: &Entry| entry.value as i64;
    let (least, most) = (series.entries.iter().map(ends).min().unwrap_or(0), series.entries.iter().map(ends).max().unwrap_or(0));
    let broken = series.entries.iter().filter(|entry| entry.look == marks::Look::Broken).count();
    let broken = if broken == 0 { "none broken".to_owned() } else { format!("{} broken", count(broken as u64)) };
    format!("{} values from {} to {}; {broken}.", count(series.entries.len() as u64), write(least), write(most))
}

struct Figure<'a> {
    id: &'static str,
    title: &'static str,
    axis: &'a Axis,
    height: f64,
    /// Labels of the upright axis.
    labels: Vec<(f64, String)>,
    /// Words within the plot, at a height.
    notes: Vec<(f64, String)>,
    foot: Option<String>,
    desc: String,
}

fn figure(figure: &Figure<'_>, under: &super::svg::Svg, series: &Series) -> Markup {
    let marks = marks::draw(series, figure.axis);
    let (bars, counts) = histogram::draw(series, figure.axis);
    let height = figure.height;
    let style = format!("height:{height}px");
    let [title, desc, bars_title] = ["t", "d", "h"].map(|end| format!("{}{end}", figure.id));
    html! {
        div.plots {
            h3.wide { (figure.title) }
            div.plot style=(style) {
                svg viewBox={ "0 0 1000 " (height) } preserveAspectRatio="none" role="img" aria-labelledby={ (title) " " (desc) } {
                    title id=(title) { (figure.title) }
                    desc id=(desc) { (figure.desc) }
                    (PreEscaped(under.as_str()))
                    (PreEscaped(marks.as_str()))
                }
                @for (y, words) in &figure.labels { span.yl style={ "top:" (format!("{y:.1}")) "px" } { (words) } }
                span.yl style="top:-14px" { "ms" }
                @for (y, words) in &figure.notes { span.at style={ "left:4px;top:" (format!("{:.1}", y - 15.0)) "px" } { (words) } }
                @if let Some(foot) = &figure.foot { span.at.c style={ "left:50%;top:" (height + 6.0) "px" } { (foot) } }
            }
            div.plot style=(style) {
                svg viewBox={ "0 0 100 " (height) } preserveAspectRatio="none" role="img" aria-labelledby=(bars_title) {
                    title id=(bars_title) { "Histogram of the same values, square-root scale" }
                    (PreEscaped(bars.as_str()))
                }
                @for (x, y, words) in counts { span.at style={ "left:" (format!("{x:.0}")) "%;top:" (format!("{:.1}", y - 7.0)) "px" } { (words) } }
                @if figure.foot.is_some() { span.at.c style={ "left:50%;top:" (height + 6.0) "px" } { "count, √ scale" } }
            }
        }
    }
}

fn key(facts: &Facts<'_>, series: &Series) -> Markup {
    let has = |look| series.entries.iter().any(|entry| entry.look == look);
    let drawn_as_columns = series.entries.len() > marks::MOST_SINGLE;
    html! {
        ul.key {
            @if drawn_as_columns { li { svg width="12" height="12" aria-hidden="true" { path.upright d="M6 1V11" {} path.median d="M3 6H9" {} } "least to greatest of neighbours, and their median" } }
            @if has(marks::Look::Beat) { li { svg width="12" height="12" aria-hidden="true" { @if marks::are_small(series) { circle.org cx="6" cy="6" r="1.6" {} } @else { circle.orgo cx="6" cy="6" r="2.6" {} } } @if facts.is_judged() { "ended by a seen beat" } @else { "ended by a beat" } } }
            @if has(marks::Look::Pulse) { li { svg width="12" height="12" aria-hidden="true" { circle.pulf cx="6" cy="6" r="2.6" {} } "ended by a pulse, holds" } }
            @if has(marks::Look::Broken) { li { svg width="12" height="12" aria-hidden="true" { path.dotb d="M2.5 2.5h7v7h-7z" {} } "pulse, broken" } }
            @if has(marks::Look::Undecided) { li { svg width="12" height="12" aria-hidden="true" { path.orgo d="M3 3h6v6h-6z" {} } "pulse, undecided" } }
            @if facts.is_judged() { li { svg width="22" height="12" aria-hidden="true" { path.acc d="M0 3h22v6h-22z" {} } "allowed for a pulse" } }
        }
    }
}
