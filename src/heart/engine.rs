//! The heart as a timed machine: micro-steps, each with one record, instants decided in two phases.

use super::focus::FocusKind;
use super::last::Last;
use super::rows::Rows;
use super::way::Direction;
use super::{Anatomy, FocusParams};
use crate::base::{Cause, CellId, FineInstant, FocusId, Instant, ParamError, Record, SiteId, Span, TractId};
use core::fmt;

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
#[derive(Clone, PartialEq, Eq)]
pub struct Heart<'a, const S: usize, const T: usize, const C: usize, const F: usize> {
    pub(super) anatomy: &'a Anatomy<S, T, C>,
    pub(super) foci: &'a [FocusParams<'a>; F],
    /// The instant whose events are or were last being handed out.
    pub(super) at: Instant,
    /// The latest instant polled for.
    seen: Instant,
    /// When there is something to do next: `at` while this instant is not done with, else `due`.
    next: Instant,
    /// The soonest of all due times below; not so while `stale`.
    due: Instant,
    pub(super) stale: bool,
    // What is left of this instant: cells to be discharged by the activation just handed out, tracts whose first end fired and those
    // whose second end did, and a tract's second record.
    pub(super) resets: Rows,
    pub(super) forward: Rows,
    pub(super) backward: Rows,
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
    pub(super) captures: Rows,
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

/// The wave in a tract, where there is one. When it arrives stands in the flat array.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Crossing {
    pub(super) pass_at: Instant,
    pub(super) took: Span,
    pub(super) direction: Direction,
    /// What had fired the site it came from.
    pub(super) cause: Cause,
}

impl<const S: usize, const T: usize, const C: usize, const F: usize> fmt::Debug for Heart<'_, S, T, C, F> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self { at, next, fired, wave_due, cell_due, .. } = self;
        let mut heart = f.debug_struct("Heart");
        heart.field("at", at).field("next", next).field("fired", fired).field("wave_due", wave_due).field("cell_due", cell_due);
        heart.finish_non_exhaustive()
    }
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
            due: NEVER,
            stale: false,
            resets: Rows::NONE,
            forward: Rows::NONE,
            backward: Rows::NONE,
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
            captures: Rows::NONE,
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
        heart.refresh();
        Ok(heart)
    }

    /// When the heart wants to be polled next, `None` if nothing will happen by itself. A compare and no more.
    #[inline]
    pub fn next_at(&self) -> Option<Instant> {
        if self.next == NEVER { None } else { Some(self.next) }
    }

    /// The next thing that happened at or before `now`; `None` when nothing more did.
    ///
    /// Bounded work: one micro-step and one record, plus the waves that set out in silence, at most one per tract end.
    #[inline]
    pub fn poll(&mut self, now: Instant) -> Option<Record> {
        self.seen = self.seen.max(now);
        if self.next > self.seen || self.next == NEVER {
            return None;
        }
        if self.resets.is_empty() { self.step() } else { self.discharge() }
    }

    /// A micro-step that is the discharge of a cell.
    #[inline(never)]
    fn discharge(&mut self) -> Option<Record> {
        let row = self.resets.take_first()?;
        let record = self.reset(CellId::new(row));
        self.next = self.upcoming();
        record
    }

    /// Any other micro-step.
    #[inline(never)]
    fn step(&mut self) -> Option<Record> {
        let record = self.micro_step();
        self.next = self.upcoming();
        record
    }

    #[inline]
    fn micro_step(&mut self) -> Option<Record> {
        if self.held.is_some() {
            return self.held.take();
        }
        if self.stale {
            self.find_soonest();
        }
        // Second phase, once no site fires in this instant any more. Waves that set out in silence make nothing stale.
        if self.due > self.at {
            while let Some(row) = self.forward.with(self.backward).take_first() {
                if let Some(record) = self.decide(TractId::new(row)) {
                    return Some(record);
                }
            }
            if self.due > self.seen || self.due == NEVER {
                return None;
            }
        }
        // First phase, of this instant or the next one, each kind in the order of its table.
        let at = self.due;
        self.at = at;
        if self.beat_due == at {
            return self.beat_now();
        }
        if let Some(row) = first_at(&self.wave_due, at) {
            return self.arrive(TractId::new(row));
        }
        if let Some(row) = first_at(&self.cell_due, at) {
            return self.expire(CellId::new(row));
        }
        if let Some(row) = first_at(&self.focus_due, at) {
            return self.fire_focus(FocusId::new(row));
        }
        self.capture_now(SiteId::new(first_at(&self.capture_due, at)?))
    }

    /// Takes note that a due time that was `was` is now `to`. Everything is looked at again only where it may have been the soonest
    /// that moved, and not before that is asked for.
    #[inline]
    pub(super) fn moved(&mut self, was: Instant, to: Instant) {
        self.stale |= was == self.due;
        self.due = self.due.min(to);
    }

    /// The same for one that was not due at all.
    #[inline]
    pub(super) fn aimed(&mut self, to: Instant) {
        self.due = self.due.min(to);
    }

    fn find_soonest(&mut self) {
        let soonest = |times: &[Instant], least: Instant| times.iter().fold(least, |least, &due| least.min(due));
        let due = soonest(&self.focus_due, soonest(&self.cell_due, soonest(&self.wave_due, self.beat_due)));
        self.due = if self.captures.is_empty() { due } else { soonest(&self.capture_due, due) };
        self.stale = false;
    }

    /// Finds again what is to be done next, after an input has changed something.
    pub(super) fn refresh(&mut self) {
        self.find_soonest();
        self.next = self.upcoming();
    }

    fn upcoming(&mut self) -> Instant {
        if !self.resets.with(self.forward).with(self.backward).is_empty() || self.held.is_some() {
            return self.at;
        }
        if self.stale {
            self.find_soonest();
        }
        self.due
    }
}

/// The first row that is due at this instant.
#[inline]
fn first_at(times: &[Instant], at: Instant) -> Option<u8> {
    times.iter().zip(0_u8..).find(|&(&due, _)| due == at).map(|(_, row)| row)
}
