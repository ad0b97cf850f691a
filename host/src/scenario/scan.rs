//! A cursor over a short text of words, numbers and signs, and what it says where the text goes wrong.

use std::ops::Range;

/// Where a short text goes wrong, and what was expected there.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Wrong {
    /// The place, in bytes of the text.
    pub at: Range<usize>,
    /// What is wrong, or what was expected.
    pub label: String,
    /// What to write instead.
    pub help: Option<String>,
}

impl Wrong {
    pub(super) fn new(at: Range<usize>, label: impl Into<String>) -> Self {
        Self { at, label: label.into(), help: None }
    }

    #[must_use]
    pub(super) fn help(self, help: impl Into<String>) -> Self {
        Self { help: Some(help.into()), ..self }
    }

    /// A wrong word: what was most likely meant, or else this label.
    pub(super) fn instead(at: Range<usize>, otherwise: &str, meant: Option<&str>) -> Self {
        Self::new(at, meant.map_or_else(|| otherwise.to_owned(), |word| format!("did you mean `{word}`?")))
    }
}

/// The cursor. Spaces between words, numbers and signs never matter.
#[derive(Debug, Clone)]
pub(super) struct Scan<'a> {
    text: &'a str,
    at: usize,
}

impl<'a> Scan<'a> {
    pub(super) const fn new(text: &'a str) -> Self {
        Self { text, at: 0 }
    }

    fn rest(&self) -> &'a str {
        self.text.get(self.at..).unwrap_or_default()
    }

    fn skip_spaces(&mut self) {
        let rest = self.rest();
        self.at = self.at.saturating_add(rest.len().saturating_sub(rest.trim_start().len()));
    }

    /// Takes the longest run of characters that satisfy this, if there is any.
    fn run(&mut self, accept: impl Fn(char) -> bool) -> Option<(&'a str, Range<usize>)> {
        self.skip_spaces();
        let rest = self.rest();
        let length = rest.find(|c| !accept(c)).unwrap_or(rest.len());
        let taken = rest.get(..length).filter(|taken| !taken.is_empty())?;
        let from = self.at;
        self.at = from.saturating_add(length);
        Some((taken, from..self.at))
    }

    /// A word: letters, digits, `-` and `_`, beginning with a letter.
    pub(super) fn word(&mut self) -> Option<(&'a str, Range<usize>)> {
        self.skip_spaces();
        if !self.rest().starts_with(|c: char| c.is_alphabetic()) {
            return None;
        }
        self.run(|c| c.is_alphanumeric() || c == '-' || c == '_')
    }

    /// The next word, without taking it.
    pub(super) fn peek_word(&self) -> Option<&'a str> {
        self.clone().word().map(|(word, _)| word)
    }

    /// Takes this word if it comes next.
    pub(super) fn take_word(&mut self, wanted: &str) -> bool {
        let before = self.at;
        match self.word() {
            Some((word, _)) if word == wanted => true,
            _ => {
                self.at = before;
                false
            }
        }
    }

    /// Takes this sign if it comes next.
    pub(super) fn take(&mut self, sign: &str) -> bool {
        self.skip_spaces();
        let here = self.rest().starts_with(sign);
        if here {
            self.at = self.at.saturating_add(sign.len());
        }
        here
    }

    /// Digits, if they come next.
    pub(super) fn digits(&mut self) -> Option<(&'a str, Range<usize>)> {
        self.run(|c| c.is_ascii_digit())
    }

    /// Letters, `µ`, `%` or `/min`, if they come next: a unit.
    pub(super) fn unit(&mut self) -> Option<(&'a str, Range<usize>)> {
        self.skip_spaces();
        let rest = self.rest();
        let slash = rest.strip_prefix('/').is_some_and(|after| after.trim_start().starts_with(|c: char| c.is_alphabetic()));
        let from = self.at;
        if slash {
            self.at = self.at.saturating_add(1);
        }
        let (_, range) = self.run(|c| c.is_alphabetic() || c == '%')?;
        let whole = from..range.end;
        self.text.get(whole.clone()).map(|unit| (unit, whole))
    }

    /// True if nothing is left.
    pub(super) fn is_done(&self) -> bool {
        self.rest().trim().is_empty()
    }

    /// The place of what comes next: the next word or sign, or the end of the text.
    pub(super) fn here(&self) -> Range<usize> {
        let mut ahead = self.clone();
        ahead.skip_spaces();
        let from = ahead.at;
        if let Some((_, range)) = ahead.run(|c| c.is_alphanumeric() || c == '-' || c == '_') {
            return range;
        }
        let next = ahead.rest().chars().next().map_or(0, char::len_utf8);
        from..from.saturating_add(next)
    }

    /// Where the cursor stands.
    pub(super) const fn position(&self) -> usize {
        self.at
    }

    /// An error at what comes next.
    pub(super) fn wrong(&self, label: impl Into<String>) -> Wrong {
        Wrong::new(self.here(), label)
    }

    /// Refuses what is left, if anything is.
    pub(super) fn finish(&self) -> Result<(), Wrong> {
        if self.is_done() {
            return Ok(());
        }
        let from = self.here().start;
        Err(Wrong::new(from..self.text.trim_end().len(), "nothing more was expected here"))
    }
}
