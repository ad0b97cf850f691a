//! The script at work: which step is due, and with what number.

use super::check::check;
use super::{Act, Amount, Coupling, Event, Step, When, WindowEnd};
use crate::base::{CauseKind, Deviation, Instant, Kind, ParamError, Program, Record, Span, Stream, draw_below, word};

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
    heard: Heard,
    next: Option<Instant>,
}

/// What any step waits for, a bit for each place: every other record is passed by.
#[derive(Debug, Clone, Copy, Default)]
struct Heard {
    /// A bit for each kind's number.
    kinds: u64,
    activated: u32,
    blocked: u32,
    not_captured: u32,
    signals: u32,
    pulses: u32,
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
        let mut script =
            Self { steps, cues: [Cue::default(); N], windows: Windows::of(program), seed, heard: Heard::of(steps), next: None };
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

    /// True if a step acts at or before `now`.
    #[inline]
    pub(super) fn is_due(&self, now: Instant) -> bool {
        self.next.is_some_and(|at| at <= now)
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
    #[inline]
    pub fn notice(&mut self, record: &Record) {
        if self.heard.has(record) {
            self.count(record);
        }
    }

    fn count(&mut self, record: &Record) {
        let (windows, seed) = (&self.windows, self.seed);
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
    fn coupled(&self, coupling: Coupling, value: i64) -> Span {
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

impl Heard {
    fn of(steps: &[Step]) -> Self {
        let mut heard = Self::default();
        for step in steps {
            let (When::After { event, .. } | When::Without { event, .. }) = step.when else { continue };
            let (kind, place) = event.trace();
            if let Some(places) = heard.places_mut(kind) {
                *places |= bit(place);
                heard.kinds |= 1_u64.wrapping_shl(word(kind.number()));
            }
        }
        heard
    }

    #[inline]
    const fn has(&self, record: &Record) -> bool {
        self.kinds & 1_u64.wrapping_shl(word(record.kind.number())) != 0 && self.has_place(record)
    }

    const fn has_place(&self, record: &Record) -> bool {
        let places = match record.kind {
            Kind::Activated => self.activated,
            Kind::Blocked => self.blocked,
            Kind::NotCaptured => self.not_captured,
            Kind::Signal => self.signals,
            Kind::Pulse => self.pulses,
            _ => 0,
        };
        places & bit(record.place) != 0
    }

    const fn places_mut(&mut self, kind: Kind) -> Option<&mut u32> {
        match kind {
            Kind::Activated => Some(&mut self.activated),
            Kind::Blocked => Some(&mut self.blocked),
            Kind::NotCaptured => Some(&mut self.not_captured),
            Kind::Signal => Some(&mut self.signals),
            Kind::Pulse => Some(&mut self.pulses),
            _ => None,
        }
    }
}

/// The bit of a place. Places that lie 32 apart share one: then [`Event::is`] tells them apart.
const fn bit(place: u8) -> u32 {
    1_u32.wrapping_shl(word(place))
}

impl Event {
    /// The kind and the place of the records that tell of such an event.
    const fn trace(self) -> (Kind, u8) {
        match self {
            Self::Pulse(channel) => (Kind::Pulse, channel.number()),
            Self::Signal(channel) => (Kind::Signal, channel.number()),
            Self::Activation(site) | Self::Capture(site) => (Kind::Activated, site.row()),
            Self::NoCapture(site) => (Kind::NotCaptured, site.row()),
            Self::Block(tract) => (Kind::Blocked, tract.row()),
        }
    }

    /// True if the record tells of such an event.
    pub fn is(self, record: &Record) -> bool {
        let by_pulse = record.cause.kind == CauseKind::Pulse || !matches!(self, Self::Capture(_) | Self::NoCapture(_));
        self.trace() == (record.kind, record.place) && by_pulse
    }
}
