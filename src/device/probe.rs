//! How a fault is shown: the smallest size that a judge can see under a program, and the smallest script that shows it.

use super::{Fault, FaultRow, Needs, Size};
use crate::base::{Instant, Program, Span};

/// How far off a device may be before a judge speaks: tolerance, uncertainty and what a sense's detection adds, together.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Allowance {
    /// Of an interval.
    pub interval: Span,
    /// Of a window's edge.
    pub edge: Span,
    /// The shortest span between two pulses that is accepted for certain.
    pub ceiling: Span,
}

/// The smallest script that shows a fault: a silent heart, and at most two signals in every cycle.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct Probe {
    /// When the run starts.
    pub start: Instant,
    /// A signal that must be sensed, this long after each pulse.
    pub beat: Option<Span>,
    /// A signal that must change nothing, or must be sensed, this long after each pulse; where there is a beat it comes later.
    pub signal: Option<Span>,
    /// True if that signal is too small to be sensed.
    pub faint: bool,
}

/// How long a signal of a [`Probe`] lasts.
pub const PROBE_WIDTH: Span = Span::from_millis(1);

/// Above an allowance by this much is above it for certain: a microsecond of rounding at each end of an interval.
const CLEARLY: Span = Span::from_micros(2);
const TICK: Span = Span::from_micros(1);
const PAIR: Span = Span::from_micros(2);

impl FaultRow {
    /// The smallest size of this fault that shows under a program in spite of an allowance, and how to show it; `None` if it
    /// cannot show.
    pub fn shown_under(&self, program: &Program, allowance: &Allowance) -> Option<(Fault, Probe)> {
        let cycle = Cycle::of(program, allowance);
        let needs = match self.needs {
            Needs::Pacing => program.paces().is_some(),
            Needs::Sensing => program.senses().is_some(),
            Needs::Hysteresis => program.senses().is_some() && cycle.stretch > Span::ZERO,
        };
        let (size, probe) = if needs { cycle.show(self)? } else { return None };
        Some((Fault::new(self.id, size).ok()?, probe))
    }
}

/// A program's cycle as a probe sees it: where a signal is sensed for certain, and where for certain it is not.
struct Cycle {
    lower: Span,
    /// The lower rate interval without its fraction.
    whole_lower: Span,
    /// By how much the hysteresis interval is longer.
    stretch: Span,
    blanking: Span,
    refractory: Span,
    delay: Span,
    /// The least change of an interval that shows.
    shows: Span,
    /// The least distance from an edge that is clear of it.
    clear: Span,
    ceiling: Span,
}

impl Cycle {
    const fn of(program: &Program, allowance: &Allowance) -> Self {
        let settings = program.settings();
        let lower = settings.lower.nearest();
        Self {
            lower,
            whole_lower: settings.lower.floor(),
            stretch: program.escape_after_sense().nearest().saturating_sub(lower),
            blanking: settings.blanking,
            refractory: settings.refractory,
            delay: settings.detect_delay,
            shows: allowance.interval.saturating_add(CLEARLY),
            clear: allowance.edge.saturating_add(CLEARLY),
            ceiling: allowance.ceiling,
        }
    }

    fn show(&self, row: &FaultRow) -> Option<(Size, Probe)> {
        let quiet = Probe { start: Instant::ZERO, beat: None, signal: None, faint: false };
        let whole = |probe| Some((Size::Whole, probe));
        match row.id {
            1 => whole(Probe { beat: Some(self.beat()?), ..quiet }),
            3 | 22 => whole(Probe { signal: Some(self.refractory_signal()?), ..quiet }),
            4 | 25 => whole(Probe { signal: Some(self.blanked_signal()?), ..quiet }),
            5 => Some((Size::Span(self.shows), quiet)),
            7 | 8 => {
                let Size::Span(register) = row.size else { return None };
                let (cycle, half) = (self.lower, halved(self.lower));
                let before = cycle.saturating_add(cycle).saturating_add(half);
                let start = Instant::ZERO.saturating_add(register).saturating_sub(before);
                (half >= self.shows).then_some((row.size, Probe { start, ..quiet }))
            }
            10 => Some((Size::Millionths(self.share()?), quiet)),
            // A carried fraction makes a cycle one tick longer than its whole microseconds now and then: a tick of two.
            12 => Some((Size::Span(PAIR), Probe { signal: Some(self.whole_lower), faint: true, ..quiet })),
            13 => {
                let onset = self.lower.saturating_sub(self.shows);
                let tick = self.shows.saturating_add(PAIR);
                self.is_alert(onset).then_some((Size::Span(tick), Probe { beat: Some(self.onset_of(onset)?), ..quiet }))
            }
            15 => Some((row.size, quiet)),
            16 => (self.stretch >= self.shows).then_some((Size::Whole, quiet)),
            17 => (self.stretch >= self.shows).then_some((Size::Whole, Probe { beat: Some(self.beat()?), ..quiet })),
            21 => {
                let beat = self.beat()?;
                whole(Probe { beat: Some(beat), signal: Some(beat.saturating_add(self.refractory_signal()?)), ..quiet })
            }
            23 => {
                let shift = self.clear.saturating_add(TICK).as_deviation().reversed();
                Some((Size::Shift(shift), Probe { signal: Some(self.refractory_signal()?), ..quiet }))
            }
            26 => {
                let sense = self.refractory.saturating_add(self.clear);
                let longer = self.clear.saturating_add(TICK);
                self.is_alert(sense).then_some((Size::Span(longer), Probe { signal: Some(self.onset_of(sense)?), ..quiet }))
            }
            69 => {
                let by = (4..=64).find(|by| self.lower.as_micros() < self.ceiling.as_micros().saturating_mul(u64::from(*by)))?;
                Some((Size::Divisor(by), quiet))
            }
            _ => None,
        }
    }

    /// The onset of a signal whose sense is to come this long after the anchor.
    fn onset_of(&self, sense: Span) -> Option<Span> {
        (sense >= self.delay).then(|| sense.saturating_sub(self.delay))
    }

    /// True if a sense this long after a pulse is sensed for certain, and comes before the expiry for certain.
    fn is_alert(&self, sense: Span) -> bool {
        sense >= self.refractory.saturating_add(self.clear) && sense.saturating_add(self.shows) <= self.lower
    }

    /// The onset of a beat in the middle of the alert window.
    fn beat(&self) -> Option<Span> {
        let sense = halved(self.refractory.saturating_add(self.lower));
        self.is_alert(sense).then(|| self.onset_of(sense)).flatten()
    }

    /// The onset of a signal inside refractory for certain, as late as possible, and after blanking.
    fn refractory_signal(&self) -> Option<Span> {
        let sense = self.refractory.saturating_sub(self.clear);
        let onset = self.onset_of(sense)?;
        (onset > self.blanking && sense >= self.shows).then_some(onset)
    }

    /// The onset of a signal that begins and ends inside blanking, as late as possible, and inside refractory for certain.
    fn blanked_signal(&self) -> Option<Span> {
        let last = self.blanking.saturating_sub(PROBE_WIDTH).saturating_sub(TICK);
        let onset = last.min(self.refractory.saturating_sub(self.clear).saturating_sub(self.delay));
        (onset.saturating_add(self.delay) >= self.shows).then_some(onset)
    }

    /// The least share of the lower rate interval that shows, in millionths.
    fn share(&self) -> Option<u32> {
        let parts = self.shows.as_micros().checked_mul(1_000_000)?;
        u32::try_from(parts.checked_div(self.lower.as_micros())?.saturating_add(1)).ok()
    }
}

const fn halved(span: Span) -> Span {
    Span::from_micros(span.as_micros() >> 1)
}
