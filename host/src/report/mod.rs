//! The report: one self-contained page that says what happened, how it was judged and what was not looked at.
//!
//! Everything on it follows from a [`RunData`] and nothing else, so that the same run gives the same page,
//! byte for byte. Black comes from the heart's records; blue and brackets come from what the bench itself sees and from the
//! program; vermilion marks a broken rule and nothing else.

mod applies;
mod cautions;
mod coverage;
mod facts;
mod findings;
mod ladder;
mod lens;
mod manifest;
mod number;
mod overview;
mod page;
mod plots;
mod rules;
mod scale;
mod scenario;
mod sign;
mod style;
mod svg;
#[cfg(test)]
mod tests;
mod text;
mod undecided;
mod waves;
mod wording;

use crate::run_data::RunData;

/// The whole page of a run, as UTF-8 text of one HTML file.
pub fn page(run: &RunData) -> String {
    page::lay_out(run).into_string()
}

/// How many rules could have been tried under the run's program and were not.
pub fn untried(run: &RunData) -> usize {
    applies::applying(run).filter(|(_, score)| score.checked == 0).count()
}
