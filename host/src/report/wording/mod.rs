//! The verdict in words: one word, one sentence with subject, deed, size and count, and a second with the worst case.

mod broken;
mod quiet;

pub(super) use broken::shared_cause;

use super::facts::Facts;
use super::number::{THIN, ms_tenth_bare};
use crate::run_data::Verdict;
use phase4::base::Span;

/// What stands at the top of the page.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Headline {
    /// One word.
    pub(super) word: &'static str,
    /// One sentence.
    pub(super) sentence: String,
    /// The worst or closest case, then where time was kept.
    pub(super) second: Option<String>,
}

/// Words the verdict of a run.
pub(super) fn headline(facts: &Facts<'_>) -> Headline {
    let (word, (sentence, second)) = match facts.run.verdict {
        Verdict::Broken => ("Broken", broken::say(facts)),
        Verdict::Holds => ("Holds", quiet::holds(facts)),
        Verdict::Undecided => ("Undecided", quiet::undecided(facts)),
        Verdict::Void => ("Void", quiet::void(facts)),
        Verdict::Unjudged => ("Unjudged", quiet::unjudged(facts)),
    };
    Headline { word, sentence, second }
}

/// From the least to the greatest of some spans: `30 to 32 ms`, or one where they are written alike.
fn range(spans: impl Iterator<Item = Span> + Clone) -> Option<String> {
    let (least, most) = (spans.clone().min()?, spans.max()?);
    // Whole milliseconds say enough where there are tens of them and both ends still differ.
    let whole = |span: Span| super::number::count((span.as_micros() + 500) / 1_000);
    let coarse = least >= Span::from_millis(10) && whole(least) != whole(most);
    let (low, high) = if coarse { (whole(least), whole(most)) } else { (ms_tenth_bare(least), ms_tenth_bare(most)) };
    Some(if low == high { format!("{low}{THIN}ms") } else { format!("{low} to {high}{THIN}ms") })
}

/// `1 time`, `8 times`.
fn times(number: usize) -> String {
    super::number::counted(number as u64, "time", "times")
}
