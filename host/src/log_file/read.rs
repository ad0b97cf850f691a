//! Reading a log back: its records in order, or the line that is wrong.

use super::{COLUMNS, Line};
use crate::refusal::{Complaint, Refusal, Source, list, nearest};
use crate::run_data::Names;
use phase4::base::{Instant, Kind, Program, Record};
use std::fs::File;
use std::io::{self, BufRead, BufReader};
use std::path::Path;

/// A line longer than this is no line of a log.
const LONGEST_LINE: u64 = 1 << 16;

/// What a device's own log may leave out of a pulse.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Usual {
    amplitude_mv: u32,
    width_us: u32,
}

impl Usual {
    /// The pulses of this program.
    pub fn of(program: &Program) -> Self {
        let settings = program.settings();
        Self { amplitude_mv: settings.amplitude.0, width_us: u32::try_from(settings.width.as_micros()).unwrap_or(u32::MAX) }
    }
}

/// A log that was read.
#[derive(Debug, Clone)]
pub struct LogFile {
    /// Its records in the order of the file, time never running backwards; not numbered.
    pub records: Vec<Record>,
    /// True if it has a start: otherwise the device was running already.
    pub has_start: bool,
    /// True if it has an end.
    pub has_end: bool,
}

/// Reads a log, JSON Lines or comma-separated values, told by its first character.
///
/// # Errors
/// Refuses a file that cannot be read, an empty one, and the first line that is not a record, lies before the one before it, or
/// comes after the end.
pub fn read(path: &Path, names: &Names, usual: Usual) -> Result<LogFile, Refusal> {
    let name = path.display().to_string();
    match File::open(path) {
        Ok(file) => parse(BufReader::new(file), &name, names, usual),
        Err(error) => Err(Refusal::plain(Complaint::new(format!("cannot read {name}: {error}")))),
    }
}

/// Reads a log from an open file of this name.
///
/// # Errors
/// As [`read`].
pub fn parse(from: impl BufRead, name: &str, names: &Names, usual: Usual) -> Result<LogFile, Refusal> {
    let mut lines = Lines { from, name, number: 0 };
    let mut log = Reader { file: LogFile { records: Vec::new(), has_start: false, has_end: false }, names, usual };
    let Some(first) = lines.next_line()? else {
        return Err(Refusal::plain(Complaint::new(format!("{name} is empty: a log has at least one record"))));
    };
    if first.trim_start().starts_with('{') {
        let mut next = Some(first);
        while let Some(text) = next {
            log.take_json(&text).map_err(|wrong| lines.refuse(&text, wrong))?;
            next = lines.next_line()?;
        }
    } else {
        let columns = header(&first).map_err(|wrong| lines.refuse(&first, wrong))?;
        while let Some(text) = lines.next_line()? {
            log.take_csv(&columns, &text).map_err(|wrong| lines.refuse(&text, wrong))?;
        }
    }
    if log.file.records.is_empty() {
        return Err(Refusal::plain(Complaint::new(format!("{name} has no record"))));
    }
    Ok(log.file)
}

struct Lines<'n, R> {
    from: R,
    name: &'n str,
    number: usize,
}

impl<R: BufRead> Lines<'_, R> {
    /// The next line that is not blank.
    fn next_line(&mut self) -> Result<Option<String>, Refusal> {
        loop {
            let mut bytes = Vec::new();
            self.number = self.number.saturating_add(1);
            let refuse = |what: String| Refusal::plain(Complaint::new(format!("{} line {}: {what}", self.name, self.number)));
            let mut limited = io::Read::take(&mut self.from, LONGEST_LINE);
            let read = limited.read_until(b'\n', &mut bytes).map_err(|error| refuse(format!("cannot be read: {error}")))?;
            if read == 0 {
                return Ok(None);
            }
            if u64::try_from(read).unwrap_or(u64::MAX) == LONGEST_LINE && bytes.last() != Some(&b'\n') {
                return Err(refuse("longer than any line of a log".to_owned()));
            }
            let text = String::from_utf8(bytes).map_err(|_| refuse("not text".to_owned()))?;
            let text = text.trim_end_matches(['\n', '\r']);
            if !text.trim().is_empty() {
                return Ok(Some(text.to_owned()));
            }
        }
    }

    fn refuse(&self, text: &str, wrong: WrongLine) -> Refusal {
        let message = format!("{} line {}: {}", self.name, self.number, wrong.message);
        let source = Source::line(self.name, text, self.number);
        let at = wrong.column.unwrap_or(0).min(text.len());
        let range = if wrong.column.is_some() { at..at } else { 0..text.len() };
        Refusal::new(source, vec![Complaint::new(message).at(range, "here")])
    }
}

/// What is wrong with a line, and where in it, if that is known.
struct WrongLine {
    message: String,
    column: Option<usize>,
}

impl From<String> for WrongLine {
    fn from(message: String) -> Self {
        Self { message, column: None }
    }
}

struct Reader<'n> {
    file: LogFile,
    names: &'n Names,
    usual: Usual,
}

impl Reader<'_> {
    fn take_json(&mut self, text: &str) -> Result<(), WrongLine> {
        let line: Line<'_> = serde_json::from_str(text).map_err(|error| {
            let message = error.to_string();
            let message =
                message.split(" at line ").next().unwrap_or_default().replace("expected u64", "expected a whole number");
            WrongLine { message: format!("not a record as JSON: {message}"), column: error.column().checked_sub(1) }
        })?;
        self.take(&line)
    }

    fn take_csv(&mut self, columns: &csv::StringRecord, text: &str) -> Result<(), WrongLine> {
        let row = row(text)?;
        if row.len() != columns.len() {
            return Err(format!("{} fields, and the header has {}", row.len(), columns.len()).into());
        }
        let line: Line<'_> = row.deserialize(Some(columns)).map_err(|error| match error.kind() {
            csv::ErrorKind::Deserialize { err, .. } => {
                let column = err.field().and_then(|field| columns.get(usize::try_from(field).ok()?)).unwrap_or("a field");
                format!("{column} is not understood: {}", err.kind())
            }
            _ => error.to_string(),
        })?;
        self.take(&line)
    }

    fn take(&mut self, line: &Line<'_>) -> Result<(), WrongLine> {
        let record = line.record(self.names, (self.usual.amplitude_mv, self.usual.width_us))?;
        let file = &mut self.file;
        if file.has_end {
            return Err("a record after the end of the run".to_owned().into());
        }
        if let Some(last) = file.records.last() {
            check_order(last.at, record.at)?;
        }
        match record.kind {
            Kind::Start if !file.records.is_empty() => {
                return Err("a start within the log: one log is of one run".to_owned().into());
            }
            Kind::Start => file.has_start = true,
            Kind::End => file.has_end = true,
            _ => {}
        }
        file.records.push(record);
        Ok(())
    }
}

fn check_order(last: Instant, next: Instant) -> Result<(), WrongLine> {
    if next < last {
        let (next, last) = (next.as_micros(), last.as_micros());
        return Err(format!("time runs backwards: {next} us after {last} us").into());
    }
    Ok(())
}

fn row(text: &str) -> Result<csv::StringRecord, WrongLine> {
    let mut reader = csv::ReaderBuilder::new().has_headers(false).trim(csv::Trim::All).from_reader(text.as_bytes());
    let mut row = csv::StringRecord::new();
    match reader.read_record(&mut row) {
        Ok(true) => Ok(row),
        Ok(false) => Err("an empty row".to_owned().into()),
        Err(error) => Err(error.to_string().into()),
    }
}

/// The header of a log as comma-separated values. Columns that are not known are passed over; the four that every log has must be there.
fn header(text: &str) -> Result<csv::StringRecord, WrongLine> {
    let header = row(text)?;
    for needed in ["at_us", "what", "where"] {
        if header.iter().all(|name| name != needed) {
            let meant = header.iter().find(|name| nearest(name, COLUMNS) == Some(needed));
            let hint = match meant {
                Some(name) => format!("did you mean it by `{name}`?"),
                None => format!("the columns of a log are {}", list(COLUMNS)),
            };
            return Err(format!("neither a record as JSON nor a header with a column `{needed}`: {hint}").into());
        }
    }
    Ok(header)
}
