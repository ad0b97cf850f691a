//! The bank of faults, as data: how a pacing device can be wrong in time.
//!
//! The faults are general experience with timing code, from memory; none is a claim about any product.

use super::Size;
use crate::base::{Deviation, ParamError, Problem, Span};

/// One fault of the bank.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct FaultRow {
    /// Its number; numbers are never given anew.
    pub id: u8,
    /// What is wrong, in one plain line.
    pub line: &'static str,
    /// The rules that catch it, by their codes.
    pub rules: &'static [&'static str],
    /// Where it shows: X only in exact lockstep, B on a bench at a tolerance of 8 ms and an uncertainty of 1 ms, R only over
    /// a long run, W needs the analogue front end.
    pub classes: &'static str,
    /// What a program must have for the fault to matter.
    pub needs: Needs,
    /// The size it has unless another is asked for.
    pub size: Size,
    /// The least accepted size, for faults that have one.
    pub least: Size,
    /// The greatest accepted size.
    pub greatest: Size,
    /// The smallest size that shows at a tolerance of 8 ms and an uncertainty of 1 ms, at 60 /min (hysteresis 50 /min),
    /// blanking 100 ms, refractory 250 ms.
    pub smallest_on_bench: Size,
}

/// What a program must have for a fault to matter.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Needs {
    /// It paces.
    Pacing,
    /// It paces and senses.
    Sensing,
    /// It paces, senses, and its hysteresis interval is longer than the lower rate interval.
    Hysteresis,
}

/// Every fault of this version.
pub static BANK: [FaultRow; 18] = [
    whole(1, "a sense does not restart the rate timer", &["IN1", "LR2"], "B", Needs::Sensing),
    whole(3, "a signal in the refractory period restarts the rate timer", &["RF1", "LR1"], "B", Needs::Sensing),
    whole(4, "a blanked signal restarts the rate timer", &["RF1", "LR1"], "B", Needs::Sensing),
    FaultRow {
        size: millis(1),
        least: micros(1),
        greatest: millis(1_000),
        smallest_on_bench: micros(9_002),
        ..whole(5, "the rate timer runs too long", &["LR1"], "X R", Needs::Pacing)
    },
    FaultRow {
        size: micros(65_536_000),
        least: micros(65_536),
        greatest: micros(65_536_000),
        smallest_on_bench: micros(65_536_000),
        ..whole(7, "a 16-bit register of the rate timer wraps unnoticed", &["LR1", "LR2"], "B", Needs::Pacing)
    },
    FaultRow {
        size: micros(1 << 32),
        least: micros(1 << 32),
        greatest: millis(1 << 32),
        smallest_on_bench: micros(1 << 32),
        ..whole(8, "a 32-bit register of the rate timer wraps unnoticed", &["LR1"], "B", Needs::Pacing)
    },
    FaultRow {
        size: Size::Millionths(20_000),
        least: Size::Millionths(1),
        greatest: Size::Millionths(500_000),
        smallest_on_bench: Size::Millionths(9_003),
        ..whole(10, "the clock is slow", &["LR1"], "B R", Needs::Pacing)
    },
    FaultRow {
        size: millis(1),
        least: micros(1),
        greatest: millis(100),
        smallest_on_bench: micros(2),
        ..whole(12, "the expiry is lost if any signal begins in its tick", &["LR1"], "X B", Needs::Pacing)
    },
    FaultRow {
        size: millis(1),
        least: micros(1),
        greatest: millis(100),
        smallest_on_bench: micros(9_004),
        ..whole(
            13,
            "a sense in the tick of an expiry restarts the timer, and the pulse comes too",
            &["CM1", "EN3"],
            "X",
            Needs::Sensing,
        )
    },
    FaultRow {
        size: millis(1),
        least: millis(1),
        greatest: millis(100),
        smallest_on_bench: millis(1),
        ..whole(15, "each pulse is emitted twice", &["CM1", "EN1"], "B", Needs::Pacing)
    },
    whole(16, "the hysteresis interval is used after a pulse", &["HY2"], "B", Needs::Hysteresis),
    whole(17, "the hysteresis interval is not used after a sense", &["HY1"], "B", Needs::Hysteresis),
    whole(21, "a sense does not start the refractory period", &["RF1", "LR1"], "B", Needs::Sensing),
    whole(22, "a pulse does not start the refractory period", &["RF1", "LR1"], "B", Needs::Sensing),
    FaultRow {
        size: Size::Shift(Deviation::from_millis(-20)),
        least: Size::Shift(Deviation::from_millis(-1_000)),
        greatest: Size::Shift(Deviation::from_millis(1_000)),
        smallest_on_bench: Size::Shift(Deviation::from_micros(-9_003)),
        ..whole(23, "the refractory period is too short or too long", &["RF1", "RF2"], "B", Needs::Sensing)
    },
    whole(25, "a signal in the blanking of the device's own pulse is sensed", &["RF1", "LR1"], "B W", Needs::Sensing),
    FaultRow {
        size: millis(50),
        least: micros(1),
        greatest: millis(1_000),
        smallest_on_bench: micros(9_003),
        ..whole(26, "the device is blind for longer than its refractory period", &["RF2", "LR2"], "B", Needs::Sensing)
    },
    FaultRow {
        size: Size::Divisor(4),
        least: Size::Divisor(2),
        greatest: Size::Divisor(64),
        smallest_on_bench: Size::Divisor(4),
        ..whole(69, "runaway: the interval is divided", &["EN1"], "B", Needs::Pacing)
    },
];

impl FaultRow {
    /// The row of this number, if it is in the bank.
    pub fn of(id: u8) -> Option<&'static Self> {
        BANK.iter().find(|row| row.id == id)
    }

    /// Accepts or refuses a size.
    pub(super) fn accepts(&self, size: Size) -> Result<(), ParamError> {
        let refused = |problem| Err(ParamError::new("fault_size", problem));
        let within = |value: u64, least: u64, greatest: u64| {
            if value < least || value > greatest { refused(Problem::OutOfRange { value, least, greatest }) } else { Ok(()) }
        };
        match (size, self.least, self.greatest) {
            (Size::Whole, Size::Whole, Size::Whole) => Ok(()),
            (Size::Span(size), Size::Span(least), Size::Span(greatest)) if matches!(self.id, 7 | 8) => {
                if size == least || size == greatest { Ok(()) } else { refused(REGISTERS) }
            }
            (Size::Span(size), Size::Span(least), Size::Span(greatest)) => {
                within(size.as_micros(), least.as_micros(), greatest.as_micros())
            }
            (Size::Shift(by), Size::Shift(_), Size::Shift(greatest)) => {
                within(by.size().as_micros(), 1, greatest.size().as_micros())
            }
            (Size::Millionths(size), Size::Millionths(least), Size::Millionths(greatest))
            | (Size::Divisor(size), Size::Divisor(least), Size::Divisor(greatest)) => {
                within(u64::from(size), u64::from(least), u64::from(greatest))
            }
            _ => refused(Problem::Unsupported("this fault has a size of another measure")),
        }
    }
}

const REGISTERS: Problem =
    Problem::Unsupported("a register counts microseconds or milliseconds and holds two to the 16 or 32 of them");

const fn whole(id: u8, line: &'static str, rules: &'static [&'static str], classes: &'static str, needs: Needs) -> FaultRow {
    let size = Size::Whole;
    FaultRow { id, line, rules, classes, needs, size, least: size, greatest: size, smallest_on_bench: size }
}

const fn micros(micros: u64) -> Size {
    Size::Span(Span::from_micros(micros))
}

const fn millis(millis: u64) -> Size {
    Size::Span(Span::from_millis(millis))
}
