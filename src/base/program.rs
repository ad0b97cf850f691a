//! What a device was programmed to do: plain data, shared by device and auditor. No timing rules live here.

use super::{Channel, Interval, MicroVolts, MilliVolts, Mode, ParamError, Problem, Span};

/// What happens to an event exactly at a window's end.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Edge {
    /// Windows are half-open: it lies outside.
    Outside,
    /// The end belongs to the window: it lies inside.
    Inside,
}

/// What comes first when a sense and an expiry fall on the same tick.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Tie {
    /// The sense, which so inhibits.
    SenseFirst,
    /// The expiry, which paces; the signal then lies at the very start of the new cycle.
    ExpiryFirst,
}

/// How a signal that begins inside blanking and outlasts it is treated.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Straddle {
    /// Its onset decides: it is not seen.
    Onset,
    /// What sticks out is seen, at the end of blanking.
    End,
}

/// A set of parameters that has not been checked yet. [`Settings::check`] makes a [`Program`] of it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct Settings {
    /// Pacing mode.
    pub mode: Mode,
    /// Lower rate interval, 200 ms to 10 s.
    pub lower: Interval,
    /// Escape interval after a sense, where rate hysteresis is on: from `lower` to 10 s.
    pub hysteresis: Option<Interval>,
    /// Refractory period from the sense or pulse that starts it; must end before the lower rate interval.
    pub refractory: Span,
    /// Blanking from the sense or pulse that starts it, within `refractory`.
    pub blanking: Span,
    /// The least peak that is sensed, 50 µV to 50 mV.
    pub sensitivity: MicroVolts,
    /// Pulse amplitude, 100 mV to 10 V.
    pub amplitude: MilliVolts,
    /// Pulse width, 50 µs to 2 ms.
    pub width: Span,
    /// Reading of an event exactly at a window's end.
    pub edge: Edge,
    /// Reading of a sense and an expiry on the same tick.
    pub tie: Tie,
    /// Reading of a signal that outlasts blanking.
    pub straddle: Straddle,
    /// From a signal's onset to its sense, below `blanking` or zero, at most 100 ms.
    pub detect_delay: Span,
}

impl Settings {
    /// Settings of this mode at this lower rate interval. The rest: refractory 250 ms, blanking 100 ms, 2.5 mV, 3.5 V, 0.4 ms,
    /// half-open windows, sense first, onset decides, no detection delay.
    pub const fn new(mode: Mode, lower: Interval) -> Self {
        Self {
            mode,
            lower,
            hysteresis: None,
            refractory: Span::from_millis(250),
            blanking: Span::from_millis(100),
            sensitivity: MicroVolts(2_500),
            amplitude: MilliVolts(3_500),
            width: Span::from_micros(400),
            edge: Edge::Outside,
            tie: Tie::SenseFirst,
            straddle: Straddle::Onset,
            detect_delay: Span::ZERO,
        }
    }

    /// The program of these settings.
    ///
    /// # Errors
    /// Names the first parameter that is out of range or in conflict with another.
    pub const fn check(self) -> Result<Program, ParamError> {
        const SECOND: u64 = 1_000_000;
        macro_rules! within {
            ($name:literal, $value:expr, $least:expr, $greatest:expr) => {
                let value = $value;
                if value < $least || value > $greatest {
                    return Err(ParamError::new($name, Problem::OutOfRange { value, least: $least, greatest: $greatest }));
                }
            };
        }
        let lower = self.lower.nearest().as_micros();
        within!("lower_rate", lower, 200_000, 10 * SECOND);
        if let Some(hysteresis) = self.hysteresis {
            within!("hysteresis_rate", hysteresis.nearest().as_micros(), lower, 10 * SECOND);
        }
        let (refractory, blanking) = (self.refractory.as_micros(), self.blanking.as_micros());
        within!("refractory", refractory, 10_000, 2 * SECOND);
        within!("blanking", blanking, 1_000, 2 * SECOND);
        if blanking > refractory {
            return Err(conflict("blanking", blanking, "refractory", refractory, "blanking must end within refractory"));
        }
        if refractory >= lower {
            return Err(conflict(
                "refractory",
                refractory,
                "lower_rate",
                lower,
                "refractory must end before the lower rate interval",
            ));
        }
        within!("sensitivity", super::wide(self.sensitivity.0), 50, 50_000);
        within!("amplitude", super::wide(self.amplitude.0), 100, 10_000);
        within!("width", self.width.as_micros(), 50, 2_000);
        let delay = self.detect_delay.as_micros();
        if delay > 100_000 {
            return Err(ParamError::new("detect_delay", Problem::OutOfRange { value: delay, least: 0, greatest: 100_000 }));
        }
        if delay >= blanking {
            return Err(conflict("detect_delay", delay, "blanking", blanking, "a sense must come before blanking would end"));
        }
        Ok(Program(self))
    }
}

const fn conflict(name: &'static str, value: u64, with: &'static str, other: u64, rule: &'static str) -> ParamError {
    ParamError::new(name, Problem::Conflict { value, with, other, rule })
}

/// A checked set of parameters: what the device was set to do, and what the auditor holds it to.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Program(Settings);

impl Program {
    /// The settings it was made of.
    pub const fn settings(&self) -> &Settings {
        &self.0
    }

    /// The chamber it paces.
    pub const fn paces(&self) -> Option<Channel> {
        self.0.mode.paces()
    }

    /// The chamber it senses.
    pub const fn senses(&self) -> Option<Channel> {
        self.0.mode.senses()
    }

    /// The escape interval after a sense: the hysteresis interval, or the lower rate interval without hysteresis.
    pub const fn escape_after_sense(&self) -> Interval {
        match self.0.hysteresis {
            Some(interval) => interval,
            None => self.0.lower,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const VVI_60: Settings = Settings::new(Mode::Vvi, Interval::MAX);

    fn at_60() -> Settings {
        Settings { lower: Interval::from_span(Span::from_secs(1)).unwrap(), ..VVI_60 }
    }

    #[test]
    fn wrong_settings_are_refused_by_name() {
        let refused = |settings: Settings| settings.check().unwrap_err();
        assert_eq!(refused(VVI_60).parameter, "lower_rate");
        assert_eq!(refused(Settings { refractory: Span::from_secs(1), ..at_60() }).parameter, "refractory");
        assert_eq!(
            std::format!("{}", refused(Settings { blanking: Span::from_millis(300), ..at_60() })),
            "blanking is 300000 and refractory is 250000: blanking must end within refractory"
        );
        let faster = Interval::from_span(Span::from_millis(900));
        assert_eq!(refused(Settings { hysteresis: faster, ..at_60() }).parameter, "hysteresis_rate");
        assert!(at_60().check().is_ok());
    }
}
