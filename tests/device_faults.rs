//! Every fault of the bank against the clean device: on its own smallest script the two differ, and nowhere before.
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

use phase4::base::{Channel, Deviation, Instant, MicroVolts, Mode, Program, Settings, Signal, Span};
use phase4::device::{Allowance, BANK, Device, Fault, FaultRow, Needs, PROBE_WIDTH, Probe, ReferenceDevice, Size};
use timeline::{Shown, at, at_ms, checked, ms, pulses_us, v};

/// What the bank's smallest sizes are stated for: a tolerance of 8 ms and an uncertainty of 1 ms.
const BENCH: Allowance = Allowance { interval: ms(9), edge: ms(9), ceiling: ms(291) };
const LOCKSTEP: Allowance = Allowance { interval: Span::ZERO, edge: Span::ZERO, ceiling: ms(292) };

/// VVI 60 /min, blanking 100 ms, refractory 250 ms.
fn p1() -> Settings {
    let mut settings = at(Mode::Vvi, 60);
    settings.refractory = ms(250);
    settings
}

/// The same with hysteresis at 50 /min.
fn p1h() -> Settings {
    let mut settings = p1();
    settings.hysteresis = at(Mode::Vvi, 50).lower.into();
    settings
}

fn program_for(row: &FaultRow) -> Program {
    checked(if row.needs == Needs::Hysteresis { p1h() } else { p1() })
}

/// Runs a device on a probe's script, as a bench would: signals coupled to each pulse.
fn run(device: &mut dyn Device, probe: &Probe, program: &Program, pulses: usize) -> Vec<u64> {
    let channel = program.paces().unwrap_or(Channel::Ventricular);
    let sensitivity = program.settings().sensitivity.0;
    let loud = Signal { peak: MicroVolts(2 * sensitivity), width: PROBE_WIDTH };
    let faint = Signal { peak: MicroVolts(sensitivity / 2), width: PROBE_WIDTH };
    let mut seen = Vec::new();
    let mut to_show: Vec<(Instant, Signal)> = Vec::new();
    while seen.len() < pulses {
        let pulse = device.next_at().expect("a pacing device waits for something");
        let next = to_show.first().map_or(pulse, |(at, _)| pulse.min(*at));
        if to_show.first().is_some_and(|(at, _)| *at == next) {
            let (at, signal) = to_show.remove(0);
            device.signal(channel, signal, at).expect("nothing is due before");
        }
        while let Some((at, _)) = device.poll(next) {
            seen.push(at.saturating_since(probe.start).as_micros());
            if seen.len() < pulses {
                to_show.extend(probe.beat.map(|after| (at.saturating_add(after), loud)));
                to_show.extend(probe.signal.map(|after| (at.saturating_add(after), if probe.faint { faint } else { loud })));
                to_show.sort_by_key(|(at, _)| *at);
            }
        }
    }
    seen
}

fn clean_and_faulty(program: Program, fault: Fault, probe: &Probe) -> (Vec<u64>, Vec<u64>) {
    let mut clean = ReferenceDevice::new(program, probe.start);
    let mut faulty = ReferenceDevice::with_fault(program, fault, probe.start);
    (run(&mut clean, probe, &program, 6), run(&mut faulty, probe, &program, 6))
}

#[test]
fn every_fault_shows_on_its_own_script() {
    for row in &BANK {
        for allowance in [LOCKSTEP, BENCH] {
            let program = program_for(row);
            let (fault, probe) = row.shown_under(&program, &allowance).expect("every fault shows under its program");
            let (clean, faulty) = clean_and_faulty(program, fault, &probe);
            let first = clean.iter().zip(&faulty).find(|(clean, faulty)| clean != faulty);
            let (clean, faulty) = first.unwrap_or_else(|| panic!("fault {} at {:?} does not show", row.id, fault.size()));
            let off = clean.abs_diff(*faulty);
            assert!(off > allowance.interval.as_micros(), "fault {} is off by {off} us only", row.id);
        }
    }
}

#[test]
fn the_smallest_sizes_on_a_bench_are_those_of_the_bank() {
    for row in &BANK {
        let (fault, _) = row.shown_under(&program_for(row), &BENCH).expect("every fault shows under its program");
        assert_eq!(fault.size(), row.smallest_on_bench, "fault {}", row.id);
    }
}

/// Pulses in milliseconds of the clean device and of the one with this fault, shown the same.
fn both(settings: Settings, fault: Fault, shown: &[Shown], until_ms: u64) -> (Vec<u64>, Vec<u64>) {
    let program = checked(settings);
    let millis = |mut device: ReferenceDevice| -> Vec<u64> {
        pulses_us(&mut device, shown, at_ms(until_ms)).into_iter().map(|at| at / 1_000).collect()
    };
    (millis(ReferenceDevice::new(program, Instant::ZERO)), millis(ReferenceDevice::with_fault(program, fault, Instant::ZERO)))
}

fn fault(id: u8) -> Fault {
    Fault::of_row(id).expect("in the bank")
}

fn sized(id: u8, size: Size) -> Fault {
    Fault::new(id, size).expect("in range")
}

/// A fault by number, a program, what is shown, and the pulses in milliseconds of the clean and of the faulty device.
type Timeline = (u8, Settings, Vec<Shown>, &'static [u64], &'static [u64]);

/// Each script of the bank by hand, each fault at its row's own size: what the clean device does, what the faulty one does.
#[test]
fn every_fault_does_what_its_line_says() {
    let timelines: [Timeline; 15] = [
        (1, p1(), v(&[600]), &[1_600, 2_600], &[1_000, 2_000, 3_000]),
        (3, p1(), v(&[1_200]), &[1_000, 2_000, 3_000], &[1_000, 2_200]),
        (4, p1(), v(&[1_060]), &[1_000, 2_000, 3_000], &[1_000, 2_060]),
        (5, p1(), v(&[]), &[1_000, 2_000, 3_000], &[1_001, 2_002]),
        (10, p1(), v(&[]), &[1_000, 2_000, 3_000], &[1_020, 2_040]),
        (13, p1(), v(&[1_000]), &[2_000, 3_000], &[1_000, 2_000, 3_000]),
        (15, p1(), v(&[]), &[1_000, 2_000, 3_000], &[1_000, 1_001, 2_000, 2_001, 3_000]),
        (16, p1h(), v(&[]), &[1_000, 2_000, 3_000], &[1_200, 2_400]),
        (17, p1h(), v(&[600]), &[1_800, 2_800], &[1_600, 2_600]),
        (21, p1(), v(&[600, 750]), &[1_600, 2_600], &[1_750, 2_750]),
        (22, p1(), v(&[1_150]), &[1_000, 2_000, 3_000], &[1_000, 2_150]),
        (23, p1(), v(&[1_235]), &[1_000, 2_000, 3_000], &[1_000, 2_235]),
        (25, p1(), v(&[1_030]), &[1_000, 2_000, 3_000], &[1_000, 2_030]),
        (26, p1(), v(&[1_290]), &[1_000, 2_290], &[1_000, 2_000, 3_000]),
        (
            69,
            p1(),
            v(&[]),
            &[1_000, 2_000, 3_000],
            &[250, 500, 750, 1_000, 1_250, 1_500, 1_750, 2_000, 2_250, 2_500, 2_750, 3_000],
        ),
    ];
    for (id, program, shown, clean, faulty) in timelines {
        assert_eq!(both(program, fault(id), &shown, 3_000), (clean.to_vec(), faulty.to_vec()), "fault {id}");
    }
}

#[test]
fn a_refractory_period_can_be_too_long_as_well() {
    let long = sized(23, Size::Shift(Deviation::from_millis(20)));
    let (clean, faulty) = both(p1(), long, &v(&[1_265]), 3_000);
    assert_eq!((clean, faulty), (vec![1_000, 2_265], vec![1_000, 2_000, 3_000]));
}

#[test]
fn a_blanked_signal_of_a_sense_is_no_business_of_the_pulses_blanking() {
    let (clean, faulty) = both(p1(), fault(25), &v(&[600, 630]), 3_000);
    assert_eq!(clean, faulty);
    let (clean, faulty) = both(p1(), fault(4), &v(&[600, 660]), 3_000);
    assert_eq!((clean, faulty), (vec![1_600, 2_600], vec![1_660, 2_660]));
}

/// A 16-bit register of milliseconds is full after 65.536 s: the cycle that is under way counts anew from there. One of
/// microseconds is full after 65.536 ms: 1 s leaves 16.96 ms in it. 32 bits last for 71 min 34.967 s, or 49.7 days. Derived.
#[test]
fn registers_wrap_where_their_bits_end() {
    let (clean, faulty) = both(p1(), fault(7), &[], 132_000);
    assert_eq!(clean.len(), 132);
    assert_eq!(faulty[..65], clean[..65]);
    assert_eq!(faulty[65..68], [66_536, 67_536, 68_536]);
    assert_eq!(faulty.iter().filter(|at| **at > 130_000).collect::<Vec<_>>(), [&130_536], "the second wrap, at 131 072 ms");

    let (_, faulty) = both(p1(), sized(7, Size::Span(Span::from_micros(65_536))), &[], 100);
    assert_eq!(faulty, [16, 33, 50, 67, 84]);

    for register in [1_u64 << 32, (1 << 32) * 1_000] {
        let start = Instant::from_micros(register - 2_500_000);
        let wrong = sized(8, Size::Span(Span::from_micros(register)));
        let mut device = ReferenceDevice::with_fault(checked(p1()), wrong, start);
        let after_start =
            |device: &mut ReferenceDevice| device.poll(Instant::MAX).map(|(at, _)| at.saturating_since(start).as_micros());
        let seen: Vec<_> = (0..5).filter_map(|_| after_start(&mut device)).collect();
        assert_eq!(seen, [1_000_000, 2_000_000, 3_500_000, 4_500_000, 5_500_000]);
    }
}

/// An expiry is lost to any signal in its tick, however faint, on either channel, and in a mode that senses nothing.
#[test]
fn an_expiry_is_lost_to_whatever_falls_into_its_tick() {
    let faint = |channel, at| vec![(channel, Signal { peak: MicroVolts(1), width: ms(1) }, at)];
    for mode in [Mode::Vvi, Mode::Voo, Mode::Aai, Mode::Aoo] {
        for channel in Channel::ALL {
            for (before, lost) in [(0, true), (999, true), (1_000, false)] {
                let onset = at_ms(1_000).saturating_sub(Span::from_micros(before));
                let (clean, faulty) = both(at(mode, 60), fault(12), &faint(channel, onset), 3_000);
                assert_eq!(clean, [1_000, 2_000, 3_000]);
                assert_eq!(faulty, if lost { vec![2_000, 3_000] } else { clean }, "{mode}, {before} us before");
            }
        }
    }
}

#[test]
fn a_fault_shows_only_where_its_program_lets_it() {
    let shows = |settings: Settings| -> Vec<u8> {
        let program = checked(settings);
        BANK.iter().filter(|row| row.shown_under(&program, &BENCH).is_some()).map(|row| row.id).collect()
    };
    let all: Vec<u8> = BANK.iter().map(|row| row.id).collect();
    let without_hysteresis: Vec<u8> = all.iter().copied().filter(|id| !matches!(id, 16 | 17)).collect();
    assert_eq!(shows(p1h()), all);
    assert_eq!(shows(p1()), without_hysteresis);
    assert_eq!(shows(at(Mode::Aai, 60)), without_hysteresis);
    for mode in [Mode::Aoo, Mode::Voo] {
        assert_eq!(shows(at(mode, 60)), [5, 7, 8, 10, 12, 15, 69]);
    }
    assert!(shows(at(Mode::Ooo, 60)).is_empty());

    // Blanking up to the end of refractory leaves no room for a refractory signal; hysteresis within the tolerance none for its own.
    let mut narrow = p1h();
    (narrow.blanking, narrow.hysteresis) = (ms(250), narrow.lower.into());
    assert!([3, 16, 17, 21, 22, 23].iter().all(|id| !shows(narrow).contains(id)));
}

#[test]
fn a_wrong_fault_is_refused_by_name() {
    let refused = |id, size| Fault::new(id, size).expect_err("refused").to_string();
    assert_eq!(refused(2, Size::Whole), "fault: no fault of this number in the bank");
    assert_eq!(refused(1, Size::Divisor(4)), "fault_size: this fault has a size of another measure");
    assert_eq!(refused(5, Size::Span(Span::ZERO)), "fault_size is 0, accepted is 1 to 1000000");
    assert_eq!(refused(23, Size::Shift(Deviation::ZERO)), "fault_size is 0, accepted is 1 to 1000000");
    assert_eq!(refused(69, Size::Divisor(0)), "fault_size is 0, accepted is 2 to 64");
    assert!(refused(7, Size::Span(ms(20))).starts_with("fault_size: a register counts microseconds or milliseconds"));
    assert_eq!(Fault::of_row(2), None);
    for row in &BANK {
        let fault = Fault::new(row.id, row.size).expect("a row's own size is in its range");
        assert_eq!((fault.id(), fault.size(), fault.row()), (row.id, row.size, row));
    }
}

#[test]
fn numbers_are_unique_and_rise() {
    assert!(BANK.windows(2).all(|pair| pair[0].id < pair[1].id));
}
