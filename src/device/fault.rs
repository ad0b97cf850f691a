//! A fault: one small, named deviation of the reference device, and how large it is.

use super::bank::{BANK, FaultRow};
use super::hooks::{Hooks, Wrap};
use super::modes::{Escape, Row};
use super::timers::Timers;
use crate::base::{Deviation, Instant, ParamError, Problem, Span};

/// How large a fault is, in the measure that its row of the [`BANK`] uses.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Size {
    /// It is there or it is not.
    Whole,
    /// A length of time.
    Span(Span),
    /// A length of time with a direction: negative is shorter.
    Shift(Deviation),
    /// A share, in millionths.
    Millionths(u32),
    /// By how much something is divided.
    Divisor(u32),
}

/// One fault of the [`BANK`] at one size.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Fault {
    id: u8,
    size: Size,
}

impl Fault {
    /// A fault of this number at this size.
    ///
    /// # Errors
    /// Refuses a number that is not in the bank as `fault`, and a size of the wrong measure or out of its row's range as
    /// `fault_size`.
    pub fn new(id: u8, size: Size) -> Result<Self, ParamError> {
        let row =
            FaultRow::of(id).ok_or(ParamError::new("fault", Problem::Unsupported("no fault of this number in the bank")))?;
        row.accepts(size)?;
        Ok(Self { id, size })
    }

    /// The fault of this number at its row's own size, if the number is in the bank.
    pub fn of_row(id: u8) -> Option<Self> {
        FaultRow::of(id).map(|row| Self { id, size: row.size })
    }

    /// Its number.
    pub const fn id(self) -> u8 {
        self.id
    }

    /// Its size.
    pub const fn size(self) -> Size {
        self.size
    }

    /// Its row of the bank.
    pub fn row(self) -> &'static FaultRow {
        // Every constructor looked it up; the first row stands in for what cannot be.
        let [first, ..] = &BANK;
        FaultRow::of(self.id).unwrap_or(first)
    }

    /// Puts the fault into a clean device: the only place where the two differ.
    pub(super) fn put_into(self, row: &mut Row, timers: &mut Timers, hooks: &mut Hooks, start: Instant) {
        match (self.id, self.size) {
            (1, _) => row.on_sense.escape = None,
            (3, _) => row.on_refractory.escape = Some(Escape::AfterSense),
            (4, _) => {
                row.on_blanked_by_pulse.escape = Some(Escape::AfterSense);
                row.on_blanked_by_sense.escape = Some(Escape::AfterSense);
            }
            (5, Size::Span(longer)) => timers.lengthen_escape(longer),
            (7 | 8, Size::Span(register)) => {
                hooks.wrap = if timers.cut_escape_to(register) { None } else { Wrap::new(register, start) };
            }
            (10, Size::Millionths(slower)) => timers.slow_down(slower),
            (12, Size::Span(tick)) => hooks.loses_expiry_within = Some(tick),
            (13, Size::Span(tick)) => hooks.paces_in_spite_within = Some(tick),
            (15, Size::Span(later)) => hooks.paces_again_after = Some(later),
            (16, _) => row.on_pulse.escape = row.on_pulse.escape.map(|_| Escape::AfterSense),
            (17, _) => row.on_sense.escape = row.on_sense.escape.map(|_| Escape::Lower),
            (21, _) => row.on_sense.refractory = false,
            (22, _) => row.on_pulse.refractory = false,
            (23, Size::Shift(by)) => timers.shift_refractory(by),
            (25, _) => row.on_blanked_by_pulse = row.on_sense,
            (26, Size::Span(longer)) => timers.blind_beyond_refractory(longer),
            (69, Size::Divisor(by)) => timers.divide_escape(by),
            _ => {} // not reached: the constructors admit the sizes above only
        }
    }
}
