//! What a signal may have done to a device in a given state.

use super::clock::Micros;
use super::hypothesis::Hypothesis;
use super::windows::{Order, Windows};
use super::{AnchorKind, Hint};
use crate::base::Straddle;

/// A signal as the auditor keeps it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Shown {
    /// Onset.
    pub(super) at: Micros,
    /// Peak in microvolts.
    pub(super) peak: u32,
    /// From onset to end.
    pub(super) width: Micros,
}

/// What may have become of a device in one state when its channel was shown a signal.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Fate {
    /// The signal may have changed nothing.
    pub(super) stays: bool,
    /// The signal may have been sensed: where, at the earliest and at the latest.
    pub(super) senses: Option<(Micros, Micros)>,
    /// Why both, where both.
    pub(super) why: Option<Hint>,
    /// Its sense may come only after the pulse that is being looked at.
    pub(super) later: bool,
}

/// Where in time a detection may lie, for one state.
#[derive(Debug, Clone, Copy)]
struct Reach {
    first: Micros,
    last: Micros,
    /// The latest that still precedes the state's expiry.
    expires: Micros,
    /// The latest that may precede, and the earliest that may follow, the pulse that is being looked at.
    pulse: Option<(Micros, Micros)>,
}

impl Fate {
    const NOTHING: Self = Self { stays: true, senses: None, why: None, later: false };

    /// The state that the sense leads to.
    pub(super) fn sensed(&self) -> Option<Hypothesis> {
        let (lo, hi) = self.senses?;
        Some(Hypothesis { lo, hi, kind: AnchorKind::Sensed, why: self.why })
    }
}

impl Windows {
    /// True if a signal of this peak may be seen.
    pub(super) const fn may_see(&self, peak: u32) -> bool {
        peak > self.must_not_see || peak >= self.must_see
    }

    /// True if a signal of this peak may be missed.
    pub(super) const fn may_miss(&self, peak: u32) -> bool {
        peak < self.must_see
    }

    /// What may have become of a device in this state when it was shown this signal.
    ///
    /// The signal is unseen if its onset or its sense lies in blanking, and changes nothing if its sense lies in refractory. Each
    /// of the two windows ends somewhere within its tolerance, counted from an anchor that lies somewhere in its interval. A sense
    /// comes before the expiry: a later one would have found the pulse gone out. If a pulse was seen meanwhile, what came before it
    /// is told apart from what may still come.
    pub(super) fn fate(&self, state: &Hypothesis, signal: &Shown, pulse: Option<Micros>) -> Fate {
        let first = signal.at.saturating_add(self.detect.lo);
        let last = signal.at.saturating_add(self.detect.hi);
        let expires = match self.order {
            Order::SenseFirst => self.expires(state),
            Order::ExpiryFirst => self.expires(state).saturating_sub(1),
            Order::Either => self.expires(state).saturating_add(self.uncertainty),
        };
        if first > expires {
            return Fate { later: pulse.is_some(), ..Fate::NOTHING };
        }
        if !self.may_see(signal.peak) {
            return Fate::NOTHING;
        }
        let pulse = pulse.map(|at| match self.order {
            Order::SenseFirst => (at, at.saturating_add(1)),
            Order::ExpiryFirst => (at.saturating_sub(1), at),
            Order::Either => (at.saturating_add(self.uncertainty), at.saturating_sub(self.uncertainty)),
        });
        let mut fate = Fate { stays: self.may_miss(signal.peak), senses: None, why: None, later: false };
        let reach = Reach { first, last, expires, pulse };
        let unseen = fate.stays;

        let blanked_to = self.blanking_of(state);
        let begins_blanked = signal.at < blanked_to.1 && signal.at.saturating_add(self.uncertainty) >= state.lo;
        let begins_clear = signal.at >= blanked_to.0 || signal.at < state.hi;
        if begins_clear {
            self.detect_in(state, reach, &mut fate);
        }
        if begins_blanked {
            let end = signal.at.saturating_add(signal.width);
            let may_outlast = self.straddle == Straddle::End && end > blanked_to.0;
            if may_outlast {
                // At the end of blanking, if refractory can be over by then; both windows count from the same anchor.
                let at_end = self.outlasting_is_seen();
                let last = if at_end { last.max(blanked_to.1) } else { last };
                let reach = Reach { first: first.max(blanked_to.0), last, ..reach };
                fate.stays |= !at_end && first < blanked_to.1;
                if reach.first <= last {
                    self.detect_in(state, reach, &mut fate);
                }
            }
            if !may_outlast || end <= blanked_to.1 {
                fate.stays = true;
            }
        }
        if fate.senses.is_some() {
            fate.why = match (unseen, begins_blanked) {
                (true, _) => Some(Hint::NearThreshold),
                (false, true) if fate.stays => Some(Hint::Straddles),
                (false, _) if fate.stays => Some(Hint::AtEdge),
                (false, _) => None,
            };
            fate.stays |= self.ignores;
        }
        fate
    }

    /// The sense of a signal that leaves nothing open: one that must be seen, clear of every window and before every expiry.
    /// What [`fate`](Self::fate) would say of most signals, at a fraction of its cost; `None` if it takes more to tell.
    pub(super) fn plain_sense(&self, state: &Hypothesis, signal: &Shown) -> Option<Hypothesis> {
        let lo = signal.at.saturating_add(self.detect.lo);
        let hi = signal.at.saturating_add(self.detect.hi);
        let must_see = !self.may_miss(signal.peak) && self.may_see(signal.peak) && !self.ignores;
        let clear = signal.at >= self.blanking_of(state).1 && lo >= self.refractory_of(state).1;
        let in_time = hi < self.expires(state);
        if must_see && clear && in_time { Some(Hypothesis { lo, hi, kind: AnchorKind::Sensed, why: None }) } else { None }
    }

    /// First moment outside blanking, at the earliest and at the latest.
    const fn blanking_of(&self, state: &Hypothesis) -> (Micros, Micros) {
        (
            state.lo.saturating_add(self.blanking.lo).saturating_sub(self.guard),
            state.hi.saturating_add(self.blanking.hi).saturating_add(self.guard),
        )
    }

    /// First moment outside refractory, at the earliest and at the latest.
    pub(super) const fn refractory_of(&self, state: &Hypothesis) -> (Micros, Micros) {
        (
            state.lo.saturating_add(self.refractory.lo).saturating_sub(self.guard),
            state.hi.saturating_add(self.refractory.hi).saturating_add(self.guard),
        )
    }

    /// Adds what a detection somewhere in this reach may do.
    fn detect_in(&self, state: &Hypothesis, reach: Reach, fate: &mut Fate) {
        let (earliest_clear, latest_clear) = self.refractory_of(state);
        fate.stays |= reach.first < latest_clear;
        let lo = reach.first.max(earliest_clear);
        let mut hi = reach.last.min(reach.expires);
        if let Some((before, after)) = reach.pulse {
            if reach.last >= after {
                fate.later = true;
                fate.stays = true;
            }
            hi = hi.min(before);
        }
        if lo <= hi {
            fate.senses = Some(fate.senses.map_or((lo, hi), |(least, greatest)| (least.min(lo), greatest.max(hi))));
        }
    }
}
