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

use judged::sloppy::{Kind, Slip, slipping};
use judged::{Finding, judge_with, scripts_or};
use phase4::audit::{Auditor, Outcome, RuleId};

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
