//! How a fault is shown: the smallest size that a judge can see under a program, and the smallest script that shows it.

use super::{Fault, FaultRow, Needs, Size};
use crate::base::{Instant, Program, Span, Straddle};

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
/// How far a beat keeps from both ends of its window: more than a judge takes for a window that is a little off (50 ms).
const APART: Span = Span::from_millis(60);
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
    straddle: Straddle,
    /// The least change of an interval that shows.
    shows: Span,
    /// The least distance from an edge that is clear of it.
    clear: Span,
    ceiling: Span,
}

impl Cycle {
    fn of(program: &Program, allowance: &Allowance) -> Self {
        let settings = program.settings();
        let lower = settings.lower.nearest();
        let after_sense = program.senses().map_or(lower, |_| program.escape_after_sense().nearest());
        Self {
            lower,
            whole_lower: settings.lower.floor(),
            stretch: after_sense.saturating_sub(lower),
            blanking: settings.blanking,
            refractory: settings.refractory,
            delay: settings.detect_delay,
            straddle: settings.straddle,
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
            5 => Some((Size::Span(self.longer()), quiet)),
            7 | 8 => {
                let Size::Span(register) = row.size else { return None };
                let half = halved(self.lower);
                let before = self.lower.saturating_add(self.lower).saturating_add(half);
                let start = Instant::ZERO.saturating_add(register).saturating_sub(before);
                self.is_late(half).then_some((row.size, Probe { start, ..quiet }))
            }
            10 => Some((Size::Millionths(self.share_of(self.longer())?), quiet)),
            // A carried fraction makes a cycle one tick longer than its whole microseconds now and then: a tick of two.
            12 => {
                let probe = Probe { signal: Some(self.whole_lower), faint: true, ..quiet };
                self.is_late(self.lower).then_some((Size::Span(PAIR), probe))
            }
            13 => self.both(quiet),
            15 => Some((row.size, quiet)),
            16 => (self.stretch >= self.shows).then_some((Size::Whole, quiet)),
            17 => (self.stretch >= self.shows).then_some((Size::Whole, Probe { beat: Some(self.beat()?), ..quiet })),
            21 => {
                let (beat, signal) = (self.beat()?, self.refractory_signal()?);
                let sensed = beat.saturating_add(self.delay);
                let probe = Probe { beat: Some(beat), signal: Some(sensed.saturating_add(signal)), ..quiet };
                self.is_plain(signal).then_some((Size::Whole, probe))
            }
            23 => self.short_refractory(quiet),
            26 => self.long_blindness(quiet),
            69 => {
                let by = (4..=64).find(|by| self.lower.as_micros() < self.ceiling.as_micros().saturating_mul(u64::from(*by)))?;
                Some((Size::Divisor(by), quiet))
            }
            _ => None,
        }
    }

    /// A beat so close before the expiry that its pulse, which comes all the same, is a second one for the same instant.
    fn both(&self, quiet: Probe) -> Option<(Size, Probe)> {
        let sense = self.lower.saturating_sub(self.shows);
        let near = self.shows.saturating_add(self.shows) <= APART;
        let far_from_refractory = sense >= self.refractory.saturating_add(self.clear).saturating_add(APART);
        let probe = Probe { beat: Some(self.onset_of(sense)?), ..quiet };
        (near && far_from_refractory).then_some((Size::Span(self.shows.saturating_add(PAIR)), probe))
    }

    /// A signal inside refractory that the device takes for a beat, and not such that the pulse comes a whole interval later.
    fn short_refractory(&self, quiet: Probe) -> Option<(Size, Probe)> {
        let onset = self.refractory_signal()?;
        let later = onset.saturating_add(self.delay).saturating_add(self.stretch);
        let is_next = apart(later, self.lower) <= self.shows.saturating_add(self.shows);
        let shift = self.clear.saturating_add(TICK).as_deviation().reversed();
        let probe = Probe { signal: Some(onset), ..quiet };
        (self.is_plain(onset) && !is_next).then_some((Size::Shift(shift), probe))
    }

    /// A beat just outside refractory to which the device is blind.
    fn long_blindness(&self, quiet: Probe) -> Option<(Size, Probe)> {
        let sense = self.refractory.saturating_add(self.clear);
        let longer = match self.straddle {
            Straddle::Onset => self.clear.saturating_add(TICK),
            // What sticks out of blanking is seen: the whole signal must lie inside.
            Straddle::End => self.clear.saturating_add(PROBE_WIDTH),
        };
        let room = self.shows.saturating_add(self.clear);
        let has_room = self.is_alert(sense) && sense.saturating_add(room).saturating_add(room) <= self.lower;
        let is_near = self.clear <= halved(APART);
        let probe = Probe { signal: Some(self.onset_of(sense)?), ..quiet };
        (is_near && has_room && self.is_plain(sense)).then_some((Size::Span(longer), probe))
    }

    /// The onset of a signal whose sense is to come this long after the anchor. It comes after the anchor itself.
    fn onset_of(&self, sense: Span) -> Option<Span> {
        Some(sense.saturating_sub(self.delay)).filter(|onset| *onset >= TICK)
    }

    /// True if a sense this long after a pulse is sensed for certain, and comes before the expiry for certain.
    fn is_alert(&self, sense: Span) -> bool {
        let after_blanking = self.blanking.saturating_add(self.delay);
        sense >= self.refractory.max(after_blanking).saturating_add(self.clear) && sense.saturating_add(self.shows) <= self.lower
    }

    /// The onset of a beat in the middle of the alert window, far from both its ends.
    fn beat(&self) -> Option<Span> {
        let sense = halved(self.refractory.saturating_add(self.lower));
        let far = self.is_alert(sense.saturating_sub(APART)) && self.is_alert(sense.saturating_add(APART));
        if far { self.onset_of(sense) } else { None }
    }

    /// True if what sticks out of blanking, where that is seen, lies inside refractory for certain.
    fn hides_what_sticks_out(&self) -> bool {
        let end = self.blanking.saturating_add(self.clear).saturating_add(PROBE_WIDTH).saturating_add(self.delay);
        self.straddle == Straddle::Onset || end.saturating_add(self.clear) <= self.refractory
    }

    /// The onset of a signal inside refractory for certain, as late as possible, and after blanking.
    fn refractory_signal(&self) -> Option<Span> {
        let sense = self.refractory.saturating_sub(self.clear);
        let onset = self.onset_of(sense)?;
        (onset > self.blanking && sense >= self.shows && self.hides_what_sticks_out()).then_some(onset)
    }

    /// The onset of a signal that begins and ends inside blanking, as late as possible, and inside refractory for certain.
    fn blanked_signal(&self) -> Option<Span> {
        let last = self.blanking.saturating_sub(PROBE_WIDTH).saturating_sub(TICK);
        let onset = last.min(self.refractory.saturating_sub(self.clear).saturating_sub(self.delay));
        let shows = onset >= TICK && onset.saturating_add(self.delay) >= self.shows;
        (shows && self.hides_what_sticks_out()).then_some(onset)
    }

    /// True if a cycle that wrongly counts from a signal so long after its anchor, or wrongly does not, is off by far more than an
    /// escape interval that is itself a little off.
    fn is_plain(&self, after: Span) -> bool {
        after >= self.shows.saturating_add(self.shows).saturating_add(self.clear)
    }

    /// True if a pulse so much too late can only be late: not in the place where hysteresis would put it either.
    fn is_late(&self, by: Span) -> bool {
        by >= self.shows && (self.stretch.is_zero() || apart(by, self.stretch) >= self.shows)
    }

    /// The least by which an interval must be longer so that it can only be late.
    fn longer(&self) -> Span {
        if self.is_late(self.shows) { self.shows } else { self.stretch.saturating_add(self.shows) }
    }

    /// A length as a share of the lower rate interval, in millionths, rounded up.
    fn share_of(&self, length: Span) -> Option<u32> {
        let parts = length.as_micros().checked_mul(1_000_000)?;
        u32::try_from(parts.checked_div(self.lower.as_micros())?.saturating_add(1)).ok()
    }
}

const fn halved(span: Span) -> Span {
    Span::from_micros(span.as_micros() >> 1)
}

const fn apart(one: Span, other: Span) -> Span {
    Span::from_micros(one.as_micros().abs_diff(other.as_micros()))
}
