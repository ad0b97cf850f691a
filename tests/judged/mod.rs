//! A recorded stream and its judge, for tests that read as time lines: signals and pulses in milliseconds, judgements out.
#![allow(
    dead_code,
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::panic,
    clippy::unwrap_used,
    reason = "a test helper; each test file uses a part of it"
)]

pub(crate) mod sloppy;

use phase4::audit::{AuditSettings, Auditor, How, Judgement, Outcome, RuleId};
use phase4::base::{
    Cause, Channel, Instant, Interval, Kind, MicroVolts, MilliVolts, Mode, Program, Pulse, Rate, Record, Settings, Signal, Span,
};

/// Well above, just above, within, just below and well below the band around a sensitivity of 2.5 mV.
pub(crate) const LOUD: u32 = 8_000;
pub(crate) const MUST: u32 = 3_000;
pub(crate) const NEAR: u32 = 2_500;
pub(crate) const MUST_NOT: u32 = 2_000;
pub(crate) const FAINT: u32 = 500;

pub(crate) const V: Channel = Channel::Ventricular;
pub(crate) const A: Channel = Channel::Atrial;

pub(crate) const fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

pub(crate) const fn at_ms(millis: u64) -> Instant {
    Instant::ZERO.saturating_add(ms(millis))
}

pub(crate) const fn rate(per_minute: u16) -> Interval {
    Interval::from_rate_nearest(Rate::per_minute(per_minute))
}

/// How many random scripts are tried: so many, or what `PHASE4_SCRIPTS` says.
pub(crate) fn scripts_or(usual: u64) -> u64 {
    std::env::var("PHASE4_SCRIPTS").ok().and_then(|count| count.parse().ok()).unwrap_or(usual)
}

/// A mode at 60 per minute, blanking 100 ms, refractory 250 ms.
pub(crate) fn at_60(mode: Mode) -> Settings {
    Settings::new(mode, rate(60))
}

pub(crate) fn vvi() -> Program {
    checked(at_60(Mode::Vvi))
}

/// The same with a hysteresis rate of 50 per minute.
pub(crate) fn vvi_50() -> Program {
    let mut settings = at_60(Mode::Vvi);
    settings.hysteresis = Some(rate(50));
    checked(settings)
}

pub(crate) fn checked(settings: Settings) -> Program {
    settings.check().expect("a program")
}

/// A pulse of a channel at a millisecond.
pub(crate) fn pulse_on(channel: Channel, at: u64) -> Record {
    pulse_us(channel, at * 1_000)
}

pub(crate) const fn pulse_us(channel: Channel, micros: u64) -> Record {
    let pulse = Pulse { channel, amplitude: MilliVolts(3_500), width: Span::from_micros(400) };
    Record::pulse(Instant::from_micros(micros), pulse)
}

/// A signal of a channel at a millisecond, with its peak in microvolts.
pub(crate) fn signal_on(channel: Channel, at: u64, peak: u32) -> Record {
    signal_us(channel, at * 1_000, peak, 40_000)
}

pub(crate) const fn signal_us(channel: Channel, micros: u64, peak: u32, width: u64) -> Record {
    let signal = Signal { peak: MicroVolts(peak), width: Span::from_micros(width) };
    Record::signal(Instant::from_micros(micros), channel, signal, Cause::NONE)
}

/// A loud ventricular beat.
pub(crate) fn v(at: u64) -> Record {
    signal_on(V, at, LOUD)
}

/// A ventricular pulse.
pub(crate) fn vp(at: u64) -> Record {
    pulse_on(V, at)
}

pub(crate) const fn end(at: u64) -> Record {
    Record::new(at_ms(at), Kind::End, 0, Cause::NONE)
}

/// The judgements of a stream that begins at zero, and the auditor that made them.
pub(crate) fn judge(program: &Program, settings: &AuditSettings, records: &[Record]) -> (Vec<Judgement>, Auditor<256>) {
    let auditor = Auditor::new(program, settings, Instant::ZERO).expect("settings that fit");
    judge_with(auditor, records)
}

/// The judgements of a stream by this auditor, polled only where it asks for it.
pub(crate) fn judge_with<const H: usize>(mut auditor: Auditor<H>, records: &[Record]) -> (Vec<Judgement>, Auditor<H>) {
    let mut judgements = Vec::new();
    for record in records {
        while let Some(at) = auditor.next_at().filter(|at| *at <= record.at) {
            judgements.extend(auditor.poll(at));
        }
        auditor.observe(record);
    }
    if let Some(last) = records.last() {
        auditor.finish(last.at);
    }
    while let Some(judgement) = auditor.poll(Instant::MAX) {
        judgements.push(judgement);
    }
    assert_eq!(auditor.lost(), 0, "a judgement was lost");
    (judgements, auditor)
}

/// With the defaults: the findings only.
pub(crate) fn findings(program: &Program, records: &[Record]) -> Vec<Finding> {
    findings_by(program, &AuditSettings::new(program), records)
}

pub(crate) fn findings_by(program: &Program, settings: &AuditSettings, records: &[Record]) -> Vec<Finding> {
    let (judgements, _) = judge(program, settings, records);
    judgements.iter().filter(|judgement| judgement.outcome == Outcome::Broken).map(Finding::of).collect()
}

/// What a test says about a finding: rule, what happened, when in milliseconds, how far off in microseconds.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Finding {
    pub(crate) rule: RuleId,
    pub(crate) also: Vec<RuleId>,
    pub(crate) how: How,
    pub(crate) at_ms: u64,
    pub(crate) off_us: Option<i64>,
}

impl Finding {
    pub(crate) fn of(judgement: &Judgement) -> Self {
        Self {
            rule: judgement.rule,
            also: judgement.also.iter().collect(),
            how: judgement.how,
            at_ms: judgement.at.as_micros() / 1_000,
            off_us: judgement.deviation.map(|deviation| deviation.as_micros()),
        }
    }

    /// True if it quotes this rule, first or as an equal explanation.
    pub(crate) fn quotes(&self, rule: RuleId) -> bool {
        self.rule == rule || self.also.contains(&rule)
    }
}
