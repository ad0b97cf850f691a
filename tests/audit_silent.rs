//! What must stay silent: devices that do right although it looks wrong, and what cannot be told and is said to be undecided.
//!
//! VVI at 60 per minute, blanking 100 ms, refractory 250 ms, tolerance 8 ms, unless said otherwise; times in milliseconds.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::indexing_slicing,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod judged;

use judged::{
    LOUD, NEAR, V, at_60, at_ms, checked, end, judge, judge_with, ms, pulse_us, signal_on, signal_us, v, vp, vvi, vvi_50,
};
use phase4::audit::{AuditSettings, Auditor, Decision, Hint, Outcome, RuleId};
use phase4::base::{Instant, Mode, Program, Record, Span, Straddle};

/// What could not be told, after making sure that nothing is found.
fn hints(program: &Program, settings: &AuditSettings, records: &[Record]) -> Vec<Hint> {
    let (judgements, auditor) = judge(program, settings, records);
    let wrong: Vec<_> = judgements.iter().filter(|judgement| judgement.outcome == Outcome::Broken).collect();
    assert!(wrong.is_empty() && auditor.broken() == 0, "{wrong:#?}");
    let hints: Vec<_> = judgements.iter().filter_map(|judgement| judgement.hint).collect();
    assert_eq!(auditor.undecided(), hints.len() as u64);
    hints
}

fn usual(records: &[Record]) -> Vec<Hint> {
    hints(&vvi(), &AuditSettings::new(&vvi()), records)
}

/// A pulse on a beat that has begun but is not seen yet: the signal comes in the pulse's blanking, or is detected there.
#[test]
fn n1_a_pulse_on_a_beat_already_begun() {
    assert_eq!(usual(&[vp(1000), v(1015), vp(2000), v(2030), vp(3000), end(3100)]), []);
    let mut slow = at_60(Mode::Vvi);
    slow.detect_delay = ms(20);
    let program = checked(slow);
    assert_eq!(hints(&program, &AuditSettings::new(&program), &[v(990), vp(1000), vp(2000), end(2500)]), []);
}

/// Intervals longer than the lower rate's, by declared hysteresis.
#[test]
fn n4_declared_hysteresis() {
    let records = [v(1100 - 150), v(2100), vp(3300), vp(4300), v(5250), vp(6450), end(6500)];
    assert_eq!(hints(&vvi_50(), &AuditSettings::new(&vvi_50()), &records), []);
}

/// Between the two limits of sensitivity a signal may be seen or not.
#[test]
fn n6_a_signal_near_the_threshold_either_way() {
    let near = signal_on(V, 600, NEAR);
    for pulse in [1000, 1600] {
        assert_eq!(usual(&[near, vp(pulse), vp(pulse + 1000), end(3000)]), [Hint::NearThreshold]);
    }
    let (_, auditor) = judge(&vvi(), &AuditSettings::new(&vvi()), &[near, vp(1000), end(1500)]);
    assert_eq!((auditor.score(RuleId::Se1).checked, auditor.score(RuleId::Se1).undecided), (1, 1));
    assert_eq!((auditor.decided(), auditor.undecided()), (1, 1), "the pulse itself is decided");
}

/// At a window's edge, within tolerance, a signal may lie inside or outside.
#[test]
fn n7_a_signal_in_the_band_of_an_edge_either_way() {
    for at in [242, 245, 250, 257] {
        for pulse in [1000, 1000 + at] {
            assert_eq!(usual(&[v(at), vp(pulse), vp(pulse + 1000), end(3000)]), [Hint::AtEdge], "at {at}, pulse {pulse}");
        }
    }
    for (at, pulse) in [(241, 1000), (258, 1258)] {
        assert_eq!(usual(&[v(at), vp(pulse), end(3000 - 1000)]), [], "clear of the edge: decided");
    }
}

/// A signal that begins in blanking and outlasts it, where blanking is as long as the refractory period.
#[test]
fn n7_a_signal_that_outlasts_blanking_either_way() {
    let mut settings = at_60(Mode::Vvi);
    settings.blanking = settings.refractory;
    settings.straddle = Straddle::End;
    let program = checked(settings);
    let judged = |width_ms: u64, pulse: u64| {
        let records = [signal_us(V, 200_000, LOUD, width_ms * 1_000), vp(pulse), end(pulse + 100)];
        hints(&program, &AuditSettings::new(&program), &records)
    };
    assert_eq!(judged(20, 1000), [], "it ends inside");
    assert_eq!(judged(50, 1000), [Hint::Straddles]);
    assert_eq!(judged(50, 1250), [Hint::Straddles, Hint::Straddles], "nor where the end of blanking was that it is seen at");
}

/// A recording that starts in the middle of a cycle: the first pulse is anyone's guess, the rest is judged.
#[test]
fn n14_a_recording_that_starts_in_mid_cycle() {
    for first in [1, 400, 999] {
        let settings = AuditSettings::new(&vvi());
        let auditor = Auditor::<12>::joining(&vvi(), &settings, Instant::ZERO).unwrap();
        let (judgements, auditor) = judge_with(auditor, &[vp(first), vp(first + 1000), v(first + 1600), vp(first + 2600)]);
        let outcomes: Vec<_> = judgements.iter().map(|one| (one.outcome, one.hint)).collect();
        assert_eq!(
            outcomes,
            [(Outcome::Undecided, Some(Hint::UnknownState)), (Outcome::Held, None), (Outcome::Held, None), (Outcome::Held, None)]
        );
        assert_eq!((auditor.decided(), auditor.undecided()), (3, 1));
    }
    // It must pace or be sensed within its longest interval, whatever its state was.
    let auditor = Auditor::<12>::joining(&vvi(), &AuditSettings::new(&vvi()), Instant::ZERO).unwrap();
    let (judgements, _) = judge_with(auditor, &[vp(1009), end(1500)]);
    assert_eq!(judgements.iter().map(|one| one.outcome).collect::<Vec<_>>(), [Outcome::Broken]);
}

/// Guarded: held inside the limits less the uncertainty, broken outside the limits with it, undecided between. The rows are those of the
/// decision rule with tolerance 8 and uncertainty 2: an error of 7 or 9 is undecided, one of 10.1 fails (derived).
#[test]
fn the_guarded_rule_has_a_band_and_the_simple_one_has_none() {
    let judged = |decision, off_us: u64| {
        let settings = AuditSettings::new(&vvi()).with_uncertainty(ms(2), decision);
        let (judgements, _) = judge(&vvi(), &settings, &[vp(1000), pulse_us(V, 2_000_000 + off_us), end(2500)]);
        judgements.iter().filter(|one| one.at > at_ms(1500)).map(|one| one.outcome).collect::<Vec<_>>()
    };
    for (off_us, guarded, simple) in [
        (5_900, Outcome::Held, Outcome::Held),
        (7_000, Outcome::Undecided, Outcome::Held),
        (9_000, Outcome::Undecided, Outcome::Broken),
        (10_100, Outcome::Broken, Outcome::Broken),
    ] {
        assert_eq!(judged(Decision::Guarded, off_us), [guarded], "{off_us}");
        assert_eq!(judged(Decision::Simple, off_us), [simple], "{off_us}");
    }
}

/// A beat and a pulse closer to each other than the uncertainty: either may have been first.
#[test]
fn a_beat_and_a_pulse_too_close_to_order() {
    let settings = AuditSettings::new(&vvi()).with_uncertainty(ms(1), Decision::Guarded);
    for beat in [999_100, 999_999, 1_000_000, 1_000_900] {
        let mut records = vec![signal_us(V, beat, LOUD, 40_000), vp(1000), vp(2000), end(2500)];
        records.sort_by_key(|record| (record.at, record.kind));
        assert_eq!(hints(&vvi(), &settings, &records), [Hint::NearTie], "beat at {beat}");
    }
    // Two milliseconds before is before.
    let (judgements, _) = judge(&vvi(), &settings, &[v(997), vp(1000), end(1500)]);
    assert_eq!(judgements.iter().filter(|one| one.outcome == Outcome::Broken).count(), 1);
}

/// A run of signals near the threshold makes more hypotheses than there is room for: less is decided, nothing is found.
#[test]
fn more_explanations_than_there_is_room_for() {
    let mut records: Vec<Record> = (1..90).map(|n| signal_on(V, 250 + n * 7, NEAR)).collect();
    records.extend([vp(1500), vp(2500), end(3000)]);
    let settings = AuditSettings::new(&vvi());
    let small = Auditor::<3>::new(&vvi(), &settings, Instant::ZERO).unwrap();
    let (judgements, small) = judge_with(small, &records);
    assert!(small.loosened() > 0);
    assert_eq!(small.broken(), 0);
    let held: Vec<_> = judgements.iter().filter(|one| one.outcome == Outcome::Held).map(|one| one.at).collect();
    assert_eq!(held, [at_ms(2500)], "the second pulse is decided again");
    let (_, large) = judge(&vvi(), &settings, &records);
    assert_eq!(large.loosened(), 0);
}

/// What cannot be told at the cap is still told where every explanation agrees.
#[test]
fn a_finding_in_spite_of_many_explanations() {
    let mut records: Vec<Record> = (1..90).map(|n| signal_on(V, 250 + n * 7, NEAR)).collect();
    // Not even the latest of them explains a pulse 1100 ms after it.
    records.extend([vp(2000), end(2500)]);
    let auditor = Auditor::<3>::new(&vvi(), &AuditSettings::new(&vvi()), Instant::ZERO).unwrap();
    let (_, auditor) = judge_with(auditor, &records);
    assert_eq!(auditor.broken(), 1);
}

/// Hours of a beating heart, across the wrap of a 32-bit counter, with nothing to say; then one late pulse is found, to the microsecond.
#[test]
fn a_long_run_is_judged_as_finely_as_a_short_one() {
    let start = Instant::from_micros((1 << 32) - 1_500_000);
    let mut auditor = Auditor::<12>::new(&vvi(), &AuditSettings::new(&vvi()), start).unwrap();
    let after = |millis: u64| start.saturating_add(Span::from_millis(millis));
    let moved = |record: Record, millis: u64| Record { at: after(millis), ..record };
    for beat in 1..=9_000 {
        auditor.observe(&moved(v(0), beat * 800));
        while let Some(judgement) = auditor.poll(after(beat * 800)) {
            assert_eq!(judgement.outcome, Outcome::Held);
        }
    }
    let last = 9_000 * 800;
    auditor.observe(&moved(vp(0), last + 1000));
    auditor.observe(&moved(vp(0), last + 2012));
    auditor.finish(after(last + 2100));
    let found: Vec<_> = core::iter::from_fn(|| auditor.poll(after(last + 2100))).collect();
    assert_eq!(found.iter().map(|one| one.outcome).collect::<Vec<_>>(), [Outcome::Held, Outcome::Broken]);
    assert_eq!(found[1].deviation.unwrap().as_micros(), 12_000);
    assert_eq!(found[1].window.unwrap().nominal, after(last + 2000));
}

/// A gap of days in a log is a missing pulse, and takes no longer than a gap of seconds.
#[test]
fn a_gap_of_days_is_one_finding() {
    let day = 86_400_000;
    let (judgements, _) =
        judge(&vvi(), &AuditSettings::new(&vvi()), &[vp(1000), vp(40 * day), vp(40 * day + 1000), end(41 * day)]);
    let found: Vec<_> = judgements.iter().filter(|one| one.outcome == Outcome::Broken).collect();
    assert_eq!(found.len(), 2, "late by 40 days, and missing at the end: {found:#?}");
    assert_eq!(found[0].deviation.unwrap().as_micros(), i64::try_from((40 * day - 2000) * 1_000).unwrap());
}
