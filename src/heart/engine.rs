//! The heart as a timed machine: micro-steps, each with one record, instants decided in two phases.

use super::focus::FocusKind;
use super::last::Last;
use super::rows::Rows;
use super::way::Direction;
use super::{Anatomy, FocusParams};
use crate::base::{Cause, CellId, FineInstant, FocusId, Instant, ParamError, Record, SiteId, Span, TractId};

/// No time: what a slot waits for that waits for nothing.
pub(super) const NEVER: Instant = Instant::MAX;

/// A heart that beats.
///
/// # Time
/// Nothing reads a clock. [`Heart::poll`] yields one thing that happened at or before `now`, with its own instant. A late poll
/// changes nothing; an earlier `now` counts as the latest one seen. Splitting a poll in two changes not one bit.
///
/// # Order
/// An instant has two phases. First everything that fires a site does so: script beats, arriving waves, cells, foci, pulses, each
/// kind in the order of its table. A wave that reaches a site which has fired in this very instant only joins it. Then each tract
/// decides both its ends at once, from its state before the instant. So nothing but names depends on the order of the tables.
///
/// # Model
/// A site that fires sends a wave into every tract at it but those that have just brought one. Escape rhythms, block, echoes and
/// compensatory pauses have no code of their own: they follow from cells, tissue and tracts.
#[derive(Debug, Clone)]
pub struct Heart<'a, const S: usize, const T: usize, const C: usize, const F: usize> {
    pub(super) anatomy: &'a Anatomy<S, T, C>,
    pub(super) foci: &'a [FocusParams<'a>; F],
    /// The instant whose events are or were last being handed out.
    pub(super) at: Instant,
    /// The latest instant polled for.
    seen: Instant,
    /// When there is something to do next.
    pub(super) next: Instant,
    pub(super) pending: Pending,
    pub(super) held: Option<Record>,
    // Due times apart from the rest: finding the next one scans nothing else.
    pub(super) wave_due: [Instant; T],
    pub(super) cell_due: [Instant; C],
    pub(super) focus_due: [Instant; F],
    pub(super) capture_due: [Instant; S],
    pub(super) beat_due: Instant,
    // Tracts.
    pub(super) crossings: [Crossing; T],
    pub(super) passed: [Last; T],
    pub(super) shut_forward: Rows,
    pub(super) shut_backward: Rows,
    // Sites.
    pub(super) fired: [Last; S],
    pub(super) causes: [Cause; S],
    pub(super) capture_channel: [u8; S],
    pub(super) beats: Rows,
    pub(super) beat_causes: [Cause; S],
    // Cells and foci.
    pub(super) fine_due: [FineInstant; C],
    pub(super) running: Rows,
    pub(super) live_foci: Rows,
    pub(super) progress: [u32; F],
}

/// What is still to be done in this instant: a row each, walked in this order.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub(super) struct Pending {
    /// Cells to be discharged by the activation just handed out.
    pub(super) resets: Rows,
    pub(super) beats: Rows,
    pub(super) arrivals: Rows,
    pub(super) expiries: Rows,
    pub(super) foci: Rows,
    pub(super) captures: Rows,
    /// Tracts whose first end fired, and those whose second end did.
    pub(super) forward: Rows,
    pub(super) backward: Rows,
}

impl Pending {
    const fn is_empty(&self) -> bool {
        let Self { resets, beats, arrivals, expiries, foci, captures, forward, backward } = *self;
        let first = resets.with(beats).with(arrivals).with(expiries);
        first.with(foci).with(captures).with(forward).with(backward).is_empty()
    }
}

/// The wave in a tract, where there is one. When it arrives stands in the flat array.
#[derive(Debug, Clone, Copy)]
pub(super) struct Crossing {
    pub(super) pass_at: Instant,
    pub(super) took: Span,
    pub(super) direction: Direction,
    /// What had fired the site it came from.
    pub(super) cause: Cause,
}

impl<'a, const S: usize, const T: usize, const C: usize, const F: usize> Heart<'a, S, T, C, F> {
    /// A heart of this anatomy with these foci, at rest until `start`: every cell first fires one interval after it.
    ///
    /// # Errors
    /// Names the first parameter of the foci that is out of range or names a row that the anatomy does not have, and the focus.
    pub fn new(anatomy: &'a Anatomy<S, T, C>, foci: &'a [FocusParams<'a>; F], start: Instant) -> Result<Self, ParamError> {
        super::check::within("foci", super::anatomy::count(F), 0, super::anatomy::count(Rows::MOST))?;
        for (row, focus) in (0_u8..).zip(foci) {
            super::check::in_row(row, focus.check(anatomy))?;
            super::check::in_row(row, focus.check_alone(foci.iter().take(usize::from(row))))?;
        }
        let rest = Crossing { pass_at: NEVER, took: Span::ZERO, direction: Direction::Forward, cause: Cause::NONE };
        let mut heart = Self {
            anatomy,
            foci,
            at: start,
            seen: start,
            next: NEVER,
            pending: Pending::default(),
            held: None,
            wave_due: [NEVER; T],
            cell_due: [NEVER; C],
            focus_due: [NEVER; F],
            capture_due: [NEVER; S],
            beat_due: NEVER,
            crossings: [rest; T],
            passed: [Last::NEVER; T],
            shut_forward: Rows::NONE,
            shut_backward: Rows::NONE,
            fired: [Last::NEVER; S],
            causes: [Cause::NONE; S],
            capture_channel: [0; S],
            beats: Rows::NONE,
            beat_causes: [Cause::NONE; S],
            fine_due: [FineInstant::at(start); C],
            running: Rows::all(C),
            live_foci: Rows::all(F),
            progress: [0; F],
        };
        for (row, tract) in (0_u8..).zip(anatomy.tracts()) {
            if tract.forward.shut {
                heart.shut_forward = heart.shut_forward.with(Rows::one(row));
            }
            if tract.backward.shut {
                heart.shut_backward = heart.shut_backward.with(Rows::one(row));
            }
        }
        for (focus, due) in foci.iter().zip(heart.focus_due.iter_mut()) {
            if let FocusKind::Replay { in_place_of, .. } = focus.kind {
                *due = start.saturating_add(FocusParams::REPLAY_LEAD);
                heart.running = heart.running.without(Rows::one(in_place_of.row()));
            }
        }
        let mut running = heart.running;
        while let Some(row) = running.take_first() {
            heart.run_cell(CellId::new(row), FineInstant::at(start));
        }
        heart.next = heart.soonest();
        Ok(heart)
    }

    /// When the heart wants to be polled next, `None` if nothing will happen by itself. A compare and no more.
    pub fn next_at(&self) -> Option<Instant> {
        if self.next == NEVER { None } else { Some(self.next) }
    }

    /// The next thing that happened at or before `now`; `None` when nothing more did.
    ///
    /// Bounded work: one micro-step and one record, plus the waves that set out in silence, at most one per tract end.
    pub fn poll(&mut self, now: Instant) -> Option<Record> {
        self.seen = self.seen.max(now);
        loop {
            if self.next > self.seen || self.next == NEVER {
                return None;
            }
            if self.pending.is_empty() && self.held.is_none() {
                self.begin(self.next);
            }
            let record = self.step();
            self.refresh();
            // Without a record the instant had nothing but silent waves left: whatever is due next has one.
            if record.is_some() {
                return record;
            }
        }
    }

    /// Finds again what is due next, after something has changed.
    pub(super) fn refresh(&mut self) {
        self.next = if self.pending.is_empty() && self.held.is_none() { self.soonest() } else { self.at };
    }

    fn soonest(&self) -> Instant {
        let waves = self.wave_due.iter().chain(&self.cell_due);
        waves.chain(&self.focus_due).chain(&self.capture_due).fold(self.beat_due, |soonest, &due| soonest.min(due))
    }

    /// Opens an instant: what is due in it becomes pending.
    fn begin(&mut self, at: Instant) {
        self.at = at;
        self.pending.arrivals = Rows::due(&self.wave_due, &at);
        self.pending.expiries = Rows::due(&self.cell_due, &at);
        self.pending.foci = Rows::due(&self.focus_due, &at);
        self.pending.captures = Rows::due(&self.capture_due, &at);
        if self.beat_due == at {
            self.pending.beats = core::mem::take(&mut self.beats);
            self.beat_due = NEVER;
        }
    }

    /// One micro-step of the instant; `None` when nothing of it is left.
    fn step(&mut self) -> Option<Record> {
        if let Some(record) = self.held.take() {
            return Some(record);
        }
        if let Some(row) = self.pending.resets.take_first() {
            return self.reset(CellId::new(row));
        }
        if let Some(row) = self.pending.beats.take_first() {
            return self.beat_now(SiteId::new(row));
        }
        if let Some(row) = self.pending.arrivals.take_first() {
            return self.arrive(TractId::new(row));
        }
        if let Some(row) = self.pending.expiries.take_first() {
            return self.expire(CellId::new(row));
        }
        if let Some(row) = self.pending.foci.take_first() {
            return self.fire_focus(FocusId::new(row));
        }
        if let Some(row) = self.pending.captures.take_first() {
            return self.capture_now(SiteId::new(row));
        }
        // Second phase: every site that fires in this instant has done so.
        loop {
            let row = self.pending.forward.with(self.pending.backward).take_first()?;
            if let Some(record) = self.decide(TractId::new(row)) {
                return Some(record);
            }
        }
    }
}
