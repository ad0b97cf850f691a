//! Each rule on a time line: the smallest stream that breaks it, what the finding says, and the near miss that does not.
//!
//! VVI at 60 per minute, blanking 100 ms, refractory 250 ms, tolerance 8 ms, unless said otherwise; times in milliseconds.
#![allow(clippy::arithmetic_side_effects, clippy::indexing_slicing, clippy::panic, clippy::unwrap_used, reason = "tests may")]

mod judged;

use judged::{
    A, FAINT, LOUD, MUST, MUST_NOT, NEAR, V, at_60, at_ms, checked, end, findings, judge, judge_with, ms, pulse_on, pulse_us,
    signal_on, v, vp, vvi, vvi_50,
};
use phase4::audit::{AuditSettings, Auditor, Hint, How, Judgement, Limits, Outcome, RuleId, RuleSet};
use phase4::base::{Instant, Mode, Program, Record};

/// The only finding: its rule, the equal explanations, what happened, when, and how far off in microseconds.
fn only(program: &Program, records: &[Record]) -> (RuleId, Vec<RuleId>, How, u64, Option<i64>) {
    let found = findings(program, records);
    let [finding] = found.as_slice() else { panic!("one finding expected: {found:#?}") };
    (finding.rule, finding.also.clone(), finding.how, finding.at_ms, finding.off_us)
}

fn is_clean(program: &Program, records: &[Record]) {
    let found = findings(program, records);
    assert!(found.is_empty(), "{found:#?}");
}

/// With only these rules in force.
fn only_with(rules: &[RuleId], settings: &AuditSettings, records: &[Record]) -> Vec<Judgement> {
    let mut auditor = Auditor::<12>::new(&vvi(), settings, Instant::ZERO).unwrap();
    let others = RuleId::ALL.into_iter().filter(|rule| !rules.contains(rule));
    auditor.blind(others.fold(RuleSet::EMPTY, RuleSet::with));
    let (judgements, _) = judge_with(auditor, records);
    judgements.into_iter().filter(|judgement| judgement.outcome == Outcome::Broken).collect()
}

#[test]
fn lr1_a_pulse_comes_not_later_than_the_lower_rate_interval() {
    let late = [vp(1000), vp(2020), vp(3020), end(3500)];
    assert_eq!(only(&vvi(), &late), (RuleId::Lr1, vec![RuleId::En2], How::Late, 2020, Some(20_000)));
    is_clean(&vvi(), &[vp(1000), vp(2008), vp(3016), end(3500)]);
    let by_a_tick = [vp(1000), pulse_us(V, 2_008_001), end(2500)];
    assert_eq!(only(&vvi(), &by_a_tick), (RuleId::Lr1, vec![RuleId::En2], How::Late, 2008, Some(8_001)));
}

#[test]
fn lr1_a_pulse_left_out() {
    let left_out = [vp(1000), vp(3000), vp(4000), end(4500)];
    assert_eq!(only(&vvi(), &left_out), (RuleId::Lr1, vec![RuleId::En2, RuleId::Cm1], How::Missing, 3000, None));
    // The device paces no more: known when its window has passed, said when nothing more can come.
    let (judgements, auditor) = judge(&vvi(), &AuditSettings::new(&vvi()), &[vp(1000), end(9000)]);
    let last = judgements.last().unwrap();
    assert_eq!((last.how, last.hint, last.at), (How::Missing, Some(Hint::EndOfRun), at_ms(9000)));
    assert_eq!(last.window.unwrap().latest, at_ms(2008));
    assert_eq!(auditor.score(RuleId::En2).broken, 1, "the same silence is too long a pause");
}

#[test]
fn lr1_a_beat_after_the_deadline_excuses_nothing() {
    let (rule, _, how, at, _) = only(&vvi(), &[vp(1000), v(2100), vp(3100), end(3500)]);
    assert_eq!((rule, how, at), (RuleId::Lr1, How::Missing, 3100));
}

#[test]
fn lr2_a_pulse_comes_not_earlier_than_the_lower_rate_interval() {
    let early = [vp(1000), vp(1980), vp(2980), end(3500)];
    assert_eq!(only(&vvi(), &early), (RuleId::Lr2, vec![], How::Early, 1980, Some(-20_000)));
    is_clean(&vvi(), &[vp(1000), vp(1992), vp(2984), end(3500)]);
    let by_a_tick = [vp(1000), pulse_us(V, 1_991_999), end(2500)];
    assert_eq!(only(&vvi(), &by_a_tick), (RuleId::Lr2, vec![], How::Early, 1991, Some(-8_001)));
}

#[test]
fn hy1_after_a_sense_the_hysteresis_interval() {
    is_clean(&vvi_50(), &[v(600), vp(1800), vp(2800), end(3000)]);
    let not_used = [v(600), vp(1600), vp(2600), end(3000)];
    assert_eq!(only(&vvi_50(), &not_used), (RuleId::Hy1, vec![], How::Early, 1600, Some(-200_000)));
    assert_eq!(only(&vvi_50(), &[v(600), vp(1830), end(2000)]), (RuleId::Hy1, vec![RuleId::En2], How::Late, 1830, Some(30_000)));
}

#[test]
fn hy2_after_a_pulse_the_lower_rate_interval() {
    let used = [vp(1000), vp(2200), vp(3200), end(3500)];
    assert_eq!(only(&vvi_50(), &used), (RuleId::Hy2, vec![], How::Late, 2200, Some(200_000)));
}

#[test]
fn in1_a_sense_removes_the_pending_pulse() {
    // The pulse comes 400 ms after the beat, at the end of its vulnerable window.
    let ignored = [v(600), vp(1000), vp(2000), end(2500)];
    assert_eq!(only(&vvi(), &ignored), (RuleId::In1, vec![RuleId::En3], How::Early, 1000, Some(-600_000)));
    is_clean(&vvi(), &[v(600), vp(1600), end(2000)]);
}

#[test]
fn rf1_nothing_in_refractory_restarts_a_timer() {
    let restarted = [v(200), vp(1200), vp(2200), end(2500)];
    assert_eq!(only(&vvi(), &restarted), (RuleId::Rf1, vec![], How::Late, 1200, Some(200_000)));
    is_clean(&vvi(), &[v(200), vp(1000), end(1500)]);
    // A signal in blanking, close to the anchor: a timer 60 ms too long is the smaller change.
    let (rule, _, how, _, off) = only(&vvi(), &[v(60), vp(1060), end(1500)]);
    assert_eq!((rule, how, off), (RuleId::Lr1, How::Late, Some(60_000)));
}

#[test]
fn rf2_the_first_signal_after_refractory_restarts_it() {
    let missed = [v(290), vp(1000), vp(2000), end(2500)];
    assert_eq!(only(&vvi(), &missed), (RuleId::Rf2, vec![], How::Early, 1000, Some(-290_000)));
    is_clean(&vvi(), &[v(290), vp(1290), end(1500)]);
}

#[test]
fn se1_a_signal_at_the_high_limit_acts() {
    let missed = [signal_on(V, 600, MUST), vp(1000), vp(2000), end(2500)];
    let (rule, also, how, at, off) = only(&vvi(), &missed);
    assert_eq!((rule, also, how, at, off), (RuleId::Se1, vec![RuleId::En3], How::Early, 1000, Some(-600_000)));
    is_clean(&vvi(), &[signal_on(V, 600, MUST), vp(1600), end(2000)]);
}

#[test]
fn se2_a_signal_at_the_low_limit_never_acts() {
    let acted = [signal_on(V, 600, MUST_NOT), vp(1600), vp(2600), end(2700)];
    assert_eq!(only(&vvi(), &acted), (RuleId::Se2, vec![RuleId::En2], How::Late, 1600, Some(600_000)));
    is_clean(&vvi(), &[signal_on(V, 600, MUST_NOT), vp(1000), end(1500)]);
}

#[test]
fn cm1_one_pulse_for_each_instant() {
    let twice = [vp(1000), vp(1001), vp(2000), vp(3000), end(3500)];
    assert_eq!(only(&vvi(), &twice), (RuleId::Cm1, vec![RuleId::En1], How::Unexpected, 1001, Some(-999_000)));
    // Whether the device went on from the extra pulse or from the one before: no second finding.
    is_clean_after_one(&[vp(1000), vp(1300), vp(2000), vp(3000), end(3500)]);
    is_clean_after_one(&[vp(1000), vp(1300), vp(2300), vp(3300), end(3500)]);
}

fn is_clean_after_one(records: &[Record]) {
    assert_eq!(only(&vvi(), records).0, RuleId::Cm1);
}

#[test]
fn en1_pulses_are_never_closer_than_the_ceiling() {
    let settings = AuditSettings::new(&vvi());
    let found = only_with(&[RuleId::En1], &settings, &[vp(1000), vp(1292), vp(1585), end(2000)]);
    assert_eq!(found.iter().map(|found| (found.rule, found.at)).collect::<Vec<_>>(), [(RuleId::En1, at_ms(1292))]);
    // The start counts as a pulse.
    assert_eq!(only_with(&[RuleId::En1], &settings, &[vp(200), end(1000)]).len(), 1);
}

#[test]
fn en2_no_pause_is_longer_than_declared() {
    let settings = AuditSettings::new(&vvi());
    let found = only_with(&[RuleId::En2], &settings, &[vp(1000), signal_on(V, 1900, NEAR), vp(3000), vp(4000), end(4500)]);
    assert_eq!(found.iter().map(|found| (found.how, found.at)).collect::<Vec<_>>(), [(How::Missing, at_ms(2908))]);
    // Signals too small to be seen do not end a pause.
    assert_eq!(only_with(&[RuleId::En2], &settings, &[vp(1000), signal_on(V, 1900, FAINT), vp(2600), end(3000)]).len(), 1);
    // A pause too long, with nothing after it.
    assert_eq!(only_with(&[RuleId::En2], &settings, &[vp(1000), end(3000)]).len(), 1);
}

#[test]
fn en3_no_pulse_in_the_vulnerable_window() {
    let settings = AuditSettings::new(&vvi());
    let pulse_after = |after: u64| only_with(&[RuleId::En3], &settings, &[v(600), vp(600 + after), end(3000)]).len();
    assert_eq!([149, 150, 400, 401].map(pulse_after), [0, 1, 1, 0]);
    // A signal that may have been blanked, or missed, is no reason.
    assert!(only_with(&[RuleId::En3], &settings, &[v(200), vp(500), end(3000)]).is_empty());
    assert!(only_with(&[RuleId::En3], &settings, &[signal_on(V, 600, NEAR), vp(900), end(3000)]).is_empty());
    // Asynchronous modes are exempt.
    is_clean(&checked(at_60(Mode::Voo)), &[v(700), vp(1000), v(1800), vp(2000), end(2500)]);
}

#[test]
fn en4_every_pulse_on_its_own_channel() {
    let stray = [vp(1000), pulse_on(A, 1500), vp(2000), end(2500)];
    assert_eq!(only(&vvi(), &stray), (RuleId::En4, vec![], How::Unexpected, 1500, None));
    // The pulse that was due went to the wrong place: one finding, not a missing pulse besides.
    let exchanged = [vp(1000), pulse_on(A, 2000), vp(3000), end(3500)];
    assert_eq!(only(&vvi(), &exchanged), (RuleId::En4, vec![], How::Unexpected, 2000, None));
    // A mode that paces nothing.
    let off = checked(at_60(Mode::Ooo));
    assert_eq!(only(&off, &[v(700), vp(1000), end(2500)]).0, RuleId::En4);
    let (judgements, auditor) = judge(&off, &AuditSettings::new(&off), &[v(700), v(1500), end(9000)]);
    assert!(judgements.is_empty());
    assert_eq!((auditor.decided(), auditor.undecided()), (0, 0));
}

#[test]
fn en4_closes_what_was_overdue() {
    let found = findings(&vvi(), &[vp(1000), pulse_on(A, 2500), vp(3500), end(3600)]);
    let quoted: Vec<_> = found.iter().map(|finding| (finding.rule, finding.how, finding.at_ms)).collect();
    assert_eq!(quoted, [(RuleId::Lr1, How::Missing, 2500), (RuleId::En4, How::Unexpected, 2500)]);
}

#[test]
fn en6_the_device_makes_progress() {
    let mut auditor = Auditor::<12>::new(&vvi(), &AuditSettings::new(&vvi()), Instant::ZERO).unwrap();
    auditor.observe(&vp(1000));
    auditor.spinning(at_ms(1000));
    auditor.spinning(at_ms(1000));
    let found: Vec<_> = core::iter::from_fn(|| auditor.poll(at_ms(1000))).filter(|one| one.outcome == Outcome::Broken).collect();
    assert_eq!(found.iter().map(|one| (one.rule, one.at)).collect::<Vec<_>>(), [(RuleId::En6, at_ms(1000))]);
    // A log's end says it as well.
    let mut spun = end(1000);
    spun.a = 3;
    assert_eq!(only(&vvi(), &[vp(1000), spun]).0, RuleId::En6);
}

#[test]
fn a_declared_pause_that_is_a_late_pulse_too_is_one_finding() {
    let program = vvi();
    let mut settings = AuditSettings::new(&program);
    settings.limits = Limits { longest_pause: Some(ms(1002)), ..settings.limits };
    let found = |pulse| {
        let (judgements, _) = judge(&program, &settings, &[vp(1000), vp(pulse), end(pulse + 10)]);
        let broken = judgements.into_iter().filter(|one| one.outcome == Outcome::Broken);
        broken.map(|one| (one.rule, one.also.has(RuleId::En2))).collect::<Vec<_>>()
    };
    assert_eq!(found(2002), []);
    assert_eq!(found(2005), [(RuleId::En2, false)], "inside the tolerance of the interval, longer than the declared pause");
    assert_eq!(found(2020), [(RuleId::Lr1, true)]);
}

#[test]
fn the_stream_of_judgements_tells_every_window() {
    let (judgements, auditor) = judge(&vvi(), &AuditSettings::new(&vvi()), &[v(600), v(1300), vp(2303), end(2500)]);
    let told: Vec<_> = judgements
        .iter()
        .map(|one| {
            let window = one.window.unwrap();
            let (anchor, nominal) = (one.anchor.unwrap().latest, window.nominal);
            (one.how, one.rule, one.at, anchor, nominal, one.deviation.map(|off| off.as_micros()))
        })
        .collect();
    assert_eq!(
        told,
        [
            (How::Withheld, RuleId::In1, at_ms(600), at_ms(0), at_ms(1000), None),
            (How::Withheld, RuleId::In1, at_ms(1300), at_ms(600), at_ms(1600), None),
            (How::OnTime, RuleId::Lr1, at_ms(2303), at_ms(1300), at_ms(2300), Some(3_000)),
        ]
    );
    assert!(judgements.iter().all(|one| one.outcome == Outcome::Held));
    let score = auditor.score(RuleId::Lr1);
    assert_eq!((score.checked, score.held), (1, 1));
    assert_eq!(score.worst.unwrap().as_micros(), 3_000);
    assert_eq!(score.margin.unwrap().as_micros(), 5_000);
    assert_eq!(auditor.score(RuleId::Hy1).checked, 0, "a rule never tried is not exercised");
    assert_eq!((auditor.decided(), auditor.undecided()), (3, 0));
}

#[test]
fn a_sense_that_proves_nothing_is_taken_back() {
    let (_, auditor) = judge(&vvi(), &AuditSettings::new(&vvi()), &[v(600), vp(1000), vp(2000), end(2500)]);
    for rule in RuleId::ALL {
        let score = auditor.score(rule);
        assert_eq!(score.checked, score.held + score.broken + score.undecided, "{}", rule.code());
    }
    let score = auditor.score(RuleId::In1);
    assert_eq!((score.held, score.broken), (0, 1));
}

#[test]
fn an_open_finding_is_seen_at_once() {
    let mut auditor = Auditor::<12>::new(&vvi(), &AuditSettings::new(&vvi()), Instant::ZERO).unwrap();
    auditor.observe(&vp(1000));
    while auditor.poll(at_ms(2008)).is_some() {}
    assert_eq!(auditor.overdue_since(), None);
    let wakes_at = auditor.next_at().unwrap();
    assert_eq!(wakes_at.as_micros(), 2_008_001);
    assert_eq!(auditor.poll(wakes_at), None, "nothing is told before it is closed");
    assert_eq!(auditor.overdue_since(), Some(at_ms(2008)));
}

#[test]
fn both_chambers_are_judged_alike() {
    let aai = checked(at_60(Mode::Aai));
    let a = |at| signal_on(A, at, LOUD);
    let ap = |at| pulse_on(A, at);
    is_clean(&aai, &[a(600), ap(1600), v(1700), ap(2600), end(2700)]);
    let ignored = [a(600), ap(1000), ap(2000), end(2500)];
    assert_eq!(only(&aai, &ignored).0, RuleId::In1);
    assert_eq!(only(&checked(at_60(Mode::Aoo)), &[ap(1000), a(1500), ap(2020), end(2500)]).0, RuleId::Lr1);
}
