//! Refusals, as the tables of an anatomy need them in `const` code.

use crate::base::{ParamError, Problem, Span};

/// Leaves the function with the error, where there is one: what `?` does, in `const` code too.
macro_rules! sound {
    ($check:expr) => {
        if let Err(error) = $check {
            return Err(error);
        }
    };
}
pub(super) use sound;

pub(super) const fn within(parameter: &'static str, value: u64, least: u64, greatest: u64) -> Result<(), ParamError> {
    if value < least || value > greatest {
        return Err(ParamError::new(parameter, Problem::OutOfRange { value, least, greatest }));
    }
    Ok(())
}

pub(super) const fn span_within(parameter: &'static str, value: Span, least: Span, greatest: Span) -> Result<(), ParamError> {
    within(parameter, value.as_micros(), least.as_micros(), greatest.as_micros())
}

pub(super) const fn conflict(
    parameter: &'static str,
    value: u64,
    with: &'static str,
    other: u64,
    rule: &'static str,
) -> Result<(), ParamError> {
    Err(ParamError::new(parameter, Problem::Conflict { value, with, other, rule }))
}

/// The same outcome, of this row of its table.
pub(super) const fn in_row(row: u8, outcome: Result<(), ParamError>) -> Result<(), ParamError> {
    match outcome {
        Ok(()) => Ok(()),
        Err(error) => Err(error.in_row(row)),
    }
}
