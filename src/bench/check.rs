//! What a script may not be: too long, without sense, or in contradiction with itself.

use super::{Act, Amount, Coupling, Event, Step, When};
use crate::base::{ParamError, Problem};
use crate::heart::Ways;

/// Checks a list of steps for a script that holds at most `room` of them.
pub(super) fn check(steps: &[Step], room: usize, has_program: bool) -> Result<(), ParamError> {
    let (count, room) = (u64::try_from(steps.len()).unwrap_or(u64::MAX), u64::try_from(room.min(255)).unwrap_or(255));
    if count > room {
        return Err(ParamError::new("step", Problem::OutOfRange { value: count, least: 0, greatest: room }));
    }
    for (row, step) in (0_u8..).zip(steps) {
        check_step(step, has_program).map_err(|error| error.in_row(row))?;
        let before = steps.iter().take(usize::from(row));
        for (other_row, other) in (0_u64..).zip(before) {
            if contradict(step, other) {
                let problem = Problem::Conflict {
                    value: u64::from(row),
                    with: "step",
                    other: other_row,
                    rule: "both act at the same instant and undo each other",
                };
                return Err(ParamError::new("step", problem).in_row(row));
            }
        }
    }
    Ok(())
}

fn check_step(step: &Step, has_program: bool) -> Result<(), ParamError> {
    at_least_one("times", u64::from(step.times))?;
    match step.when {
        When::At(_) if step.times != 1 => {
            let value = u64::from(step.times);
            Err(ParamError::new("times", Problem::OutOfRange { value, least: 1, greatest: 1 }))
        }
        When::At(_) => Ok(()),
        When::Every(span) | When::Without { span, .. } => at_least_one("when", span.as_micros()),
        When::After { nth, coupling, .. } => {
            at_least_one("when", u64::from(nth))?;
            check_coupling(coupling, has_program)
        }
    }
}

fn check_coupling(coupling: Coupling, has_program: bool) -> Result<(), ParamError> {
    if coupling.window.is_some() && !has_program {
        return Err(ParamError::new("when", Problem::Unsupported("a window's edge needs a device with a program")));
    }
    match coupling.shift {
        Amount::Fixed(by) if coupling.window.is_none() => at_least_one("when", u64::try_from(by.as_micros()).unwrap_or(0)),
        Amount::Fixed(_) => Ok(()),
        Amount::Sweep { step, .. } => at_least_one("when", step.as_micros()),
        Amount::Random { from, to } => {
            let value = to.as_micros().abs_diff(from.as_micros());
            let greatest = u64::from(u32::MAX).saturating_sub(1);
            if value > greatest {
                return Err(ParamError::new("when", Problem::OutOfRange { value, least: 0, greatest }));
            }
            Ok(())
        }
    }
}

const fn at_least_one(parameter: &'static str, value: u64) -> Result<(), ParamError> {
    if value == 0 {
        return Err(ParamError::new(parameter, Problem::OutOfRange { value, least: 1, greatest: u64::MAX }));
    }
    Ok(())
}

/// True if both steps act at the same instants and one undoes what the other does.
fn contradict(one: &Step, other: &Step) -> bool {
    one.when == other.when
        && match (one.act, other.act) {
            (Act::Arrest(a), Act::Release(b)) | (Act::Release(a), Act::Arrest(b)) => a == b,
            (Act::Open(a, p), Act::Shut(b, q)) | (Act::Shut(a, p), Act::Open(b, q)) => {
                a == b && (p == q || p == Ways::Both || q == Ways::Both)
            }
            (Act::Quiet, Act::Release(_) | Act::Open(..)) | (Act::Release(_) | Act::Open(..), Act::Quiet) => true,
            _ => false,
        }
}

/// Checks that every step names rows that the anatomy has.
pub(super) fn check_rows(steps: &[Step], sites: usize, tracts: usize, cells: usize) -> Result<(), ParamError> {
    let rows = |parameter, row: u8, rows: usize| {
        if usize::from(row) < rows {
            return Ok(());
        }
        let rows = u64::try_from(rows).unwrap_or(u64::MAX);
        Err(ParamError::new(parameter, Problem::NoSuchRow { value: u64::from(row), rows }))
    };
    for (row, step) in (0_u8..).zip(steps) {
        let acted_on = match step.act {
            Act::Beat(site) => rows("act", site.row(), sites),
            Act::Arrest(cell) | Act::Release(cell) => rows("act", cell.row(), cells),
            Act::Shut(tract, _) | Act::Open(tract, _) => rows("act", tract.row(), tracts),
            Act::Quiet | Act::Signal(..) | Act::Lead(..) | Act::End => Ok(()),
        };
        let waited_for = match step.when {
            When::After { event, .. } | When::Without { event, .. } => match event {
                Event::Activation(site) | Event::Capture(site) | Event::NoCapture(site) => rows("when", site.row(), sites),
                Event::Block(tract) => rows("when", tract.row(), tracts),
                Event::Pulse(_) | Event::Signal(_) => Ok(()),
            },
            When::At(_) | When::Every(_) => Ok(()),
        };
        acted_on.and(waited_for).map_err(|error| error.in_row(row))?;
    }
    Ok(())
}
