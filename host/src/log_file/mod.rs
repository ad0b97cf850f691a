//! A run's log as text: one record a line, as JSON or as comma-separated values, with words in place of numbers.
//!
//! Both forms carry every record whole, so that a log read back is the log that was written, to the bit of its hash.

mod line;
mod read;
mod words;
mod write;

pub use line::{COLUMNS, Line};
pub use read::{LogFile, Usual, parse, read};
pub use write::{CsvLog, JsonLog};
