//! A complaint about an input: what is wrong, where, and what to write instead.

use super::Source;
use miette::{Diagnostic, GraphicalReportHandler, GraphicalTheme, LabeledSpan, SourceCode};
use std::fmt;
use std::ops::Range;

/// One thing that is wrong.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Complaint {
    message: String,
    help: Option<String>,
    spots: Vec<(Range<usize>, String)>,
}

impl Complaint {
    /// A complaint without a place.
    pub fn new(message: impl Into<String>) -> Self {
        Self { message: message.into(), help: None, spots: Vec::new() }
    }

    /// With a place in the text and what to say about it.
    #[must_use]
    pub fn at(mut self, range: Range<usize>, label: impl Into<String>) -> Self {
        self.spots.push((range, label.into()));
        self
    }

    /// With what to write instead.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// With what to write instead, where that is known.
    #[must_use]
    pub fn maybe_help(self, help: Option<String>) -> Self {
        Self { help: help.or(self.help), ..self }
    }

    /// Where the first of its places begins.
    pub(crate) fn place(&self) -> usize {
        self.spots.iter().map(|(range, _)| range.start).min().unwrap_or(0)
    }

    /// What is wrong, in one sentence.
    pub fn message(&self) -> &str {
        &self.message
    }
}

/// Why an input is refused: at least one complaint about a text.
#[derive(Debug, Clone)]
pub struct Refusal {
    source: Option<Source>,
    complaints: Vec<Complaint>,
}

/// More complaints than this are counted and not printed: the first ones explain the rest.
const MOST_PRINTED: usize = 8;

impl Refusal {
    /// A refusal of a text.
    pub const fn new(source: Source, complaints: Vec<Complaint>) -> Self {
        Self { source: Some(source), complaints }
    }

    /// A refusal that concerns no place in a text.
    pub fn plain(complaint: Complaint) -> Self {
        Self { source: None, complaints: vec![complaint] }
    }

    /// What is wrong.
    pub fn complaints(&self) -> &[Complaint] {
        &self.complaints
    }

    /// The complaints as a person reads them, with colours and rounded corners where the terminal has them.
    pub fn render(&self, fancy: bool) -> String {
        let theme = if fancy { GraphicalTheme::unicode() } else { GraphicalTheme::unicode_nocolor() };
        let handler = GraphicalReportHandler::new_themed(theme).with_width(110).with_links(false).with_context_lines(1);
        let mut out = String::new();
        for complaint in self.complaints.iter().take(MOST_PRINTED) {
            // Writing into a string cannot fail; should it ever, the bare message still gets out.
            if handler.render_report(&mut out, &Shown::new(complaint, self.source.as_ref())).is_err() {
                out.push_str(&complaint.message);
                out.push('\n');
            }
        }
        if let Some(more) = self.complaints.len().checked_sub(MOST_PRINTED).filter(|more| *more > 0) {
            out.push_str(&format!("  … and {more} more\n"));
        }
        out
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut first = true;
        for complaint in &self.complaints {
            f.write_str(if first { "" } else { "; " })?;
            f.write_str(&complaint.message)?;
            first = false;
        }
        Ok(())
    }
}

impl std::error::Error for Refusal {}

/// A complaint with its text, as the renderer wants it.
#[derive(Debug)]
struct Shown {
    message: String,
    help: Option<String>,
    labels: Vec<LabeledSpan>,
    text: Option<Source>,
}

impl Shown {
    fn new(complaint: &Complaint, source: Option<&Source>) -> Self {
        let mut message = complaint.message.clone();
        let mut shown = Self { message: String::new(), help: complaint.help.clone(), labels: Vec::new(), text: None };
        if let (Some(source), Some((first, _))) = (source, complaint.spots.first()) {
            if complaint.spots.iter().all(|(range, _)| source.can_be_shown(range.start)) {
                shown.labels = complaint.spots.iter().map(|(range, label)| label_of(range, label, source.text())).collect();
                shown.text = Some(source.clone());
            } else {
                let (line, column) = source.line_and_column(first.start);
                message = format!("{}, line {line}, column {column}: {message}", source.name());
            }
        }
        shown.message = message;
        shown
    }
}

fn label_of(range: &Range<usize>, label: &str, text: &str) -> LabeledSpan {
    // A caret needs something to stand under, and never reaches beyond its line: an empty range gets its character, one at the
    // end of a line the character before.
    let rest = text.get(range.start..).unwrap_or_default();
    let line_end = rest.find('\n').map_or(text.len(), |end| range.start.saturating_add(end));
    let before = text.get(..range.start).and_then(|before| before.chars().next_back()).filter(|c| *c != '\n');
    let start = match before {
        Some(before) if range.start >= line_end => range.start.saturating_sub(before.len_utf8()),
        _ => range.start,
    };
    let end = range.end.min(line_end).max(start.saturating_add(usize::from(start < line_end)));
    LabeledSpan::new((!label.is_empty()).then(|| label.to_owned()), start, end.saturating_sub(start))
}

impl fmt::Display for Shown {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Shown {}

impl Diagnostic for Shown {
    fn help(&self) -> Option<Box<dyn fmt::Display + '_>> {
        self.help.as_ref().map(|help| Box::new(help) as Box<dyn fmt::Display>)
    }

    fn source_code(&self) -> Option<&dyn SourceCode> {
        self.text.as_ref().map(|text| text as &dyn SourceCode)
    }

    fn labels(&self) -> Option<Box<dyn Iterator<Item = LabeledSpan> + '_>> {
        (!self.labels.is_empty()).then(|| Box::new(self.labels.iter().cloned()) as Box<dyn Iterator<Item = LabeledSpan>>)
    }
}
