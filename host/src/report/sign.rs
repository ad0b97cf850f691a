//! The window mark in its small forms: the sign of a state, and the bar that shows how near a rule's worst case came.

use super::svg::{Point, Svg};
use maud::{Markup, PreEscaped, html};
use phase4::audit::Outcome;

/// How a rule, a case or a requirement stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum State {
    Holds,
    Broken,
    Undecided,
    NotExercised,
    Void,
}

impl State {
    pub(super) const fn of(outcome: Outcome) -> Self {
        match outcome {
            Outcome::Held => Self::Holds,
            Outcome::Broken => Self::Broken,
            Outcome::Undecided => Self::Undecided,
        }
    }

    /// The word beside the sign.
    pub(super) const fn word(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::Broken => "broken",
            Self::Undecided => "undecided",
            Self::NotExercised => "not exercised",
            Self::Void => "void",
        }
    }

    const fn class(self) -> &'static str {
        match self {
            Self::Holds => "st holds",
            Self::Broken => "st broken",
            Self::Undecided | Self::Void => "st",
            Self::NotExercised => "st not",
        }
    }

    const fn symbol(self) -> &'static str {
        match self {
            Self::Holds => "#g-holds",
            Self::Broken => "#g-broken",
            Self::Undecided => "#g-und",
            Self::NotExercised => "#g-not",
            Self::Void => "#g-void",
        }
    }
}

/// The sign alone.
pub(super) fn sign(state: State) -> Markup {
    html! { svg.g viewBox="0 0 32 14" aria-hidden="true" { use href=(state.symbol()) {} } }
}

/// The sign with its word.
pub(super) fn sign_and_word(state: State) -> Markup {
    html! { span class=(state.class()) { (sign(state)) " " (state.word()) } }
}

/// Drawings that the page uses again and again, and the hatch, which must lie in a drawing that is always rendered.
pub(super) const SYMBOLS: PreEscaped<&str> = PreEscaped(concat!(
    r#"<svg width="0" height="0" style="position:absolute" aria-hidden="true"><defs>"#,
    r#"<pattern id="hatch" width="4" height="4" patternUnits="userSpaceOnUse" patternTransform="rotate(45)"><path class="hl" d="M0 0V4"/></pattern>"#,
    r#"<g id="g-in"><path class="br" d="M10 1.5H6V12.5H10M18 1.5H22V12.5H18"/></g>"#,
    r##"<g id="g-holds"><use href="#g-in"/><circle class="pt" cx="14" cy="7" r="3"/></g>"##,
    r##"<g id="g-broken"><use href="#g-in"/><path class="dotb" d="M25 1.5h5v11h-5z"/></g>"##,
    r##"<g id="g-und"><use href="#g-in"/><circle class="orgo" cx="22" cy="7" r="3.4"/></g>"##,
    r#"<g id="g-not"><path class="br" stroke-dasharray="2 2" d="M10 1.5H6V12.5H10M18 1.5H22V12.5H18"/></g>"#,
    r##"<g id="g-void"><use href="#g-in"/><path class="br" d="M4 11L24 3"/></g>"##,
    r#"<g id="c-req"><path class="o" d="M.6 .6h24.8v10.8h-24.8z"/></g>"#,
    r##"<g id="c-core"><use href="#c-req"/><path class="f" d="M8 2.500h10v7h-10z"/></g>"##,
    r#"<g id="c-left"><path class="f" d="M2.500 2.500h3.500v7h-3.500z"/></g>"#,
    r#"<g id="c-right"><path class="f" d="M20 2.500h3.500v7h-3.500z"/></g>"#,
    r##"<g id="c-band"><use href="#c-req"/><path class="edge" d="M1 1h6v10h-6zM19 1h6v10h-6z"/></g>"##,
    r#"<g id="c-opt"><circle class="p3" cx="13" cy="6" r="1.5"/></g>"#,
    r#"<g id="c-void"><path class="o" d="M11 .6V11.400M15 .6V11.400"/></g>"#,
    r#"<g id="c-none"><path class="d" d="M.6 .6h24.8v10.8h-24.8z"/></g>"#,
    "</defs></svg>"
));

/// What a margin bar shows.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Bar {
    /// A window: where the mark stands, in half widths from its middle.
    TwoSided(f64),
    /// Only a latest limit: the mark's distance before it, as a share of the limit; negative is beyond.
    Latest(f64),
    /// Only an earliest limit: the mark's distance after it, as a share of the limit; negative is before.
    Earliest(f64),
}

/// The bar of 112 × 16.
pub(super) fn bar(bar: Bar, state: State) -> Markup {
    let mut svg = Svg::new();
    svg.line("base", (0.0, 8.0), (110.0, 8.0));
    let (band, brackets, mark) = match bar {
        Bar::TwoSided(halves) => ((18.0, 66.0), Brackets::Both, 42.0 + 24.0 * halves),
        Bar::Latest(share) => ((2.0, 82.0), Brackets::Right, 82.0 - 78.0 * share.min(1.0)),
        Bar::Earliest(share) => ((14.0, 108.0), Brackets::Left, 14.0 + 92.0 * share.min(1.0)),
    };
    svg.rect("acc", (band.0, 3.0), band.1 - band.0, 10.0);
    brackets.draw(&mut svg, band, (2.0, 14.0));
    draw_mark(&mut svg, mark, band, state);
    html! { svg.mbar viewBox="0 0 112 16" aria-hidden="true" { (PreEscaped(svg.as_str())) } }
}

fn draw_mark(svg: &mut Svg, x: f64, (left, right): (f64, f64), state: State) {
    let inside = x.clamp(2.0, 108.0);
    match state {
        State::Broken if x > 90.0 => arrow(svg, (right + 2.0, 8.0), 111.0),
        State::Broken if x < 2.0 => arrow(svg, (left - 2.0, 8.0), 0.5),
        State::Broken => svg.rect("dotb", (inside - 2.5, 0.0), 5.0, 14.0),
        State::Undecided => svg.rect("orgo", (inside - 3.0, 5.0), 6.0, 6.0),
        _ => svg.rect("dot", (inside - 1.5, 2.0), 3.0, 12.0),
    }
}

/// An arrow for a mark too far out to be drawn in place.
pub(super) fn arrow(svg: &mut Svg, from: Point, tip: f64) {
    let back = if tip > from.0 { tip - 8.0 } else { tip + 8.0 };
    svg.line("dim", from, (back, from.1));
    svg.shape("dotb", &[(back, from.1 - 5.0), (tip, from.1), (back, from.1 + 5.0)]);
}

/// Which ends of a window have a bracket.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Brackets {
    Both,
    Left,
    Right,
}

impl Brackets {
    /// Draws them around a band from `x` to `x` and from `y` to `y`.
    pub(super) fn draw(self, svg: &mut Svg, (left, right): (f64, f64), (top, bottom): (f64, f64)) {
        let arm = 5.0_f64.min((right - left) / 3.0);
        if self != Self::Right {
            svg.path("brk", &[(left + arm, top), (left, top), (left, bottom), (left + arm, bottom)]);
        }
        if self != Self::Left {
            svg.path("brk", &[(right - arm, top), (right, top), (right, bottom), (right - arm, bottom)]);
        }
    }
}
