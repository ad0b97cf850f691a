//! The script at work: which step is due, and with what number.

use super::check::check;
use super::{Act, Amount, Coupling, Event, Step, When, WindowEnd};
use crate::base::{CauseKind, Channel, Deviation, Instant, Kind, ParamError, Program, Record, Span, Stream, draw_below};

/// Streams of chance of the script's steps begin here: one stream a step.
const FIRST_STREAM: u32 = 0x5C_0000;

/// A script under way: up to `N` steps, each waiting for its instant or its event.
///
/// # Order
/// Steps due at the same instant act in the order of their list.
#[derive(Debug, Clone)]
pub struct Script<'a, const N: usize> {
    steps: &'a [Step],
    cues: [Cue; N],
    windows: Windows,
    seed: u64,
    next: Option<Instant>,
}

/// What one step waits for.
#[derive(Debug, Clone, Copy, Default)]
struct Cue {
    due: Option<Instant>,
    /// The number that its amount gave for this act, in µs.
    value: i64,
    /// Events counted since it last acted.
    seen: u32,
    acted: u32,
}

/// The ends of the program's windows, resolved once.
#[derive(Debug, Clone, Copy)]
struct Windows {
    blanking: Span,
    refractory: Span,
    lower: Span,
    hysteresis: Span,
}

/// A step that acts now.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Cued {
    /// The step's place in the list, from 0.
    pub step: u8,
    /// When it was due.
    pub at: Instant,
    /// Which of its acts this is, from 1.
    pub turn: u32,
    /// The number its amount gave, in µs; 0 where it has none.
    pub value: i64,
    /// What to do.
    pub act: Act,
}

impl<'a, const N: usize> Script<'a, N> {
    /// A script that begins at `start`. Windows are those of `program`; without one, no step may name a window.
    ///
    /// # Errors
    /// Refuses more than `N` (or 255) steps, a step whose numbers make no sense, a window without a program, and steps that
    /// contradict each other, naming the step's row.
    pub fn new(steps: &'a [Step], program: Option<&Program>, seed: u64, start: Instant) -> Result<Self, ParamError> {
        check(steps, N, program.is_some())?;
        let mut script = Self { steps, cues: [Cue::default(); N], windows: Windows::of(program), seed, next: None };
        for (step, cue) in steps.iter().zip(&mut script.cues) {
            cue.due = match step.when {
                When::At(span) | When::Every(span) | When::Without { span, .. } => Some(start.saturating_add(span)),
                When::After { .. } => None,
            };
        }
        script.refresh();
        Ok(script)
    }

    /// When the next step acts, as far as is known now.
    pub const fn next_at(&self) -> Option<Instant> {
        self.next
    }

    /// The next step due at or before `now`, earliest first, then in the order of the list.
    pub fn poll(&mut self, now: Instant) -> Option<Cued> {
        let due = self.next.filter(|at| *at <= now)?;
        let mut cued = None;
        for ((row, step), cue) in (0_u8..).zip(self.steps).zip(&mut self.cues) {
            if cue.due == Some(due) {
                cue.acted = cue.acted.saturating_add(1);
                cued = Some(Cued { step: row, at: due, turn: cue.acted, value: cue.value, act: step.act });
                cue.due = match step.when {
                    _ if cue.acted >= step.times => None,
                    When::Every(span) | When::Without { span, .. } => Some(due.saturating_add(span)),
                    When::At(_) | When::After { .. } => None,
                };
                break;
            }
        }
        self.refresh();
        cued
    }

    /// Tells the script what happened. A step that already waits for its instant takes no notice of further events.
    pub fn notice(&mut self, record: &Record) {
        if !can_be_waited_for(record.kind) {
            return;
        }
        let (windows, seed) = (self.windows, self.seed);
        let mut changed = false;
        for ((row, step), cue) in (0_u32..).zip(self.steps).zip(&mut self.cues) {
            if cue.acted >= step.times {
                continue;
            }
            match step.when {
                When::After { event, nth, coupling } if cue.due.is_none() && event.is(record) => {
                    cue.seen = cue.seen.saturating_add(1);
                    if cue.seen >= nth {
                        cue.seen = 0;
                        cue.value = amount(coupling.shift, seed, row, cue.acted);
                        cue.due = Some(record.at.saturating_add(windows.coupled(coupling, cue.value)));
                        changed = true;
                    }
                }
                When::Without { event, span } if event.is(record) => {
                    cue.due = Some(record.at.saturating_add(span));
                    changed = true;
                }
                _ => {}
            }
        }
        if changed {
            self.refresh();
        }
    }

    fn refresh(&mut self) {
        self.next = self.cues.iter().filter_map(|cue| cue.due).min();
    }
}

impl Windows {
    const fn of(program: Option<&Program>) -> Self {
        match program {
            Some(program) => Self {
                blanking: program.settings().blanking,
                refractory: program.settings().refractory,
                lower: program.settings().lower.nearest(),
                hysteresis: program.escape_after_sense().nearest(),
            },
            None => Self { blanking: Span::ZERO, refractory: Span::ZERO, lower: Span::ZERO, hysteresis: Span::ZERO },
        }
    }

    /// How long after its event a step acts: at least 1 µs, so that no instant holds an endless chain.
    fn coupled(self, coupling: Coupling, value: i64) -> Span {
        let base = match coupling.window {
            None => Span::ZERO,
            Some(WindowEnd::Blanking) => self.blanking,
            Some(WindowEnd::Refractory) => self.refractory,
            Some(WindowEnd::Lower) => self.lower,
            Some(WindowEnd::Hysteresis) => self.hysteresis,
        };
        let shifted = Instant::from_micros(base.as_micros()).shifted(Deviation::from_micros(value));
        Span::from_micros(shifted.as_micros().max(1))
    }
}

/// The value of an amount for the act that follows `acted` others.
fn amount(amount: Amount, seed: u64, row: u32, acted: u32) -> i64 {
    match amount {
        Amount::Fixed(by) => by.as_micros(),
        Amount::Sweep { from, to, step } => {
            let wide = to.as_micros().abs_diff(from.as_micros());
            let turns = wide.checked_div(step.as_micros()).unwrap_or(0).saturating_add(1);
            let turn = u64::from(acted).checked_rem(turns).unwrap_or(0);
            let by = i64::try_from(turn.saturating_mul(step.as_micros())).unwrap_or(i64::MAX);
            if to < from { from.as_micros().saturating_sub(by) } else { from.as_micros().saturating_add(by) }
        }
        Amount::Random { from, to } => {
            let wide = to.as_micros().abs_diff(from.as_micros()).saturating_add(1);
            let stream = Stream(FIRST_STREAM.wrapping_add(row));
            let drawn = draw_below(seed, stream, u64::from(acted), u32::try_from(wide).unwrap_or(u32::MAX));
            from.min(to).as_micros().saturating_add(i64::from(drawn))
        }
    }
}

const fn can_be_waited_for(kind: Kind) -> bool {
    matches!(kind, Kind::Activated | Kind::Blocked | Kind::NotCaptured | Kind::Signal | Kind::Pulse)
}

impl Event {
    /// True if the record tells of such an event.
    pub fn is(self, record: &Record) -> bool {
        let here = |row: u8| record.place == row;
        let by_pulse = record.cause.kind == CauseKind::Pulse;
        let on = |channel: Channel| record.place == channel.number();
        match (self, record.kind) {
            (Self::Pulse(channel), Kind::Pulse) | (Self::Signal(channel), Kind::Signal) => on(channel),
            (Self::Activation(site), Kind::Activated) => here(site.row()),
            (Self::Capture(site), Kind::Activated) | (Self::NoCapture(site), Kind::NotCaptured) => here(site.row()) && by_pulse,
            (Self::Block(tract), Kind::Blocked) => here(tract.row()),
            _ => false,
        }
    }
}
