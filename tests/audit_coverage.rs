//! Coverage on a time line: what counts as a hit, what does not, and what stays out of the count.
//!
//! VVI at 60 per minute, hysteresis at 50, blanking 100 ms, refractory 250 ms, tolerance 8 ms, unless said otherwise.
#![allow(clippy::arithmetic_side_effects, clippy::panic, clippy::unwrap_used, reason = "tests may")]

mod judged;

use judged::{A, FAINT, LOUD, NEAR, V, at_60, at_ms, checked, end, ms, pulse_on, signal_on, vp, vvi, vvi_50};
use phase4::audit::coverage::{After, CellId, CellState, Column, Need, Stretch, WholeRun};
use phase4::audit::{AuditSettings, Auditor, Coverage};
use phase4::base::{Cause, CauseKind, Channel, Instant, Kind, Mode, Program, Record, Span};

/// Runs auditor and coverage side by side, as a bench does.
fn covered_by(program: &Program, settings: &AuditSettings, records: &[Record]) -> Coverage {
    let mut auditor = Auditor::<12>::new(program, settings, Instant::ZERO).unwrap();
    let mut coverage = Coverage::new(program, settings);
    let fetch = |auditor: &mut Auditor<12>, coverage: &mut Coverage, now: Instant| {
        while let Some(judgement) = auditor.poll(now) {
            coverage.judged(&judgement);
        }
    };
    for record in records {
        while let Some(at) = auditor.next_at().filter(|at| *at < record.at) {
            fetch(&mut auditor, &mut coverage, at);
        }
        coverage.record(record);
        auditor.observe(record);
        fetch(&mut auditor, &mut coverage, record.at);
    }
    coverage
}

fn covered(records: &[Record]) -> Coverage {
    covered_by(&vvi_50(), &AuditSettings::new(&vvi_50()), records)
}

const fn caused(record: Record, kind: CauseKind) -> Record {
    Record { cause: Cause::new(kind, 1), ..record }
}

/// A beat of the heart's own, and a premature one.
fn beat(at: u64) -> Record {
    caused(signal_on(V, at, LOUD), CauseKind::Conducted)
}

fn premature(at: u64) -> Record {
    caused(signal_on(V, at, LOUD), CauseKind::Focus)
}

/// A pulse with what the tissue made of it.
fn captured(at: u64) -> [Record; 2] {
    [vp(at), Record::new(at_ms(at + 2), Kind::Activated, 4, Cause::new(CauseKind::Pulse, V.number()))]
}

fn lost(at: u64) -> [Record; 2] {
    [vp(at), Record::new(at_ms(at), Kind::NotCaptured, 4, Cause::new(CauseKind::Pulse, V.number()))]
}

fn state(coverage: &Coverage, name: &str) -> CellState {
    coverage.state(CellId::from_name(name, coverage.channel()).unwrap())
}

#[test]
fn a_decided_hit_clear_of_both_ends_counts() {
    let coverage = covered(&[&captured(1000)[..], &[beat(1600), vp(2800), end(2900)]].concat());
    assert_eq!(state(&coverage, "VP/alert/R"), CellState::Hit);
    assert_eq!(state(&coverage, "VP/blanking/R"), CellState::Untried);
    // The pulse after the beat was judged: what it passed through in silence counts as empty.
    for window in ["blanking", "refractory", "alert", "last-100", "hysteresis"] {
        assert_eq!(state(&coverage, &format!("VS/{window}/empty")), CellState::Hit, "{window}");
    }
    assert_eq!(state(&coverage, "VP/blanking/empty"), CellState::Untried, "no pulse ended that cycle");
    assert!(!coverage.guessed());
}

#[test]
fn a_hit_near_an_end_or_undecided_proves_nothing() {
    let near_the_end = covered(&[&captured(1000)[..], &[beat(1093), vp(2000), end(2100)]].concat());
    assert_eq!(state(&near_the_end, "VP/blanking/R"), CellState::BandOnly);
    let undecided = covered(&[&captured(1000)[..], &[beat(1245), vp(2000), end(2100)]].concat());
    assert_eq!(state(&undecided, "VP/refractory/R"), CellState::BandOnly);
    let undecided = covered(&[&captured(1000)[..], &[beat(1245), vp(2445), end(2500)]].concat());
    assert_eq!(state(&undecided, "VP/refractory/R"), CellState::BandOnly);
    let decided = covered(&[&captured(1000)[..], &[signal_on(V, 1150, NEAR), vp(2000), end(2100)]].concat());
    assert_eq!(state(&decided, "VP/refractory/near"), CellState::Hit, "in refractory it makes no difference");
}

/// Whether a signal near the threshold was seen cannot be told when it comes, but by the pulse after it: where that is in its place, the
/// signal has tried the window it lay in.
#[test]
fn a_signal_near_the_threshold_counts_by_the_pulse_after_it() {
    for (pulse, also_silent) in [(2000, "VP/last-100/empty"), (2800, "VS/alert/empty")] {
        let coverage = covered(&[&captured(1000)[..], &[signal_on(V, 1600, NEAR), vp(pulse), end(2900)]].concat());
        assert_eq!(state(&coverage, "VP/alert/near"), CellState::Hit, "pulse at {pulse}");
        assert_eq!(state(&coverage, also_silent), CellState::Hit);
        assert_eq!(state(&coverage, "VS/blanking/near"), CellState::Untried, "it is no event of the cycle it began");
    }
}

#[test]
fn columns_tell_what_stood_behind_a_signal() {
    let coverage = covered(
        &[
            &captured(1000)[..],
            &[premature(1150), signal_on(V, 1500, FAINT), caused(signal_on(V, 1600, LOUD), CauseKind::Script)],
            &lost(2800),
            &[beat(3000), vp(3800), end(3900)],
        ]
        .concat(),
    );
    for name in ["VP/refractory/PVC", "VP/alert/sub", "VP/alert/PVC", "VP-lost/refractory/R", "VP-lost/alert/empty"] {
        assert_eq!(state(&coverage, name), CellState::Hit, "{name}");
    }
    assert_eq!(state(&coverage, "VP-lost/blanking/empty"), CellState::Hit);
    // The beat that a pulse itself made is no event of its cycle.
    let own = caused(signal_on(V, 1005, LOUD), CauseKind::Pulse);
    let own = Record { cause: Cause::new(CauseKind::Pulse, V.number()), ..own };
    let paced = covered(&[&captured(1000)[..], &[own, vp(2000), end(2100)]].concat());
    assert_eq!(state(&paced, "VP/blanking/empty"), CellState::Hit);
}

#[test]
fn signals_that_outlast_a_window_and_signals_together() {
    let mut wide = beat(1220);
    wide.b = 90_000;
    let coverage = covered(&[&captured(1000)[..], &[wide, vp(2000), end(2100)]].concat());
    assert_eq!(state(&coverage, "VP/refractory/straddle"), CellState::Hit);
    assert_eq!(state(&coverage, "VP/refractory/R"), CellState::Hit);
    let together = covered(&[&captured(1000)[..], &[beat(1150), premature(1151), vp(2000), end(2100)]].concat());
    assert_eq!(state(&together, "VP/refractory/two"), CellState::Hit);
}

#[test]
fn windows_too_narrow_are_void_and_out_of_the_count() {
    let mut settings = at_60(Mode::Vvi);
    settings.blanking = ms(14);
    let program = checked(settings);
    let coverage = Coverage::new(&program, &AuditSettings::new(&program));
    assert_eq!(state(&coverage, "VS/blanking/PVC"), CellState::Void);
    let wider = Coverage::new(&vvi(), &AuditSettings::new(&vvi()));
    // Blanking asks for four cells after each of three anchors.
    assert_eq!(wider.score().required - coverage.score().required, 12);
    assert!(coverage.rows().any(|row| row.stretch == Stretch::Blanking && row.void));
}

#[test]
fn a_stimulus_that_does_not_exist_stays_in_the_count() {
    let coverage = Coverage::new(&vvi(), &AuditSettings::new(&vvi()));
    assert_eq!(state(&coverage, "VS/alert/T"), CellState::NoStimulus);
    let missing = coverage.cells().filter(|cell| coverage.state(*cell) == CellState::NoStimulus);
    let counted = missing.filter(|cell| coverage.need(*cell) == Need::Required).count();
    assert!(counted > 0);
    // Rows V1 to V4 of the table hold 4, 6, 11 and 8 required cells, after each of three anchors; four cells belong to the whole run.
    assert_eq!(coverage.score().required, 3 * (4 + 6 + 11 + 8) + 4);
    assert_eq!(Coverage::new(&vvi_50(), &AuditSettings::new(&vvi_50())).score().required, 3 * (4 + 6 + 11 + 8) + 2 + 4);
}

#[test]
fn an_edge_is_tried_from_both_sides() {
    // Bands of 8 ms: before 250 from 226 to 242, beyond it from 258 to 274; at the end of the escape interval from 976 and to 1024.
    let program = vvi();
    let coverage = covered_by(
        &program,
        &AuditSettings::new(&program),
        &[
            &captured(1000)[..],
            &[beat(1230)],
            &captured(2000),
            &[beat(2270)],
            &captured(3270),
            &[beat(4250)],
            &captured(5250),
            &captured(6250),
            &[beat(6265)],
            &captured(7250),
            &[end(7300)],
        ]
        .concat(),
    );
    let tried: Vec<_> = coverage
        .edges()
        .filter(|edge| edge.before > 0 || edge.beyond > 0)
        .map(|edge| (edge.after, edge.at, edge.column, edge.before, edge.beyond))
        .collect();
    let edge = |at, before, beyond| (After::CapturedPulse, ms(at), Column::Beat, before, beyond);
    assert_eq!(tried, [edge(250, 1, 1), edge(1000, 1, 1)]);
    assert_eq!((coverage.edge_score().hit, coverage.edge_score().required), (2, 18));
}

#[test]
fn the_run_as_a_whole() {
    let hits = |coverage: &Coverage, cell: WholeRun| coverage.whole_run().find(|(one, _)| *one == cell).unwrap().1;
    let coverage = covered(&[&captured(1000)[..], &[beat(1600), beat(1870), vp(3070), end(3100)]].concat());
    assert_eq!(hits(&coverage, WholeRun::FirstCycle), 1);
    assert_eq!(hits(&coverage, WholeRun::FastestSenses), 1);
    assert_eq!(hits(&coverage, WholeRun::LongestSilence), 1);
    assert_eq!(hits(&coverage, WholeRun::Wrap), 0);
    let start = Instant::from_micros((1 << 32) - 500_000);
    let program = vvi();
    let mut auditor = Auditor::<12>::new(&program, &AuditSettings::new(&program), start).unwrap();
    let mut coverage = Coverage::new(&program, &AuditSettings::new(&program));
    for at in [1000, 2000] {
        let pulse = Record { at: start.saturating_add(Span::from_millis(at)), ..vp(at) };
        coverage.record(&pulse);
        auditor.observe(&pulse);
        while let Some(judgement) = auditor.poll(pulse.at) {
            coverage.judged(&judgement);
        }
    }
    assert_eq!(hits(&coverage, WholeRun::Wrap), 1);
    assert!(coverage.guessed(), "no record says whether the first pulse captured");
}

#[test]
fn other_modes() {
    let aai = checked(at_60(Mode::Aai));
    let settings = AuditSettings::new(&aai);
    let premature = caused(signal_on(A, 1600, LOUD), CauseKind::Focus);
    let ap = |at| pulse_on(A, at);
    let coverage = covered_by(&aai, &settings, &[ap(1000), premature, ap(2600), end(2700)]);
    assert_eq!(state(&coverage, "AP/alert/PAC"), CellState::Hit);
    assert_eq!(coverage.channel(), Channel::Atrial);
    // Asynchronous modes have whole cycles only, and nothing but silence and signals without effect in them.
    let voo = checked(at_60(Mode::Voo));
    let coverage = covered_by(&voo, &AuditSettings::new(&voo), &[&captured(1000)[..], &captured(2000), &[end(2700)]].concat());
    assert_eq!(state(&coverage, "VP/cycle/empty"), CellState::Hit);
    assert_eq!(state(&coverage, "VP/cycle/R"), CellState::Impossible);
    assert_eq!(coverage.score().required, 2 + 3);
    let off = checked(at_60(Mode::Ooo));
    assert_eq!(Coverage::new(&off, &AuditSettings::new(&off)).score().required, 0);
}
