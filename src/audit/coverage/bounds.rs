//! Where windows and edges lie, and how near an end is too near.

use super::table::{After, Stretch};
use crate::audit::{AuditSettings, Tolerance};
use crate::base::{Instant, Program, Span};

/// The end of a window that is asked for from both sides.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum EdgeKind {
    /// Of blanking.
    Blanking,
    /// Of the refractory period.
    Refractory,
    /// Of the escape interval: hysteresis after a sense, where that is on, else the lower rate interval.
    Escape,
}

impl EdgeKind {
    /// Every edge, in the order of time.
    pub const ALL: [Self; 3] = [Self::Blanking, Self::Refractory, Self::Escape];

    /// Its name.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Blanking => "end of blanking",
            Self::Refractory => "end of refractory",
            Self::Escape => "end of the escape interval",
        }
    }
}

/// Everything in µs from the anchor.
#[derive(Debug, Clone, Copy)]
pub(super) struct Bounds {
    pub(super) blanking: u64,
    pub(super) refractory: u64,
    pub(super) lower: u64,
    pub(super) escape_after_sense: u64,
    pub(super) delay: u64,
    pub(super) band: Band,
    pub(super) hysteresis: bool,
}

/// How near an end is too near.
#[derive(Debug, Clone, Copy)]
pub(super) struct Band {
    pub(super) blanking: u64,
    pub(super) refractory: u64,
    pub(super) lower: u64,
    pub(super) after_sense: u64,
    /// Width of a sensed anchor.
    pub(super) spread: u64,
}

/// How many edges there are.
pub(super) const EDGE_COUNT: usize = 9;

impl Bounds {
    pub(super) fn new(program: &Program, settings: &AuditSettings) -> Self {
        let set = program.settings();
        let uncertainty = settings.uncertainty.as_micros();
        let band = |tolerance: &Tolerance, window: Span| {
            let (low, high) = tolerance.around(window);
            low.max(high).as_micros().saturating_add(uncertainty)
        };
        let after_sense = program.escape_after_sense().nearest();
        let hysteresis = set.hysteresis.is_some();
        Self {
            blanking: set.blanking.as_micros(),
            refractory: set.refractory.as_micros(),
            lower: set.lower.nearest().as_micros(),
            escape_after_sense: after_sense.as_micros(),
            delay: set.detect_delay.as_micros(),
            band: Band {
                blanking: band(&settings.blanking, set.blanking),
                refractory: band(&settings.refractory, set.refractory),
                lower: band(&settings.lower, set.lower.nearest()),
                after_sense: band(if hysteresis { &settings.hysteresis } else { &settings.lower }, after_sense),
                spread: settings.detect.1.saturating_sub(settings.detect.0).as_micros(),
            },
            hysteresis,
        }
    }

    /// Where a signal's sense lies in a cycle; none if it lies before it, or is what the cycle begins with.
    pub(super) fn offset(&self, onset: Instant, anchor: Instant) -> Option<u64> {
        let sense = onset.saturating_add(Span::from_micros(self.delay));
        sense.since(anchor).map(Span::as_micros).filter(|offset| *offset > 0)
    }

    /// Beginning, end and band of a window.
    pub(super) fn row(&self, after: After, stretch: Stretch) -> (u64, u64, u64) {
        let Band { blanking, refractory, lower, after_sense, .. } = self.band;
        let last = self.lower.saturating_sub(100_000).max(self.refractory);
        let (from, to, band) = match stretch {
            Stretch::Blanking => (0, self.blanking, blanking),
            Stretch::Refractory => (self.blanking, self.refractory, blanking.max(refractory)),
            Stretch::Alert => (self.refractory, last, refractory.max(lower)),
            Stretch::Last => (last, self.lower, lower),
            Stretch::Hysteresis => (self.lower, self.escape_after_sense, lower.max(after_sense)),
            Stretch::Cycle => (0, self.lower, lower),
        };
        (from, to, band.saturating_add(self.spread(after)))
    }

    pub(super) fn is_void(&self, after: After, stretch: Stretch) -> bool {
        let (from, to, band) = self.row(after, stretch);
        to.saturating_sub(from) <= band.saturating_mul(2)
    }

    /// Place and band of an edge. A band is at least a tick, so that an exact run has two sides too.
    pub(super) fn edge(&self, after: After, kind: EdgeKind) -> (u64, u64) {
        let (at, band) = match (kind, after) {
            (EdgeKind::Blanking, _) => (self.blanking, self.band.blanking),
            (EdgeKind::Refractory, _) => (self.refractory, self.band.refractory),
            (EdgeKind::Escape, After::Sense) => (self.escape_after_sense, self.band.after_sense),
            (EdgeKind::Escape, _) => (self.lower, self.band.lower),
        };
        (at, band.saturating_add(self.spread(after)).max(1))
    }

    /// True if another edge of the cycle lies where this one is tried.
    pub(super) fn is_edge_void(&self, after: After, kind: EdgeKind, at: u64, band: u64) -> bool {
        let reach = band.saturating_mul(3);
        let others = EdgeKind::ALL.into_iter().filter(|other| *other != kind).map(|other| self.edge(after, other));
        at < reach || others.into_iter().any(|(other, band)| other.abs_diff(at) <= reach.saturating_add(band))
    }

    const fn spread(&self, after: After) -> u64 {
        match after {
            After::Sense => self.band.spread,
            After::CapturedPulse | After::LostPulse => 0,
        }
    }

    /// An edge's place in a table of all of them.
    pub(super) const fn edge_place(after: After, kind: EdgeKind) -> usize {
        let kind = match kind {
            EdgeKind::Blanking => 0,
            EdgeKind::Refractory => 1,
            EdgeKind::Escape => 2,
        };
        after.place().saturating_mul(3).saturating_add(kind)
    }
}
