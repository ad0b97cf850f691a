//! Pulses, and what the heart made of each.

use super::of_kind;
use crate::run_data::RunData;
use phase4::base::{CauseKind, Channel, Instant, Kind, MilliVolts, NoCapture, Record, Span};

/// A pulse.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct PulseFact {
    pub(crate) at: Instant,
    pub(crate) channel: Channel,
    pub(crate) amplitude: MilliVolts,
    pub(crate) width: Span,
    pub(crate) answer: Answer,
}

/// What the heart made of a pulse.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Answer {
    /// The site fired.
    Captured,
    /// It did not, for this reason, with the margin in mV or µs.
    NotCaptured(NoCapture, u32),
    /// Nothing is recorded of it.
    Unknown,
}

/// How long after a pulse its answer may come: longer than any capture latency.
const WITHIN: Span = Span::from_millis(300);

/// Reads the pulses of a run. An answer belongs to the earliest pulse of its channel that could have it and has none yet.
pub(super) fn read(run: &RunData) -> Vec<PulseFact> {
    let mut pulses: Vec<PulseFact> = of_kind(run, Kind::Pulse)
        .filter_map(|record| {
            let pulse = record.as_pulse()?;
            let (amplitude, width) = (pulse.amplitude, pulse.width);
            Some(PulseFact { at: record.at, channel: pulse.channel, amplitude, width, answer: Answer::Unknown })
        })
        .collect();
    for record in run.records.iter().filter(|record| record.cause.kind == CauseKind::Pulse) {
        let Some(answer) = answer(record) else { continue };
        let first = pulses.partition_point(|pulse| pulse.at < record.at.saturating_sub(WITHIN));
        let until = pulses.partition_point(|pulse| pulse.at <= record.at);
        let waits = |pulse: &&mut PulseFact| pulse.channel.number() == record.cause.id && pulse.answer == Answer::Unknown;
        if let Some(pulse) = pulses.get_mut(first..until).unwrap_or_default().iter_mut().find(waits) {
            pulse.answer = answer;
        }
    }
    pulses
}

fn answer(record: &Record) -> Option<Answer> {
    match record.kind {
        Kind::Activated => Some(Answer::Captured),
        Kind::NotCaptured => Some(Answer::NotCaptured(
            match record.a {
                1 => NoCapture::TooWeak,
                3 => NoCapture::Forestalled,
                _ => NoCapture::Refractory,
            },
            record.b,
        )),
        _ => None,
    }
}

/// Why a pulse found no answer, in words.
pub(crate) const fn reason_word(reason: NoCapture) -> &'static str {
    match reason {
        NoCapture::TooWeak => "too weak",
        NoCapture::Refractory => "refractory",
        NoCapture::Forestalled => "a beat came first",
    }
}
