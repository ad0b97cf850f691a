//! The canary: every fault that can show is caught, no rule can be dropped without one getting away, and without a fault there
//! is nothing to find.
#![allow(clippy::arithmetic_side_effects, clippy::expect_used, clippy::missing_const_for_fn, clippy::panic, reason = "tests may")]

mod timeline;

use core::cell::Cell;
use phase4::audit::{AuditSettings, Decision, RuleId, RuleSet, Tolerance};
use phase4::base::{Edge, Interval, MicroVolts, Mode, Program, Rate, Settings, Span, Straddle, Tie};
use phase4::bench::canary::{self, CanaryResult};
use phase4::device::Fault;
use proptest::prelude::*;
use proptest::test_runner::{Config, TestError, TestRunner};
use timeline::{at, checked, ms};

const H: usize = 64;

/// VVI at 60 /min, with hysteresis at 50 /min, AAI at 65 /min, VOO at 72 /min.
fn programs() -> [Program; 4] {
    let mut vvi = at(Mode::Vvi, 60);
    vvi.refractory = ms(250);
    let mut with_hysteresis = vvi;
    with_hysteresis.hysteresis = Some(at(Mode::Vvi, 50).lower);
    [vvi, with_hysteresis, at(Mode::Aai, 65), at(Mode::Voo, 72)].map(checked)
}

/// A tolerance of 8 ms; no uncertainty, and 1 ms of it guarded.
fn runs() -> impl Iterator<Item = (Program, AuditSettings)> {
    programs().into_iter().flat_map(|program| {
        let plain = AuditSettings::new(&program);
        [plain, plain.with_uncertainty(ms(1), Decision::Guarded)].map(|settings| (program, settings))
    })
}

fn sighted(program: &Program, settings: &AuditSettings, fault: Fault) -> CanaryResult {
    canary::run::<H>(program, settings, fault, RuleSet::EMPTY).expect("the settings fit")
}

fn ids(faults: impl Iterator<Item = Fault>) -> Vec<u8> {
    faults.map(Fault::id).collect()
}

#[test]
fn every_fault_that_can_show_is_caught() {
    let seen: Vec<Vec<u8>> = runs().map(|(program, settings)| ids(canary::visible(&program, &settings))).collect();
    let vvi = vec![1, 3, 4, 5, 7, 8, 10, 12, 13, 15, 21, 22, 23, 25, 26, 69];
    let with_hysteresis = vec![1, 3, 4, 5, 7, 8, 10, 12, 13, 15, 16, 17, 21, 22, 23, 25, 26, 69];
    let voo = vec![5, 7, 8, 10, 12, 15, 69];
    let twice = |ids: &Vec<u8>| [ids.clone(), ids.clone()];
    assert_eq!(seen, [&vvi, &with_hysteresis, &vvi, &voo].map(twice).concat());
    for (program, settings) in runs() {
        for fault in canary::visible(&program, &settings) {
            let result = sighted(&program, &settings, fault);
            assert!(result.caught, "{program:?} {settings:?} {result:#?}");
        }
    }
}

/// A rule dropped whole: some canary of some program gets away that a sighted auditor catches. No fault of this bank needs the rules
/// of the other list: what breaks them breaks a rule of the program too, or is not among the bank's faults.
#[test]
fn without_a_rule_some_canary_gets_away() {
    let unneeded = [RuleId::En2, RuleId::En3, RuleId::En4, RuleId::En6];
    for rule in RuleId::ALL {
        let gets_away = runs().any(|(program, settings)| {
            canary::visible(&program, &settings).any(|fault| {
                let blinded = canary::run::<H>(&program, &settings, fault, RuleSet::only(rule)).expect("the settings fit");
                !blinded.caught
            })
        });
        assert_eq!(gets_away, !unneeded.contains(&rule), "{}", rule.code());
    }
}

#[test]
fn an_auditor_blind_to_everything_catches_nothing() {
    let all = RuleId::ALL.into_iter().fold(RuleSet::EMPTY, RuleSet::with);
    for (program, settings) in runs() {
        for fault in canary::visible(&program, &settings) {
            let result = canary::run::<H>(&program, &settings, fault, all).expect("the settings fit");
            assert_eq!((result.caught, result.first), (false, None), "fault {}", fault.id());
        }
    }
}

#[test]
fn seeds_draw_every_visible_fault_evenly() {
    let (program, settings) = runs().next().expect("there are runs");
    let visible = ids(canary::visible(&program, &settings));
    let mut drawn = vec![0_u32; visible.len()];
    for seed in 0..16_000 {
        let fault = canary::draw_fault(&program, &settings, seed).expect("some show");
        assert_eq!(canary::draw_fault(&program, &settings, seed), Some(fault), "a seed draws the same fault again");
        let place = visible.iter().position(|id| *id == fault.id()).expect("it is one of the visible");
        drawn[place] += 1;
    }
    assert!(drawn.iter().all(|count| count.abs_diff(1_000) < 150), "{drawn:?}");
}

#[test]
fn a_mode_that_does_not_pace_needs_no_canary() {
    let program = checked(at(Mode::Ooo, 60));
    assert_eq!(canary::draw_fault(&program, &AuditSettings::new(&program), 1), None);
}

fn any_tolerance() -> impl Strategy<Value = Tolerance> {
    let share = prop_oneof![Just(0), 0..20_000_u32];
    let tick = prop_oneof![Just(0), 0..2_000_u64];
    (0..20_000_u64, 0..20_000_u64, share, tick).prop_map(|(low, high, share_millionths, tick)| {
        let [low, high, tick] = [low, high, tick].map(Span::from_micros);
        Tolerance { low, high, share_millionths, tick }
    })
}

fn any_program() -> impl Strategy<Value = Program> {
    let mode = prop::sample::select(vec![Mode::Aoo, Mode::Voo, Mode::Aai, Mode::Vvi]);
    let timing = (30_000..300_000_u32, 10_000..500_000_u64, 0..=1_000_u64, prop::option::of(1..=500_u64));
    let delay = prop_oneof![Just(0), 1..40_000_u64];
    let readings = (any::<bool>(), any::<bool>(), any::<bool>(), delay, 50..50_000_u32);
    (mode, timing, readings).prop_filter_map("not a program", |(mode, (milli, refractory, blanked, slower), readings)| {
        let (inside, expiry_first, end, delay, sensitivity) = readings;
        let lower = Interval::from_rate_nearest(Rate::from_milli_per_minute(milli));
        let mut settings = Settings::new(mode, lower);
        settings.hysteresis = slower.and_then(|slower| Interval::from_span(lower.ceil().saturating_add(ms(slower))));
        settings.refractory = Span::from_micros(refractory);
        settings.blanking = Span::from_micros((refractory * blanked / 1_000).max(1_000));
        settings.edge = if inside { Edge::Inside } else { Edge::Outside };
        settings.tie = if expiry_first { Tie::ExpiryFirst } else { Tie::SenseFirst };
        settings.straddle = if end { Straddle::End } else { Straddle::Onset };
        settings.detect_delay = Span::from_micros(delay.min(settings.blanking.as_micros() - 1));
        settings.sensitivity = MicroVolts(sensitivity);
        settings.check().ok()
    })
}

fn any_run() -> impl Strategy<Value = (Program, AuditSettings)> {
    let tolerances = [any_tolerance(), any_tolerance(), any_tolerance(), any_tolerance()];
    let uncertainty = prop_oneof![Just(0), 0..5_000_u64];
    let detection = (0..10_000_u64, 0..10_000_u64);
    let rest = (uncertainty, any::<bool>(), 0..500_u32, detection);
    (any_program(), tolerances, rest).prop_filter_map("settings that do not fit", |(program, tolerances, rest)| {
        let (uncertainty, guarded, sensitivity, (sooner, later)) = rest;
        let decision = if guarded { Decision::Guarded } else { Decision::Simple };
        let mut settings = AuditSettings::new(&program).with_uncertainty(Span::from_micros(uncertainty), decision);
        [settings.lower, settings.hysteresis, settings.refractory, settings.blanking] = tolerances;
        settings.sensitivity_thousandths = sensitivity;
        let delay = program.settings().detect_delay;
        settings.detect = (delay.saturating_sub(Span::from_micros(sooner)), delay.saturating_add(Span::from_micros(later)));
        settings.check(&program).ok().map(|()| (program, settings))
    })
}

/// Whatever the program and the tolerances: a canary that is planted is caught, and its script is clean without the fault.
#[test]
fn a_canary_never_voids_a_sound_run() {
    let planted = Cell::new(0);
    let mut runner = TestRunner::new(Config {
        cases: 20_000,
        max_global_rejects: 10_000_000,
        max_local_rejects: 10_000_000,
        failure_persistence: None,
        ..Config::default()
    });
    let outcome = runner.run(&any_run(), |(program, settings)| {
        for fault in canary::visible(&program, &settings) {
            let result = sighted(&program, &settings, fault);
            prop_assert!(result.caught, "{:#?}", result);
            let control = canary::control::<H>(&program, &settings, fault).expect("the settings fit");
            prop_assert_eq!(control, None, "without fault {}", fault.id());
            planted.set(planted.get() + 1);
        }
        Ok(())
    });
    match outcome {
        Ok(()) => {}
        Err(TestError::Fail(reason, case)) => panic!("{reason}\nsmallest case: {case:#?}"),
        Err(abort) => panic!("{abort}"),
    }
    println!("{} canaries", planted.get());
    assert!(planted.get() >= 100_000);
}
