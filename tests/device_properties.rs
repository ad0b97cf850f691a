//! What holds for the reference device whatever it is shown and however it is polled.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::panic,
    reason = "tests may"
)]

mod timeline;

use core::cell::Cell;
use phase4::base::{Channel, Edge, Instant, Interval, MicroVolts, Mode, Program, Rate, Settings, Signal, Span, Straddle, Tie};
use phase4::base::{Stream, draw_below};
use phase4::device::{BANK, Device, Fault, ReferenceDevice};
use proptest::collection::vec;
use proptest::prelude::*;
use proptest::test_runner::{Config, TestCaseResult, TestError, TestRunner};
use timeline::{Shown, checked, pulses_us};

/// Where the next signal begins.
#[derive(Debug, Clone, Copy)]
enum Onset {
    /// So long after the one before.
    Later(u64),
    /// On the tick of the one before.
    Same,
    /// When the device waits for something, or a tick beside it.
    AtNext(i8),
    /// At the end of a window counted from the last pulse or signal, or a tick beside it.
    AtEdge(bool, i8),
}

#[derive(Debug, Clone, Copy)]
struct Wave {
    onset: Onset,
    channel: Channel,
    peak: u32,
    width_us: u64,
}

fn any_wave() -> impl Strategy<Value = Wave> {
    let onset = prop_oneof![
        3 => (0..1_500_000_u64).prop_map(Onset::Later),
        2 => Just(Onset::Same),
        3 => Just(Onset::AtNext(0)),
        2 => (-1..=1_i8).prop_map(Onset::AtNext),
        2 => (any::<bool>(), -1..=1_i8).prop_map(|(refractory, off)| Onset::AtEdge(refractory, off)),
    ];
    let channel = prop_oneof![1 => Just(Channel::Atrial), 3 => Just(Channel::Ventricular)];
    let peak = prop_oneof![1 => Just(2_499_u32), 6 => 2_500..20_000_u32];
    (onset, channel, peak, 1_000..200_000_u64).prop_map(|(onset, channel, peak, width_us)| Wave {
        onset,
        channel,
        peak,
        width_us,
    })
}

fn any_program(modes: &'static [Mode]) -> impl Strategy<Value = Program> {
    let timing = (30_000..175_000_u32, 10_000..320_000_u64, 0..=1_000_u64, prop::option::of(1..=500_u64));
    let delay = prop_oneof![2 => Just(0), 1 => 1..40_000_u64];
    let readings = (any::<bool>(), any::<bool>(), any::<bool>(), delay);
    (prop::sample::select(modes), timing, readings).prop_map(|(mode, (milli, refractory, blanked, slower), readings)| {
        let lower = Interval::from_rate_nearest(Rate::from_milli_per_minute(milli));
        let (inside, expiry_first, end, delay) = readings;
        let mut settings = Settings::new(mode, lower);
        settings.hysteresis = slower.and_then(|ms| Interval::from_span(lower.ceil().saturating_add(Span::from_millis(ms))));
        settings.refractory = Span::from_micros(refractory);
        settings.blanking = Span::from_micros((refractory * blanked / 1_000).max(1_000));
        settings.edge = if inside { Edge::Inside } else { Edge::Outside };
        settings.tie = if expiry_first { Tie::ExpiryFirst } else { Tie::SenseFirst };
        settings.straddle = if end { Straddle::End } else { Straddle::Onset };
        settings.detect_delay = Span::from_micros(delay.min(settings.blanking.as_micros() - 1));
        checked(settings)
    })
}

/// A device in three kinds: clean, or with one of the bank's faults at its own size.
fn any_fault() -> impl Strategy<Value = Option<Fault>> {
    let ids: Vec<u8> = BANK.iter().map(|row| row.id).collect();
    prop_oneof![2 => Just(None), 1 => prop::sample::select(ids).prop_map(Fault::of_row)]
}

fn device(program: Program, fault: Option<Fault>) -> ReferenceDevice {
    match fault {
        Some(fault) => ReferenceDevice::with_fault(program, fault, START),
        None => ReferenceDevice::new(program, START),
    }
}

const START: Instant = Instant::from_micros(1_234_567);

/// Lays waves out in time against a device that is polled only where it must be; also the pulses of that run.
fn lay_out(program: Program, fault: Option<Fault>, waves: &[Wave]) -> (Vec<Shown>, Vec<u64>) {
    let mut device = device(program, fault);
    let (mut shown, mut pulses) = (Vec::new(), Vec::new());
    let (mut last, mut now) = (START, START);
    for wave in waves {
        let settings = program.settings();
        let beside = |at: Instant, off: i8| at.shifted(phase4::base::Deviation::from_micros(i64::from(off)));
        let at = match wave.onset {
            Onset::Later(micros) => now.saturating_add(Span::from_micros(micros)),
            Onset::Same => now,
            Onset::AtNext(off) => beside(device.next_at().unwrap_or(now), off),
            Onset::AtEdge(true, off) => beside(last.saturating_add(settings.refractory), off),
            Onset::AtEdge(false, off) => beside(last.saturating_add(settings.blanking), off),
        };
        now = at.max(now);
        let signal = Signal { peak: MicroVolts(wave.peak), width: Span::from_micros(wave.width_us) };
        let from = pulses.len();
        pulses.extend(pulses_until(&mut device, (wave.channel, signal, now)));
        last = pulses[from..].last().map_or(now, |micros| Instant::from_micros(*micros));
        shown.push((wave.channel, signal, now));
    }
    pulses.extend(pulses_us(&mut device, &[], now.saturating_add(TAIL)));
    (shown, pulses)
}

const TAIL: Span = Span::from_secs(5);

fn pulses_until(device: &mut ReferenceDevice, (channel, signal, at): Shown) -> Vec<u64> {
    let mut pulses = Vec::new();
    while let Err(not_yet) = device.signal(channel, signal, at) {
        pulses.extend(device.poll(not_yet.0).map(|(at, _)| at.as_micros()));
    }
    pulses
}

/// The same waves to a device that is polled at random instants, one answer at a time; checks the contract on the way.
fn polled_at_random(mut device: ReferenceDevice, shown: &[Shown], seed: u64) -> Result<Vec<u64>, TestCaseError> {
    let mut pulses = Vec::new();
    let (mut seen, mut drawn) = (START, 0);
    let mut below = |bound: u64| {
        drawn += 1;
        u64::from(draw_below(seed, Stream(0), drawn, u32::try_from(bound).expect("small")))
    };
    let mut poll = |device: &mut ReferenceDevice, now: Instant, seen: Instant| -> TestCaseResult {
        match device.poll(now) {
            Some((at, _)) => {
                prop_assert!(at <= now.max(seen));
                pulses.push(at.as_micros());
            }
            None => prop_assert!(device.next_at().is_none_or(|next| next > now.max(seen)), "waits for the past"),
        }
        Ok(())
    };
    for (channel, signal, at) in shown.iter().copied() {
        for _ in 0..below(4) {
            let apart = at.saturating_since(seen).as_micros();
            let next = device.next_at().unwrap_or(seen);
            let now = match below(4) {
                0 => next,
                1 => next.saturating_sub(Span::from_micros(1)),
                2 => seen.saturating_sub(Span::from_micros(below(1_000))), // time running backwards changes nothing
                _ => seen.saturating_add(Span::from_micros(below(apart + 1))),
            };
            // Within an instant the bench shows all signals before it polls.
            if now.max(seen) < at {
                poll(&mut device, now, seen)?;
                seen = seen.max(now);
            }
        }
        loop {
            let before = format!("{device:?}");
            match device.signal(channel, signal, at) {
                Ok(()) => break,
                Err(not_yet) => {
                    prop_assert!(not_yet.0 < at, "refused although nothing is due before");
                    prop_assert_eq!(Some(not_yet.0), device.next_at());
                    prop_assert_eq!(before, format!("{device:?}"), "changed by what it refused");
                    poll(&mut device, not_yet.0, seen)?;
                    seen = seen.max(not_yet.0);
                }
            }
        }
        seen = seen.max(at);
    }
    pulses.extend(pulses_us(&mut device, &[], seen.saturating_add(TAIL)));
    Ok(pulses)
}

fn run<S: Strategy>(cases: u32, strategy: &S, test: impl Fn(S::Value) -> TestCaseResult) {
    let mut runner = TestRunner::new(Config { cases, failure_persistence: None, ..Config::default() });
    match runner.run(strategy, test) {
        Ok(()) => {}
        Err(TestError::Fail(reason, case)) => panic!("{reason}\nsmallest case: {case:#?}"),
        Err(abort) => panic!("{abort}"),
    }
}

#[test]
fn polling_changes_nothing() {
    let (events, ties) = (Cell::new(0), Cell::new(0));
    let strategy = (any_program(&Mode::ALL), any_fault(), vec(any_wave(), 100..500), any::<u64>());
    run(400, &strategy, |(program, fault, waves, seed)| {
        let (shown, pulses) = lay_out(program, fault, &waves);
        prop_assert_eq!(&pulses, &polled_at_random(device(program, fault), &shown, seed)?);
        prop_assert_eq!(
            &pulses,
            &pulses_us(&mut device(program, fault), &shown, shown.last().map_or(START, |s| s.2).saturating_add(TAIL))
        );

        let mut instants: Vec<u64> = shown.iter().map(|(_, _, at)| at.as_micros()).chain(pulses.iter().copied()).collect();
        events.set(events.get() + instants.len());
        instants.sort_unstable();
        ties.set(ties.get() + instants.windows(2).filter(|pair| pair[0] == pair[1]).count());
        Ok(())
    });
    println!("{} events, {} of them on the instant of another", events.get(), ties.get());
    assert!(events.get() >= 100_000, "{} events are too few", events.get());
    assert!(ties.get() * 5 >= events.get(), "{} ties are too few", ties.get());
}

/// Asynchronous modes pace at the lower rate interval, whatever the heart does.
#[test]
fn asynchronous_pacing_does_not_depend_on_the_heart() {
    let strategy = (any_program(&[Mode::Aoo, Mode::Voo]), vec(any_wave(), 0..200));
    run(200, &strategy, |(program, waves)| {
        let (shown, pulses) = lay_out(program, None, &waves);
        let until = shown.last().map_or(START, |(_, _, at)| *at).saturating_add(TAIL);
        prop_assert_eq!(pulses, pulses_us(&mut device(program, None), &[], until));
        Ok(())
    });
}

/// What is shown on a channel that the mode does not sense might as well not be there.
#[test]
fn a_channel_that_is_not_sensed_is_not_heard() {
    let strategy = (any_program(&[Mode::Aai, Mode::Vvi]), vec(any_wave(), 0..200));
    run(200, &strategy, |(program, waves)| {
        let (mut shown, pulses) = lay_out(program, None, &waves);
        let until = shown.last().map_or(START, |(_, _, at)| *at).saturating_add(TAIL);
        shown.retain(|(channel, _, _)| Some(*channel) == program.senses());
        prop_assert_eq!(pulses, pulses_us(&mut device(program, None), &shown, until));
        Ok(())
    });
}

/// AAI and VVI, judged apart from the device's own code by walking through what was shown and what came: a pulse comes one escape
/// interval after the last pulse or sense, neither earlier nor later, and a sense is a signal that is high enough and
/// outside the refractory period of the last pulse or sense.
#[test]
fn inhibited_pacing_follows_the_last_event_by_its_escape_interval() {
    let strategy = (any_program(&[Mode::Aai, Mode::Vvi]), vec(any_wave(), 50..300));
    run(300, &strategy, |(program, waves)| {
        let mut plain = *program.settings();
        (plain.detect_delay, plain.straddle) = (Span::ZERO, Straddle::Onset);
        let program = checked(plain);
        let (shown, pulses) = lay_out(program, None, &waves);
        let signals =
            shown.iter().filter(|(channel, signal, _)| Some(*channel) == program.senses() && signal.peak >= plain.sensitivity);
        // Signals and pulses in order; within an instant as the tie is declared.
        let first = |sense: bool| sense == (plain.tie == Tie::SenseFirst);
        let mut line: Vec<(u64, bool, bool)> = signals.map(|(_, _, at)| (at.as_micros(), !first(true), true)).collect();
        line.extend(pulses.iter().map(|at| (*at, !first(false), false)));
        line.sort_unstable();

        let (mut anchor, mut escape) = (START.as_micros(), plain.lower);
        let escapes = (plain.lower, program.escape_after_sense());
        let refractory = plain.refractory.as_micros();
        for (at, _, is_signal) in line {
            let due = anchor + escape.nearest().as_micros();
            prop_assert!(at <= due + 1, "nothing at {due} after {anchor}");
            let is_refractory = at < anchor + refractory || (at == anchor + refractory && plain.edge == Edge::Inside);
            if !is_signal {
                prop_assert!(at + 1 >= due, "a pulse at {at} before {due}");
                (anchor, escape) = (at, escapes.0);
            } else if !is_refractory {
                (anchor, escape) = (at, escapes.1);
            }
        }
        Ok(())
    });
}

/// Beat n of an undisturbed rate falls within a microsecond of n times 60 s over the rate, for a whole day.
#[test]
fn no_rate_drifts_over_a_day() {
    run(20, &(30_000..175_000_u32), |milli| {
        let lower = Interval::from_rate_nearest(Rate::from_milli_per_minute(milli));
        let mut device = ReferenceDevice::new(checked(Settings::new(Mode::Voo, lower)), Instant::ZERO);
        let day = Instant::from_micros(86_400_000_000);
        let mut beat = 0_u128;
        while let Some((at, _)) = device.poll(day) {
            beat += 1;
            let exact = (beat * 60_000_000_000 + u128::from(milli) / 2) / u128::from(milli);
            prop_assert!(u128::from(at.as_micros()).abs_diff(exact) <= 1, "beat {beat} at {at:?}");
        }
        prop_assert!(beat >= 43_200);
        Ok(())
    });
}
