//! Hypotheses: the states a device may be in, given all that was seen of it.

use super::clock::Micros;
use super::{AnchorKind, Hint};
use heapless::Vec;

/// One explanation of everything seen so far: the running timers of a single-chamber device all count from one anchor, which
/// lies somewhere in an interval, both ends included. Windows and due times are computed from it, never stored.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Hypothesis {
    pub(super) lo: Micros,
    pub(super) hi: Micros,
    pub(super) kind: AnchorKind,
    /// Why it is not the only one, or not an exact one.
    pub(super) why: Option<Hint>,
}

impl Hypothesis {
    /// A pulse: its instant is exact, so nothing that was uncertain before outlives it.
    pub(super) const fn paced(at: Micros) -> Self {
        Self { lo: at, hi: at, kind: AnchorKind::Paced, why: None }
    }

    pub(super) const fn width(&self) -> Micros {
        self.hi.saturating_sub(self.lo)
    }

    /// The middle of the interval.
    pub(super) const fn middle(&self) -> Micros {
        self.lo.saturating_add(self.width() >> 1)
    }

    /// True if the same timers run from both, only elsewhere.
    fn is_like(&self, other: &Self) -> bool {
        (self.kind == AnchorKind::Sensed) == (other.kind == AnchorKind::Sensed)
    }

    /// The span between the two intervals; 0 if they overlap, 1 if they touch.
    const fn gap(&self, other: &Self) -> Micros {
        if self.lo > other.hi { self.lo.saturating_sub(other.hi) } else { other.lo.saturating_sub(self.hi) }
    }

    /// The smallest interval that holds both.
    fn hull(&self, other: &Self) -> Self {
        let kind = if self.kind == other.kind { self.kind } else { AnchorKind::Paced };
        Self { lo: self.lo.min(other.lo), hi: self.hi.max(other.hi), kind, why: self.why.or(other.why) }
    }
}

/// The hypotheses alive, at most `H`.
///
/// Two become one where their union is exact: one holds the other, they overlap or they touch. Only a full set is loosened:
/// the nearest two of a kind are then covered by the interval that holds both, which allows more than either.
#[derive(Debug, Clone)]
pub(super) struct Hypotheses<const H: usize> {
    alive: Vec<Hypothesis, H>,
}

impl<const H: usize> Hypotheses<H> {
    const ROOM: () =
        assert!(H >= 3, "two kinds of state need room for three hypotheses, so that two of a kind can be covered by one");

    pub(super) const fn new() -> Self {
        const { Self::ROOM };
        Self { alive: Vec::new() }
    }

    pub(super) fn only(&mut self, state: Hypothesis) {
        self.alive.clear();
        let _ = self.alive.push(state);
    }

    pub(super) fn clear(&mut self) {
        self.alive.clear();
    }

    pub(super) fn is_empty(&self) -> bool {
        self.alive.is_empty()
    }

    /// The one alive, if it is the only one.
    pub(super) fn single(&self) -> Option<Hypothesis> {
        match self.alive.as_slice() {
            [only] => Some(*only),
            _ => None,
        }
    }

    pub(super) fn iter(&self) -> core::slice::Iter<'_, Hypothesis> {
        self.alive.iter()
    }

    pub(super) fn retain(&mut self, mut keep: impl FnMut(&Hypothesis) -> bool) {
        // One is the rule: nothing to be moved about then.
        if let [only] = self.alive.as_slice() {
            if !keep(only) {
                self.alive.clear();
            }
        } else {
            self.alive.retain(keep);
        }
    }

    /// Moves every anchor `by` earlier.
    pub(super) fn shift(&mut self, by: Micros) {
        for state in &mut self.alive {
            state.lo = state.lo.saturating_sub(by);
            state.hi = state.hi.saturating_sub(by);
        }
    }

    /// Adds a state; true if the set had to be loosened for it.
    pub(super) fn add(&mut self, state: Hypothesis) -> bool {
        let state = self.absorb(state, 1);
        let Err(state) = self.alive.push(state) else { return false };
        let state = self.absorb_nearest(state);
        // At least one place is free now.
        let _ = self.alive.push(Hypothesis { why: Some(Hint::Loosened), ..state });
        true
    }

    /// Takes out every state of the kind that lies within `reach` of this one, and gives the union of them all.
    fn absorb(&mut self, mut state: Hypothesis, reach: Micros) -> Hypothesis {
        while let Some(place) = self.alive.iter().position(|other| other.is_like(&state) && other.gap(&state) <= reach) {
            state = self.take(place).map_or(state, |other| other.hull(&state));
        }
        state
    }

    /// Takes one out; the last one fills its place.
    fn take(&mut self, place: usize) -> Option<Hypothesis> {
        let last = self.alive.pop()?;
        Some(self.alive.get_mut(place).map_or(last, |slot| core::mem::replace(slot, last)))
    }

    /// Makes one place free: covers the nearest two of a kind, the newcomer among them, by one.
    fn absorb_nearest(&mut self, newcomer: Hypothesis) -> Hypothesis {
        let mut nearest: Option<(Micros, usize, Option<usize>)> = None;
        for (place, one) in self.alive.iter().enumerate() {
            let later = self.alive.iter().enumerate().skip(place.saturating_add(1)).map(|(at, other)| (Some(at), other));
            for (with, other) in later.chain([(None, &newcomer)]) {
                let gap = one.gap(other);
                if one.is_like(other) && nearest.is_none_or(|(least, ..)| gap < least) {
                    nearest = Some((gap, place, with));
                }
            }
        }
        match nearest {
            Some((_, place, None)) => self.take(place).map_or(newcomer, |other| other.hull(&newcomer)),
            Some((_, place, Some(with))) => {
                // The later place first, so that the earlier one stays where it is.
                let other = self.take(with);
                if let Some(slot) = self.alive.get_mut(place) {
                    *slot = Hypothesis { why: Some(Hint::Loosened), ..other.map_or(*slot, |other| slot.hull(&other)) };
                }
                newcomer
            }
            None => newcomer,
        }
    }
}
