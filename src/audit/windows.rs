//! The windows of a program with their tolerances, as the auditor holds a device to them.

use super::clock::{FOREVER, Micros, short};
use super::hypothesis::Hypothesis;
use super::{AnchorKind, AuditSettings, Decision, RuleId, RuleSet, Tolerance};
use crate::base::{Edge, Interval, MicroVolts, Program, Span, Straddle, Tie};

/// An escape interval with its tolerance.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Escape {
    pub(super) earliest: Micros,
    pub(super) nominal: Micros,
    pub(super) latest: Micros,
}

impl Escape {
    /// A rate leaves a fraction of a microsecond that the device carries: both whole numbers beside it belong to it.
    fn new(interval: Interval, tolerance: &Tolerance) -> Self {
        let (low, high) = tolerance.around(interval.nearest());
        Self {
            earliest: short(interval.floor().saturating_sub(low)),
            nominal: short(interval.nearest()),
            latest: short(interval.ceil().saturating_add(high)),
        }
    }

    /// How much room it leaves.
    pub(super) const fn width(self) -> Micros {
        self.latest.saturating_sub(self.earliest)
    }

    const fn hull(self, other: Self) -> Self {
        Self {
            earliest: if self.earliest < other.earliest { self.earliest } else { other.earliest },
            latest: if self.latest > other.latest { self.latest } else { other.latest },
            ..self
        }
    }
}

/// Two limits of a span; which of them belong to it depends on the use.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Range {
    pub(super) lo: Micros,
    pub(super) hi: Micros,
}

/// What a sense and an expiry so close together that their order is not measured may have done.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Order {
    /// The declared order holds to the tick: the sense first.
    SenseFirst,
    /// The declared order holds to the tick: the expiry first.
    ExpiryFirst,
    /// Not measured finer than the uncertainty: both orders.
    Either,
}

/// Everything a judgement is made from. Relaxing or dropping a rule gives another set of windows, so that live judging and
/// naming share one piece of code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Windows {
    /// Escape after a pulse or the start.
    pub(super) paced: Escape,
    /// Escape after a sense.
    pub(super) sensed: Escape,
    /// A second escape that either may use instead, where a rule is relaxed: after a pulse, after a sense.
    pub(super) swapped: (Option<Escape>, Option<Escape>),
    /// True if the two intervals are rules of their own.
    pub(super) hysteresis: bool,
    /// First moment outside refractory, at the earliest and at the latest.
    pub(super) refractory: Range,
    /// The same for blanking.
    pub(super) blanking: Range,
    /// At or above: must be seen.
    pub(super) must_see: u32,
    /// At or below: must not be seen.
    pub(super) must_not_see: u32,
    /// From onset to sense.
    pub(super) detect: Range,
    /// Uncertainty of an order of two events.
    pub(super) uncertainty: Micros,
    /// By how much limits are widened before a hypothesis is given up.
    pub(super) guard: Micros,
    pub(super) order: Order,
    pub(super) straddle: Straddle,
    /// A sense need not remove the pending pulse.
    pub(super) ignores: bool,
    /// How long after a pulse or a sense a further pulse may come without being due.
    pub(super) repeats: Option<Micros>,
}

impl Windows {
    pub(super) fn new(program: &Program, settings: &AuditSettings) -> Self {
        let set = program.settings();
        let paced = Escape::new(set.lower, &settings.lower);
        let sensed = match set.hysteresis {
            Some(interval) => Escape::new(interval, &settings.hysteresis),
            None => paced,
        };
        let (must_not_see, must_see) = settings.sensitivity_limits(set.sensitivity);
        let uncertainty = short(settings.uncertainty);
        Self {
            paced,
            sensed,
            swapped: (None, None),
            hysteresis: set.hysteresis.is_some() && program.senses().is_some(),
            refractory: end_of(set.refractory, &settings.refractory, set.edge),
            blanking: end_of(set.blanking, &settings.blanking, set.edge),
            must_see: must_see.0,
            must_not_see: must_not_see.0,
            detect: Range { lo: short(settings.detect.0), hi: short(settings.detect.1) },
            uncertainty,
            guard: if matches!(settings.decision, Decision::Guarded) { uncertainty } else { 0 },
            order: match set.tie {
                _ if uncertainty > 0 => Order::Either,
                Tie::SenseFirst => Order::SenseFirst,
                Tie::ExpiryFirst => Order::ExpiryFirst,
            },
            straddle: set.straddle,
            ignores: false,
            repeats: None,
        }
    }

    /// The escape from this sort of anchor.
    pub(super) const fn escape(&self, kind: AnchorKind) -> Escape {
        match kind {
            AnchorKind::Sensed => self.sensed,
            AnchorKind::Paced | AnchorKind::Start => self.paced,
        }
    }

    /// The latest moment at which a pulse from this state is accepted.
    pub(super) fn expires(&self, state: &Hypothesis) -> Micros {
        let own = self.escape(state.kind).latest;
        let latest = self.swapped_escape(state.kind).map_or(own, |other| other.latest.max(own));
        state.hi.saturating_add(latest).saturating_add(self.guard)
    }

    /// True if this state may pace at `pulse`.
    pub(super) fn allows(&self, state: &Hypothesis, pulse: Micros) -> bool {
        let fits = |escape: Escape| {
            pulse.saturating_add(self.guard) >= state.lo.saturating_add(escape.earliest)
                && pulse <= state.hi.saturating_add(escape.latest).saturating_add(self.guard)
        };
        fits(self.escape(state.kind))
            || self.swapped_escape(state.kind).is_some_and(fits)
            || (state.kind != AnchorKind::Start
                && self.repeats.is_some_and(|by| state.lo <= pulse && pulse <= state.hi.saturating_add(by)))
    }

    const fn swapped_escape(&self, kind: AnchorKind) -> Option<Escape> {
        match kind {
            AnchorKind::Sensed => self.swapped.1,
            AnchorKind::Paced | AnchorKind::Start => self.swapped.0,
        }
    }

    /// True if a signal that outlasts blanking can be sensed at its end: where blanking may last as long as the refractory period.
    pub(super) fn outlasting_is_seen(&self) -> bool {
        let refractory_ends = self.refractory.lo.saturating_sub(self.guard);
        self.straddle == Straddle::End && self.blanking.hi.saturating_add(self.guard) >= refractory_ends
    }

    /// The latest a sense can follow its signal's onset: by the detection delay, or at the end of blanking where a signal that
    /// outlasts it is seen there.
    pub(super) fn latest_sense(&self) -> Micros {
        if self.outlasting_is_seen() { self.detect.hi.max(self.blanking.hi.saturating_add(self.guard)) } else { self.detect.hi }
    }

    /// When everything that could bear on a signal's sense has been seen: no pulse observed later can have preceded it.
    pub(super) fn settles(&self, onset: Micros) -> Micros {
        let latest = onset.saturating_add(self.latest_sense()).saturating_add(self.uncertainty.saturating_mul(2));
        match self.order {
            Order::SenseFirst => latest,
            Order::ExpiryFirst | Order::Either => latest.saturating_add(1),
        }
    }

    /// The windows with one rule relaxed by this much: the larger, the more they allow.
    ///
    /// The scale makes rules comparable: a microsecond of a timer is a microsecond, one per cent of sensitivity counts as one
    /// millisecond, another choice of interval as the least there is. A sense without effect counts as [`IGNORED`].
    #[must_use]
    pub(super) fn relaxed(&self, rule: RuleId, by: Micros) -> Self {
        let mut windows = *self;
        let per_cent = |level: u32| {
            let share = u64::from(level).saturating_mul(u64::from(by)).checked_div(100_000).unwrap_or(0);
            u32::try_from(share).unwrap_or(u32::MAX)
        };
        match rule {
            RuleId::Lr1 => {
                windows.paced.latest = self.paced.latest.saturating_add(by);
                if !self.hysteresis {
                    windows.sensed.latest = self.sensed.latest.saturating_add(by);
                }
            }
            RuleId::Lr2 => {
                windows.paced.earliest = self.paced.earliest.saturating_sub(by);
                if !self.hysteresis {
                    windows.sensed.earliest = self.sensed.earliest.saturating_sub(by);
                }
            }
            RuleId::Hy1 if self.hysteresis => {
                windows.sensed.earliest = self.sensed.earliest.saturating_sub(by);
                windows.sensed.latest = self.sensed.latest.saturating_add(by);
                windows.swapped.1 = Some(self.paced);
            }
            RuleId::Hy2 if self.hysteresis => windows.swapped.0 = Some(self.sensed),
            RuleId::In1 => windows.ignores = by >= IGNORED,
            RuleId::Rf1 => {
                windows.refractory.lo = self.refractory.lo.saturating_sub(by);
                windows.blanking.lo = self.blanking.lo.saturating_sub(by);
            }
            RuleId::Rf2 => windows.refractory.hi = self.refractory.hi.saturating_add(by),
            RuleId::Se1 => windows.must_see = self.must_see.saturating_add(per_cent(self.must_see)),
            RuleId::Se2 => windows.must_not_see = self.must_not_see.saturating_sub(per_cent(self.must_not_see)),
            RuleId::Cm1 => windows.repeats = Some(by),
            _ => {}
        }
        windows
    }

    /// The windows without these rules: what they forbid is allowed, whatever its size.
    #[must_use]
    pub(super) fn without(&self, rules: RuleSet) -> Self {
        let mut windows = *self;
        for rule in rules.iter() {
            match rule {
                RuleId::Lr1 | RuleId::Lr2 | RuleId::Rf1 | RuleId::Rf2 | RuleId::In1 | RuleId::Se1 => {
                    windows = windows.relaxed(rule, FOREVER);
                }
                RuleId::Se2 => windows.must_not_see = 0,
                RuleId::Hy1 if self.hysteresis => {
                    windows.sensed = Escape { latest: FOREVER, ..windows.sensed.hull(windows.paced) };
                }
                RuleId::Hy2 if self.hysteresis => windows.paced = windows.paced.hull(windows.sensed),
                // Without it an instant that is due may bring as many pulses as its window holds.
                RuleId::Cm1 => windows.repeats = Some(self.paced.width()),
                _ => {}
            }
        }
        windows
    }
}

/// What a sense that removes nothing counts among relaxations: 50 ms. It must be dearer than a window or a gain that is a
/// little off, which look the same once, and cheaper than an escape interval that is several hundred milliseconds off. Derived
/// from the bank of faults, where 20 to 40 ms is a wrong window and 300 ms or more is no window at all.
pub(super) const IGNORED: Micros = 50_000;

fn end_of(window: Span, tolerance: &Tolerance, edge: Edge) -> Range {
    let (low, high) = tolerance.around(window);
    let end = match edge {
        Edge::Outside => window,
        Edge::Inside => window.saturating_add(Span::from_micros(1)),
    };
    Range { lo: short(end.saturating_sub(low)), hi: short(end.saturating_add(high)) }
}

impl Tolerance {
    /// What is accepted below and above a timer of this length; a fraction of a microsecond counts in the device's favour.
    pub(super) fn around(&self, nominal: Span) -> (Span, Span) {
        let share = nominal.as_micros().saturating_mul(u64::from(self.share_millionths)).div_ceil(1_000_000);
        let both = Span::from_micros(share).saturating_add(self.tick);
        (self.low.saturating_add(both), self.high.saturating_add(both))
    }
}

impl AuditSettings {
    /// The highest peak that must not be seen and the lowest that must.
    pub fn sensitivity_limits(&self, set: MicroVolts) -> (MicroVolts, MicroVolts) {
        let share = |thousandths: u32| u64::from(set.0).saturating_mul(u64::from(thousandths));
        let low = share(1_000_u32.saturating_sub(self.sensitivity_thousandths)).checked_div(1_000).unwrap_or(0);
        let high = share(1_000_u32.saturating_add(self.sensitivity_thousandths)).div_ceil(1_000);
        (MicroVolts(u32::try_from(low).unwrap_or(u32::MAX)), MicroVolts(u32::try_from(high).unwrap_or(u32::MAX)))
    }
}
