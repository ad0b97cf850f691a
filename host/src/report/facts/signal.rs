//! What was shown to the device, and how its program reads each signal.

use super::sensitivity_band;
use crate::run_data::RunData;
use phase4::audit::{AnchorKind, How, Judgement, Outcome};
use phase4::base::{Cause, CauseKind, Channel, Instant, Kind, MicroVolts, Program, Span};

/// A signal.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct SignalFact {
    pub(crate) at: Instant,
    pub(crate) channel: Channel,
    pub(crate) peak: MicroVolts,
    pub(crate) cause: Cause,
    /// True if no beat stands behind it.
    pub(crate) bare: bool,
    /// How the program reads it.
    pub(crate) sight: Sight,
}

/// How a signal is to be read under the program: not what the device made of it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub(crate) enum Sight {
    /// It must be seen and restarts the interval.
    Seen,
    /// It lies in blanking.
    Blanked,
    /// It lies in the refractory period.
    Refractory,
    /// It is too small to be seen.
    Small,
    /// The device may take it either way.
    Either,
    /// Nothing is sensed on this channel.
    Unsensed,
}

/// How long before a signal the activation behind it may lie: far more than any lead's delay.
const BEHIND: Span = Span::from_millis(300);

/// Reads the signals of a run, each against the cycle it falls into.
pub(super) fn read(run: &RunData) -> Vec<SignalFact> {
    let anchors = sensed_anchors(run);
    let mut scripted: Vec<(u8, Instant)> = Vec::new();
    let mut last = Some(run.start);
    let mut signals = Vec::new();
    for record in &run.records {
        let scripted_cause = record.cause.kind == CauseKind::Script;
        match record.kind {
            Kind::Activated if scripted_cause => {
                scripted.retain(|(_, at)| at.saturating_add(BEHIND) >= record.at);
                scripted.push((record.cause.id, record.at));
            }
            Kind::Pulse if judged(run, record.place) => last = Some(record.at),
            Kind::Signal => {
                let Some((channel, signal)) = record.as_signal() else { continue };
                let recent = |(step, at): &(u8, Instant)| *step == record.cause.id && at.saturating_add(BEHIND) >= record.at;
                let bare = scripted_cause && !scripted.iter().any(recent);
                let sight = sight(run, channel, signal.peak, record.at, last, &anchors);
                if sight == Sight::Seen {
                    last = Some(record.at);
                }
                signals.push(SignalFact { at: record.at, channel, peak: signal.peak, cause: record.cause, bare, sight });
            }
            _ => {}
        }
    }
    signals
}

fn judged(run: &RunData, place: u8) -> bool {
    super::judged_channel(run).is_some_and(|channel| channel.number() == place)
}

fn sight(
    run: &RunData,
    channel: Channel,
    peak: MicroVolts,
    at: Instant,
    last: Option<Instant>,
    anchors: &[(Instant, Instant)],
) -> Sight {
    let Some(program) = run.program.as_ref().filter(|program| program.senses() == Some(channel)) else {
        return Sight::Unsensed;
    };
    let settings = program.settings();
    let (low, high) = sensitivity_band(run, program);
    let peak = u64::from(peak.0);
    let detected = last.map_or(Span::from_secs(3_600), |last| at.saturating_since(last)).saturating_add(settings.detect_delay);
    let edge = tolerance(run, program);
    if peak <= low {
        Sight::Small
    } else if detected.saturating_add(edge) < settings.blanking {
        Sight::Blanked
    } else if detected.saturating_add(edge) < settings.refractory {
        Sight::Refractory
    } else if (peak >= high && detected >= settings.refractory.saturating_add(edge))
        || is_anchor(at, settings.detect_delay, anchors)
    {
        Sight::Seen
    } else {
        Sight::Either
    }
}

fn tolerance(run: &RunData, program: &Program) -> Span {
    let fixed = run.audit.map_or(Span::ZERO, |audit| audit.refractory.high.saturating_add(audit.uncertainty));
    if program.settings().refractory > fixed { fixed } else { Span::ZERO }
}

/// Spans in which the auditor places a sensed beat, in order.
fn sensed_anchors(run: &RunData) -> Vec<(Instant, Instant)> {
    let seen = |judgement: &&Judgement| judgement.how == How::Withheld && judgement.outcome == Outcome::Held;
    let withheld = run.judgements.iter().filter(seen).map(|judgement| (judgement.at, judgement.at));
    let anchors = run.judgements.iter().filter_map(|judgement| judgement.anchor);
    let sensed = anchors.filter(|anchor| anchor.kind == AnchorKind::Sensed).map(|anchor| (anchor.earliest, anchor.latest));
    let mut spans: Vec<_> = withheld.chain(sensed).collect();
    spans.sort_unstable();
    spans.dedup();
    spans
}

fn is_anchor(at: Instant, delay: Span, anchors: &[(Instant, Instant)]) -> bool {
    let detected = at.saturating_add(delay);
    let until = anchors.partition_point(|(earliest, _)| *earliest <= detected);
    anchors.get(..until).and_then(|before| before.last()).is_some_and(|(earliest, latest)| *earliest >= at && *latest >= at)
}
