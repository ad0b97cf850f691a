//! The reference device on a time line: timing worked by hand, each with where it comes from and how sure that is.
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

use phase4::base::{Channel, Edge, Instant, Interval, MicroVolts, Mode, Rate, Settings, Signal, Span, Straddle, Tie};
use phase4::device::{Device, Fault, ReferenceDevice, Size};
use timeline::{LOUD, Shown, a, at, at_ms, checked, ms, pulses, pulses_us, v};

fn with_hysteresis(mut settings: Settings, per_minute: u16) -> Settings {
    settings.hysteresis = Some(Interval::from_rate_nearest(Rate::per_minute(per_minute)));
    settings
}

/// The pulse of this number, counted from 1, of an undisturbed device; in microseconds.
fn nth_pulse(mut device: ReferenceDevice, number: u64) -> u64 {
    let mut last = Instant::ZERO;
    for _ in 0..number {
        (last, _) = device.poll(Instant::MAX).expect("it paces for ever");
    }
    last.as_micros()
}

fn undisturbed(lower: Interval) -> ReferenceDevice {
    ReferenceDevice::new(checked(Settings::new(Mode::Voo, lower)), Instant::ZERO)
}

/// The lower rate interval is 60 000 ms over the rate. Derived.
#[test]
fn a_rate_is_paced_at_its_interval() {
    let published = [
        (30, 2_000.0),
        (40, 1_500.0),
        (45, 1_333.333),
        (50, 1_200.0),
        (60, 1_000.0),
        (65, 923.077),
        (70, 857.143),
        (72, 833.333),
        (75, 800.0),
        (80, 750.0),
        (85, 705.882),
        (90, 666.667),
        (100, 600.0),
        (120, 500.0),
        (150, 400.0),
        (175, 342.857),
    ];
    for (rate, millis) in published {
        let interval = nth_pulse(undisturbed(Interval::from_rate_nearest(Rate::per_minute(rate))), 1) as f64 / 1_000.0;
        assert!((interval - millis).abs() <= 0.001, "{rate} per minute: {interval} ms");
    }
}

/// The same in ticks of 1/32 768 s, to nearest: 32 768, 30 247, 28 087, 11 235. Derived.
#[test]
fn a_rate_in_ticks_of_a_watch_crystal() {
    for (rate, ticks) in [(60, 32_768), (65, 30_247), (70, 28_087), (175, 11_235)] {
        let micros = nth_pulse(undisturbed(Interval::from_rate_nearest(Rate::per_minute(rate))), 1);
        assert_eq!((micros * 32_768 + 500_000) / 1_000_000, ticks, "{rate} per minute");
    }
}

/// The reset set of a publicly released pacemaker system specification for certification research (2007) is VVI at 65 /min
/// ± 8 ms: 915.077 to 931.077 ms. Limits checked in a public transcription of it.
#[test]
fn the_reset_set_lies_in_the_middle_of_its_limits() {
    let micros = nth_pulse(ReferenceDevice::new(checked(at(Mode::Vvi, 65)), Instant::ZERO), 1);
    assert_eq!((micros - 8_000, micros + 8_000), (915_077, 931_077));
}

/// VVI 60 /min without a beat paces each second, and VOO 60 /min does so whatever the heart does. Derived.
#[test]
fn nothing_sensed_nothing_changed() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &[], 3_000), [1_000, 2_000, 3_000]);
    let beats = v(&[100, 400, 700, 999, 1_000, 1_001, 1_500, 2_400]);
    assert_eq!(pulses(at(Mode::Voo, 60), &beats, 3_000), [1_000, 2_000, 3_000]);
}

/// VVI 60 /min, refractory 320 ms: a beat at 319 ms is refractory, one at 320 ms is sensed. Derived.
#[test]
fn the_end_of_refractory_lies_outside() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[319]), 1_400), [1_000]);
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[320]), 1_400), [1_320]);
}

/// VVI 60 /min with beats at 700, 1800 and 3100 ms: sensed, refractory, sensed. Derived.
#[test]
fn a_sense_restarts_the_cycle() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[700, 1_800, 3_100]), 4_100), [1_700, 2_700, 4_100]);
}

/// The same with hysteresis at 50 /min: 1200 ms after a sense, 1000 ms after a pulse. Derived; that hysteresis follows a sense
/// and not a pulse is checked in the transcription named above.
#[test]
fn hysteresis_follows_a_sense_and_no_pulse() {
    let program = with_hysteresis(at(Mode::Vvi, 60), 50);
    assert_eq!(pulses(program, &v(&[700, 1_800, 3_100]), 5_000), [3_000, 4_000, 5_000]);
    assert_eq!(pulses(program, &v(&[1_800]), 4_000), [1_000, 3_000, 4_000]);
}

/// A beat just inside the hysteresis interval inhibits, one just outside comes too late. Derived.
#[test]
fn hysteresis_leaves_the_heart_its_own_slower_rhythm() {
    let program = with_hysteresis(at(Mode::Vvi, 60), 50);
    assert_eq!(pulses(program, &v(&[700, 1_899, 3_098]), 4_297), Vec::<u64>::new());
    assert_eq!(pulses(program, &v(&[700, 1_901]), 3_000), [1_900, 2_900]);
}

/// VVI 60 /min and a heart of 75 /min that is not seen at all: the beats fall 800, 600, 400, 200, 0 ms after the last pulse, so
/// that the pulses sweep through the T wave. Derived.
#[test]
fn undersensing_walks_the_pulses_through_the_cycle() {
    let faint = Signal { peak: MicroVolts(2_499), width: ms(40) };
    let beats: Vec<Shown> = (1..=5).map(|n| (Channel::Ventricular, faint, at_ms(800 * n))).collect();
    let pulses = pulses(at(Mode::Vvi, 60), &beats, 4_000);
    assert_eq!(pulses, [1_000, 2_000, 3_000, 4_000]);
    let after_last_pulse = |beat: u64| beat - pulses.iter().filter(|pulse| **pulse <= beat).max().unwrap_or(&0);
    assert_eq!([800, 1_600, 2_400, 3_200, 4_000].map(after_last_pulse), [800, 600, 400, 200, 0]);
}

/// AAI 60 /min, refractory 250 ms, and the far-field R of each beat in the atrial channel: at + 200 ms it is refractory, at
/// + 260 ms it is sensed, and the pulses come 1260 ms apart. Derived.
#[test]
fn a_far_field_signal_beyond_refractory_slows_atrial_pacing() {
    let mut aai = at(Mode::Aai, 60);
    aai.refractory = ms(250);
    assert_eq!(pulses(aai, &a(&[200, 1_200]), 2_000), [1_000, 2_000]);
    assert_eq!(pulses(aai, &a(&[260, 1_520]), 2_520), [1_260, 2_520]);
}

/// A refractory period of 320 ms reaches to the tick before its end or to its end, as declared. Derived.
#[test]
fn both_readings_of_a_windows_end_to_the_tick() {
    for (edge, first_sensed) in [(Edge::Outside, 320_000), (Edge::Inside, 320_001)] {
        let mut program = at(Mode::Vvi, 60);
        program.edge = edge;
        for onset in 319_999..=320_002 {
            let shown = [(Channel::Ventricular, LOUD, Instant::from_micros(onset))];
            let mut device = ReferenceDevice::new(checked(program), Instant::ZERO);
            let first = pulses_us(&mut device, &shown, at_ms(1_400));
            let expected = if onset >= first_sensed { onset + 1_000_000 } else { 1_000_000 };
            assert_eq!(first, [expected], "{edge:?}, onset at {onset} us");
        }
    }
}

/// A beat on the tick of the expiry inhibits, or lies in the blanking of the pulse, as declared; a tick earlier and a tick later
/// both readings agree. Derived.
#[test]
fn both_readings_of_a_tie_to_the_tick() {
    for tie in [Tie::SenseFirst, Tie::ExpiryFirst] {
        let mut program = at(Mode::Vvi, 60);
        program.tie = tie;
        for onset in 999_999..=1_000_001 {
            let shown = [(Channel::Ventricular, LOUD, Instant::from_micros(onset))];
            let mut device = ReferenceDevice::new(checked(program), Instant::ZERO);
            let inhibits = onset < 1_000_000 || (onset == 1_000_000 && tie == Tie::SenseFirst);
            let expected = if inhibits { vec![onset + 1_000_000] } else { vec![1_000_000, 2_000_000] };
            assert_eq!(pulses_us(&mut device, &shown, at_ms(2_000)), expected, "{tie:?}, onset at {onset} us");
        }
    }
}

/// Two signals on one tick are one sense, whatever the reading of ties. Derived.
#[test]
fn two_signals_on_one_tick_are_one_sense() {
    for tie in [Tie::SenseFirst, Tie::ExpiryFirst] {
        let mut program = at(Mode::Vvi, 60);
        program.tie = tie;
        assert_eq!(pulses(program, &v(&[700, 700]), 1_700), [1_700]);
        let expected: &[u64] = if tie == Tie::SenseFirst { &[2_000] } else { &[1_000, 2_000] };
        assert_eq!(pulses(program, &v(&[1_000, 1_000]), 2_000), expected);
    }
}

/// Blanking equal to refractory, 250 ms; a signal begins 10 ms before its end and lasts for 40 ms. Its onset decides, or what
/// sticks out is seen at the first instant after blanking. Derived.
#[test]
fn both_readings_of_a_signal_that_outlasts_blanking() {
    let first = |straddle, edge, width| {
        let mut program = at(Mode::Vvi, 60);
        (program.refractory, program.blanking, program.straddle, program.edge) = (ms(250), ms(250), straddle, edge);
        let shown = [(Channel::Ventricular, Signal { width, ..LOUD }, at_ms(240))];
        pulses_us(&mut ReferenceDevice::new(checked(program), Instant::ZERO), &shown, at_ms(1_260))
    };
    assert_eq!(first(Straddle::Onset, Edge::Outside, ms(40)), [1_000_000]);
    assert_eq!(first(Straddle::End, Edge::Outside, ms(40)), [1_250_000]);
    assert_eq!(first(Straddle::End, Edge::Inside, ms(40)), [1_250_001]);
    assert_eq!(first(Straddle::End, Edge::Outside, ms(10)), [1_000_000], "it ends with blanking: nothing sticks out");
}

/// A detection delay of 15 ms: the cycle restarts at onset + 15 ms, refractory and ties are judged there, blanking at the
/// onset too. Derived.
#[test]
fn a_sense_comes_its_delay_after_the_onset() {
    let mut program = at(Mode::Vvi, 60);
    program.detect_delay = ms(15);
    assert_eq!(pulses(program, &v(&[600]), 1_615), [1_615]);
    assert_eq!(pulses(program, &v(&[304]), 1_400), [1_000], "sensed at 319 ms: refractory");
    assert_eq!(pulses(program, &v(&[305]), 1_400), [1_320], "sensed at 320 ms");
    assert_eq!(pulses(program, &v(&[985]), 2_000), [2_000], "sensed on the tick of the expiry");
    assert_eq!(pulses(program, &v(&[986]), 2_000), [1_000, 2_000], "blanked by the pulse before it is sensed");
    assert_eq!(pulses(program, &v(&[600, 610, 614]), 1_615), [1_615], "a sense on its way is one sense");
}

/// A peak of the sensitivity itself is sensed, a microvolt less is not. Our reading, common practice, no source.
#[test]
fn a_peak_at_the_sensitivity_is_sensed() {
    let first = |peak| {
        let shown = [(Channel::Ventricular, Signal { peak: MicroVolts(peak), width: ms(40) }, at_ms(600))];
        pulses(at(Mode::Vvi, 60), &shown, 1_600)
    };
    assert_eq!(first(2_500), [1_600]);
    assert_eq!(first(2_499), [1_000]);
}

/// A mode acts on its own chamber only, and OOO on none. Derived from the generic code (Bernstein et al., revision of 2002).
#[test]
fn a_mode_hears_and_paces_its_own_chamber() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &a(&[600]), 1_000), [1_000]);
    assert_eq!(pulses(at(Mode::Aai, 60), &v(&[600]), 1_000), [1_000]);
    for mode in Mode::ALL {
        let mut device = ReferenceDevice::new(checked(at(mode, 60)), Instant::ZERO);
        let pulse = device.poll(at_ms(1_000)).map(|(_, pulse)| pulse);
        assert_eq!(pulse.map(|pulse| pulse.channel), mode.paces(), "{mode}");
        assert_eq!(pulse.map(|pulse| (pulse.amplitude.0, pulse.width.as_micros())), mode.paces().map(|_| (3_500, 400)));
    }
    assert_eq!(ReferenceDevice::new(checked(at(Mode::Ooo, 60)), Instant::ZERO).next_at(), None);
}

/// The start counts as a pulse: refractory and lower rate interval run from there, hysteresis does not. Our convention.
#[test]
fn the_start_counts_as_a_pulse() {
    let start = at_ms(5_000);
    let mut device = ReferenceDevice::new(checked(with_hysteresis(at(Mode::Vvi, 60), 50)), start);
    assert_eq!(device.next_at(), Some(at_ms(6_000)));
    assert_eq!(pulses_us(&mut device, &v(&[5_319]), at_ms(6_000)), [6_000_000]);
}

/// Beats in 24 h at 60, 65 and 70 /min: 86 400, 93 600, 100 800, the last within a microsecond of its place. Derived.
#[test]
fn a_day_does_not_drift() {
    for (rate, beats) in [(60, 86_400), (65, 93_600), (70, 100_800)] {
        let device = undisturbed(Interval::from_rate_nearest(Rate::per_minute(rate)));
        assert!(nth_pulse(device, beats).abs_diff(86_400_000_000) <= 1, "{rate} per minute");
    }
}

/// A sense on its way when a pulse comes falls into that pulse's blanking; a signal after it that outlasts blanking is sensed none the less.
#[test]
fn a_sense_that_a_pulse_overtakes_hides_no_later_signal() {
    let mut program = at(Mode::Vvi, 60);
    (program.refractory, program.blanking, program.straddle, program.detect_delay) = (ms(250), ms(250), Straddle::End, ms(60));
    let long = Signal { width: ms(240), ..LOUD };
    // The first is detected at 1050, in the blanking of the pulse at 1000; the second ends at 1260 and is sensed at 1250.
    let shown = [(Channel::Ventricular, LOUD, at_ms(990)), (Channel::Ventricular, long, at_ms(1_020))];
    assert_eq!(pulses(program, &shown, 2_500), [1_000, 2_250]);
}

/// A scheduler in whole milliseconds is 7.2 s early after a day at 65 /min and 14.4 s early at 70 /min. Derived.
#[test]
fn a_whole_millisecond_scheduler_drifts_and_ours_does_not() {
    for (rate, whole_ms, beats, early_ms) in [(65, 923, 93_600, 7_200), (70, 857, 100_800, 14_400)] {
        let whole = Interval::from_span(ms(whole_ms)).expect("short enough");
        assert_eq!(nth_pulse(undisturbed(whole), beats), 86_400_000_000 - early_ms * 1_000);
        let ours = undisturbed(Interval::from_rate_nearest(Rate::per_minute(rate)));
        assert!(nth_pulse(ours, beats).abs_diff(86_400_000_000) <= 1);
    }
}

/// A clock off by 20 parts per million is 1728 ms off after a day at 60 /min. Derived.
#[test]
fn a_slow_clock_is_late_by_its_share_of_the_day() {
    let slow = Fault::new(10, Size::Millionths(20)).expect("in range");
    let program = checked(at(Mode::Vvi, 60));
    assert_eq!(nth_pulse(ReferenceDevice::with_fault(program, slow, Instant::ZERO), 86_400), 86_401_728_000);
}

/// Whatever is asked of it, a device stops at the end of the time line instead of spinning there.
#[test]
fn the_end_of_the_time_line_is_a_wall() {
    let start = Instant::MAX.saturating_sub(ms(1_500));
    let mut device = ReferenceDevice::new(checked(at(Mode::Vvi, 60)), start);
    assert_eq!(device.poll(Instant::MAX).map(|(at, _)| at), Some(Instant::MAX.saturating_sub(ms(500))));
    assert_eq!((device.poll(Instant::MAX), device.next_at()), (None, None));
}

/// Input older than what the device was told of counts as coming now.
#[test]
fn an_earlier_now_counts_as_the_latest() {
    let mut device = ReferenceDevice::new(checked(at(Mode::Vvi, 60)), Instant::ZERO);
    assert_eq!(device.poll(at_ms(700)), None);
    assert_eq!(device.signal(Channel::Ventricular, LOUD, at_ms(500)), Ok(()));
    assert_eq!(device.poll(at_ms(100)), None);
    assert_eq!(device.next_at(), Some(at_ms(1_700)));
    assert_eq!(device.poll(at_ms(1_700).saturating_sub(Span::from_micros(1))), None);
}
