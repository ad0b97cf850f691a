//! The canary: proof, in every run, that this run's auditor can still catch a fault.
//!
//! A second, short closed loop with the run's own program and tolerances, a silent plain heart, and a reference device with one
//! fault in it that is drawn by the seed. If the auditor does not catch it, nothing the run says can be relied on: it is void.
//! The canary has no part in the run's beats, log and hash.

use super::{Act, Amount, Bench, Coupling, Entry, Event, Setup, Step, When};
use crate::audit::{AuditSettings, Auditor, Judgement, Outcome, RuleSet, Tolerance};
use crate::base::{Channel, Instant, MicroVolts, ParamError, Program, Signal, Span, Stream, draw_below};
use crate::device::{Allowance, BANK, Fault, PROBE_WIDTH, Probe, ReferenceDevice};
use crate::heart::plain;
use crate::lead::{ChannelParams, LeadParams, NearField};

/// The stream from which the fault is drawn: the canary's own.
const STREAM: Stream = Stream(0x6361_6E61);
/// How many cycles a canary lasts, each as long as the longest escape interval.
const CYCLES: u64 = 8;

/// What became of a canary.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct CanaryResult {
    /// The fault that was planted.
    pub fault: Fault,
    /// True if the auditor caught it: a finding that names one of the fault's rules.
    pub caught: bool,
    /// The finding that caught it; if none did, the first finding there was.
    pub first: Option<Judgement>,
}

/// The faults that can show under a program and these settings, each at the smallest size that does.
pub fn visible(program: &Program, settings: &AuditSettings) -> impl Iterator<Item = Fault> {
    let (program, allowance) = (*program, allowance(program, settings));
    BANK.iter().filter_map(move |row| row.shown_under(&program, &allowance)).map(|(fault, _)| fault)
}

/// The fault that this seed plants, drawn evenly from the visible ones; `None` if none can show.
pub fn draw_fault(program: &Program, settings: &AuditSettings, seed: u64) -> Option<Fault> {
    let count = u32::try_from(visible(program, settings).count()).unwrap_or(0);
    let drawn = draw_below(seed, STREAM, 0, count);
    visible(program, settings).nth(usize::try_from(drawn).unwrap_or(0))
}

/// Plants a fault and lets an auditor look for it, who is blind to some rules: none in a real run. `H` as for [`Auditor`].
///
/// # Errors
/// What the auditor refuses in its settings. A fault that cannot show under the program is not caught.
pub fn run<const H: usize>(
    program: &Program,
    settings: &AuditSettings,
    fault: Fault,
    blind: RuleSet,
) -> Result<CanaryResult, ParamError> {
    let mut result = CanaryResult { fault, caught: false, first: None };
    watch::<H>(program, settings, fault, true, blind, |finding| {
        let names = |code: &&str| finding.rule.code() == *code || finding.also.iter().any(|rule| rule.code() == *code);
        result.caught = fault.row().rules.iter().any(names);
        if result.caught || result.first.is_none() {
            result.first = Some(finding);
        }
        result.caught
    })?;
    Ok(result)
}

/// The control: what the same auditor says of a device without the fault on the fault's script. It must be `None`.
///
/// # Errors
/// What the auditor refuses in its settings.
pub fn control<const H: usize>(
    program: &Program,
    settings: &AuditSettings,
    fault: Fault,
) -> Result<Option<Judgement>, ParamError> {
    let mut first = None;
    watch::<H>(program, settings, fault, false, RuleSet::EMPTY, |finding| {
        first = Some(finding);
        true
    })?;
    Ok(first)
}

/// Runs a fault's script against a device with or without it, and hands over each finding until one is enough.
fn watch<const H: usize>(
    program: &Program,
    settings: &AuditSettings,
    fault: Fault,
    is_planted: bool,
    blind: RuleSet,
    mut is_enough: impl FnMut(Judgement) -> bool,
) -> Result<(), ParamError> {
    let shown = fault.row().shown_under(program, &allowance(program, settings));
    let (Some(channel), Some((_, probe))) = (program.paces(), shown) else { return Ok(()) };
    let mut auditor = Auditor::<H>::new(program, settings, probe.start)?;
    auditor.blind(blind);
    let device = as_detected(program, settings);
    let device = if is_planted {
        ReferenceDevice::with_fault(device, fault, probe.start)
    } else {
        ReferenceDevice::new(device, probe.start)
    };
    let setup = Setup {
        anatomy: &plain::ANATOMY,
        foci: &[],
        lead: DEAF,
        judged: None,
        steps: &script(channel, &probe, program, settings),
        start: probe.start,
        length: longest_escape(program).saturating_mul(CYCLES),
        seed: 0,
    };
    let mut bench = Bench::<_, 5, 4, 3, 0, SCRIPT, 3>::new(&setup, Some(device))?;
    while let Some(entry) = bench.poll(Instant::MAX) {
        let Entry::Record(record) = entry else { continue };
        auditor.observe(&record);
        while let Some(judgement) = auditor.poll(record.at) {
            if judgement.outcome == Outcome::Broken && is_enough(judgement) {
                return Ok(());
            }
        }
    }
    Ok(())
}

/// How many steps a canary's script has.
const SCRIPT: usize = 3;

/// A heart that is silent from the start, and the probe's signals after every pulse.
fn script(channel: Channel, probe: &Probe, program: &Program, settings: &AuditSettings) -> [Step; SCRIPT] {
    let (faint, loud) = heights(program, settings);
    let after_pulse = |after: Option<Span>, peak| {
        let quiet = Step { when: When::At(Span::ZERO), act: Act::Quiet, times: 1 };
        let Some(after) = after else { return quiet };
        let coupling = Coupling { window: None, shift: Amount::Fixed(after.as_deviation()) };
        let act = Act::Signal(channel, Signal { peak, width: PROBE_WIDTH });
        Step { when: When::After { event: Event::Pulse(channel), nth: 1, coupling }, act, times: u32::MAX }
    };
    let signal = if probe.faint { faint } else { loud };
    [after_pulse(None, loud), after_pulse(probe.beat, loud), after_pulse(probe.signal, signal)]
}

/// Peaks that must not and that must be seen, whatever the tolerance of the sensitivity.
fn heights(program: &Program, settings: &AuditSettings) -> (MicroVolts, MicroVolts) {
    let sensitivity = program.settings().sensitivity.0;
    let part = |thousandths: u32| {
        let micro = u64::from(sensitivity).saturating_mul(u64::from(thousandths)).checked_div(1_000).unwrap_or(0);
        MicroVolts(u32::try_from(micro).unwrap_or(u32::MAX))
    };
    let tolerance = settings.sensitivity_thousandths;
    (part(1_000_u32.saturating_sub(tolerance) >> 1), part(tolerance.saturating_add(2_000)))
}

/// Leads that pace as usual and show nothing of the heart: only the script is to be seen.
const DEAF: LeadParams = LeadParams {
    atrial: Some(ChannelParams::at(plain::ATRIUM, NearField { peak: MicroVolts(0), ..NearField::ATRIAL })),
    ventricular: Some(ChannelParams::at(plain::APEX, NearField { peak: MicroVolts(0), ..NearField::VENTRICULAR })),
};

/// How far off a device may be before an auditor with these settings speaks.
fn allowance(program: &Program, settings: &AuditSettings) -> Allowance {
    // A sense may have come anywhere in the spread, and so may the one it is measured from.
    let spread = settings.detect.1.saturating_sub(settings.detect.0);
    let more = settings.uncertainty.saturating_add(spread).saturating_add(spread);
    let of = |tolerance: &Tolerance, nominal: Span| {
        let parts = nominal.as_micros().saturating_mul(u64::from(tolerance.share_millionths));
        let share = Span::from_micros(parts.saturating_add(999_999).checked_div(1_000_000).unwrap_or(0));
        let fixed = tolerance.low.max(tolerance.high).saturating_add(tolerance.tick);
        fixed.saturating_add(share).saturating_add(more)
    };
    let longest = longest_escape(program);
    let refractory = program.settings().refractory;
    Allowance {
        interval: of(&settings.lower, longest).max(of(&settings.hysteresis, longest)),
        edge: of(&settings.refractory, refractory).max(of(&settings.blanking, refractory)),
        ceiling: settings.limits.ceiling.saturating_sub(settings.uncertainty),
    }
}

const fn longest_escape(program: &Program) -> Span {
    program.escape_after_sense().ceil()
}

/// The program with a detection delay that the settings allow: the auditor may be told of another device's.
fn as_detected(program: &Program, settings: &AuditSettings) -> Program {
    let mut detected = *program.settings();
    detected.detect_delay = detected.detect_delay.max(settings.detect.0).min(settings.detect.1);
    detected.check().unwrap_or(*program)
}
