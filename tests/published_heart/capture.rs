//! Capture of pulses: strength, duration, refractoriness.

use crate::heart_common::{ms, run, span};
use phase4::base::{Channel, Instant, MilliVolts, NoCapture, Pulse, SiteId, Span};
use phase4::heart::{Anatomy, Heart, PulseAnswer, SiteParams};

const SITE: SiteId = SiteId::new(0);

/// Rheobase 0.5 V, chronaxie 0.3 ms.
fn tissue() -> Anatomy<1, 0, 0> {
    let site = SiteParams::new(span(250)).with_relative(span(50)).with_threshold(MilliVolts(500), Span::from_micros(300));
    Anatomy::new([site], [], []).unwrap()
}

fn answer(width: u64, millivolts: u32, fired_before: Option<u64>) -> PulseAnswer {
    let anatomy = tissue();
    let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    heart.beat(SITE, ms(1_000), crate::heart_common::STEP).unwrap();
    run(&mut heart, ms(1_000));
    let at = ms(1_000 + fired_before.unwrap_or(1_000));
    let pulse = Pulse { channel: Channel::Ventricular, amplitude: MilliVolts(millivolts), width: Span::from_micros(width) };
    heart.pulse(SITE, pulse, at).unwrap()
}

/// The least amplitude that captures rested tissue at this width, in mV.
fn threshold(width: u64) -> u32 {
    (1..10_000).find(|&millivolts| matches!(answer(width, millivolts, None), PulseAnswer::Captured { .. })).unwrap()
}

/// Weiss: 2.00, 1.25, 1.00, 0.80, 0.65, 0.60 V at 0.1, 0.2, 0.3, 0.5, 1.0, 1.5 ms; twice the rheobase at the chronaxie. Derived,
/// ±0.1 %; the law for rectangular pulses: Geddes, IEEE Trans Biomed Eng 2004 (checked).
#[test]
fn strength_and_duration() {
    let found = [100, 200, 300, 500, 1_000, 1_500].map(threshold);
    assert_eq!(found, [2_000, 1_250, 1_000, 800, 650, 600]);
}

/// By Weiss the least energy at threshold lies at the chronaxie: 0.600 µJ into 500 Ω, against 0.625 at 0.2 and 0.640 at 0.5 ms. Derived.
#[test]
fn the_least_energy_lies_at_the_chronaxie() {
    let micro_joules = |width: u64| (f64::from(threshold(width)) / 1e3).powi(2) * width as f64 / 500.0;
    let (at_chronaxie, short, long) = (micro_joules(300), micro_joules(200), micro_joules(500));
    assert!((at_chronaxie - 0.600).abs() < 1e-3 && (short - 0.625).abs() < 1e-3 && (long - 0.640).abs() < 1e-3);
    assert!((100..=1_000).step_by(20).all(|width| micro_joules(width) >= at_chronaxie - 1e-9));
}

/// Tissue is absolutely refractory for 250–300 ms and needs more than usual for about 50 ms after (textbook: checked; twice as much is
/// ours). No strength makes it answer twice within its refractory period: no summation, no tetanus (textbook).
#[test]
fn refractory_then_hard_to_capture_then_recovered() {
    let why = |fired_before, millivolts| match answer(400, millivolts, Some(fired_before)) {
        PulseAnswer::Captured { .. } => None,
        PulseAnswer::Unanswered(record) => Some((record.a, record.b)),
    };
    let (weak, refractory) = (NoCapture::TooWeak.number(), NoCapture::Refractory.number());
    for before in 1..250 {
        let left = (250 - u32::try_from(before).unwrap()) * 1_000;
        assert_eq!(why(before, 10_000), Some((refractory, left)));
    }
    assert_eq!(why(250, 1_749), Some((weak, 1)));
    assert_eq!(why(250, 1_750), None);
    assert_eq!(why(299, 875), Some((weak, 875)));
    assert_eq!(why(300, 875), None);
}
