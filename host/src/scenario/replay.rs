//! A recorded series of intervals, from a table of comma-separated values.

use super::units::span;
use crate::refusal::{Complaint, Refusal, Source, list, nearest};
use phase4::base::Span;
use std::path::Path;

/// The columns that are known, each with the unit of its numbers.
const COLUMNS: [(&str, &str); 3] = [("interval_ms", "ms"), ("interval_us", "us"), ("interval_s", "s")];

/// Reads the intervals of a file: a header with a column `interval_ms` (or `interval_us`, `interval_s`), then a row for each.
///
/// # Errors
/// Refuses a file that cannot be read, has no such column or no row, or a row that is not an interval: with its line.
pub(super) fn read(path: &Path) -> Result<Vec<Span>, Refusal> {
    let source = Source::read(path)?;
    intervals(&source).map_err(|complaint| Refusal::new(source.clone(), vec![complaint]))
}

fn intervals(source: &Source) -> Result<Vec<Span>, Complaint> {
    let mut reader = csv::ReaderBuilder::new().trim(csv::Trim::All).flexible(true).from_reader(source.text().as_bytes());
    let names = COLUMNS.map(|(name, _)| name);
    let header = reader.headers().map_err(|error| Complaint::new(format!("{}: {error}", source.name())))?.clone();
    let found = header
        .iter()
        .enumerate()
        .find_map(|(column, name)| COLUMNS.iter().find(|(known, _)| *known == name).map(|(_, unit)| (column, *unit)));
    let Some((column, unit)) = found else {
        let first = header.iter().next().unwrap_or_default();
        let label = match nearest(first, names) {
            Some(name) => format!("did you mean `{name}`?"),
            None => format!("expected a header with a column {}", list(names)),
        };
        let end = source.text().find('\n').unwrap_or(source.text().len());
        return Err(Complaint::new(format!("{} has no column of intervals", source.name())).at(0..end, label));
    };
    let mut intervals = Vec::new();
    for row in reader.records() {
        let row = row.map_err(|error| Complaint::new(format!("{}: {error}", source.name())))?;
        let place = row.position().map_or(0, |position| usize::try_from(position.byte()).unwrap_or(usize::MAX));
        intervals.push(interval(source, &row, column, unit, place)?);
    }
    if intervals.is_empty() {
        return Err(Complaint::new(format!("{} has no row of intervals below its header", source.name())));
    }
    Ok(intervals)
}

fn interval(source: &Source, row: &csv::StringRecord, column: usize, unit: &str, place: usize) -> Result<Span, Complaint> {
    let field = row.get(column).unwrap_or_default();
    // The row begins at the place or, where blank lines were skipped, a little later.
    let from = source.text().get(place..).and_then(|rest| rest.find(field)).map_or(place, |ahead| place.saturating_add(ahead));
    let (line, _) = source.line_and_column(from);
    let refuse = |label: String| {
        Err(Complaint::new(format!("{} line {line} is not an interval", source.name()))
            .at(from..from.saturating_add(field.len()), label))
    };
    match span(&format!("{field} {unit}")) {
        Ok(interval) if interval.is_zero() => refuse("zero: an interval is longer than that".to_owned()),
        Ok(interval) => Ok(interval),
        Err(wrong) if field.is_empty() || wrong.at.end > field.len() => refuse(format!("expected a number of {unit}")),
        Err(wrong) if !wrong.label.starts_with("finer") && !wrong.label.starts_with("too") => {
            refuse(format!("expected a number of {unit}"))
        }
        Err(wrong) => refuse(wrong.label),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str) -> Result<Vec<u64>, String> {
        let read = intervals(&Source::new("beats.csv", text));
        read.map(|spans| spans.into_iter().map(Span::as_micros).collect()).map_err(|complaint| complaint.message().to_owned())
    }

    #[test]
    fn a_column_of_intervals_is_found_by_its_name() {
        assert_eq!(read("interval_ms\n859\n867.5\n"), Ok(vec![859_000, 867_500]));
        assert_eq!(read("beat, interval_us\n1, 859000\n\n2, 7\n"), Ok(vec![859_000, 7]));
    }

    #[test]
    fn what_is_no_table_of_intervals_is_refused() {
        for text in [
            "",
            "859\n867\n",
            "interval_ms\n",
            "interval_ms\n859\nx\n",
            "interval_ms\n0\n",
            "interval_ms\n-5\n",
            "a,interval_ms\n1\n",
        ] {
            assert!(read(text).is_err(), "{text:?}");
        }
        assert_eq!(read("interval_ms\n859\n\nx\n"), Err("beats.csv line 4 is not an interval".to_owned()));
    }
}
