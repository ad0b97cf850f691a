//! Hearts as timelines: what is done, and what is then seen. Times are in ms.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod heart_common;

use heart_common::{STEP, STRONG, beat, intervals, line, ms, pulse, run, span, times};
use phase4::base::{Instant, Kind, Meeting, MilliVolts, NoCapture, NotYet, Pulse, Record, SiteId, Span};
use phase4::heart::plain::{
    APEX, ATRIUM, ATRIUM_JUNCTION, JUNCTION, JUNCTION_CELL, SINUS, SINUS_CELL, VENTRICLE, VENTRICLE_CELL,
};
use phase4::heart::{Anatomy, FocusParams, Fraction, Heart, PulseAnswer, SiteParams, TractParams, Way, Ways, plain};

type Plain<'a> = Heart<'a, 5, 4, 3, 0>;

fn plain() -> Plain<'static> {
    Heart::new(&plain::ANATOMY, &[], Instant::ZERO).unwrap()
}

/// The plain heart with every cell silent: it does only what is done to it.
fn silent() -> Plain<'static> {
    let mut heart = plain();
    for cell in [SINUS_CELL, JUNCTION_CELL, VENTRICLE_CELL] {
        heart.arrest(cell, Instant::ZERO).unwrap();
    }
    heart
}

fn lines(log: &[Record]) -> Vec<String> {
    log.iter().map(|record| line(record, &plain::SITE_NAMES)).collect()
}

#[test]
fn a_sinus_beat_goes_down_to_the_apex() {
    assert_eq!(
        lines(&run(&mut plain(), ms(1_599))),
        [
            "800 sinus fires by cell 0",
            "870 atrium fires by tract 0",
            "980 junction fires by tract 1",
            "980 cell 1 reset with 220 to run",
            "1020 ventricle fires by tract 2",
            "1020 cell 2 reset with 730 to run",
            "1060 apex fires by tract 3",
        ]
    );
}

#[test]
fn when_the_sinus_node_stops_lower_pacemakers_escape_one_after_the_other() {
    let mut heart = plain();
    run(&mut heart, ms(2_700));
    heart.arrest(SINUS_CELL, ms(2_700)).unwrap();
    assert_eq!(
        lines(&run(&mut heart, ms(4_600))),
        [
            "3780.76 junction fires by cell 1",
            "3780.76 tract 1 blocks backward: Shut",
            "3820.76 ventricle fires by tract 2",
            "3820.76 cell 2 reset with 550 to run",
            "3860.76 apex fires by tract 3",
        ]
    );
    heart.arrest(JUNCTION_CELL, ms(4_600)).unwrap();
    assert_eq!(
        lines(&run(&mut heart, ms(7_000))),
        [
            "5570.76 ventricle fires by cell 2",
            "5610.76 junction fires by tract 2",
            "5610.76 apex fires by tract 3",
            "5610.76 tract 1 blocks backward: Shut",
        ]
    );
    // Released, the sinus node runs from the start of an interval.
    heart.release(SINUS_CELL, ms(7_000)).unwrap();
    assert_eq!(times(&run(&mut heart, ms(8_600)), SINUS), [7_800_000, 8_600_000]);
}

#[test]
fn when_conduction_fails_atrium_and_ventricle_go_their_own_ways_until_it_returns() {
    let mut heart = plain();
    run(&mut heart, ms(1_500));
    heart.shut(ATRIUM_JUNCTION, Ways::Both, ms(1_500)).unwrap();
    assert_eq!(
        lines(&run(&mut heart, ms(2_400))),
        [
            "1600 sinus fires by cell 0",
            "1670 atrium fires by tract 0",
            "1670 tract 1 blocks forward: Shut",
            "2180 junction fires by cell 1",
            "2180 tract 1 blocks backward: Shut",
            "2220 ventricle fires by tract 2",
            "2220 cell 2 reset with 550 to run",
            "2260 apex fires by tract 3",
            "2400 sinus fires by cell 0",
        ]
    );
    let log = run(&mut heart, ms(20_000));
    assert!(intervals(&times(&log, ATRIUM)).iter().all(|&pp| pp == 800.0));
    assert!(intervals(&times(&log, VENTRICLE)).iter().all(|&rr| rr == 1_200.0));

    heart.open(ATRIUM_JUNCTION, Ways::Forward, ms(20_000)).unwrap();
    let log = run(&mut heart, ms(30_000));
    assert_eq!(times(&log, ATRIUM).len(), times(&log, VENTRICLE).len());
}

#[test]
fn a_pulse_at_the_apex_drives_the_ventricle_and_stops_at_the_node() {
    let mut heart = silent();
    let (_, answer) = pulse(&mut heart, APEX, ms(1_000));
    assert_eq!(answer, PulseAnswer::Captured { due: ms(1_003) });
    assert_eq!(
        lines(&run(&mut heart, ms(2_000))),
        [
            "1003 apex fires by pulse 1",
            "1043 ventricle fires by tract 3",
            "1083 junction fires by tract 2",
            "1083 tract 1 blocks backward: Shut",
        ]
    );
}

#[test]
fn with_conduction_to_the_atrium_a_pulse_reaches_the_sinus_node() {
    let mut heart = Heart::new(&plain::ANATOMY_VA, &[], Instant::ZERO).unwrap();
    heart.shut(ATRIUM_JUNCTION, Ways::Forward, Instant::ZERO).unwrap();
    heart.arrest(JUNCTION_CELL, Instant::ZERO).unwrap();
    let (before, answer) = pulse(&mut heart, APEX, ms(1_297));
    assert_eq!(answer, PulseAnswer::Captured { due: ms(1_300) });
    assert_eq!(lines(&before), ["800 sinus fires by cell 0", "870 atrium fires by tract 0", "870 tract 1 blocks forward: Shut"]);
    assert_eq!(
        lines(&run(&mut heart, ms(2_399))),
        [
            "1300 apex fires by pulse 1",
            "1340 ventricle fires by tract 3",
            "1340 cell 2 reset with 410 to run",
            "1380 junction fires by tract 2",
            "1530 atrium fires by tract 1",
            // The node's own interval ends in the very instant in which the wave arrives: the wave comes first.
            "1600 sinus fires by tract 0",
            "1600 cell 0 reset with 0 to run",
        ]
    );
    assert_eq!(times(&run(&mut heart, ms(2_400)), SINUS), [2_400_000]);
}

#[test]
fn two_waves_meet_half_way_and_both_end() {
    let mut heart = plain();
    // The beat from above leaves the ventricle at 1020, the pulse's wave the apex at 1030.
    pulse(&mut heart, APEX, ms(1_027));
    let log = run(&mut heart, ms(1_500));
    assert_eq!(lines(&log), ["1030 apex fires by pulse 1", "1030 tract 3 collision"]);
    let met = Meeting::unpack(log[1].a, log[1].b);
    assert_eq!(met, Meeting { left: span(30), took: span(40), delay: span(40), backward: true });
}

#[test]
fn a_pulse_is_not_answered_and_says_why() {
    let weak = |millivolts, micros| Pulse { amplitude: MilliVolts(millivolts), width: Span::from_micros(micros), ..STRONG };
    let mut heart = silent();
    pulse(&mut heart, APEX, ms(1_000));
    run(&mut heart, ms(1_003));
    // Fired at 1003: absolutely refractory for 250, then for 50 twice the threshold is needed, which at 0.4 ms is 0.875 V.
    let answers = [
        (ms(1_252), STRONG, NoCapture::Refractory, 1_000),
        (ms(1_253), weak(1_749, 400), NoCapture::TooWeak, 1),
        (ms(1_303), weak(800, 400), NoCapture::TooWeak, 75),
        (ms(1_303), weak(5_000, 0), NoCapture::TooWeak, u32::MAX),
    ];
    for (at, pulse, reason, margin) in answers {
        run(&mut heart, at);
        let expected = Record { a: reason.number(), b: margin, ..not_captured(at) };
        assert_eq!(heart.pulse(APEX, pulse, at), Ok(PulseAnswer::Unanswered(expected)));
    }
    let due = ms(1_303).saturating_add(span(3));
    assert_eq!(heart.pulse(APEX, weak(875, 400), ms(1_303)), Ok(PulseAnswer::Captured { due }));
    // A second one while the first is about to fire the site comes too late by as much as it came later.
    let expected = Record { a: NoCapture::Forestalled.number(), b: 2_000, ..not_captured(ms(1_305)) };
    assert_eq!(heart.pulse(APEX, STRONG, ms(1_305)), Ok(PulseAnswer::Unanswered(expected)));
    // A site that the heart does not have answers nothing.
    assert!(matches!(heart.pulse(SiteId::new(9), STRONG, ms(1_305)), Ok(PulseAnswer::Unanswered(_))));
}

const fn not_captured(at: Instant) -> Record {
    let cause = phase4::base::Cause::new(phase4::base::CauseKind::Pulse, 1);
    Record::new(at, Kind::NotCaptured, APEX.row(), cause)
}

#[test]
fn a_pulse_can_be_forestalled_by_a_beat_from_above() {
    let mut heart = plain();
    // The beat from above fires the apex at 1060, the pulse would at 1061.
    let (_, answer) = pulse(&mut heart, APEX, ms(1_058));
    assert_eq!(answer, PulseAnswer::Captured { due: ms(1_061) });
    let log = run(&mut heart, ms(1_500));
    assert_eq!(lines(&log), ["1060 apex fires by tract 3", "1061 apex not captured by pulse 1, 3"]);
    assert_eq!(log[1].b, 1_000);
}

#[test]
fn a_premature_beat_after_every_third() {
    let foci = [FocusParams::premature_after(VENTRICLE, VENTRICLE, span(500), 3)];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    let log = run(&mut heart, ms(9_500));
    let rr: Vec<i64> = intervals(&times(&log, VENTRICLE)).iter().map(|rr| (rr / 10.0).round() as i64 * 10).collect();
    // Each with a pause that makes up for it: the next sinus beat finds the node just passed from below.
    assert_eq!(rr, [800, 800, 500, 1_100, 800, 800, 500, 1_100, 800, 800]);
}

#[test]
fn a_premature_beat_may_come_too_early() {
    let foci = [FocusParams::premature(VENTRICLE, span(249))];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    let log = run(&mut heart, ms(1_500));
    assert_eq!(lines(&log).last().unwrap(), "1269 ventricle not captured by focus 0, 2");
    assert_eq!(log.last().unwrap().b, 1_000, "1 ms was missing");
}

#[test]
fn a_recorded_series_takes_the_sinus_nodes_place() {
    let series = [span(900), span(700), span(800)];
    let sinus = |repeat, until| {
        let foci = [FocusParams::replay(SINUS, &series, repeat, SINUS_CELL)];
        let mut heart = Heart::new(&plain::ANATOMY, &foci, ms(10_000)).unwrap();
        times(&run(&mut heart, ms(until)), SINUS).iter().map(|t| t / 1_000).collect::<Vec<_>>()
    };
    // First 1 s after the start; n intervals, n + 1 beats; then it ends, or begins again.
    assert_eq!(sinus(false, 20_000), [11_000, 11_900, 12_600, 13_400]);
    assert_eq!(sinus(true, 15_100), [11_000, 11_900, 12_600, 13_400, 14_300, 15_000]);
}

#[test]
fn a_recorded_series_is_reset_by_no_wave() {
    let series = [span(900), span(700), span(800)];
    let foci = [FocusParams::replay(SINUS, &series, false, SINUS_CELL)];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    let mut log = beat(&mut heart, SINUS, ms(1_850));
    log.extend(run(&mut heart, ms(4_000)));
    let seen: Vec<String> = lines(&log).into_iter().filter(|line| line.contains("sinus")).collect();
    assert_eq!(
        seen,
        [
            "1000 sinus fires by focus 0",
            "1850 sinus fires by step 0",
            "1900 sinus not captured by focus 0, 2",
            "2600 sinus fires by focus 0",
            "3400 sinus fires by focus 0",
        ]
    );
}

#[test]
fn arresting_the_cell_stops_the_series_in_its_place() {
    let series = [span(900), span(700), span(800)];
    let foci = [FocusParams::replay(SINUS, &series, false, SINUS_CELL)];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    let mut log = run(&mut heart, ms(2_000));
    heart.arrest(SINUS_CELL, ms(2_000)).unwrap();
    log.extend(run(&mut heart, ms(5_000)));
    heart.release(SINUS_CELL, ms(5_000)).unwrap();
    log.extend(run(&mut heart, ms(9_000)));
    assert_eq!(times(&log, SINUS), [1_000_000, 1_900_000, 5_800_000]);
}

#[test]
fn releasing_what_runs_changes_nothing() {
    let series = [span(900), span(700), span(800)];
    let foci = [FocusParams::replay(SINUS, &series, false, SINUS_CELL)];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    run(&mut heart, ms(2_000));
    let before = heart.clone();
    for cell in [SINUS_CELL, JUNCTION_CELL, VENTRICLE_CELL] {
        heart.release(cell, ms(2_000)).unwrap();
    }
    assert_eq!(heart, before);
}

#[test]
fn quiet_leaves_only_pulses_and_the_script() {
    let foci = [FocusParams::premature(APEX, span(400))];
    let mut heart = Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap();
    run(&mut heart, ms(900));
    heart.quiet(ms(900)).unwrap();
    // The wave that was already under way still arrives.
    let log = run(&mut heart, ms(60_000));
    assert_eq!(lines(&log), ["980 junction fires by tract 1", "980 tract 2 blocks forward: Shut"]);
    assert_eq!(heart.next_at(), None);

    pulse(&mut heart, APEX, ms(60_000));
    let log = run(&mut heart, ms(70_000));
    assert_eq!(lines(&log), ["60003 apex fires by pulse 1", "60003 tract 3 blocks backward: Shut"]);
}

#[test]
fn a_script_beat_comes_before_everything_else_of_its_instant() {
    let mut heart = plain();
    run(&mut heart, ms(799));
    heart.beat(SINUS, ms(800), STEP).unwrap();
    heart.beat(ATRIUM, ms(870), STEP).unwrap_err();
    assert_eq!(lines(&run(&mut heart, ms(869))), ["800 sinus fires by step 0", "800 cell 0 reset with 0 to run"]);
    heart.beat(ATRIUM, ms(870), STEP).unwrap();
    assert_eq!(lines(&run(&mut heart, ms(870))), ["870 atrium fires by step 0", "870 tract 0 joins"]);
    // In the refractory atrium it finds no answer.
    heart.beat(ATRIUM, ms(900), STEP).unwrap();
    assert_eq!(lines(&run(&mut heart, ms(979))), ["900 atrium not captured by step 0, 2"]);
}

#[test]
fn an_input_waits_until_everything_before_it_is_handed_out() {
    let mut heart = plain();
    let at = ms(801);
    assert_eq!(heart.pulse(APEX, STRONG, at), Err(NotYet(ms(800))));
    assert_eq!(heart.beat(APEX, at, STEP), Err(NotYet(ms(800))));
    assert_eq!(heart.arrest(SINUS_CELL, at), Err(NotYet(ms(800))));
    assert_eq!(heart.release(SINUS_CELL, at), Err(NotYet(ms(800))));
    assert_eq!(heart.shut(ATRIUM_JUNCTION, Ways::Both, at), Err(NotYet(ms(800))));
    assert_eq!(heart.open(ATRIUM_JUNCTION, Ways::Both, at), Err(NotYet(ms(800))));
    assert_eq!(heart.quiet(at), Err(NotYet(ms(800))));
    // The script comes first in an instant, pulses last.
    assert_eq!(heart.pulse(APEX, STRONG, ms(800)), Err(NotYet(ms(800))));
    assert_eq!(heart.arrest(SINUS_CELL, ms(800)), Ok(()));
    assert_eq!(heart.next_at(), Some(ms(1_200)), "the arrested sinus node does not fire any more");
}

#[test]
fn a_late_input_counts_from_the_last_event() {
    let mut heart = plain();
    run(&mut heart, ms(1_020));
    assert_eq!(heart.pulse(SINUS, STRONG, ms(500)), Ok(PulseAnswer::Captured { due: ms(1_023) }));
    heart.beat(ATRIUM, ms(900), STEP).unwrap();
    assert_eq!(lines(&run(&mut heart, ms(1_020))), ["1020 atrium not captured by step 0, 2"]);
}

#[test]
fn an_earlier_now_counts_as_the_latest_one() {
    let mut heart = plain();
    assert_eq!(heart.poll(ms(2_000)).unwrap().at, ms(800));
    assert_eq!(heart.poll(Instant::ZERO).unwrap().at, ms(870), "2000 has been seen");
}

/// Two ways of the same length: the second wave joins, and neither way carries one back.
#[test]
fn simultaneous_waves_join() {
    let (from, to) = (SiteId::new(0), SiteId::new(1));
    let tract = TractParams::new(from, to, Fraction::ONE, Way::new(span(100)), Way::new(span(100)));
    let anatomy = Anatomy::new([SiteParams::new(span(50)); 2], [tract; 2], []).unwrap();
    let mut heart: Heart<'_, 2, 2, 0, 0> = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    heart.beat(from, ms(1_000), STEP).unwrap();
    let names = ["up", "down"];
    let log: Vec<String> = run(&mut heart, ms(5_000)).iter().map(|record| line(record, &names)).collect();
    assert_eq!(log, ["1000 up fires by step 0", "1100 down fires by tract 0", "1100 tract 1 joins"]);
}

/// Two ways of unequal length and tissue that recovers quickly: the wave comes back by the longer one and goes round for ever. Re-entry
/// has no code of its own.
#[test]
fn a_ring_of_two_ways_re_enters() {
    let (from, to) = (SiteId::new(0), SiteId::new(1));
    let short = TractParams::new(from, to, Fraction::ZERO, Way::new(span(100)), Way::new(span(100)).closed());
    let long = TractParams::new(from, to, Fraction::ZERO, Way::new(span(300)).closed(), Way::new(span(300)));
    let anatomy = Anatomy::new([SiteParams::new(span(200)); 2], [short, long], []).unwrap();
    let mut heart: Heart<'_, 2, 2, 0, 0> = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    heart.beat(from, ms(1_000), STEP).unwrap();
    let log = run(&mut heart, ms(9_000));
    assert!(intervals(&times(&log, from)).iter().all(|&cycle| cycle == 400.0));
    assert_eq!(times(&log, from).len(), 21);
}

#[test]
fn a_beat_of_the_junction_goes_both_ways() {
    let mut heart = Heart::new(&plain::ANATOMY_VA, &[], Instant::ZERO).unwrap();
    heart.arrest(SINUS_CELL, Instant::ZERO).unwrap();
    let log = run(&mut heart, ms(1_500));
    assert_eq!((times(&log, JUNCTION), times(&log, VENTRICLE)), (vec![1_200_000], vec![1_240_000]));
    assert_eq!((times(&log, ATRIUM), times(&log, SINUS)), (vec![1_350_000], vec![1_420_000]));
}
