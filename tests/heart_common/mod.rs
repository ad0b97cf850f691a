//! Helpers for timelines of a heart: run it, and list what fired when.
#![allow(dead_code, clippy::missing_const_for_fn, reason = "each test binary uses its own part")]

use phase4::base::{BlockReason, Cause, CauseKind, Channel, Instant, Kind, MilliVolts, Pulse, Record, SiteId, Span};
use phase4::heart::{Heart, PulseAnswer};

/// Milliseconds on the run's time line.
pub(crate) const fn ms(millis: u64) -> Instant {
    Instant::from_micros(millis * 1_000)
}

/// Milliseconds of length.
pub(crate) const fn span(millis: u64) -> Span {
    Span::from_millis(millis)
}

/// A pulse that captures rested tissue with plenty to spare.
pub(crate) const STRONG: Pulse =
    Pulse { channel: Channel::Ventricular, amplitude: MilliVolts(5_000), width: Span::from_micros(400) };

/// The script as the cause of a beat.
pub(crate) const STEP: Cause = Cause::new(CauseKind::Script, 0);

/// Everything up to and including `until`.
pub(crate) fn run<const S: usize, const T: usize, const C: usize, const F: usize>(
    heart: &mut Heart<'_, S, T, C, F>,
    until: Instant,
) -> Vec<Record> {
    core::iter::from_fn(|| heart.poll(until)).collect()
}

/// Fires a site now, draining first; returns what came on the way.
pub(crate) fn beat<const S: usize, const T: usize, const C: usize, const F: usize>(
    heart: &mut Heart<'_, S, T, C, F>,
    site: SiteId,
    at: Instant,
) -> Vec<Record> {
    let before = run(heart, Instant::from_micros(at.as_micros().saturating_sub(1)));
    heart.beat(site, at, STEP).expect("drained");
    before
}

/// A strong pulse, draining first; returns what came on the way, and the answer.
pub(crate) fn pulse<const S: usize, const T: usize, const C: usize, const F: usize>(
    heart: &mut Heart<'_, S, T, C, F>,
    site: SiteId,
    at: Instant,
) -> (Vec<Record>, PulseAnswer) {
    let before = run(heart, at);
    (before, heart.pulse(site, STRONG, at).expect("drained"))
}

/// When a site fired, in µs.
pub(crate) fn times(log: &[Record], site: SiteId) -> Vec<u64> {
    let fired = log.iter().filter(|record| record.kind == Kind::Activated && record.place == site.row());
    fired.map(|record| record.at.as_micros()).collect()
}

/// Differences of neighbours, in ms.
pub(crate) fn intervals(times: &[u64]) -> Vec<f64> {
    times.windows(2).map(|pair| (pair[1] - pair[0]) as f64 / 1e3).collect()
}

/// One line a record: `"150.840 junction fires, conducted by 1"`.
pub(crate) fn line(record: &Record, sites: &[&str]) -> String {
    let at = record.at.as_micros() as f64 / 1e3;
    let cause = match record.cause.kind {
        CauseKind::None => "unknown".to_owned(),
        CauseKind::Own => format!("cell {}", record.cause.id),
        CauseKind::Conducted => format!("tract {}", record.cause.id),
        CauseKind::Pulse => format!("pulse {}", record.cause.id),
        CauseKind::Focus => format!("focus {}", record.cause.id),
        CauseKind::Script => format!("step {}", record.cause.id),
    };
    let place = record.place;
    match record.kind {
        Kind::Activated => format!("{at} {} fires by {cause}", sites[usize::from(place)]),
        Kind::Blocked => format!("{at} tract {place} blocks {}", reason(record.a)),
        Kind::Collided => format!("{at} tract {place} collision"),
        Kind::Joined => format!("{at} tract {place} joins"),
        Kind::Reset => format!("{at} cell {place} reset with {} to run", f64::from(record.a) / 1e3),
        Kind::NotCaptured => format!("{at} {} not captured by {cause}, {}", sites[usize::from(place)], record.a),
        other => format!("{at} {other:?}"),
    }
}

fn reason(a: u32) -> String {
    let way = if a & 0x100 == 0 { "forward" } else { "backward" };
    let known = [BlockReason::Refractory, BlockReason::Shut, BlockReason::Occupied, BlockReason::Site];
    let reason = known.into_iter().find(|reason| reason.number() == a & 0xFF).expect("a known reason");
    format!("{way}: {reason:?}")
}

/// Fires `site` so many times, one `period` after the other, first at `first`; returns what came until one µs before the next.
pub(crate) fn drive<const S: usize, const T: usize, const C: usize, const F: usize>(
    heart: &mut Heart<'_, S, T, C, F>,
    site: SiteId,
    first: Instant,
    period: Span,
    times: u64,
) -> Vec<Record> {
    let mut log = Vec::new();
    for n in 0..times {
        log.extend(beat(heart, site, first.saturating_add(period.saturating_mul(n))));
    }
    let end = first.saturating_add(period.saturating_mul(times));
    log.extend(run(heart, end.saturating_sub(Span::from_micros(1))));
    log
}

/// True if a wave was blocked at the mouth of `tract` at this instant, in µs.
pub(crate) fn is_blocked(log: &[Record], tract: u8, at: u64) -> bool {
    log.iter().any(|record| record.kind == Kind::Blocked && record.place == tract && record.at.as_micros() == at)
}

/// A decay that tests know to be right.
pub(crate) fn decay(millis: u64) -> phase4::base::Decay {
    phase4::base::Decay::new(span(millis)).expect("in range")
}

/// An interval of so many milliseconds.
pub(crate) fn every(millis: u64) -> phase4::base::Interval {
    phase4::base::Interval::from_span(span(millis)).expect("below an hour")
}

/// Appends everything up to and including `until`.
pub(crate) fn drain<const S: usize, const T: usize, const C: usize, const F: usize>(
    heart: &mut Heart<'_, S, T, C, F>,
    until: Instant,
    log: &mut Vec<Record>,
) {
    log.extend(core::iter::from_fn(|| heart.poll(until)));
}
