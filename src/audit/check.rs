//! What audit settings are refused, by name.

use super::{AuditSettings, Tolerance};
use crate::base::{ParamError, Problem, Program, Span};

const SECOND: u64 = 1_000_000;

impl AuditSettings {
    /// Checks these settings against a program.
    ///
    /// # Errors
    /// Names the first setting that is out of range, contradicts another, or cannot hold for a device with this program:
    /// `tolerance`, `uncertainty`, `sensitivity_tolerance`, `detect`, `ceiling`, `longest_pause`, `vulnerable`, `decide`.
    pub fn check(&self, program: &Program) -> Result<(), ParamError> {
        let set = program.settings();
        for tolerance in [&self.lower, &self.hysteresis, &self.refractory, &self.blanking] {
            within("tolerance", tolerance.low, 0, SECOND)?;
            within("tolerance", tolerance.high, 0, SECOND)?;
            within("tolerance", tolerance.tick, 0, SECOND)?;
            range("tolerance_share", u64::from(tolerance.share_millionths), 0, 500_000)?;
        }
        within("uncertainty", self.uncertainty, 0, 50_000)?;
        range("sensitivity_tolerance", u64::from(self.sensitivity_thousandths), 0, 900)?;
        range("decide", u64::from(self.decide_thousandths), 0, 1_000)?;
        within("detect", self.detect.1, 0, 100_000)?;
        if self.detect.0 > self.detect.1 {
            return Err(conflict(
                "detect",
                self.detect.0,
                "detect",
                self.detect.1,
                "the least delay must not exceed the greatest",
            ));
        }
        self.check_windows(program)?;
        let limits = &self.limits;
        let lower = set.lower.floor();
        within("ceiling", limits.ceiling, 0, 10 * SECOND)?;
        if limits.ceiling > lower && program.paces().is_some() {
            let rule = "the ceiling interval must not exceed the lower rate interval";
            return Err(conflict("ceiling", limits.ceiling, "lower_rate", lower, rule));
        }
        if let Some(pause) = limits.longest_pause {
            within("longest_pause", pause, 0, 300 * SECOND)?;
            let escape = program.escape_after_sense().ceil();
            if pause < escape {
                let rule = "the longest pause must not be shorter than the longest escape interval";
                return Err(conflict("longest_pause", pause, "hysteresis_rate", escape, rule));
            }
        }
        if let Some((from, to)) = limits.vulnerable {
            within("vulnerable", to, 0, 2 * SECOND)?;
            if from > to {
                return Err(conflict("vulnerable", from, "vulnerable", to, "its beginning must not lie after its end"));
            }
        }
        Ok(())
    }

    /// A tolerance must leave something of its window, and order two events that follow each other.
    fn check_windows(&self, program: &Program) -> Result<(), ParamError> {
        let set = program.settings();
        if program.paces().is_none() {
            return Ok(());
        }
        let lower = set.lower.floor();
        let escape = program.escape_after_sense().floor();
        let windows = [("lower_rate", &self.lower, lower), ("hysteresis_rate", &self.hysteresis, escape)];
        for (name, tolerance, window) in windows {
            let low = below(tolerance, window);
            if low >= window {
                return Err(conflict(
                    "tolerance",
                    low,
                    name,
                    window,
                    "a tolerance must be shorter than the interval it belongs to",
                ));
            }
        }
        if program.senses().is_none() {
            return Ok(());
        }
        let low = below(&self.refractory, set.refractory);
        if low >= set.refractory {
            let rule = "a tolerance must be shorter than the window it belongs to";
            return Err(conflict("tolerance", low, "refractory", set.refractory, rule));
        }
        let kept = set.refractory.saturating_sub(low);
        let spread = self.detect.1.saturating_add(self.uncertainty.saturating_mul(4));
        if spread >= kept {
            let rule = "refractory less its tolerance must outlast the detection delay and four times the uncertainty";
            let name = if self.uncertainty.is_zero() { "detect" } else { "uncertainty" };
            return Err(conflict(name, spread, "refractory", kept, rule));
        }
        let high = self.refractory.around(set.refractory).1;
        let latest = set.refractory.saturating_add(high);
        let earliest = lower.saturating_sub(below(&self.lower, lower));
        if latest >= earliest {
            let rule = "refractory with its tolerance must end before the lower rate interval less its own";
            return Err(conflict("tolerance", latest, "lower_rate", earliest, rule));
        }
        Ok(())
    }
}

fn below(tolerance: &Tolerance, window: Span) -> Span {
    tolerance.around(window).0
}

const fn within(name: &'static str, value: Span, least: u64, greatest: u64) -> Result<(), ParamError> {
    range(name, value.as_micros(), least, greatest)
}

const fn range(name: &'static str, value: u64, least: u64, greatest: u64) -> Result<(), ParamError> {
    if value < least || value > greatest {
        return Err(ParamError::new(name, Problem::OutOfRange { value, least, greatest }));
    }
    Ok(())
}

const fn conflict(name: &'static str, value: Span, with: &'static str, other: Span, rule: &'static str) -> ParamError {
    ParamError::new(name, Problem::Conflict { value: value.as_micros(), with, other: other.as_micros(), rule })
}
