//! The walk through the parsed file: every table is opened with its schema, every value read where it stands, every complaint kept
//! with its place.

use super::scan::Wrong;
use super::schema::{Holds, Schema};
use crate::refusal::{Complaint, Source, list, nearest};
use std::cell::RefCell;
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// The walk: the text, and what was found wrong with it so far.
#[derive(Debug)]
pub(super) struct Walk<'a> {
    pub(super) source: &'a Source,
    complaints: RefCell<Vec<Complaint>>,
}

impl<'a> Walk<'a> {
    pub(super) const fn new(source: &'a Source) -> Self {
        Self { source, complaints: RefCell::new(Vec::new()) }
    }

    pub(super) fn complain(&self, complaint: Complaint) {
        self.complaints.borrow_mut().push(complaint);
    }

    pub(super) fn has_complaints(&self) -> bool {
        !self.complaints.borrow().is_empty()
    }

    /// The complaints in the order of their places.
    pub(super) fn into_complaints(self) -> Vec<Complaint> {
        let mut complaints = self.complaints.into_inner();
        complaints.sort_by_key(Complaint::place);
        // A table that was opened twice has complained twice.
        complaints.dedup();
        complaints
    }
}

/// A table of the file, opened with its schema. A table that is absent opens as one without keys.
#[derive(Debug, Clone)]
pub(super) struct Section<'a, 'w> {
    walk: &'w Walk<'a>,
    schema: &'static Schema,
    /// The table as its user would name it, `[heart.site.apex]`.
    title: String,
    table: Option<&'w DeTable<'a>>,
    span: Range<usize>,
}

/// A text in the file, and where it stands.
#[derive(Debug, Clone)]
pub(super) struct Text<'w> {
    pub(super) value: &'w str,
    pub(super) span: Range<usize>,
    /// Where its first character stands, if its characters stand in the file as they are.
    inside: Option<usize>,
}

impl Text<'_> {
    /// The place in the file of a range of this text.
    pub(super) fn place(&self, range: &Range<usize>) -> Range<usize> {
        match self.inside {
            Some(from) => from.saturating_add(range.start)..from.saturating_add(range.end),
            None => self.span.clone(),
        }
    }
}

impl<'a, 'w> Section<'a, 'w> {
    /// Opens the whole file.
    pub(super) fn root(walk: &'w Walk<'a>, schema: &'static Schema, table: &'w Spanned<DeTable<'a>>) -> Self {
        let section = Self { walk, schema, title: schema.title.to_owned(), table: Some(table.get_ref()), span: 0..0 };
        section.check_keys();
        section
    }

    /// Opens a table that this key holds.
    pub(super) fn open(&self, key: &str, schema: &'static Schema) -> Self {
        self.open_as(key, schema, schema.title.to_owned())
    }

    /// Opens a table that this key holds, under a title of its own.
    pub(super) fn open_as(&self, key: &str, schema: &'static Schema, title: String) -> Self {
        let Some((name, value)) = self.entry(key) else {
            return Self { walk: self.walk, schema, title, table: None, span: self.span.clone() };
        };
        self.open_value(name, value, schema, title)
    }

    fn open_value(&self, name: Range<usize>, value: &'w Spanned<DeValue<'a>>, schema: &'static Schema, title: String) -> Self {
        let table = value.get_ref().as_table();
        if table.is_none() {
            let label = format!("{}, expected a table", describe(value.get_ref()));
            self.walk.complain(Complaint::new(format!("{title} is not a table")).at(value.span(), label));
        }
        // The span of `[table]` is the header's; of an inline table the value's; of a dotted one the key's.
        let span = if value.span().is_empty() { name } else { value.span() };
        let section = Self { walk: self.walk, schema, title, table, span };
        section.check_keys();
        section
    }

    /// Opens each table of a list of tables, or the one table where there is but one.
    pub(super) fn open_each(&self, key: &str, schema: &'static Schema) -> Vec<Self> {
        let Some((name, value)) = self.entry(key) else { return Vec::new() };
        match value.get_ref() {
            DeValue::Array(list) => {
                list.iter().map(|value| self.open_value(name.clone(), value, schema, schema.title.to_owned())).collect()
            }
            _ => vec![self.open_value(name, value, schema, schema.title.to_owned())],
        }
    }

    /// Opens each table under a key whose own keys are names, such as those of sites.
    pub(super) fn open_named(
        &self,
        key: &str,
        noun: &str,
        names: &[&'static str],
        schema: &'static Schema,
    ) -> Vec<(usize, Self)> {
        let Some((name, value)) = self.entry(key) else { return Vec::new() };
        let Some(table) = value.get_ref().as_table() else {
            self.open_value(name, value, schema, format!("[heart.{key}]"));
            return Vec::new();
        };
        let mut sections = Vec::new();
        for (given, value) in table {
            match names.iter().position(|name| *name == given.get_ref()) {
                Some(row) => {
                    let title = format!("[heart.{key}.{}]", given.get_ref());
                    sections.push((row, self.open_value(given.span(), value, schema, title)));
                }
                None => self.walk.complain(no_such(noun, given.get_ref(), given.span(), names.iter().copied())),
            }
        }
        sections
    }

    fn check_keys(&self) {
        for (given, _) in self.table.into_iter().flatten() {
            if self.schema.keys.iter().all(|key| key.name != given.get_ref()) {
                let names = self.schema.keys.iter().map(|key| key.name);
                let kind = if self.schema.title == "the file" { "table" } else { "key" };
                let message = format!("{} has no {kind} `{}`", self.title, given.get_ref());
                let label = match nearest(given.get_ref(), names.clone()) {
                    Some(name) => format!("did you mean `{name}`?"),
                    None => "not a key of this table".to_owned(),
                };
                let complaint = Complaint::new(message).at(given.span(), label);
                self.walk.complain(complaint.help(format!("{} has {}", self.title, list(names))));
            }
        }
    }

    fn entry(&self, key: &str) -> Option<(Range<usize>, &'w Spanned<DeValue<'a>>)> {
        self.table?.iter().find(|(name, _)| name.get_ref() == key).map(|(name, value)| (name.span(), value))
    }

    fn holds(&self, key: &str) -> Holds {
        self.schema.keys.iter().find(|row| row.name == key).map_or(Holds::Text, |row| row.holds)
    }

    /// The table's name as its user would write it.
    pub(super) fn title(&self) -> &str {
        &self.title
    }

    /// True if the table is in the file.
    pub(super) const fn exists(&self) -> bool {
        self.table.is_some()
    }

    /// True if the key is in the table.
    pub(super) fn has(&self, key: &str) -> bool {
        self.entry(key).is_some()
    }

    /// True if the key holds a table.
    pub(super) fn has_table(&self, key: &str) -> bool {
        self.entry(key).is_some_and(|(_, value)| value.get_ref().is_table())
    }

    /// Where the value of a key stands; where the table begins if it has no such key.
    pub(super) fn place(&self, key: &str) -> Range<usize> {
        self.entry(key).map_or_else(|| self.span.clone(), |(_, value)| value.span())
    }

    /// Where the table begins.
    pub(super) fn span(&self) -> Range<usize> {
        self.span.clone()
    }

    /// Adds a complaint about this table.
    pub(super) fn complain(&self, complaint: Complaint) {
        self.walk.complain(complaint);
    }

    /// The file that is walked.
    pub(super) fn source(&self) -> &'a Source {
        self.walk.source
    }

    /// Complains that a key is missing, with an example; not if a misspelt one stands in its place, which has its own complaint.
    pub(super) fn missing(&self, key: &str) {
        let names = || self.schema.keys.iter().map(|key| key.name);
        let misspelt = |given: &str| names().all(|name| name != given) && nearest(given, names()) == Some(key);
        if self.table.into_iter().flatten().any(|(given, _)| misspelt(given.get_ref())) {
            return;
        }
        let complaint = Complaint::new(format!("{} has no `{key}`, and needs one", self.title));
        let complaint = complaint.at(self.span.clone(), format!("`{key}` belongs here"));
        self.walk.complain(complaint.help(format!("expected {}", self.holds(key).expected())));
    }

    fn wrong_type(&self, key: &str, value: &Spanned<DeValue<'a>>) {
        let holds = self.holds(key);
        let label = format!("{}, expected {}", describe(value.get_ref()), holds.expected());
        let help = match (value.get_ref(), holds.usual_unit()) {
            (DeValue::Integer(_) | DeValue::Float(_), Some(unit)) => {
                let number = self.walk.source.text().get(value.span()).unwrap_or_default();
                Some(format!("write {key} = \"{number} {unit}\" if that is the unit you mean"))
            }
            _ => None,
        };
        self.walk
            .complain(Complaint::new(format!("{} {key} is not understood", self.title)).at(value.span(), label).maybe_help(help));
    }

    /// The text of a key, `None` if it has none or is none.
    pub(super) fn text(&self, key: &str) -> Option<Text<'w>> {
        let (_, value) = self.entry(key)?;
        let text = self.text_of(value);
        if text.is_none() {
            self.wrong_type(key, value);
        }
        text
    }

    fn text_of(&self, value: &'w Spanned<DeValue<'a>>) -> Option<Text<'w>> {
        let text = value.get_ref().as_str()?;
        let span = value.span();
        let first = span.start.saturating_add(1);
        let as_it_stands = self.walk.source.text().get(first..span.end.saturating_sub(1)) == Some(text);
        Some(Text { value: text, span, inside: as_it_stands.then_some(first) })
    }

    /// The texts of a list.
    pub(super) fn texts(&self, key: &str) -> Vec<Text<'w>> {
        let Some((_, value)) = self.entry(key) else { return Vec::new() };
        let texts = value.get_ref().as_array().map(|list| list.iter().map(|value| self.text_of(value)).collect());
        match texts {
            Some(Some(texts)) => texts,
            _ => {
                self.wrong_type(key, value);
                Vec::new()
            }
        }
    }

    /// Reads the text of a key, `None` if it is absent or wrong; a complaint says which.
    pub(super) fn read<T>(&self, key: &str, read: impl FnOnce(&str) -> Result<T, Wrong>) -> Option<T> {
        let text = self.text(key)?;
        self.read_text(key, &text, read)
    }

    /// Reads a text that belongs to a key.
    pub(super) fn read_text<T>(&self, key: &str, text: &Text<'_>, read: impl FnOnce(&str) -> Result<T, Wrong>) -> Option<T> {
        match read(text.value) {
            Ok(value) => Some(value),
            Err(wrong) => {
                let complaint = Complaint::new(format!("{} {key} is not understood", self.title));
                self.walk.complain(complaint.at(text.place(&wrong.at), wrong.label).maybe_help(wrong.help));
                None
            }
        }
    }

    /// A share, which may also be written as a bare number.
    pub(super) fn share_millionths(&self, key: &str) -> Option<u32> {
        let (_, value) = self.entry(key)?;
        match value.get_ref() {
            DeValue::Integer(_) | DeValue::Float(_) => {
                let number = self.walk.source.text().get(value.span())?;
                let text = Text { value: number, span: value.span(), inside: Some(value.span().start) };
                self.read_text(key, &text, super::units::share_millionths)
            }
            _ => self.read(key, super::units::share_millionths),
        }
    }

    /// One of the words that the schema lists for a key.
    pub(super) fn choice(&self, key: &str) -> Option<&'static str> {
        let Holds::OneOf(words) = self.holds(key) else { return None };
        let text = self.text(key)?;
        let found = words.iter().find(|word| **word == text.value);
        if found.is_none() {
            let label = match nearest(text.value, words.iter().copied()) {
                Some(word) => format!("did you mean \"{word}\"?"),
                None => "not one of them".to_owned(),
            };
            let message = format!("{} {key} has no choice \"{}\"", self.title, text.value);
            let complaint = Complaint::new(message).at(text.span, label);
            self.walk.complain(complaint.help(format!("expected {}", self.holds(key).expected())));
        }
        found.copied()
    }

    /// A whole number.
    pub(super) fn whole(&self, key: &str) -> Option<u64> {
        let (_, value) = self.entry(key)?;
        let number = match value.get_ref() {
            DeValue::Integer(number) => u64::from_str_radix(number.as_str(), number.radix()).ok(),
            _ => None,
        };
        if number.is_none() {
            self.wrong_type(key, value);
        }
        number
    }

    /// `true` or `false`.
    pub(super) fn switch(&self, key: &str) -> Option<bool> {
        let (_, value) = self.entry(key)?;
        let on = value.get_ref().as_bool();
        if on.is_none() {
            self.wrong_type(key, value);
        }
        on
    }

    /// A name out of a list of names.
    pub(super) fn name(&self, key: &str, noun: &str, names: &[&'static str]) -> Option<usize> {
        let text = self.text(key)?;
        let row = names.iter().position(|name| *name == text.value);
        if row.is_none() {
            self.walk.complain(no_such(noun, text.value, text.span, names.iter().copied()));
        }
        row
    }
}

/// There is no such name: what was meant, and which there are.
fn no_such<'n>(noun: &str, given: &str, span: Range<usize>, names: impl Iterator<Item = &'n str> + Clone) -> Complaint {
    let label = match nearest(given, names.clone()) {
        Some(name) => format!("did you mean `{name}`?"),
        None => format!("not a {noun} of this anatomy"),
    };
    Complaint::new(format!("there is no {noun} `{given}`")).at(span, label).help(format!("the {noun}s are {}", list(names)))
}

fn describe(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a bare number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
