//! Second phase of an instant: each tract decides what becomes of the waves at its ends.

use super::Heart;
use super::engine::{Crossing, NEVER};
use super::gate::{Fate, Flight, Gate};
use super::rows::Rows;
use super::way::Direction;
use crate::base::{Cause, Kind, Record, SiteId, TractId};

impl<const S: usize, const T: usize, const C: usize, const F: usize> Heart<'_, S, T, C, F> {
    /// A tract decides both its ends at once. Waves that set out do so in silence.
    pub(super) fn decide(&mut self, id: TractId) -> Option<Record> {
        let row = usize::from(id.row());
        let (here, forward, backward) = (Rows::one(id.row()), self.forward, self.backward);
        (self.forward, self.backward) = (forward.without(here), backward.without(here));
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
        let (forward, backward) = (forward.has(id.row()), backward.has(id.row()));
        // By far the most frequent case, taken apart from the rest because that has more to carry around.
        if let Some(flight) = gate.enters_freely(forward, backward, self.at) {
            return self.enter(id, flight);
        }
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
    fn enter(&mut self, id: TractId, flight: Flight) -> Option<Record> {
        let Flight { direction, due, pass_at, took } = flight;
        let row = usize::from(id.row());
        let cause = self.mouth_cause(id, direction)?;
        *self.wave_due.get_mut(row)? = due;
        *self.crossings.get_mut(row)? = Crossing { pass_at, took, direction, cause };
        self.moved(Self::wave_slot(id), due);
        None
    }

    fn settle(&mut self, id: TractId, fate: Fate) -> Option<Record> {
        match fate {
            Fate::Enters(flight) => self.enter(id, flight),
            Fate::Blocked(direction, reason, recovery) => {
                Some(self.blocked(id, direction, reason, recovery, self.mouth_cause(id, direction)?))
            }
            Fate::Meets(meeting) => {
                *self.wave_due.get_mut(usize::from(id.row()))? = NEVER;
                self.moved(Self::wave_slot(id), NEVER);
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
