//! Time lines of streams that a bench could have recorded, and what the auditor must say of them.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod judged;

use judged::{
    A, FAINT, LOUD, V, at_60, checked, end, findings, findings_by, judge, pulse_on, pulse_us, rate, signal_on, signal_us, v, vp,
    vvi,
};
use phase4::audit::{AuditSettings, Decision, How, Outcome, RuleId, Tolerance};
use phase4::base::{Mode, Program, Record, Settings, Span};

/// Rows 10 to 14 and 16 of the worked rows use a refractory period of 320 ms (250 ms in the atrium), blanking 100 ms.
fn row(mode: Mode) -> Settings {
    let mut settings = at_60(mode);
    settings.refractory = Span::from_millis(if mode == Mode::Aai { 250 } else { 320 });
    settings
}

/// Judged with no tolerance at all, and everything decided.
fn is_clean_and_decided(program: &Program, records: &[Record]) {
    let settings = AuditSettings::new(program).with_tolerance(Tolerance::symmetric(Span::ZERO));
    let (judgements, auditor) = judge(program, &settings, records);
    let wrong: Vec<_> = judgements.iter().filter(|judgement| judgement.outcome != Outcome::Held).collect();
    assert!(wrong.is_empty(), "{wrong:#?}");
    assert_eq!((auditor.broken(), auditor.undecided()), (0, 0));
    assert!(auditor.decided() > 0);
}

/// Worked rows of the single-chamber state tables, derived by event simulation.
#[test]
fn worked_rows_are_judged_clean() {
    let clean = is_clean_and_decided;
    // VVI 60, no senses; VOO 60, any senses: 1000, 2000, 3000 in both.
    clean(&checked(row(Mode::Vvi)), &[vp(1000), vp(2000), vp(3000), end(3500)]);
    clean(&checked(row(Mode::Voo)), &[v(700), vp(1000), v(1300), vp(2000), v(2999), vp(3000), end(3500)]);
    // VVI 60, V at 319: refractory, pulse at 1000. V at 320: sensed, pulse at 1320.
    clean(&checked(row(Mode::Vvi)), &[v(319), vp(1000), end(1500)]);
    clean(&checked(row(Mode::Vvi)), &[v(320), vp(1320), end(1500)]);
    // VVI 60, V at 700, 1800, 3100: VS 700, VP 1700, VR 1800, VP 2700, VS 3100, VP 4100.
    let beats = [v(700), vp(1700), v(1800), vp(2700), v(3100), vp(4100), end(4500)];
    clean(&checked(row(Mode::Vvi)), &beats);
    // The same with hysteresis at 50: VS 700, VS 1800, VP 3000, VR 3100, VP 4000, 5000.
    let mut with_hysteresis = row(Mode::Vvi);
    with_hysteresis.hysteresis = Some(rate(50));
    clean(&checked(with_hysteresis), &[v(700), v(1800), vp(3000), v(3100), vp(4000), vp(5000), end(5500)]);
    // VVI 60, all undersensed, a beat every 800: pulses walk through the beats, 600, 400, 200 and 0 ms before them.
    let undersensed = [800, 1600, 2400, 3200, 4000].map(|at| signal_on(V, at, 500));
    let mut records: Vec<Record> = [1000, 2000, 3000, 4000].map(vp).into_iter().chain(undersensed).collect();
    records.sort_by_key(|record| (record.at, record.kind));
    clean(&checked(row(Mode::Vvi)), &records);
    // AAI 60, refractory 250, a far-field beat 260 after each A: sensed, AP-AP 1260.
    let far = |at| signal_on(A, at, 8_000);
    let ap = |at| pulse_on(A, at);
    clean(&checked(row(Mode::Aai)), &[far(260), ap(1260), far(1520), ap(2520), end(2600)]);
    clean(&checked(row(Mode::Aai)), &[far(200), ap(1000), far(1200), ap(2000), end(2600)]);
}

#[test]
fn a_late_pulse_is_one_finding() {
    let found = findings(&vvi(), &[vp(1000), vp(2020), vp(3020), end(3500)]);
    assert_eq!(found.len(), 1, "{found:#?}");
}

/// Tolerance 8 ms, uncertainty 0 and 1 ms: the first microsecond beyond both is late, the one before is not broken.
#[test]
fn the_first_microsecond_too_late_is_late_and_not_early() {
    for (uncertainty, last) in [(0, 1_008_000), (1, 1_009_000)] {
        let settings = AuditSettings::new(&vvi()).with_uncertainty(Span::from_millis(uncertainty), Decision::Guarded);
        let first = |at| {
            let (judgements, _) = judge(&vvi(), &settings, &[pulse_us(V, at), end(1_500)]);
            judgements.first().map(|first| (first.outcome == Outcome::Broken, first.how, first.rule))
        };
        assert_eq!(first(last + 1), Some((true, How::Late, RuleId::Lr1)));
        assert_eq!(first(last), Some((false, How::OnTime, RuleId::Lr1)));
    }
}

/// A signal on its way to its sense when a pulse becomes overdue: one that may be sensed explains the silence, one that is too
/// small for that explains nothing wherever it lies, to the microsecond, and the missing pulse is found.
#[test]
fn a_faint_signal_before_the_deadline_hides_no_missing_pulse() {
    for (uncertainty, decision) in [(0, Decision::Simple), (2, Decision::Simple), (2, Decision::Guarded)] {
        let mut settings = AuditSettings::new(&vvi()).with_uncertainty(Span::from_millis(uncertainty), decision);
        settings.detect = (Span::from_millis(4), Span::from_millis(10));
        let found = |onset, peak| findings_by(&vvi(), &settings, &[vp(1000), signal_us(V, onset, peak, 40_000), end(2900)]);
        assert!(found(2_002_000, LOUD).is_empty());
        let coincidences = (1_980..2_020).flat_map(|ms| [ms * 1_000, ms * 1_000 + 1]);
        for onset in coincidences {
            let quoted: Vec<_> = found(onset, FAINT).iter().map(|finding| (finding.how, finding.rule)).collect();
            assert_eq!(quoted, [(How::Missing, RuleId::Lr1)], "{uncertainty} ms, {decision:?}, onset at {onset} us");
        }
    }
}
