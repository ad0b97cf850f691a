//! Tracts: ways between sites, with a recovery law of their own in each direction.

use super::check::{conflict, span_within};
use super::{Fraction, way::Direction};
use crate::base::{Decay, ParamError, SiteId, Span, low_u32};

/// One direction through a tract.
///
/// # Model
/// With `recovery` = the time since the tract's gate was last passed, in either direction:
///
/// `delay = base + gain · exp(−recovery / tau)`, blocked if `recovery < theta`.
///
/// The exponential recovery of the AV node is that of Simson, Spear and Moore and of Shrier et al., Circulation 1987;76:1196
/// (from the recovery curve follow 1:1, Wenckebach and 2:1: checked); human fits: Lin et al., Am J Cardiol 1997;80:1178 (checked).
/// A wave that is blocked may still have gone some of the way (concealed conduction); `conceal` is how much it counts: nothing,
/// or as if it had passed, or between. One that is stopped by a shut way always counts as if it had passed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct Way {
    /// Delay when fully recovered, 1 µs to 2 s.
    pub base: Span,
    /// What an unrecovered gate adds at most; with `base` at most 2 s. Needs `tau` if not zero.
    pub gain: Span,
    /// How fast that wears off.
    pub tau: Option<Decay>,
    /// Recovery below which a wave is blocked, up to 60 s; zero never blocks.
    pub theta: Span,
    /// How far a wave that finds the gate unrecovered, or another wave ahead, counts as one that passed.
    pub conceal: Fraction,
    /// True if nothing passes this way until it is opened. What is stopped there comes up to the gate and counts as having passed it:
    /// otherwise every beat that is not conducted would find the way back open.
    pub shut: bool,
}

impl Way {
    /// The longest delay there is.
    pub const LONGEST: Span = Span::from_secs(2);

    /// A way with the same delay always, which never blocks.
    pub const fn new(base: Span) -> Self {
        Self { base, gain: Span::ZERO, tau: None, theta: Span::ZERO, conceal: Fraction::ZERO, shut: false }
    }

    /// The same, shut until it is opened.
    #[must_use]
    pub const fn closed(self) -> Self {
        Self { shut: true, ..self }
    }

    /// The same with a delay that grows by up to `gain` the less the gate has recovered.
    #[must_use]
    pub const fn with_recovery(self, gain: Span, tau: Decay) -> Self {
        Self { gain, tau: Some(tau), ..self }
    }

    /// The same, blocked below this recovery.
    #[must_use]
    pub const fn with_theta(self, theta: Span) -> Self {
        Self { theta, ..self }
    }

    /// The same with this concealment.
    #[must_use]
    pub const fn with_conceal(self, conceal: Fraction) -> Self {
        Self { conceal, ..self }
    }

    /// The delay of a wave that finds this recovery.
    pub const fn delay(&self, recovery: Span) -> Span {
        match self.tau {
            Some(tau) => self.base.saturating_add(tau.scaled(low_u32(self.gain.as_micros()), recovery).nearest()),
            None => self.base,
        }
    }

    const fn check(&self, names: &Names) -> Result<(), ParamError> {
        super::check::sound!(span_within(names.base, self.base, Span::from_micros(1), Self::LONGEST));
        super::check::sound!(span_within(names.gain, self.gain, Span::ZERO, Self::LONGEST.saturating_sub(self.base)));
        super::check::sound!(span_within(names.theta, self.theta, Span::ZERO, Span::from_secs(60)));
        if self.tau.is_none() && !self.gain.is_zero() {
            return conflict(names.gain, self.gain.as_micros(), names.tau, 0, "a gain needs a time constant");
        }
        Ok(())
    }

    /// From where on an earlier passage no longer matters: θ + 8τ.
    const fn memory(&self) -> Span {
        match self.tau {
            Some(tau) => self.theta.saturating_add(tau.tau().saturating_mul(8)),
            None => self.theta,
        }
    }
}

/// A way between two sites, both directions.
///
/// # Model
/// One bottleneck, the gate, with one clock for both directions: a wave that passes it either way makes both wait. A tract holds
/// one wave at most, so a delay longer than the cycle that drives it needs two tracts in series.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct TractParams {
    /// Where forward begins.
    pub from: SiteId,
    /// Where forward ends.
    pub to: SiteId,
    /// Where the gate lies: zero at `from`, one at `to`.
    pub gate: Fraction,
    /// From `from` to `to`.
    pub forward: Way,
    /// From `to` to `from`.
    pub backward: Way,
}

impl TractParams {
    /// A tract between these sites.
    pub const fn new(from: SiteId, to: SiteId, gate: Fraction, forward: Way, backward: Way) -> Self {
        Self { from, to, gate, forward, backward }
    }

    pub(super) const fn way(&self, direction: Direction) -> &Way {
        match direction {
            Direction::Forward => &self.forward,
            Direction::Backward => &self.backward,
        }
    }

    /// How much of the way lies before the gate.
    pub(super) const fn before_gate(&self, direction: Direction) -> Fraction {
        match direction {
            Direction::Forward => self.gate,
            Direction::Backward => self.gate.complement(),
        }
    }

    /// From where on an earlier passage, either way, no longer matters.
    pub(super) const fn memory(&self) -> Span {
        let (forward, backward) = (self.forward.memory(), self.backward.memory());
        if forward.as_micros() > backward.as_micros() { forward } else { backward }
    }

    pub(super) const fn check(&self) -> Result<(), ParamError> {
        use crate::base::{wide, word};
        super::check::sound!(self.forward.check(&FORWARD));
        super::check::sound!(self.backward.check(&BACKWARD));
        let (from, to) = (self.from.row(), self.to.row());
        if from == to {
            return conflict("to", wide(word(to)), "from", wide(word(from)), "a tract joins two different sites");
        }
        Ok(())
    }
}

/// How the parameters of a direction are called in an error.
struct Names {
    base: &'static str,
    gain: &'static str,
    tau: &'static str,
    theta: &'static str,
}

const FORWARD: Names = Names { base: "forward.base", gain: "forward.gain", tau: "forward.tau", theta: "forward.theta" };
const BACKWARD: Names = Names { base: "backward.base", gain: "backward.gain", tau: "backward.tau", theta: "backward.theta" };
