//! What the auditor is told besides the program: tolerances, uncertainty, the decision rule and the declared limits.

use crate::base::{Program, Span};

/// How far a timer may be off: the sum of a fixed span, a share of its nominal length, and one tick of the device's clock each side.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Tolerance {
    /// Accepted on the early side.
    pub low: Span,
    /// Accepted on the late side.
    pub high: Span,
    /// Accepted on both sides, in millionths of the timer's nominal length.
    pub share_millionths: u32,
    /// One tick of the device's clock, accepted on both sides.
    pub tick: Span,
}

impl Tolerance {
    /// The same fixed span on both sides and nothing else.
    pub const fn symmetric(span: Span) -> Self {
        Self { low: span, high: span, share_millionths: 0, tick: Span::ZERO }
    }
}

/// How measurement uncertainty enters a judgement. ISO/IEC 17025 wants the rule written down beside the result (checked: an
/// article on its clause 7.8.6, not the text itself). Which of two events came first is left open within the uncertainty by both.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Decision {
    /// Broken outside the limits, held inside.
    Simple,
    /// Held inside limits shrunk by the uncertainty, broken outside limits widened by it, undecided between.
    Guarded,
}

/// Limits of the envelope rules, which hold whatever features the device has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Limits {
    /// EN1: the least span between two pulses of one chamber; the tolerance of the lower rate interval stays allowed.
    pub ceiling: Span,
    /// EN2: the longest span without a pulse or a signal that may have been seen; `None` derives it from the program.
    pub longest_pause: Option<Span>,
    /// EN3: from and to after a signal that must have been seen; `None` turns the rule off.
    pub vulnerable: Option<(Span, Span)>,
}

/// 60 000/205 ms: a ceiling of 205 pulses per minute, the figure of one published manual (common practice, no further source).
const CEILING: u64 = 292_683;

/// What the auditor is told besides the program.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct AuditSettings {
    /// Tolerance of the lower rate interval.
    pub lower: Tolerance,
    /// Tolerance of the hysteresis interval.
    pub hysteresis: Tolerance,
    /// Tolerance of the refractory period.
    pub refractory: Tolerance,
    /// Tolerance of blanking.
    pub blanking: Tolerance,
    /// Uncertainty of a measured interval, k = 2.
    pub uncertainty: Span,
    /// Decision rule.
    pub decision: Decision,
    /// Tolerance of the sensitivity, in thousandths: 200 means must be seen at 1.2 times, must not at 0.8 times.
    pub sensitivity_thousandths: u32,
    /// Least and greatest span from a signal's onset to its sense.
    pub detect: (Span, Span),
    /// Envelope limits.
    pub limits: Limits,
    /// The least share of windows and signals that must be decided, in thousandths: below it the run is undecided.
    pub decide_thousandths: u32,
}

impl AuditSettings {
    /// The defaults: 8 ms on every timer, no uncertainty, simple rule, sensitivity within 20 %, sensed at the program's own
    /// detection delay, ceiling 60 000/205 ms (292.683 ms; less where the lower rate itself is higher), longest pause from the
    /// program, vulnerable window 150 to 400 ms, nine tenths decided.
    pub const fn new(program: &Program) -> Self {
        let tolerance = Tolerance::symmetric(Span::from_millis(8));
        let delay = program.settings().detect_delay;
        let shortest = program.settings().lower.floor().as_micros();
        Self {
            lower: tolerance,
            hysteresis: tolerance,
            refractory: tolerance,
            blanking: tolerance,
            uncertainty: Span::ZERO,
            decision: Decision::Simple,
            sensitivity_thousandths: 200,
            detect: (delay, delay),
            limits: Limits {
                ceiling: Span::from_micros(if shortest < CEILING { shortest } else { CEILING }),
                longest_pause: None,
                vulnerable: Some((Span::from_millis(150), Span::from_millis(400))),
            },
            decide_thousandths: 900,
        }
    }

    /// The same tolerance on every timer.
    #[must_use]
    pub const fn with_tolerance(self, tolerance: Tolerance) -> Self {
        Self { lower: tolerance, hysteresis: tolerance, refractory: tolerance, blanking: tolerance, ..self }
    }

    /// This uncertainty and decision rule.
    #[must_use]
    pub const fn with_uncertainty(self, uncertainty: Span, decision: Decision) -> Self {
        Self { uncertainty, decision, ..self }
    }

    /// These envelope limits.
    #[must_use]
    pub const fn with_limits(self, limits: Limits) -> Self {
        Self { limits, ..self }
    }
}
