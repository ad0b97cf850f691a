//! The reference device: the single-chamber modes as a table and three timers.

use super::hooks::Hooks;
use super::modes::{Escape, Event, Reaction, Row};
use super::timers::Timers;
use super::{Device, Fault};
use crate::base::{Channel, Edge, FineInstant, Instant, NotYet, Program, Pulse, Signal, Span, Straddle, Tie};

/// A device that does what its [`Program`] says, to the microsecond.
///
/// It exists to test benches: something with known timing at the far end of the loop. It is not a design for a product, it has
/// no safety concept, and nothing it does is advice on how a device should be built.
///
/// # Model
/// Modes OOO, AOO, VOO, AAI and VVI. Three timers – escape, refractory, blanking – and a table of what each event does to
/// them. The start counts as a pulse, so that every timer runs from there. The fraction of a microsecond that a rate leaves is
/// carried from pulse to pulse: 65 /min stays in place for as long as it runs.
///
/// A signal is sensed `detect_delay` after its onset if its peak reaches the sensitivity. It is unseen if its onset or its
/// sense lies in blanking, and changes nothing if its sense lies in the refractory period. With [`Straddle::End`] a signal
/// that begins inside blanking and outlasts it is sensed at the first instant after it. While a sense is on its way, a further
/// signal cannot start another: it would lie in the blanking of the first.
///
/// # Time
/// As the contract [`Device`] says. What `poll` and `signal` do depends on instants only, never on how often they are called.
#[derive(Debug, Clone)]
pub struct ReferenceDevice {
    program: Program,
    row: Row,
    timers: Timers,
    hooks: Hooks,
    state: State,
    /// When the device wants to be polled next, kept up to date by whatever changes `state`.
    next: Instant,
}

/// No time: what is not due.
const NEVER: Instant = Instant::MAX;

#[derive(Debug, Clone, Copy)]
struct State {
    /// The latest instant the device was told of.
    seen: Instant,
    /// When the next pulse is due, with its fraction.
    escape_at: Option<FineInstant>,
    refractory_until: Instant,
    blanked_until: Instant,
    /// Whether a pulse or a sense started blanking.
    blanked_by: Event,
    /// A sense on its way from its onset.
    sense: Option<Sense>,
    /// A pulse emitted but not fetched yet: an expiry that came before a signal of the same instant.
    emitted_at: Option<Instant>,
    /// A pulse that a fault adds.
    extra_at: Option<Instant>,
}

/// A signal whose onset is past and whose sense is still to come.
#[derive(Debug, Clone, Copy)]
struct Sense {
    at: Instant,
    began_blanked: bool,
}

impl ReferenceDevice {
    /// A device with this program, started at `start`: the first pulse is due one lower rate interval later.
    pub fn new(program: Program, start: Instant) -> Self {
        Self::with(program, None, start)
    }

    /// The same with this fault in it.
    pub fn with_fault(program: Program, fault: Fault, start: Instant) -> Self {
        Self::with(program, Some(fault), start)
    }

    fn with(program: Program, fault: Option<Fault>, start: Instant) -> Self {
        let mut row = Row::of(program.settings().mode);
        let mut timers = Timers::of(&program);
        let mut hooks = Hooks::default();
        if let Some(fault) = fault {
            fault.put_into(&mut row, &mut timers, &mut hooks, start);
        }
        let state = State {
            seen: start,
            escape_at: None,
            refractory_until: start,
            blanked_until: start,
            blanked_by: Event::Pulse,
            sense: None,
            emitted_at: None,
            extra_at: None,
        };
        let mut device = Self { program, row, timers, hooks, state, next: NEVER };
        device.react(Event::Pulse, FineInstant::at(start));
        device.refresh();
        device
    }

    /// What it was programmed to do.
    pub const fn program(&self) -> &Program {
        &self.program
    }

    /// Lets an event act on the timers.
    fn react(&mut self, event: Event, at: FineInstant) {
        let Reaction { escape, refractory, blanking } = self.row.on(event);
        if let Some(escape) = escape {
            let interval = match escape {
                Escape::Lower => self.timers.lower,
                Escape::AfterSense => self.timers.after_sense,
            };
            let due = match &mut self.hooks.wrap {
                Some(wrap) => wrap.due(at, interval),
                None => at.plus(interval),
            };
            self.state.escape_at = before_the_end(due);
        }
        if refractory {
            self.state.refractory_until = at.nearest().saturating_add(self.timers.refractory);
        }
        if blanking {
            self.state.blanked_until = at.nearest().saturating_add(self.timers.blanking);
            self.state.blanked_by = event;
        }
    }

    /// True if an event at this instant lies before a window's end, as the program reads edges.
    fn is_inside(&self, at: Instant, end: Instant) -> bool {
        match self.program.settings().edge {
            Edge::Outside => at < end,
            Edge::Inside => at <= end,
        }
    }

    /// The first instant outside blanking.
    const fn after_blanking(&self) -> Instant {
        match self.program.settings().edge {
            Edge::Outside => self.state.blanked_until,
            Edge::Inside => self.state.blanked_until.saturating_add(Span::from_micros(1)),
        }
    }

    /// What this sense is, from the windows as they are now.
    fn classify(&self, sense: Sense) -> Event {
        if sense.began_blanked || self.is_inside(sense.at, self.state.blanked_until) {
            return if self.state.blanked_by == Event::Pulse { Event::BlankedByPulse } else { Event::BlankedBySense };
        }
        if self.is_inside(sense.at, self.state.refractory_until) { Event::Refractory } else { Event::Sense }
    }

    /// The sense that a signal with its onset at `at` leads to, unless something restarts a window before.
    fn sense_of(&self, signal: Signal, at: Instant) -> Sense {
        let settings = self.program.settings();
        let sense_at = at.saturating_add(settings.detect_delay);
        if !self.is_inside(at, self.state.blanked_until) {
            return Sense { at: sense_at, began_blanked: false };
        }
        let after = self.after_blanking();
        match settings.straddle {
            Straddle::End if at.saturating_add(signal.width) > after => Sense { at: sense_at.max(after), began_blanked: false },
            Straddle::End | Straddle::Onset => Sense { at: sense_at, began_blanked: true },
        }
    }

    /// Does the next thing due at or before `now`; true if there was one. A pulse is left in `emitted_at`.
    fn step(&mut self, now: Instant) -> bool {
        let due = self.next;
        if due > now || due == NEVER {
            return false;
        }
        if self.state.extra_at == Some(due) {
            self.state.emitted_at = self.state.extra_at.take();
            self.refresh();
            return true;
        }
        let expiry = self.state.escape_at.filter(|escape| escape.nearest() == due);
        let sense = self.state.sense.filter(|sense| sense.at == due);
        match (sense, expiry, self.program.settings().tie) {
            (Some(sense), None, _) | (Some(sense), Some(_), Tie::SenseFirst) => self.detect(sense),
            (_, Some(expiry), _) => self.expire(expiry),
            (None, None, _) => return false,
        }
        self.refresh();
        true
    }

    /// Finds again what is due next, after something has changed.
    fn refresh(&mut self) {
        self.next = self.state.soonest();
    }

    fn detect(&mut self, sense: Sense) {
        self.state.sense = None;
        let event = self.classify(sense);
        if event == Event::Sense && self.is_within(sense.at, self.hooks.paces_in_spite_within) {
            self.state.extra_at = self.state.escape_at.map(FineInstant::nearest);
        }
        self.react(event, FineInstant::at(sense.at));
    }

    fn expire(&mut self, due: FineInstant) {
        let at = due.nearest();
        self.state.escape_at = None;
        self.state.emitted_at = Some(at);
        self.state.extra_at = self.hooks.paces_again_after.map(|later| at.saturating_add(later));
        self.react(Event::Pulse, due);
        // A sense on its way that now falls into the pulse's own blanking must not keep later signals from being sensed.
        if self.state.sense.is_some_and(|sense| self.row.on(self.classify(sense)).is_none()) {
            self.state.sense = None;
            self.refresh();
        }
    }

    /// The expiry passes unnoticed, and the timer runs for another interval.
    fn lose_expiry(&mut self) {
        self.state.escape_at = self.state.escape_at.and_then(|due| before_the_end(due.plus(self.timers.lower)));
        self.refresh();
    }

    /// True if a fault's span is set and `at` lies in the last such span before the expiry.
    fn is_within(&self, at: Instant, span: Option<Span>) -> bool {
        let (Some(span), Some(due)) = (span, self.state.escape_at) else { return false };
        due.nearest().saturating_since(at) < span
    }
}

impl State {
    /// When the next thing is due, whatever it is.
    fn soonest(&self) -> Instant {
        let escape_at = self.escape_at.map_or(NEVER, FineInstant::nearest);
        let sense_at = self.sense.map_or(NEVER, |sense| sense.at);
        escape_at.min(sense_at).min(self.extra_at.unwrap_or(NEVER)).min(self.emitted_at.unwrap_or(NEVER))
    }
}

/// The end of the time line is a wall: a timer that reaches it never expires.
fn before_the_end(due: FineInstant) -> Option<FineInstant> {
    Some(due).filter(|due| due.nearest() < Instant::MAX)
}

impl Device for ReferenceDevice {
    fn signal(&mut self, channel: Channel, signal: Signal, at: Instant) -> Result<(), NotYet> {
        let at = at.max(self.state.seen);
        if self.next < at {
            return Err(NotYet(self.next));
        }
        self.state.seen = at;
        if self.is_within(at, self.hooks.loses_expiry_within) {
            self.lose_expiry();
        }
        let settings = self.program.settings();
        if self.row.senses != Some(channel) || signal.peak < settings.sensitivity {
            return Ok(());
        }
        // What precedes this signal in its own instant: an earlier sense, or the expiry where that is declared to come first.
        let waits = self.state.emitted_at.is_some();
        if !waits && (self.state.sense.is_some_and(|sense| sense.at == at) || settings.tie == Tie::ExpiryFirst) {
            self.step(at);
        }
        let sense = self.sense_of(signal, at);
        if self.state.sense.is_none() && !self.row.on(self.classify(sense)).is_none() {
            self.state.sense = Some(sense);
            self.next = self.next.min(sense.at);
        }
        Ok(())
    }

    #[inline]
    fn poll(&mut self, now: Instant) -> Option<(Instant, Pulse)> {
        self.state.seen = self.state.seen.max(now);
        if self.next > self.state.seen { None } else { self.fetch(self.state.seen) }
    }

    #[inline]
    fn next_at(&self) -> Option<Instant> {
        if self.next == NEVER { None } else { Some(self.next) }
    }
}

impl ReferenceDevice {
    /// The next pulse due at or before `now`.
    fn fetch(&mut self, now: Instant) -> Option<(Instant, Pulse)> {
        // At most a sense, then an expiry.
        while self.state.emitted_at.is_none() && self.step(now) {}
        let at = self.state.emitted_at.take()?;
        self.refresh();
        let settings = self.program.settings();
        Some((at, Pulse { channel: self.row.paces?, amplitude: settings.amplitude, width: settings.width }))
    }
}
