//! The loop without a device, and with one: what happens, in the order it happens.

use super::{Act, Amount, Bench, Coupling, EndReason, Entry, Event, Setup, Step, When, WindowEnd};
use crate::audit::AuditSettings;
use crate::base::{
    CauseKind, Channel, Deviation, Instant, Interval, Kind, MicroVolts, Mode, Program, Rate, Record, Settings, Signal, Span,
};
use crate::device::ReferenceDevice;
use crate::heart::{Ways, plain};
use crate::lead::LeadParams;
use std::vec::Vec;

type Loop<'a> = Bench<'a, ReferenceDevice, 5, 4, 3, 0, 8, 16>;

const fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

fn vvi_60() -> Program {
    Settings::new(Mode::Vvi, Interval::from_rate_nearest(Rate::per_minute(60))).check().unwrap()
}

fn setup<'a>(program: Option<Program>, steps: &'a [Step], length: Span) -> Setup<'a, 5, 4, 3, 0> {
    Setup {
        anatomy: &plain::ANATOMY,
        foci: &[],
        lead: LeadParams::PLAIN,
        judged: program.map(|program| (program, AuditSettings::new(&program))),
        steps,
        start: Instant::ZERO,
        length,
        seed: 1,
    }
}

fn bench<'a>(setup: &Setup<'a, 5, 4, 3, 0>) -> Loop<'a> {
    let device = setup.judged.map(|(program, _)| ReferenceDevice::new(program, setup.start));
    Bench::new(setup, device).unwrap()
}

fn records(bench: &mut Loop) -> Vec<Record> {
    let mut records = Vec::new();
    while let Some(entry) = bench.poll(Instant::MAX) {
        if let Entry::Record(record) = entry {
            records.push(record);
        }
    }
    records
}

/// Instants of one kind at one place, in whole milliseconds.
fn times(records: &[Record], kind: Kind, place: u8) -> Vec<u64> {
    let chosen = records.iter().filter(|record| record.kind == kind && record.place == place);
    chosen.map(|record| record.at.as_micros() / 1_000).collect()
}

const fn once(when: When, act: Act) -> Step {
    Step { when, act, times: 1 }
}

#[test]
fn a_quiet_heart_is_paced_at_the_lower_rate_from_the_start() {
    let quiet = [once(When::At(Span::ZERO), Act::Quiet)];
    let setup = setup(Some(vvi_60()), &quiet, ms(4_500));
    let records = records(&mut bench(&setup));
    assert_eq!(times(&records, Kind::Pulse, Channel::Ventricular.number()), [1_000, 2_000, 3_000, 4_000]);
    let (first, last) = (records.first().unwrap(), records.last().unwrap());
    assert_eq!((first.kind, first.a), (Kind::Start, 1));
    assert_eq!((last.kind, last.at, last.a), (Kind::End, Instant::from_micros(4_500_000), 0));
}

#[test]
fn conduction_fails_and_the_device_takes_over() {
    let steps = [
        once(When::At(ms(2_500)), Act::Shut(plain::ATRIUM_JUNCTION, Ways::Both)),
        once(When::At(ms(6_500)), Act::Open(plain::ATRIUM_JUNCTION, Ways::Forward)),
    ];
    let setup = setup(Some(vvi_60()), &steps, ms(9_000));
    let records = records(&mut bench(&setup));
    let paced = times(&records, Kind::Pulse, Channel::Ventricular.number());
    assert!(!paced.is_empty() && paced.iter().skip(1).all(|at| (2_500..7_500).contains(at)), "{paced:?}");
    assert_eq!(times(&records, Kind::Step, 0), [2_500]);
}

/// A step at a window's edge follows the program: here 5 ms before the refractory period ends, after each of the first two pulses.
#[test]
fn a_step_at_a_window_edge_is_resolved_from_the_program() {
    let coupling = Coupling { window: Some(WindowEnd::Refractory), shift: Amount::Fixed(Deviation::from_millis(-5)) };
    let when = When::After { event: Event::Pulse(Channel::Ventricular), nth: 1, coupling };
    let steps = [once(When::At(Span::ZERO), Act::Quiet), Step { when, act: Act::Beat(plain::APEX), times: 2 }];
    for (refractory, expected) in [(ms(250), [1_245, 2_245]), (ms(320), [1_315, 2_315])] {
        let mut settings = *vvi_60().settings();
        settings.refractory = refractory;
        let setup = setup(settings.check().ok(), &steps, ms(4_500));
        assert_eq!(times(&records(&mut bench(&setup)), Kind::Step, 1), expected);
    }
}

#[test]
fn a_sweep_has_a_value_for_each_act() {
    let shift = Amount::Sweep { from: Deviation::from_millis(500), to: Deviation::from_millis(400), step: ms(50) };
    let coupling = Coupling { window: None, shift };
    let when = When::After { event: Event::Pulse(Channel::Ventricular), nth: 1, coupling };
    let steps = [once(When::At(Span::ZERO), Act::Quiet), Step { when, act: Act::Beat(plain::APEX), times: 4 }];
    let setup = setup(Some(vvi_60()), &steps, Span::from_secs(10));
    let acts: Vec<u32> = records(&mut bench(&setup))
        .iter()
        .filter(|record| record.kind == Kind::Step && record.place == 1)
        .map(|record| record.b / 1_000)
        .collect();
    assert_eq!(acts, [500, 450, 400, 500]);
}

#[test]
fn silence_can_be_waited_for() {
    let when = When::Without { event: Event::Activation(plain::ATRIUM), span: ms(1_500) };
    let steps = [once(When::At(ms(2_000)), Act::Arrest(plain::SINUS_CELL)), once(when, Act::End)];
    let setup = setup(None, &steps, Span::from_secs(60));
    let mut bench = bench(&setup);
    let records = records(&mut bench);
    let last_atrial = *times(&records, Kind::Activated, plain::ATRIUM.row()).last().unwrap();
    assert_eq!(bench.ended(), Some(EndReason::Script));
    assert_eq!(records.last().unwrap().at.as_micros() / 1_000, last_atrial + 1_500);
}

/// Promise: the hash belongs to the run, not to what stores it.
#[cfg(feature = "std")]
#[test]
fn the_hash_does_not_depend_on_the_sink() {
    use super::{RecordWriter, Ring};
    let setup = setup(Some(vvi_60()), &[], Span::from_secs(20));
    let runs = || bench(&setup);
    let (mut to_nothing, mut to_ring, mut to_list, mut to_writer) = (runs(), runs(), runs(), runs());
    let (mut ring, mut list, mut writer) = (Ring::<16>::new(), Vec::new(), RecordWriter::new(Vec::new()));
    to_nothing.run(Instant::MAX, &mut ());
    to_ring.run(Instant::MAX, &mut ring);
    to_list.run(Instant::MAX, &mut list);
    to_writer.run(Instant::MAX, &mut writer);
    for other in [&to_ring, &to_list, &to_writer] {
        assert_eq!(to_nothing.log().hash(), other.log().hash());
    }
    assert!(ring.iter().eq(list.iter().skip(list.len() - 16)), "the ring holds the last 16");
    assert_eq!(ring.forgotten(), u64::try_from(list.len() - 16).unwrap());
    let bytes: Vec<u8> = list.iter().flat_map(Record::to_bytes).collect();
    assert_eq!(writer.finish().unwrap(), bytes, "the writer writes the canonical form");
}

#[test]
fn a_step_that_cannot_be_is_refused_by_its_row() {
    let refused =
        |steps: &[Step]| Bench::<ReferenceDevice, 5, 4, 3, 0, 8, 16>::new(&setup(None, steps, ms(1)), None).unwrap_err();
    let at = When::At(ms(1));
    let both = [once(at, Act::Arrest(plain::SINUS_CELL)), once(at, Act::Release(plain::SINUS_CELL))];
    assert_eq!((refused(&both).parameter, refused(&both).row), ("step", Some(1)));
    let coupling = Coupling { window: Some(WindowEnd::Lower), shift: Amount::Fixed(Deviation::ZERO) };
    let edge = [once(When::After { event: Event::Pulse(Channel::Atrial), nth: 1, coupling }, Act::End)];
    assert_eq!(refused(&edge).parameter, "when", "an edge without a program");
    assert_eq!(refused(&[Step { when: When::Every(Span::ZERO), act: Act::End, times: 1 }]).parameter, "when");
    assert_eq!(refused(&[once(at, Act::Beat(crate::base::SiteId::new(9)))]).parameter, "act");
    assert_eq!(refused(&[once(at, Act::End); 9]).parameter, "step");
}

/// A device that emits pulses without time passing is reported, not waited for.
#[test]
fn a_spinning_device_ends_the_run() {
    struct Spinning(crate::base::Pulse);
    impl crate::device::Device for Spinning {
        fn signal(&mut self, _: Channel, _: crate::base::Signal, _: Instant) -> Result<(), crate::base::NotYet> {
            Ok(())
        }
        fn poll(&mut self, now: Instant) -> Option<(Instant, crate::base::Pulse)> {
            (now >= Instant::from_micros(700_000)).then_some((now, self.0))
        }
        fn next_at(&self) -> Option<Instant> {
            Some(Instant::from_micros(700_000))
        }
    }
    let settings = *vvi_60().settings();
    let pulse = crate::base::Pulse { channel: Channel::Ventricular, amplitude: settings.amplitude, width: settings.width };
    let setup = setup(Some(vvi_60()), &[], Span::from_secs(20));
    let mut bench: Bench<'_, _, 5, 4, 3, 0, 8, 16> = Bench::new(&setup, Some(Spinning(pulse))).unwrap();
    bench.run(Instant::MAX, &mut ());
    assert_eq!(bench.ended(), Some(EndReason::Spinning));
    assert_eq!(bench.now(), Instant::from_micros(700_000));
}

#[test]
fn several_steps_may_show_signals_in_one_instant() {
    let wave = |peak| Act::Signal(Channel::Ventricular, Signal { peak: MicroVolts(peak), width: ms(10) });
    let steps = [
        once(When::At(Span::ZERO), Act::Quiet),
        once(When::At(ms(600)), wave(1_000)),
        once(When::At(ms(600)), wave(2_000)),
        once(When::At(ms(600)), wave(9_000)),
    ];
    let records = records(&mut bench(&setup(Some(vvi_60()), &steps, ms(1_700))));
    let shown = records.iter().filter(|record| record.kind == Kind::Signal && record.cause.kind == CauseKind::Script);
    let peaks: Vec<_> = shown.map(|record| (record.cause.id, record.a, record.at.as_micros())).collect();
    assert_eq!(peaks, [(1, 1_000, 600_000), (2, 2_000, 600_000), (3, 9_000, 600_000)]);
    assert_eq!(times(&records, Kind::Pulse, Channel::Ventricular.number()), [1_600], "the last one is sensed");
}
