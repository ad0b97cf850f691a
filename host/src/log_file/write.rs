//! Writing a log, record by record.

use super::{COLUMNS, Line};
use crate::run_data::Names;
use phase4::base::Record;
use serde::ser::{Serialize, SerializeMap, Serializer};
use std::io::{self, Write};

/// A log as JSON Lines: an object a record, no header.
#[derive(Debug)]
pub struct JsonLog<W> {
    out: W,
}

impl<W: Write> JsonLog<W> {
    /// A log that is written to `out`, which should be buffered.
    pub const fn new(out: W) -> Self {
        Self { out }
    }

    /// Writes one record.
    ///
    /// # Errors
    /// What the output refuses.
    pub fn write(&mut self, record: &Record, names: &Names) -> io::Result<()> {
        serde_json::to_writer(&mut self.out, &Present(&Line::of(record, names)))?;
        self.out.write_all(b"\n")
    }

    /// Ends the log.
    ///
    /// # Errors
    /// What the output refuses.
    pub fn finish(mut self) -> io::Result<W> {
        self.out.flush()?;
        Ok(self.out)
    }
}

/// A log as comma-separated values: a header, then a row a record, the columns of [`COLUMNS`].
#[derive(Debug)]
pub struct CsvLog<W: Write> {
    out: csv::Writer<W>,
}

impl<W: Write> CsvLog<W> {
    /// A log that is written to `out`; the header at once.
    ///
    /// # Errors
    /// What the output refuses.
    pub fn new(out: W) -> io::Result<Self> {
        let mut out = csv::WriterBuilder::new().has_headers(false).from_writer(out);
        out.write_record(COLUMNS).map_err(into_io)?;
        Ok(Self { out })
    }

    /// Writes one record.
    ///
    /// # Errors
    /// What the output refuses.
    pub fn write(&mut self, record: &Record, names: &Names) -> io::Result<()> {
        self.out.serialize(Line::of(record, names)).map_err(into_io)
    }

    /// Ends the log.
    ///
    /// # Errors
    /// What the output refuses.
    pub fn finish(mut self) -> io::Result<W> {
        self.out.flush()?;
        self.out.into_inner().map_err(|error| io::Error::other(error.to_string()))
    }
}

fn into_io(error: csv::Error) -> io::Error {
    match error.into_kind() {
        csv::ErrorKind::Io(error) => error,
        other => io::Error::other(format!("{other:?}")),
    }
}

/// A line without what is absent from it.
struct Present<'a>(&'a Line<'a>);

impl Serialize for Present<'_> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let line = self.0;
        let mut map = serializer.serialize_map(None)?;
        map.serialize_entry("at_us", &line.at_us)?;
        map.serialize_entry("what", &line.what)?;
        map.serialize_entry("where", &line.place)?;
        map.serialize_entry("cause", &line.cause)?;
        macro_rules! present {
            ($($field:ident)*) => {
                $(if let Some(value) = &line.$field {
                    map.serialize_entry(stringify!($field), value)?;
                })*
            };
        }
        present!(peak_uv width_us amplitude_mv way reason recovery_us left_us took_us delay_us missing_mv missing_us turn value_us seed number);
        map.end()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use phase4::base::{Cause, Instant, Kind};

    #[test]
    fn both_forms_have_the_same_columns() {
        let mut csv = CsvLog::new(Vec::new()).unwrap();
        let mut json = JsonLog::new(Vec::new());
        let record = Record::new(Instant::from_micros(5), Kind::Signal, 1, Cause::NONE).with_details(7, 9);
        csv.write(&record, &Names::default()).unwrap();
        json.write(&record, &Names::default()).unwrap();
        let csv = String::from_utf8(csv.finish().unwrap()).unwrap();
        let json = String::from_utf8(json.finish().unwrap()).unwrap();
        let (header, row) = csv.trim_end().split_once('\n').unwrap();
        assert_eq!(header.split(',').collect::<Vec<_>>(), COLUMNS);
        assert_eq!(row, "5,signal,V,none,7,9,,,,,,,,,,,,,0");
        assert_eq!(
            json,
            "{\"at_us\":5,\"what\":\"signal\",\"where\":\"V\",\"cause\":\"none\",\"peak_uv\":7,\"width_us\":9,\"number\":0}\n"
        );
        for (name, _) in serde_json::from_str::<serde_json::Map<String, serde_json::Value>>(&json).unwrap() {
            assert!(COLUMNS.contains(&name.as_str()));
        }
    }
}
