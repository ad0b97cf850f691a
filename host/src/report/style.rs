//! The style sheet and the few lines of script. The page works without script.

/// For screens of every width, then for paper.
pub(super) const SHEET: &str = concat!(
    include_str!("style/page.css"),
    include_str!("style/drawing.css"),
    include_str!("style/table.css"),
    include_str!("style/narrow.css"),
    include_str!("style/paper.css")
);
/// Centres ladders on their finding, offers to copy the command, opens what is folded before printing.
pub(super) const SCRIPT: &str = include_str!("style/script.js");
