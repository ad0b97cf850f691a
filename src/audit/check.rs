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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::audit::{Decision, Limits};
    use crate::base::{Interval, Mode, Program, Rate, Settings};
    use std::format;
    use std::string::String;

    fn settings(mode: Mode, per_minute: u16) -> Settings {
        Settings::new(mode, Interval::from_rate_nearest(Rate::per_minute(per_minute)))
    }

    fn vvi() -> Program {
        settings(Mode::Vvi, 60).check().unwrap()
    }

    fn refused(program: &Program, change: impl FnOnce(AuditSettings) -> AuditSettings) -> String {
        format!("{}", change(AuditSettings::new(program)).check(program).unwrap_err())
    }

    #[test]
    fn the_defaults_fit_every_mode_and_rate() {
        for mode in Mode::ALL {
            for per_minute in [30, 60, 65, 120, 175, 205, 220] {
                let mut settings = settings(mode, per_minute);
                settings.refractory = Span::from_millis(200);
                let program = settings.check().unwrap();
                assert_eq!(AuditSettings::new(&program).check(&program), Ok(()), "{mode} at {per_minute}");
            }
        }
    }

    #[test]
    fn what_is_out_of_range_is_refused_by_name() {
        let program = vvi();
        let ms = Span::from_millis;
        assert_eq!(
            refused(&program, |set| set.with_uncertainty(ms(51), Decision::Guarded)),
            "uncertainty is 51000, accepted is 0 to 50000"
        );
        assert_eq!(
            refused(&program, |set| set.with_tolerance(Tolerance::symmetric(ms(1_001)))),
            "tolerance is 1001000, accepted is 0 to 1000000"
        );
        assert_eq!(
            refused(&program, |set| AuditSettings { sensitivity_thousandths: 901, ..set }),
            "sensitivity_tolerance is 901, accepted is 0 to 900"
        );
        assert_eq!(
            refused(&program, |set| AuditSettings { decide_thousandths: 1_001, ..set }),
            "decide is 1001, accepted is 0 to 1000"
        );
        let limits = AuditSettings::new(&program).limits;
        assert_eq!(
            refused(&program, |set| set.with_limits(Limits { longest_pause: Some(ms(300_001)), ..limits })),
            "longest_pause is 300001000, accepted is 0 to 300000000"
        );
        assert_eq!(
            refused(&program, |set| set.with_limits(Limits { vulnerable: Some((ms(100), ms(2_001))), ..limits })),
            "vulnerable is 2001000, accepted is 0 to 2000000"
        );
    }

    #[test]
    fn what_contradicts_is_refused_with_both_names() {
        let program = vvi();
        let ms = Span::from_millis;
        let limits = AuditSettings::new(&program).limits;
        let begins = |text: String, with: &str| assert!(text.starts_with(with), "{text}");
        begins(
            refused(&program, |set| set.with_limits(Limits { ceiling: ms(1_001), ..limits })),
            "ceiling is 1001000 and lower_rate is 1000000: ",
        );
        begins(
            refused(&program, |set| set.with_limits(Limits { longest_pause: Some(ms(900)), ..limits })),
            "longest_pause is 900000 and hysteresis_rate is 1000000: ",
        );
        begins(
            refused(&program, |set| set.with_limits(Limits { vulnerable: Some((ms(400), ms(150))), ..limits })),
            "vulnerable is 400000 and vulnerable is 150000: ",
        );
        begins(refused(&program, |set| AuditSettings { detect: (ms(10), ms(5)), ..set }), "detect is 10000 and detect is 5000: ");
        begins(
            refused(&program, |set| set.with_tolerance(Tolerance::symmetric(ms(250)))),
            "tolerance is 250000 and refractory is 250000: ",
        );
        let mut close = settings(Mode::Vvi, 200);
        close.refractory = ms(290);
        begins(refused(&close.check().unwrap(), |set| set), "tolerance is 298000 and lower_rate is 292000: ");
        let mut short = settings(Mode::Vvi, 60);
        (short.refractory, short.blanking) = (ms(30), ms(20));
        let short = short.check().unwrap();
        begins(
            refused(&short, |set| set.with_uncertainty(ms(6), Decision::Simple)),
            "uncertainty is 24000 and refractory is 22000: ",
        );
        begins(
            refused(&short, |set| AuditSettings { detect: (ms(0), ms(22)), ..set }),
            "detect is 22000 and refractory is 22000: ",
        );
        let mut fast = settings(Mode::Voo, 60);
        fast.lower = Interval::from_span(ms(500)).unwrap();
        begins(
            refused(&fast.check().unwrap(), |set| set.with_tolerance(Tolerance::symmetric(ms(500)))),
            "tolerance is 500000 and lower_rate is 500000: ",
        );
    }
}
