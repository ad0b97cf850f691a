//! Judging: a run's own log gives its verdict, a blind judge is found out, and what is required must be hit.
#![allow(clippy::panic, clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may")]

mod common;

use common::{SCENARIOS, parsed, ran, root, shipped};
use phase4::audit::{RuleId, RuleSet};
use phase4_host::assemble::{Outcome, run_data};
use phase4_host::judge::judge;
use phase4_host::log_file::{CsvLog, JsonLog, Usual, parse};
use phase4_host::output::{Summary, sentence};
use phase4_host::run::names;
use phase4_host::run_data::{RunData, Verdict};
use phase4_host::scenario::Scenario;
use phase4_host::tally::{Tally, number};
use proptest::prelude::*;

/// Writes a run's log in both forms, reads each back, and judges it.
fn judged_again(scenario: &Scenario, run: &RunData) -> [RunData; 2] {
    let names = names(scenario);
    let (mut json, mut csv) = (JsonLog::new(Vec::new()), CsvLog::new(Vec::new()).unwrap());
    for record in &run.records {
        json.write(record, &names).unwrap();
        csv.write(record, &names).unwrap();
    }
    [json.finish().unwrap(), csv.finish().unwrap()].map(|text| {
        let device = scenario.device.as_ref().unwrap();
        let mut log = parse(text.as_slice(), "log", &names, Usual::of(&device.program)).unwrap_or_else(|no| panic!("{no}"));
        let hash = number(&mut log.records);
        let mut tally = Tally::default();
        log.records.iter().for_each(|record| tally.take(record));
        let judged = judge(&log, scenario).unwrap();
        let outcome = Outcome { command: run.command.clone(), tally, hash, records: log.records, judged };
        run_data(scenario, outcome, RuleSet::EMPTY).unwrap()
    })
}

fn assert_same(run: &RunData, again: &RunData) {
    assert_eq!(again.records, run.records);
    assert_eq!(again.judgements, run.judgements);
    assert_eq!(Summary::of(again).to_json(), Summary::of(run).to_json());
}

#[test]
fn a_log_read_back_is_judged_as_its_run_was() {
    for name in SCENARIOS {
        let scenario = shipped(name);
        if scenario.device.is_some() {
            let run = ran(&scenario, scenario.seed, RuleSet::EMPTY);
            judged_again(&scenario, &run).iter().for_each(|again| assert_same(&run, again));
        }
    }
}

/// Scenarios of every sort that this version can write, most of them untidy.
fn some_scenario() -> impl Strategy<Value = String> {
    let mode = prop_oneof![Just("VVI"), Just("AAI"), Just("VOO"), Just("AOO"), Just("OOO")];
    let fault = prop_oneof![
        3 => Just(String::new()),
        2 => proptest::sample::select(vec![1, 3, 4, 5, 10, 12, 13, 15, 16, 17, 21, 22, 23, 25, 26, 69]).prop_map(|n| format!("fault = {n}\n")),
    ];
    let hysteresis = prop_oneof![Just(""), Just("hysteresis_rate = \"45 /min\"\n")];
    let peak = prop_oneof![Just("8 mV"), Just("2.5 mV"), Just("1 mV")];
    let guard = prop_oneof![
        Just(""),
        Just("uncertainty = \"1 ms\"\ndecision = \"guarded\"\n"),
        Just("tolerance = { share = \"1 %\", tick = \"1 ms\" }\n")
    ];
    let step = prop_oneof![
        Just("when = \"after V signal + [200..900] ms\"\nact = \"beat ventricle\"\ntimes = 9"),
        Just("when = \"after AP + [10..600/37] ms\"\nact = \"signal A 2.5 mV\""),
        Just("when = \"edge(refractory) + [-20..20/4] ms after VP\"\nact = \"signal V 4 mV\""),
        Just("when = \"edge(lower_rate) + [-9..9/1] ms after VP\"\nact = \"signal V 3 mV\""),
        Just("when = \"at 9 s\"\nact = \"quiet\""),
        Just("when = \"at 11 s\"\nact = \"lead V peak 0.5 mV\""),
        Just("when = \"every 3 s\"\nact = \"signal V 2 mV\""),
        Just("when = \"no VP for 4 s\"\nact = \"shut atrium-junction\""),
        Just("when = \"at 21 s\"\nact = \"end\""),
    ];
    (mode, 40..90_u32, 50..110_u32, fault, hysteresis, peak, guard, proptest::collection::vec(step, 0..3)).prop_map(
        |(mode, lower, sinus, fault, hysteresis, peak, guard, steps)| {
            let hysteresis = if lower > 45 { hysteresis } else { "" };
            let steps: String = steps.iter().map(|step| format!("[[step]]\n{step}\n")).collect();
            format!(
                "[run]\nlength = \"30 s\"\n[heart]\nsinus = \"{sinus} /min\"\n[lead.ventricle]\npeak = \"{peak}\"\n[lead.atrium]\n\
                 [device]\nmode = \"{mode}\"\nlower_rate = \"{lower} /min\"\n{hysteresis}{fault}[audit]\n{guard}{steps}"
            )
        },
    )
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(150))]

    #[test]
    fn any_log_read_back_is_judged_as_its_run_was(text in some_scenario(), seed in any::<u64>()) {
        let scenario = parsed(&text);
        let run = ran(&scenario, seed, RuleSet::EMPTY);
        judged_again(&scenario, &run).iter().for_each(|again| assert_same(&run, again));
    }
}

/// The seeds 1 to 60 draw every visible fault at least once.
const SEEDS: std::ops::RangeInclusive<u64> = 1..=60;

#[test]
fn a_judge_blind_to_a_rule_that_its_canary_needs_makes_the_run_void() {
    let scenario = shipped("premature");
    let mut found_out = RuleSet::EMPTY;
    for seed in SEEDS {
        let open = ran(&scenario, seed, RuleSet::EMPTY);
        let canary = open.canary.clone().unwrap();
        assert!(canary.caught && open.verdict == Verdict::Holds, "seed {seed}: {canary:?}");
        for rule in RuleId::ALL {
            let blind = ran(&scenario, seed, RuleSet::only(rule));
            let caught = blind.canary.as_ref().unwrap().caught;
            assert_eq!(blind.verdict.exit_code() == 4, !caught, "seed {seed}, blind to {}", rule.code());
            assert!(caught || canary.line == blind.canary.unwrap().line);
            if !caught {
                found_out = found_out.with(rule);
            }
        }
        // Blind to all that names it, no judge finds it.
        let all = RuleId::ALL.into_iter().fold(RuleSet::EMPTY, RuleSet::with);
        assert_eq!(ran(&scenario, seed, all).verdict.exit_code(), 4);
    }
    assert!(!found_out.is_empty(), "no single rule is needed by any canary");
}

fn with_require(cell: &str) -> RunData {
    let text = std::fs::read_to_string(root().join("examples/scenarios/premature.toml")).unwrap();
    let (before, rest) = text.split_once("require = [").unwrap();
    let (_, after) = rest.split_once(']').unwrap();
    ran(&parsed(&format!("{before}require = [\"{cell}\"]{after}")), 11, RuleSet::EMPTY)
}

#[test]
fn a_cell_asked_for_must_be_hit() {
    for (cell, code) in [("VP/alert/PVC", 0), ("VS/hysteresis/R", 0), ("longest-silence", 0), ("VP/alert/sub", 3), ("wrap", 3)] {
        assert_eq!(with_require(cell).verdict.exit_code(), code, "{cell}");
    }
}

#[test]
fn coverage_alone_never_changes_a_verdict() {
    let run = ran(&shipped("steady"), 1, RuleSet::EMPTY);
    let coverage = run.coverage.unwrap();
    assert!(coverage.hit < coverage.required);
    assert_eq!(run.verdict, Verdict::Holds);
}

/// A log of a device's own: signals and pulses at any instants, far apart and close together, with and without start and end.
fn wild_log() -> impl Strategy<Value = String> {
    let gap = prop_oneof![Just(0_u64), Just(1), 1..2_000_u64, 100_000..1_500_000_u64, 0..1_u64 << 33, 0..1_u64 << 60];
    let line = prop_oneof![
        Just("\"what\":\"pulse\",\"where\":\"V\"".to_owned()),
        Just("\"what\":\"pulse\",\"where\":\"A\"".to_owned()),
        (0..9_000_u32).prop_map(|peak| format!("\"what\":\"signal\",\"where\":\"V\",\"peak_uv\":{peak},\"width_us\":4294967295")),
        Just("\"what\":\"activated\",\"where\":\"apex\",\"cause\":\"pulse V\"".to_owned()),
    ];
    let first = prop_oneof![Just(0_u64), 0..1_u64 << 40, Just(u64::MAX), Just((1 << 32) - 5)];
    (first, any::<bool>(), any::<bool>(), proptest::collection::vec((gap, line), 0..60)).prop_map(
        |(first, starts, ends, lines)| {
            let mut at = first;
            let mut text = String::new();
            if starts || lines.is_empty() {
                text.push_str(&format!("{{\"at_us\":{at},\"what\":\"start\",\"where\":\"run\"}}\n"));
            }
            for (gap, line) in lines {
                at = at.saturating_add(gap);
                text.push_str(&format!("{{\"at_us\":{at},{line}}}\n"));
            }
            if ends {
                text.push_str(&format!("{{\"at_us\":{at},\"what\":\"end\",\"where\":\"run\",\"reason\":\"length reached\"}}\n"));
            }
            text
        },
    )
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn any_log_gets_a_verdict_at_once(text in wild_log(), scenario in some_scenario()) {
        let scenario = parsed(&scenario);
        let names = names(&scenario);
        let mut log = parse(text.as_bytes(), "log", &names, Usual::default()).unwrap_or_else(|no| panic!("{no}"));
        let hash = number(&mut log.records);
        let mut tally = Tally::default();
        log.records.iter().for_each(|record| tally.take(record));
        let began = std::time::Instant::now();
        let judged = judge(&log, &scenario).unwrap();
        prop_assert!(began.elapsed() < std::time::Duration::from_secs(2), "{text}");
        let outcome = Outcome { command: String::new(), tally, hash, records: log.records, judged };
        let run = run_data(&scenario, outcome, RuleSet::EMPTY).unwrap();
        prop_assert!(!sentence(&run).is_empty());
        prop_assert!(Summary::of(&run).to_json().len() > 100);
        prop_assert!(phase4_host::report::page(&run).len() < 1_000_000);
    }
}
