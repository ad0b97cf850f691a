//! The bank of faults against the auditor: the clean device is never found wrong, each fault is found on its own smallest script,
//! and the first finding quotes one of the fault's rules.
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

use judged::{at_60, checked, judge_with, rate};
use phase4::audit::{AuditSettings, Auditor, Decision, Judgement, Outcome, RuleId, RuleSet, Tolerance};
use phase4::base::{Channel, Instant, MicroVolts, Mode, Program, Record, Signal, Span};
use phase4::device::{Allowance, BANK, Device, FaultRow, PROBE_WIDTH, Probe, ReferenceDevice};

/// The stream of a device on a probe's script: signals coupled to each pulse, shown before pulses of the same instant.
fn stream(device: &mut dyn Device, probe: &Probe, program: &Program, cycles: usize) -> Vec<Record> {
    let channel = program.paces().unwrap_or(Channel::Ventricular);
    let sensitivity = program.settings().sensitivity.0;
    let loud = Signal { peak: MicroVolts(2 * sensitivity), width: PROBE_WIDTH };
    let faint = Signal { peak: MicroVolts(sensitivity / 2), width: PROBE_WIDTH };
    let mut records = Vec::new();
    let mut to_show: Vec<(Instant, Signal)> = Vec::new();
    let mut pulses = 0;
    while pulses < cycles {
        let Some(pulse) = device.next_at() else { break };
        let next = to_show.first().map_or(pulse, |(at, _)| pulse.min(*at));
        while to_show.first().is_some_and(|(at, _)| *at == next) {
            let (at, signal) = to_show.remove(0);
            records.push(Record::signal(at, channel, signal, phase4::base::Cause::NONE));
            device.signal(channel, signal, at).expect("nothing is due before");
        }
        while let Some((at, pulse)) = device.poll(next) {
            records.push(Record::pulse(at, pulse));
            pulses += 1;
            to_show.extend(probe.beat.map(|after| (at.saturating_add(after), loud)));
            to_show.extend(probe.signal.map(|after| (at.saturating_add(after), if probe.faint { faint } else { loud })));
            to_show.sort_by_key(|(at, _)| *at);
        }
    }
    records
}

/// A way of judging: its name, what a device may then be off by, and the settings.
type Way = (&'static str, Allowance, fn(&Program) -> AuditSettings);

/// In lockstep, in process with tolerance, on a bench.
fn benches() -> [Way; 3] {
    let ms = Span::from_millis;
    [
        ("lockstep", Allowance { interval: Span::ZERO, edge: Span::ZERO, ceiling: ms(292) }, |program| {
            AuditSettings::new(program).with_tolerance(Tolerance::symmetric(Span::ZERO))
        }),
        ("in process", Allowance { interval: ms(8), edge: ms(8), ceiling: ms(292) }, AuditSettings::new),
        ("bench", Allowance { interval: ms(9), edge: ms(9), ceiling: ms(291) }, |program| {
            AuditSettings::new(program).with_uncertainty(Span::from_millis(1), Decision::Guarded)
        }),
    ]
}

fn programs() -> Vec<Program> {
    let mut programs = Vec::new();
    for mode in [Mode::Vvi, Mode::Aai, Mode::Voo] {
        for (per_minute, hysteresis) in [(60, None), (60, Some(50)), (72, None), (90, Some(65))] {
            let mut settings = at_60(mode);
            settings.lower = rate(per_minute);
            settings.hysteresis = hysteresis.map(rate);
            programs.push(checked(settings));
        }
    }
    programs
}

fn findings(program: &Program, settings: &AuditSettings, probe: &Probe, records: &[Record], blind: RuleSet) -> Vec<Judgement> {
    let mut auditor = Auditor::<12>::new(program, settings, probe.start).unwrap();
    auditor.blind(blind);
    let (judgements, _) = judge_with(auditor, records);
    judgements.into_iter().filter(|judgement| judgement.outcome == Outcome::Broken).collect()
}

fn each(mut check: impl FnMut(&FaultRow, &Program, &AuditSettings, &Probe, &[Record], &[Record], &str)) {
    for (name, allowance, settings) in benches() {
        for program in programs() {
            let settings = settings(&program);
            for row in &BANK {
                let Some((fault, probe)) = row.shown_under(&program, &allowance) else { continue };
                let cycles = 7;
                let clean = stream(&mut ReferenceDevice::new(program, probe.start), &probe, &program, cycles);
                let faulty = stream(&mut ReferenceDevice::with_fault(program, fault, probe.start), &probe, &program, cycles);
                let what = format!("{name}: fault {} ({}) at {:?}, {:?}", row.id, row.line, fault.size(), program.settings());
                check(row, &program, &settings, &probe, &clean, &faulty, &what);
            }
        }
    }
}

#[test]
fn the_clean_device_is_never_found_wrong() {
    each(|_, program, settings, probe, clean, _, what| {
        let found = findings(program, settings, probe, clean, RuleSet::EMPTY);
        assert!(found.is_empty(), "{what}\n{found:#?}");
    });
}

#[test]
fn every_fault_is_found_by_one_of_its_rules() {
    let mut rules = RuleSet::EMPTY;
    let mut tried = 0;
    let mut wrong = Vec::new();
    each(|row, program, settings, probe, _, faulty, what| {
        tried += 1;
        let found = findings(program, settings, probe, faulty, RuleSet::EMPTY);
        let Some(first) = found.first() else {
            wrong.push(format!("not found: {what}"));
            return;
        };
        let quoted: Vec<_> = first.also.with(first.rule).iter().collect();
        if !quoted.iter().any(|rule| row.rules.contains(&rule.code())) {
            wrong.push(format!("{quoted:?} instead of {:?}: {what}", row.rules));
        }
        rules = rules.with(first.rule).and(first.also);
    });
    assert!(wrong.is_empty(), "{} of {tried}:\n{}", wrong.len(), wrong.join("\n"));
    let idle: Vec<_> = RuleId::ALL.into_iter().filter(|rule| !rules.has(*rule)).map(RuleId::code).collect();
    println!("{tried} cases; rules that found none: {idle:?}");
}

/// Which rule each fault needs: dropped whole, it neither kills nor names, and no finding quotes a rule of the fault any more.
#[test]
fn a_blinded_rule_is_missed_by_some_fault() {
    let mut needed = RuleSet::EMPTY;
    each(|row, program, settings, probe, _, faulty, _| {
        for rule in RuleId::ALL {
            let found = findings(program, settings, probe, faulty, RuleSet::only(rule));
            let quoted = found.iter().fold(RuleSet::EMPTY, |quoted, finding| quoted.and(finding.also).with(finding.rule));
            assert!(!quoted.has(rule), "{} names although it is blind", rule.code());
            if !quoted.iter().any(|rule| row.rules.contains(&rule.code())) {
                needed = needed.with(rule);
            }
        }
    });
    let idle: Vec<_> = RuleId::ALL.into_iter().filter(|rule| !needed.has(*rule)).map(RuleId::code).collect();
    // A pause is a late pulse as well, a pulse in the vulnerable window an early one; no fault of these modes uses the wrong channel,
    // and a device that spins is reported by the bench.
    assert_eq!(idle, ["EN2", "EN3", "EN4", "EN6"]);
}
