//! First phase of an instant: what fires sites, and what that does to the cells and foci there.

use super::Heart;
use super::engine::NEVER;
use super::focus::FocusKind;
use super::rows::Rows;
use super::way::Direction;
use crate::base::{
    BlockReason, Cause, CauseKind, CellId, FineInstant, FocusId, Instant, Kind, NoCapture, Record, SiteId, Span, TractId,
    low_u32, wide,
};

impl<const S: usize, const T: usize, const C: usize, const F: usize> Heart<'_, S, T, C, F> {
    /// A wave reaches the end of its tract.
    pub(super) fn arrive(&mut self, id: TractId) -> Option<Record> {
        let row = usize::from(id.row());
        let at = self.at;
        let tract = self.anatomy.tract(id)?;
        let crossing = self.crossings.get(row)?;
        let (direction, pass_at, cause) = (crossing.direction, crossing.pass_at, crossing.cause);
        *self.wave_due.get_mut(row)? = NEVER;
        self.stale = true;
        let passed = self.passed.get_mut(row)?;
        *passed = (*passed).max(super::last::Last::at(pass_at));
        let (site, end) = match direction {
            Direction::Forward => (tract.to, &mut self.backward),
            Direction::Backward => (tract.from, &mut self.forward),
        };
        let fired = *self.fired.get(usize::from(site.row()))?;
        if fired.is(at) {
            // It joins, and no wave goes back the way it came.
            *end = end.without(Rows::one(id.row()));
            let cause = *self.causes.get(usize::from(site.row()))?;
            return Some(Record::new(at, Kind::Joined, id.row(), cause));
        }
        let since = fired.since(at);
        if self.anatomy.site(site)?.is_refractory(since) {
            return Some(self.blocked(id, direction, BlockReason::Site, since, cause));
        }
        let record = self.activate(site, Cause::new(CauseKind::Conducted, id.row()));
        let end = match direction {
            Direction::Forward => &mut self.backward,
            Direction::Backward => &mut self.forward,
        };
        *end = end.without(Rows::one(id.row()));
        record
    }

    /// A cell's interval is over.
    pub(super) fn expire(&mut self, id: CellId) -> Option<Record> {
        let site = self.anatomy.cell(id)?.site;
        let due = *self.fine_due.get(usize::from(id.row()))?;
        self.run_cell(id, due);
        let record = self.fire(site, Cause::new(CauseKind::Own, id.row()));
        // It has just begun its interval, with the fraction of the last one carried over.
        self.resets = self.resets.without(Rows::one(id.row()));
        record
    }

    /// Another activation of its site discharges a cell.
    pub(super) fn reset(&mut self, id: CellId) -> Option<Record> {
        let site = self.anatomy.cell(id)?.site;
        let left = self.cell_due.get(usize::from(id.row()))?.saturating_since(self.at);
        let cause = *self.causes.get(usize::from(site.row()))?;
        self.run_cell(id, FineInstant::at(self.at));
        Some(Record::new(self.at, Kind::Reset, id.row(), cause).with_details(short(left), 0))
    }

    /// Lets a cell run for one interval from `from`.
    pub(super) fn run_cell(&mut self, id: CellId, from: FineInstant) {
        let row = usize::from(id.row());
        if let (Some(cell), Some(fine), Some(due)) =
            (self.anatomy.cell(id), self.fine_due.get_mut(row), self.cell_due.get_mut(row))
        {
            *fine = from.plus(cell.interval);
            let to = fine.nearest();
            let was = core::mem::replace(due, to);
            self.moved(was, to);
        }
    }

    /// A focus fires.
    pub(super) fn fire_focus(&mut self, id: FocusId) -> Option<Record> {
        let row = usize::from(id.row());
        let focus = self.foci.get(row)?;
        self.aim_focus(id, self.at);
        self.fire(focus.site, Cause::new(CauseKind::Focus, id.row()))
    }

    /// Lets a replayed series run for its next interval from `from`; anything else, or a series at its end, waits.
    pub(super) fn aim_focus(&mut self, id: FocusId, from: Instant) {
        let row = usize::from(id.row());
        let (Some(focus), Some(due), Some(progress)) =
            (self.foci.get(row), self.focus_due.get_mut(row), self.progress.get_mut(row))
        else {
            return;
        };
        let was = core::mem::replace(due, NEVER);
        if let FocusKind::Replay { intervals, repeat, .. } = focus.kind {
            let at = |position: u32| usize::try_from(position).ok().and_then(|position| intervals.get(position));
            let begin = if repeat { 0 } else { *progress };
            let (position, interval) = match at(*progress) {
                Some(interval) => (*progress, Some(interval)),
                None => (begin, at(begin)),
            };
            if let Some(&interval) = interval {
                *due = from.saturating_add(interval);
                *progress = position.saturating_add(1);
            }
        }
        let to = *due;
        self.moved(was, to);
    }

    /// The first of the script's beats of this instant.
    pub(super) fn beat_now(&mut self) -> Option<Record> {
        let site = SiteId::new(self.beats.take_first()?);
        if self.beats.is_empty() {
            self.beat_due = NEVER;
            self.stale = true;
        }
        let cause = *self.beat_causes.get(usize::from(site.row()))?;
        self.fire(site, cause)
    }

    /// A pulse that was answered fires its site, unless something else has done so since.
    pub(super) fn capture_now(&mut self, site: SiteId) -> Option<Record> {
        let row = usize::from(site.row());
        *self.capture_due.get_mut(row)? = NEVER;
        self.captures = self.captures.without(Rows::one(site.row()));
        self.stale = true;
        let cause = Cause::new(CauseKind::Pulse, *self.capture_channel.get(row)?);
        let since = self.fired.get(row)?.since(self.at);
        // Not answered if the site fired at the leading edge either: had it done so before the pulse, that would have found it refractory.
        if since <= self.anatomy.site(site)?.latency {
            return Some(self.not_captured(site, cause, NoCapture::Forestalled, short(since)));
        }
        self.activate(site, cause)
    }

    /// Fires a site unless it is refractory.
    fn fire(&mut self, site: SiteId, cause: Cause) -> Option<Record> {
        let since = self.fired.get(usize::from(site.row()))?.since(self.at);
        let tissue = self.anatomy.site(site)?;
        if tissue.is_refractory(since) {
            let left = tissue.refractory.saturating_sub(since);
            return Some(self.not_captured(site, cause, NoCapture::Refractory, short(left)));
        }
        self.activate(site, cause)
    }

    /// A site fires: its cells are to be discharged, foci may count it, and waves are to set out.
    fn activate(&mut self, site: SiteId, cause: Cause) -> Option<Record> {
        let row = usize::from(site.row());
        let at = self.at;
        *self.fired.get_mut(row)? = super::last::Last::at(at);
        *self.causes.get_mut(row)? = cause;
        let links = self.anatomy.links(site)?;
        self.resets = links.cells.and(self.running);
        self.forward = self.forward.with(links.forward);
        self.backward = self.backward.with(links.backward);
        if F > 0 {
            self.count_trigger(site, cause);
        }
        Some(Record::new(at, Kind::Activated, site.row(), cause))
    }

    /// Premature foci that wait for this site count its activation.
    fn count_trigger(&mut self, site: SiteId, cause: Cause) {
        for (row, focus) in (0_u8..).zip(self.foci) {
            let FocusKind::Premature { trigger, coupling, every } = focus.kind else { continue };
            let own = cause == Cause::new(CauseKind::Focus, row);
            let position = usize::from(row);
            let (Some(due), Some(count)) = (self.focus_due.get_mut(position), self.progress.get_mut(position)) else { continue };
            if trigger != site || own || *due != NEVER || !self.live_foci.has(row) {
                continue;
            }
            *count = count.saturating_add(1);
            if *count >= every {
                *count = 0;
                let fires_at = self.at.saturating_add(coupling);
                *due = fires_at;
                self.aimed(fires_at);
            }
        }
    }

    const fn not_captured(&self, site: SiteId, cause: Cause, why: NoCapture, margin: u32) -> Record {
        Record::new(self.at, Kind::NotCaptured, site.row(), cause).with_details(why.number(), margin)
    }

    pub(super) fn blocked(&self, id: TractId, direction: Direction, why: BlockReason, recovery: Span, cause: Cause) -> Record {
        let backward = if direction.is_backward() { 1 << 8 } else { 0 };
        Record::new(self.at, Kind::Blocked, id.row(), cause).with_details(why.number() | backward, short(recovery))
    }
}

/// A span for a record's detail, cut at what that holds.
pub(super) fn short(span: Span) -> u32 {
    low_u32(span.as_micros().min(wide(u32::MAX)))
}
