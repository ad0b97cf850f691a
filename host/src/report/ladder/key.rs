//! What the marks mean: those that the drawing holds.

use maud::{Markup, PreEscaped, html};

/// Marks with the class that shows them to be there, their picture, and words.
const MARKS: [(&str, &str, &str, &str); 14] = [
    ("\"wave\"", "26", r#"<path class="wave" d="M6 1L18 15"/>"#, "conducted; the slope is the delay"),
    (
        "\"hid\"",
        "26",
        r#"<path class="hid" d="M6 1L16 12"/><path class="stop" d="M11 13H21"/>"#,
        "ends here: blocked; dashed = entered and never came out (concealed)",
    ),
    ("collision", "18", r#"<path class="stop" d="M4 3l10 10m0 -10l-10 10"/>"#, "two waves meet"),
    (
        "\"gate\"",
        "26",
        r#"<path class="gate" d="M0 8H11"/><path class="shut" d="M13 6.5H26M13 9.500H26"/>"#,
        "gate of a tract, open / shut",
    ),
    ("\"org\"", "12", r#"<circle class="org" cx="5" cy="8" r="3.2"/>"#, "origin: sinus"),
    ("<circle class=\"orgo\"", "14", r#"<circle class="orgo" cx="7" cy="8" r="4.6"/>"#, "origin: escape"),
    (">ectopic<", "14", r#"<path class="orgo" d="M7 2.500l5.500 5.500l-5.500 5.500l-5.500 -5.500z"/>"#, "origin: ectopic"),
    ("\"pulf\"", "18", r#"<path class="pulf" d="M2 13L8 2L14 13z"/>"#, "pulse that captured"),
    ("\"pulo\"", "18", r#"<path class="pulo" d="M3 15L9 5L15 15z"/><path class="pul" d="M2 2H16"/>"#, "pulse not captured"),
    (
        "\"seen",
        "18",
        r#"<path class="seen" d="M8.500 0V5"/><path class="orgo" d="M3 4h11l-5.500 9z"/>"#,
        "signal; without a triangle: not to be seen",
    ),
    (
        "\"blank\"",
        "80",
        r#"<path class="blank" d="M0 2h20v12h-20z"/><path class="refr" d="M20 2h26v12h-26z"/><path class="alert" d="M46 2h30v12h-30z"/>"#,
        "blanking, refractory, alert",
    ),
    ("\"refr all\"", "26", r#"<path class="refr" d="M0 2h26v12h-26z"/>"#, "nothing is sensed"),
    ("\"late\"", "16", r#"<path class="late" d="M0 2h12v12h-12z"/>"#, "overdue"),
    (
        "\"lensf\"",
        "46",
        r#"<path class="acc" d="M8 1h30v14h-30z"/><path class="brk" d="M12 1H8V15H12M34 1H38V15H34"/><path class="dot" d="M24 1h3v14h-3z"/>"#,
        "expected window [earliest, latest], and the instant seen",
    ),
];

/// The key of a drawing.
pub(super) fn key(drawing: &str) -> Markup {
    html! {
        ul.key {
            @for (mark, width, picture, words) in MARKS {
                @if drawing.contains(mark) { li { svg width=(width) height="16" aria-hidden="true" { (PreEscaped(picture)) } (words) } }
            }
            @if drawing.contains("\"edge\"") {
                li { svg width="22" height="16" aria-hidden="true" { path.edge d="M2 1h18v14h-18z" {} } "limit within which the bench cannot tell" }
            }
        }
    }
}
