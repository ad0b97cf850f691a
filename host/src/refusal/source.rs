//! A text file that was read to be understood, with its name as the user gave it.

use super::{Complaint, Refusal};
use miette::{MietteError, MietteSpanContents, SourceCode, SourceSpan, SpanContents};
use std::io::Read;
use std::path::Path;
use std::sync::Arc;

/// The largest file that is read as a scenario: a longer one is not a scenario but something else with the wrong name.
pub const LARGEST: u64 = 1 << 20;

/// A text and the name of the file it came from.
#[derive(Debug, Clone)]
pub struct Source {
    name: Arc<str>,
    text: Arc<str>,
    /// Lines of the file that come before the text.
    skipped: usize,
}

impl Source {
    /// A text that was found under this name.
    pub fn new(name: impl Into<Arc<str>>, text: impl Into<Arc<str>>) -> Self {
        Self { name: name.into(), text: text.into(), skipped: 0 }
    }

    /// One line out of a longer file, with its number there, from 1.
    pub fn line(name: impl Into<Arc<str>>, text: impl Into<Arc<str>>, number: usize) -> Self {
        Self { name: name.into(), text: text.into(), skipped: number.saturating_sub(1) }
    }

    /// Reads a file of at most [`LARGEST`] bytes of UTF-8.
    ///
    /// # Errors
    /// Refuses what cannot be opened or read, what is too large and what is not text.
    pub fn read(path: &Path) -> Result<Self, Refusal> {
        let name = path.display().to_string();
        let refuse = |message: String| Err(Refusal::plain(Complaint::new(message)));
        let mut bytes = Vec::new();
        let read = std::fs::File::open(path).and_then(|file| file.take(LARGEST.saturating_add(1)).read_to_end(&mut bytes));
        if let Err(error) = read {
            return refuse(format!("cannot read {name}: {error}"));
        }
        if u64::try_from(bytes.len()).unwrap_or(u64::MAX) > LARGEST {
            return refuse(format!("{name} is larger than 1 MiB: not a scenario or a table of intervals"));
        }
        match String::from_utf8(bytes) {
            Ok(text) => Ok(Self::new(name, text)),
            Err(error) => {
                let good = error.utf8_error().valid_up_to();
                let line = error.as_bytes().iter().take(good).filter(|byte| **byte == b'\n').count().saturating_add(1);
                refuse(format!("{name} is not text: line {line} is not UTF-8"))
            }
        }
    }

    /// The file's name, as it was given.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The whole text.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Line and column of a place in the text, both from 1, the column in characters.
    pub fn line_and_column(&self, at: usize) -> (usize, usize) {
        let before = self.text.get(..at).unwrap_or(&self.text);
        let line = before.matches('\n').count().saturating_add(1).saturating_add(self.skipped);
        let column = before.rsplit('\n').next().unwrap_or_default().chars().count().saturating_add(1);
        (line, column)
    }

    /// True if the lines around this place can be shown to a person: short, and without control characters.
    pub(crate) fn can_be_shown(&self, at: usize) -> bool {
        const WIDEST: usize = 300;
        let row = self.text.get(..at).unwrap_or(&self.text).matches('\n').count();
        self.text
            .lines()
            .skip(row.saturating_sub(2))
            .take(6)
            .all(|line| line.len() <= WIDEST && !line.chars().any(|c| c.is_control() && c != '\t'))
    }
}

impl SourceCode for Source {
    fn read_span<'a>(
        &'a self,
        span: &SourceSpan,
        lines_before: usize,
        lines_after: usize,
    ) -> Result<Box<dyn SpanContents<'a> + 'a>, MietteError> {
        let found = self.text.read_span(span, lines_before, lines_after)?;
        Ok(Box::new(MietteSpanContents::new_named(
            self.name.to_string(),
            found.data(),
            *found.span(),
            found.line().saturating_add(self.skipped),
            found.column(),
            found.line_count(),
        )))
    }
}
