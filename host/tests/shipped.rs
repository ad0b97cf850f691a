//! The six shipped scenarios, pinned: hash, counts, scores and the first lines of each log. A change here is a change of what every
//! user sees, and belongs into the changelog.
#![allow(clippy::panic, clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may")]

mod common;

use common::{SCENARIOS, ran, shipped};
use phase4::audit::RuleSet;
use phase4_host::log_file::JsonLog;
use phase4_host::output::sentence;
use phase4_host::run::names;
use std::fmt::Write;

#[test]
fn the_logs_are_pinned() {
    for name in SCENARIOS {
        let scenario = shipped(name);
        let run = ran(&scenario, scenario.seed, RuleSet::EMPTY);
        let mut text = format!("{}\n", sentence(&run));
        let (hash, records) = (run.hash, run.records.len());
        writeln!(text, "hash {hash:016x} over {records} records; {} beats, {} pulses", run.beats, run.pulses).unwrap();
        writeln!(text, "{} decided, {} undecided", run.decided, run.undecided).unwrap();
        if let Some(coverage) = &run.coverage {
            writeln!(text, "{} of {} cells covered", coverage.hit, coverage.required).unwrap();
        }
        if let Some(canary) = &run.canary {
            writeln!(text, "canary caught: {}, {}", canary.caught, canary.line).unwrap();
        }
        for (rule, score) in run.scores.iter().filter(|(_, score)| score.checked > 0) {
            let worst = score.worst.map_or("-".to_owned(), |worst| format!("{} us", worst.as_micros()));
            let line = (rule.code(), score.checked, score.held, score.broken, score.undecided);
            writeln!(
                text,
                "{}: {} checked, {} held, {} broken, {} undecided, worst {worst}",
                line.0, line.1, line.2, line.3, line.4
            )
            .unwrap();
        }
        let names = names(&scenario);
        let mut log = JsonLog::new(Vec::new());
        run.records.iter().take(30).for_each(|record| log.write(record, &names).unwrap());
        text.push_str(&String::from_utf8(log.finish().unwrap()).unwrap());
        insta::assert_snapshot!(name, text);
    }
}

/// Every key and column that a user may need is in the reference beside the scenarios.
#[test]
fn the_reference_is_complete() {
    let reference = include_str!("../../examples/scenarios/README.md");
    let words: Vec<&str> = reference.split(|c: char| !c.is_alphanumeric() && c != '_').collect();
    for name in phase4_host::scenario::key_names().chain(phase4_host::log_file::COLUMNS) {
        assert!(words.contains(&name), "{name}");
    }
    for scenario in SCENARIOS {
        assert!(reference.contains(&format!("`{scenario}.toml`")), "{scenario}");
    }
}

/// A scenario that is printed anywhere can be run.
#[test]
fn printed_scenarios_are_valid() {
    for page in [include_str!("../../README.md"), include_str!("../../examples/scenarios/README.md")] {
        for block in page.split("```toml\n").skip(1) {
            let (text, _) = block.split_once("```").unwrap();
            common::parsed(text);
        }
    }
}
