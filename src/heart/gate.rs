//! The gate rule: what becomes of waves that reach a tract's ends, decided once an instant for both ends together.

use super::TractParams;
use super::last::Last;
use super::way::Direction;
use crate::base::{BlockReason, Instant, Meeting, Span};

/// A tract as it stands before an instant.
#[derive(Debug, Clone, Copy)]
pub(super) struct Gate<'t> {
    pub(super) tract: &'t TractParams,
    /// From where on an earlier passage no longer matters.
    pub(super) memory: Span,
    /// When the gate was last passed, either way, or counts as passed.
    pub(super) passed: Last,
    /// The wave under way, if there is one.
    pub(super) flight: Option<Flight>,
    /// Which directions are shut now.
    pub(super) shut_forward: bool,
    pub(super) shut_backward: bool,
}

/// A wave under way.
#[derive(Debug, Clone, Copy)]
pub(super) struct Flight {
    pub(super) direction: Direction,
    /// When it reaches the far end.
    pub(super) due: Instant,
    /// When it reaches the gate.
    pub(super) pass_at: Instant,
    /// How long it takes for the whole tract.
    pub(super) took: Span,
}

/// What becomes of a wave at a tract's end.
#[derive(Debug, Clone, Copy)]
pub(super) enum Fate {
    /// It sets out.
    Enters(Flight),
    /// It ends here.
    Blocked(Direction, BlockReason, Span),
    /// It meets an opposite one, and both end.
    Meets(Meeting),
}

/// What an instant makes of a tract.
#[derive(Debug, Clone, Copy)]
pub(super) struct Decided {
    pub(super) first: Option<Fate>,
    pub(super) second: Option<Fate>,
    pub(super) passed: Last,
}

/// A wave that sets out, before it is known what it meets.
#[derive(Clone, Copy)]
struct Newcomer {
    direction: Direction,
    recovery: Span,
    delay: Span,
    pass_at: Instant,
    obstacle: Option<BlockReason>,
}

impl Newcomer {
    #[inline]
    fn new(tract: &TractParams, direction: Direction, shut: bool, passed: Last, now: Instant) -> Self {
        let way = tract.way(direction);
        let recovery = passed.since(now);
        let delay = way.delay(recovery.max(way.theta));
        let pass_at = now.saturating_add(tract.before_gate(direction).of(delay));
        let obstacle = match (shut, recovery < way.theta) {
            (true, _) => Some(BlockReason::Shut),
            (false, true) => Some(BlockReason::Refractory),
            (false, false) => None,
        };
        Self { direction, recovery, delay, pass_at, obstacle }
    }

    const fn flight(&self, now: Instant) -> Flight {
        let Self { direction, delay, pass_at, .. } = *self;
        Flight { direction, due: now.saturating_add(delay), pass_at, took: delay }
    }
}

/// A single wave at an empty tract, if nothing stops it: by far the most frequent case, decided apart from the rest because that
/// has more to carry around.
#[inline]
pub(super) fn enters_freely(tract: &TractParams, direction: Direction, passed: Last, now: Instant) -> Option<Flight> {
    let newcomer = Newcomer::new(tract, direction, false, passed, now);
    if newcomer.obstacle.is_none() { Some(newcomer.flight(now)) } else { None }
}

impl Gate<'_> {
    /// Decides both ends at once, from the state before the instant: nothing depends on which end is looked at first.
    pub(super) fn decide(&self, forward: bool, backward: bool, now: Instant) -> Decided {
        match (self.flight, forward, backward) {
            (None, true, true) => self.both(now),
            (flight, forward, backward) => {
                let mut decided = Decided { first: None, second: None, passed: self.passed };
                let ends = [(forward, Direction::Forward), (backward, Direction::Backward)];
                for (_, direction) in ends.into_iter().filter(|&(fires, _)| fires) {
                    let (fate, passed) = match flight {
                        None => self.alone(&self.newcomer(direction, self.passed, now), now),
                        Some(ahead) if ahead.direction == direction => self.behind(ahead, now),
                        Some(other) => self.against(other, direction, now),
                    };
                    decided = decided.also(fate, passed);
                }
                decided
            }
        }
    }

    fn newcomer(&self, direction: Direction, passed: Last, now: Instant) -> Newcomer {
        let shut = if direction.is_backward() { self.shut_backward } else { self.shut_forward };
        Newcomer::new(self.tract, direction, shut, passed, now)
    }

    /// Nothing else is in the tract: the gate alone decides.
    fn alone(&self, newcomer: &Newcomer, now: Instant) -> (Fate, Last) {
        match newcomer.obstacle {
            Some(reason) => self.blocked(newcomer, reason, self.passed, now),
            None => (Fate::Enters(newcomer.flight(now)), self.passed),
        }
    }

    /// Another wave is ahead in the same direction. For concealment it counts as past the gate.
    fn behind(&self, ahead: Flight, now: Instant) -> (Fate, Last) {
        let passed = self.passed.max(Last::at(ahead.pass_at));
        let newcomer = self.newcomer(ahead.direction, passed, now);
        self.blocked(&newcomer, BlockReason::Occupied, passed, now)
    }

    /// Another wave comes towards it. The gate blocks only what reaches it: where they meet first, both end there.
    fn against(&self, other: Flight, direction: Direction, now: Instant) -> (Fate, Last) {
        let other_passed = Last::at(other.pass_at);
        // It has passed only if that was earlier than now.
        let passed = if other.pass_at < now { self.passed.max(other_passed) } else { self.passed };
        let newcomer = self.newcomer(direction, passed, now);
        let meets = Fate::Meets(Meeting {
            left: other.due.saturating_since(now),
            took: other.took,
            delay: newcomer.delay,
            backward: direction.is_backward(),
        });
        // Who is at the gate first is there before they meet, and the other is not.
        match newcomer.obstacle {
            _ if newcomer.pass_at >= other.pass_at => (meets, self.passed.max(other_passed)),
            None => (meets, self.passed.max(Last::at(newcomer.pass_at))),
            Some(reason) => self.blocked(&newcomer, reason, passed, now),
        }
    }

    /// Both ends of an empty tract fire in one instant: the first at the gate is tested. Open, both end; blocked, the other is
    /// tested alone. Where both are at the gate together, they collide there unless both are blocked.
    fn both(&self, now: Instant) -> Decided {
        let forward = self.newcomer(Direction::Forward, self.passed, now);
        let backward = self.newcomer(Direction::Backward, self.passed, now);
        let forward_open = forward.obstacle.is_none() && forward.pass_at <= backward.pass_at;
        let backward_open = backward.obstacle.is_none() && backward.pass_at <= forward.pass_at;
        if forward_open || backward_open {
            let meeting = Meeting { left: forward.delay, took: forward.delay, delay: backward.delay, backward: true };
            let first = forward.pass_at.min(backward.pass_at);
            return Decided { first: Some(Fate::Meets(meeting)), second: None, passed: self.passed.max(Last::at(first)) };
        }
        let (first, after_forward) = self.alone(&forward, now);
        let (second, after_backward) = self.alone(&backward, now);
        Decided { first: Some(first), second: Some(second), passed: after_forward.max(after_backward) }
    }

    /// A blocked wave, and how far it counts as one that passed: by the share `conceal` of the way from the last passage that
    /// still matters to when it would have passed itself.
    fn blocked(&self, newcomer: &Newcomer, reason: BlockReason, passed: Last, now: Instant) -> (Fate, Last) {
        let fate = Fate::Blocked(newcomer.direction, reason, newcomer.recovery);
        let conceal = match reason {
            BlockReason::Shut => super::Fraction::ONE,
            _ => self.tract.way(newcomer.direction).conceal,
        };
        if conceal == super::Fraction::ZERO {
            return (fate, self.passed);
        }
        // How long before it would have passed the earlier passage was, as far back as that matters.
        let since = passed.since(newcomer.pass_at);
        let reach = self.memory.saturating_add(newcomer.pass_at.saturating_since(now));
        let counted = conceal.complement().of(since.min(reach));
        (fate, self.passed.max(Last::at(newcomer.pass_at.saturating_sub(counted))))
    }
}

impl Decided {
    fn also(self, fate: Fate, passed: Last) -> Self {
        let passed = self.passed.max(passed);
        match self.first {
            None => Self { first: Some(fate), passed, ..self },
            Some(_) => Self { second: Some(fate), passed, ..self },
        }
    }
}

#[cfg(test)]
mod tests;
