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
        let forward = self.pending.forward.has(id.row());
        let backward = self.pending.backward.has(id.row());
        self.pending.forward = self.pending.forward.without(Rows::one(id.row()));
        self.pending.backward = self.pending.backward.without(Rows::one(id.row()));
        let due = *self.wave_due.get(row)?;
        let Crossing { pass_at, took, direction, .. } = *self.crossings.get(row)?;
        let passed = self.passed.get_mut(row)?;
        let gate = Gate {
            tract: self.anatomy.tract(id)?,
            memory: self.anatomy.memory(id)?,
            passed: *passed,
            flight: if due == NEVER { None } else { Some(Flight { direction, due, pass_at, took }) },
            shut_forward: self.shut_forward.has(id.row()),
            shut_backward: self.shut_backward.has(id.row()),
        };
        let decided = gate.decide(forward, backward, self.at);
        *passed = decided.passed;
        let first = decided.first.and_then(|fate| self.settle(id, fate));
        let second = decided.second.and_then(|fate| self.settle(id, fate));
        if first.is_some() {
            self.held = second;
            return first;
        }
        second
    }

    fn settle(&mut self, id: TractId, fate: Fate) -> Option<Record> {
        let row = usize::from(id.row());
        match fate {
            Fate::Enters(Flight { direction, due, pass_at, took }) => {
                let cause = self.mouth_cause(id, direction)?;
                *self.wave_due.get_mut(row)? = due;
                *self.crossings.get_mut(row)? = Crossing { pass_at, took, direction, cause };
                None
            }
            Fate::Blocked(direction, reason, recovery) => {
                Some(self.blocked(id, direction, reason, recovery, self.mouth_cause(id, direction)?))
            }
            Fate::Meets(meeting) => {
                *self.wave_due.get_mut(row)? = NEVER;
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
