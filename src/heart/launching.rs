//! Second phase of an instant: each tract decides what becomes of the waves at its ends.

use super::Heart;
use super::engine::{Crossing, NEVER};
use super::gate::{Fate, Flight, Gate, enters_freely};
use super::rows::Rows;
use super::way::Direction;
use crate::base::{Cause, Kind, Record, SiteId, TractId};

impl<const S: usize, const T: usize, const C: usize, const F: usize> Heart<'_, S, T, C, F> {
    /// A tract decides both its ends at once. Waves that set out do so in silence.
    pub(super) fn decide(&mut self, id: TractId) -> Option<Record> {
        let row = usize::from(id.row());
        let (here, forward, backward) = (Rows::one(id.row()), self.forward, self.backward);
        (self.forward, self.backward) = (forward.without(here), backward.without(here));
        let (forward, backward) = (forward.has(id.row()), backward.has(id.row()));
        let shut = if backward { self.shut_backward } else { self.shut_forward };
        if *self.wave_due.get(row)? == NEVER && forward != backward && !shut.has(id.row()) {
            let direction = if backward { Direction::Backward } else { Direction::Forward };
            if let Some(flight) = enters_freely(self.anatomy.tract(id)?, direction, *self.passed.get(row)?, self.at) {
                return self.enter(id, flight);
            }
        }
        self.decide_by_the_gate(id, forward, backward)
    }

    /// Everything but a single wave at an open and empty tract.
    #[inline(never)]
    fn decide_by_the_gate(&mut self, id: TractId, forward: bool, backward: bool) -> Option<Record> {
        let row = usize::from(id.row());
        let due = *self.wave_due.get(row)?;
        let Crossing { pass_at, took, direction, .. } = *self.crossings.get(row)?;
        let gate = Gate {
            tract: self.anatomy.tract(id)?,
            memory: self.anatomy.memory(id)?,
            passed: *self.passed.get(row)?,
            flight: if due == NEVER { None } else { Some(Flight { direction, due, pass_at, took }) },
            shut_forward: self.shut_forward.has(id.row()),
            shut_backward: self.shut_backward.has(id.row()),
        };
        let decided = gate.decide(forward, backward, self.at);
        *self.passed.get_mut(row)? = decided.passed;
        let first = decided.first.and_then(|fate| self.settle(id, fate));
        let second = decided.second.and_then(|fate| self.settle(id, fate));
        if first.is_some() {
            self.held = second;
            return first;
        }
        second
    }

    /// A wave sets out, in silence.
    #[inline]
    fn enter(&mut self, id: TractId, flight: Flight) -> Option<Record> {
        let Flight { direction, due, pass_at, took } = flight;
        let row = usize::from(id.row());
        let cause = self.mouth_cause(id, direction)?;
        *self.wave_due.get_mut(row)? = due;
        *self.crossings.get_mut(row)? = Crossing { pass_at, took, direction, cause };
        self.aimed(due);
        None
    }

    fn settle(&mut self, id: TractId, fate: Fate) -> Option<Record> {
        match fate {
            Fate::Enters(flight) => self.enter(id, flight),
            Fate::Blocked(direction, reason, recovery) => {
                Some(self.blocked(id, direction, reason, recovery, self.mouth_cause(id, direction)?))
            }
            Fate::Meets(meeting) => {
                let due = self.wave_due.get_mut(usize::from(id.row()))?;
                let was = core::mem::replace(due, NEVER);
                self.moved(was, NEVER);
                let newcomer = if meeting.backward { Direction::Backward } else { Direction::Forward };
                let (a, b) = meeting.pack();
                Some(Record::new(self.at, Kind::Collided, id.row(), self.mouth_cause(id, newcomer)?).with_details(a, b))
            }
        }
    }

    /// What fired the site at which this direction begins.
    fn mouth_cause(&self, id: TractId, direction: Direction) -> Option<Cause> {
        let tract = self.anatomy.tract(id)?;
        let mouth: SiteId = if direction.is_backward() { tract.to } else { tract.from };
        self.causes.get(usize::from(mouth.row())).copied()
    }
}
