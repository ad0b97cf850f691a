//! Devices that do one thing wrong once: at most one finding, however much goes on around it, and by a rule that says what it was.
//! `PHASE4_SCRIPTS=100000 cargo test --release --test audit_slips` is the long form.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::float_arithmetic,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod judged;

use judged::sloppy::{Kind, Script, Slip, slipping};
use judged::{Finding, judge_with, scripts_or};
use phase4::audit::{Auditor, Outcome, RuleId};
use phase4::base::{Instant, Interval};
use phase4::device::{Device, ReferenceDevice};

#[derive(Debug, Default)]
struct Found {
    slipped: u32,
    found: u32,
    quoted: u32,
}

/// Runs many scripts with this slip in each. A slip may hide: a beat may come before the late pulse, say.
fn scripts(kind: Kind, slip: Slip, rules: &[RuleId]) -> Found {
    let mut all = Found::default();
    for seed in 0..scripts_or(4_000) {
        let script = slipping(seed, kind, Some(slip));
        let Some(slipped_at) = script.slipped_at else { continue };
        let auditor = Auditor::<12>::new(&script.program, &script.settings, script.start).unwrap();
        let (judgements, _) = judge_with(auditor, &script.records);
        let found: Vec<_> = judgements.iter().filter(|judgement| judgement.outcome == Outcome::Broken).collect();
        assert!(found.len() <= 1, "one fault, one finding: {slip:?} in script {seed} of {kind:?}\n{script}\n{found:#?}");
        all.slipped += 1;
        if let [finding] = found.as_slice() {
            let stamped = finding.at.saturating_add(script.settings.uncertainty);
            assert!(stamped >= slipped_at, "found before it happened: {slip:?} in script {seed}");
            all.found += 1;
            all.quoted += u32::from(rules.iter().any(|rule| Finding::of(finding).quotes(*rule)));
        }
    }
    println!("{kind:?} {slip:?}: {all:?}");
    all
}

/// Of the slips that happen, at least so many per cent are found, and of those so many name an expected rule.
fn is_found(slip: Slip, rules: &[RuleId], found: u32, quoted: u32) {
    // Where much is uncertain less is found, and still no fault is found twice.
    scripts(Kind::Wild, slip, rules);
    for kind in [Kind::Exact, Kind::Ordinary] {
        let all = scripts(kind, slip, rules);
        assert!(all.slipped > 300, "{slip:?}: {all:?}");
        assert!(all.found * 100 >= all.slipped * found, "{slip:?}: {all:?}");
        assert!(all.quoted * 100 >= all.found * quoted, "{slip:?}: {all:?}");
    }
}

#[test]
fn a_late_pulse() {
    for by in [2, 1_500, 60_000] {
        is_found(Slip::Late(by), &[RuleId::Lr1, RuleId::Hy1], 60, 95);
    }
}

#[test]
fn an_early_pulse() {
    for by in [2, 1_500, 60_000] {
        is_found(Slip::Early(by), &[RuleId::Lr2, RuleId::Hy1], 60, 95);
    }
}

#[test]
fn a_pulse_left_out() {
    is_found(Slip::Missing, &[RuleId::Lr1, RuleId::Cm1, RuleId::Hy1], 95, 95);
}

#[test]
fn a_pulse_that_comes_twice() {
    for later in [1_000, 30_000] {
        is_found(Slip::Twice(later), &[RuleId::Cm1, RuleId::En1], 100, 100);
    }
}

#[test]
fn a_sense_that_changes_nothing() {
    is_found(Slip::IgnoresSense, &[RuleId::In1, RuleId::Se1, RuleId::Rf2], 70, 70);
}

#[test]
fn a_restart_in_refractory() {
    is_found(Slip::RestartsInRefractory, &[RuleId::Rf1, RuleId::Lr1], 60, 80);
}

#[test]
fn hysteresis_after_a_pulse() {
    is_found(Slip::HysteresisAfterPulse, &[RuleId::Hy2], 50, 90);
}

#[test]
fn no_hysteresis_after_a_sense() {
    is_found(Slip::NoHysteresisAfterSense, &[RuleId::Hy1], 50, 100);
}

/// What an exact device would have emitted on the same signals, up to here.
fn exact_pulses(script: &Script, until: Instant) -> Vec<Instant> {
    let mut device = ReferenceDevice::new(script.program, script.start);
    let mut pulses = Vec::new();
    for record in &script.records {
        if let Some((channel, signal)) = record.as_signal() {
            while let Err(not_yet) = device.signal(channel, signal, record.at) {
                pulses.extend(device.poll(not_yet.0).map(|(at, _)| at));
            }
        }
    }
    pulses.extend(core::iter::from_fn(|| device.poll(until)).map(|(at, _)| at));
    pulses
}

/// Exact judging of an exact device is complete as well as sound: something is found if, and only if, the pulses are not those that an
/// exact device emits on these signals. Programs of whole microseconds, so that no fraction is carried.
#[test]
fn an_exact_judge_finds_whatever_differs_and_nothing_else() {
    let slips = [
        None,
        Some(Slip::Late(1)),
        Some(Slip::Late(60_000)),
        Some(Slip::Early(1)),
        Some(Slip::Missing),
        Some(Slip::Twice(3_000)),
        Some(Slip::IgnoresSense),
        Some(Slip::RestartsInRefractory),
        Some(Slip::HysteresisAfterPulse),
        Some(Slip::NoHysteresisAfterSense),
    ];
    let (mut same, mut different) = (0, 0);
    for (seed, slip) in (0..scripts_or(3_000)).flat_map(|seed| slips.map(|slip| (seed, slip))) {
        let script = slipping(seed, Kind::Exact, slip);
        let set = script.program.settings();
        let is_whole = |interval: Interval| interval.floor() == interval.ceil();
        if !is_whole(set.lower) || !set.hysteresis.is_none_or(is_whole) {
            continue;
        }
        let last = script.records.last().unwrap().at;
        let pulses = script.records.iter().filter(|record| record.as_pulse().is_some());
        let (emitted, expected): (Vec<_>, _) = (pulses.map(|pulse| pulse.at).collect(), exact_pulses(&script, last));
        let agree = emitted.iter().zip(&expected).take_while(|(here, there)| here == there).count();
        let first = [emitted.get(agree).copied(), expected.get(agree).copied()].into_iter().flatten().min();
        let auditor = Auditor::<12>::new(&script.program, &script.settings, script.start).unwrap();
        let (_, auditor) = judge_with(auditor, &script.records);
        match first {
            None => {
                assert_eq!(auditor.broken(), 0, "{slip:?} in script {seed}\n{script}");
                same += 1;
            }
            // A pulse due in the very last instant is not missing yet.
            Some(at) if at < last => {
                assert!(auditor.broken() > 0, "{slip:?} in script {seed}: pulses differ from {at:?}\n{script}");
                different += 1;
            }
            Some(_) => {}
        }
    }
    println!("{same} scripts as they must be, {different} that differ");
    assert!(same > 3_000 && different > 3_000);
}
