//! What is refused, and why: one error type for parameters, one for inputs that come too soon.

use super::Instant;
use core::fmt;

/// A parameter that cannot be used: its name, what was given, and what is accepted.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct ParamError {
    /// The parameter's name, as the documentation of its owner spells it (`interval`, `refractory`, …).
    pub parameter: &'static str,
    /// The row of its table, where it belongs to one.
    pub row: Option<u8>,
    /// What is wrong with it.
    pub problem: Problem,
}

/// What is wrong with a parameter. Values are in the parameter's own unit: µs, µV or mV.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Problem {
    /// Outside what is accepted; both ends belong to the accepted range.
    OutOfRange {
        /// What was given.
        value: u64,
        /// The least accepted value.
        least: u64,
        /// The greatest accepted value.
        greatest: u64,
    },
    /// In conflict with another parameter.
    Conflict {
        /// What was given.
        value: u64,
        /// The other parameter.
        with: &'static str,
        /// The other parameter's value.
        other: u64,
        /// What must hold between them, in words.
        rule: &'static str,
    },
    /// Names a row that its table does not have.
    NoSuchRow {
        /// The row named.
        value: u64,
        /// How many rows the table has.
        rows: u64,
    },
    /// A choice that does not exist here, in words.
    Unsupported(&'static str),
}

impl ParamError {
    /// An error of this parameter.
    pub const fn new(parameter: &'static str, problem: Problem) -> Self {
        Self { parameter, row: None, problem }
    }

    /// The same error, of this row of the parameter's table.
    #[must_use]
    pub const fn in_row(self, row: u8) -> Self {
        Self { row: Some(row), ..self }
    }
}

impl fmt::Display for ParamError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.parameter)?;
        if let Some(row) = self.row {
            write!(f, " (row {row})")?;
        }
        match self.problem {
            Problem::OutOfRange { value, least, greatest } => {
                write!(f, " is {value}, accepted is {least} to {greatest}")
            }
            Problem::Conflict { value, with, other, rule } => {
                write!(f, " is {value} and {with} is {other}: {rule}")
            }
            Problem::NoSuchRow { value, rows } => write!(f, " names row {value} of a table of {rows}"),
            Problem::Unsupported(what) => write!(f, ": {what}"),
        }
    }
}

impl core::error::Error for ParamError {}

/// An input whose instant lies beyond something that is still due: poll up to the instant inside first, then offer it again.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct NotYet(pub Instant);

impl fmt::Display for NotYet {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "something is due at {} us: poll first", self.0.as_micros())
    }
}

impl core::error::Error for NotYet {}
