//! What reaches the heart from outside: pulses, and the script's beats and commands.

use super::engine::NEVER;
use super::firing::short;
use super::rows::Rows;
use super::{Heart, Ways};
use crate::base::{
    Cause, CauseKind, CellId, FineInstant, FocusId, Instant, Kind, NoCapture, NotYet, Pulse, Record, SiteId, TractId,
};

/// What tissue makes of a pulse.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum PulseAnswer {
    /// The site will fire at this instant, unless something else fires it first.
    Captured {
        /// When it will.
        due: Instant,
    },
    /// The site does not answer: a [`Kind::NotCaptured`] record with reason and margin, which no poll will show again.
    Unanswered(Record),
}

/// Inputs carry their own instant. An instant before the last event counts as that event's. Rows that the anatomy does not have
/// are ignored: check them once with [`Anatomy::site`](super::Anatomy::site) and its like.
impl<const S: usize, const T: usize, const C: usize, const F: usize> Heart<'_, S, T, C, F> {
    /// A pulse reaches a site. Within an instant it comes after everything else there.
    ///
    /// A pulse while an earlier one is about to fire the site is not answered: that one forestalls it. A site that the anatomy does
    /// not have answers no pulse, whatever its strength.
    ///
    /// # Errors
    /// [`NotYet`] if something is due at or before `at`: poll up to `at` until nothing comes, then offer the pulse again.
    pub fn pulse(&mut self, site: SiteId, pulse: Pulse, at: Instant) -> Result<PulseAnswer, NotYet> {
        if let Some(next) = self.next_at().filter(|&next| next <= at) {
            return Err(NotYet(next));
        }
        let at = at.max(self.at);
        let row = usize::from(site.row());
        let cause = Cause::new(CauseKind::Pulse, pulse.channel.number());
        let unanswered = |why: NoCapture, margin| {
            let record = Record::new(at, Kind::NotCaptured, site.row(), cause).with_details(why.number(), margin);
            Ok(PulseAnswer::Unanswered(record))
        };
        let (Some(tissue), Some(fired), Some(due), Some(channel)) =
            (self.anatomy.site(site), self.fired.get(row), self.capture_due.get_mut(row), self.capture_channel.get_mut(row))
        else {
            return unanswered(NoCapture::TooWeak, u32::MAX);
        };
        if let Some((why, margin)) = tissue.resists(&pulse, fired.since(at)) {
            return unanswered(why, margin);
        }
        let fires_at = at.saturating_add(tissue.latency);
        if *due != NEVER {
            return unanswered(NoCapture::Forestalled, short(fires_at.saturating_since(*due)));
        }
        *due = fires_at;
        *channel = pulse.channel.number();
        self.captures = self.captures.with(Rows::one(site.row()));
        self.refresh();
        Ok(PulseAnswer::Captured { due: fires_at })
    }

    /// Fires a site in instant `at`, before everything else of that instant; where the site is refractory, the next poll shows a
    /// [`Kind::NotCaptured`] record instead. A second beat for the same site and instant is the same beat.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn beat(&mut self, site: SiteId, at: Instant, cause: Cause) -> Result<(), NotYet> {
        let at = self.accept(at)?;
        if let Some(slot) = self.beat_causes.get_mut(usize::from(site.row())) {
            *slot = cause;
            self.beats = self.beats.with(Rows::one(site.row()));
            self.beat_due = at;
            self.refresh();
        }
        Ok(())
    }

    /// Stops a cell, or the series that has taken its place.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn arrest(&mut self, cell: CellId, at: Instant) -> Result<(), NotYet> {
        self.accept(at)?;
        if let Some(due) = self.cell_due.get_mut(usize::from(cell.row())) {
            *due = NEVER;
            self.running = self.running.without(Rows::one(cell.row()));
        }
        if let Some(focus) = self.series_in_place_of(cell) {
            self.stop_focus(focus);
        }
        self.refresh();
        Ok(())
    }

    /// Lets a stopped cell run again, from the start of an interval; a series in its place goes on with its next interval. A cell
    /// that runs is left alone.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn release(&mut self, cell: CellId, at: Instant) -> Result<(), NotYet> {
        let at = self.accept(at)?;
        match self.series_in_place_of(cell) {
            Some(focus) if !self.live_foci.has(focus.row()) => {
                self.live_foci = self.live_foci.with(Rows::one(focus.row()));
                self.aim_focus(focus, at);
            }
            None if self.anatomy.cell(cell).is_some() && !self.running.has(cell.row()) => {
                self.running = self.running.with(Rows::one(cell.row()));
                self.run_cell(cell, FineInstant::at(at));
            }
            _ => {}
        }
        self.refresh();
        Ok(())
    }

    /// Shuts a tract to waves that have not entered it yet. What is stopped there counts as having passed.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn shut(&mut self, tract: TractId, ways: Ways, at: Instant) -> Result<(), NotYet> {
        self.accept(at)?;
        let rows = self.rows_of(tract);
        if ways != Ways::Backward {
            self.shut_forward = self.shut_forward.with(rows);
        }
        if ways != Ways::Forward {
            self.shut_backward = self.shut_backward.with(rows);
        }
        Ok(())
    }

    /// Opens a tract.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn open(&mut self, tract: TractId, ways: Ways, at: Instant) -> Result<(), NotYet> {
        self.accept(at)?;
        let rows = self.rows_of(tract);
        if ways != Ways::Backward {
            self.shut_forward = self.shut_forward.without(rows);
        }
        if ways != Ways::Forward {
            self.shut_backward = self.shut_backward.without(rows);
        }
        Ok(())
    }

    /// Stops every cell and focus and shuts every tract: from now on only pulses and the script fire a site, and only that site.
    /// Waves under way still arrive.
    ///
    /// # Errors
    /// [`NotYet`] if something is due before `at`.
    pub fn quiet(&mut self, at: Instant) -> Result<(), NotYet> {
        self.accept(at)?;
        self.cell_due = [NEVER; C];
        self.running = Rows::NONE;
        for (row, _) in (0_u8..).zip(self.foci) {
            self.stop_focus(FocusId::new(row));
        }
        self.shut_forward = Rows::all(T);
        self.shut_backward = Rows::all(T);
        self.refresh();
        Ok(())
    }

    /// The instant at which an input given for `at` counts.
    fn accept(&self, at: Instant) -> Result<Instant, NotYet> {
        match self.next_at() {
            Some(next) if next < at => Err(NotYet(next)),
            _ => Ok(at.max(self.at)),
        }
    }

    fn rows_of(&self, tract: TractId) -> Rows {
        if self.anatomy.tract(tract).is_some() { Rows::one(tract.row()) } else { Rows::NONE }
    }

    fn series_in_place_of(&self, cell: CellId) -> Option<FocusId> {
        (0_u8..).zip(self.foci).find(|(_, focus)| focus.in_place_of() == Some(cell)).map(|(row, _)| FocusId::new(row))
    }

    fn stop_focus(&mut self, focus: FocusId) {
        if let Some(due) = self.focus_due.get_mut(usize::from(focus.row())) {
            *due = NEVER;
        }
        self.live_foci = self.live_foci.without(Rows::one(focus.row()));
    }
}
