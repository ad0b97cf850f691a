//! The upright axis of a plot: values up, pixels down.

use crate::report::scale::{step_for, ticks};

/// From values in µs to heights in a drawing.
#[derive(Debug, Clone, Copy)]
pub(super) struct Axis {
    low: f64,
    high: f64,
    pub(super) height: f64,
}

impl Axis {
    /// An axis that holds all these values with some room beyond.
    pub(super) fn over(values: impl Iterator<Item = f64>, height: f64) -> Self {
        let (low, high) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), value| (low.min(value), high.max(value)));
        if low > high {
            return Self { low: 0.0, high: 1.0, height };
        }
        let room = ((high - low) * 0.08).max(1_000.0);
        Self { low: low - room, high: high + room, height }
    }

    pub(super) fn y(&self, value: f64) -> f64 {
        (self.height * (self.high - value) / (self.high - self.low)).clamp(0.0, self.height)
    }

    pub(super) fn holds(&self, value: f64) -> bool {
        (self.low..=self.high).contains(&value)
    }

    /// Round values with at least this many pixels between them.
    pub(super) fn ticks(&self, apart: f64) -> impl Iterator<Item = f64> {
        let most = (self.height / apart).max(1.0) as u32;
        ticks(self.low, self.high, step_for(self.high - self.low, most))
    }

    /// The value in the middle of a bin, and the bin of a value, where `bins` divide the height evenly.
    pub(super) fn bin(&self, value: f64, bins: usize) -> usize {
        let share = (self.high - value) / (self.high - self.low);
        ((share * bins as f64) as usize).min(bins.saturating_sub(1))
    }
}
