//! What the tests of the host share.
#![allow(dead_code, reason = "each test uses its part")]
#![allow(clippy::panic, clippy::unwrap_used, reason = "a test may")]

use phase4::audit::RuleSet;
use phase4_host::assemble::{Outcome, run_data};
use phase4_host::refusal::Source;
use phase4_host::run::{Finished, Order, run};
use phase4_host::run_data::RunData;
use phase4_host::scenario::Scenario;
use std::path::{Path, PathBuf};
use std::sync::atomic::AtomicBool;

/// The six scenarios that are shipped.
pub(crate) const SCENARIOS: [&str; 6] =
    ["steady", "conduction-returns", "arrest-escape", "premature", "recorded", "faulty-device"];

/// The project's folder.
pub(crate) fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// A shipped scenario, named as a user in the project's folder would name it.
pub(crate) fn shipped(name: &str) -> Scenario {
    let file = format!("examples/scenarios/{name}.toml");
    let text = std::fs::read_to_string(root().join(&file)).unwrap();
    Scenario::parse(Source::new(file, text), &root().join("examples/scenarios")).unwrap()
}

/// A scenario from its text.
pub(crate) fn parsed(text: &str) -> Scenario {
    Scenario::parse(Source::new("scenario.toml", text), Path::new(""))
        .unwrap_or_else(|refusal| panic!("{}", refusal.render(false)))
}

/// Runs a scenario in this process, keeping everything.
pub(crate) fn ran(scenario: &Scenario, seed: u64, blind: RuleSet) -> RunData {
    let stop = AtomicBool::new(false);
    let mut records = Vec::new();
    let order = Order { seed, blind, stop: &stop, keep: true };
    let keep = |record: &_| {
        records.push(*record);
        Ok(())
    };
    let Finished { tally, hash, judged } = run(scenario, order, keep, |_| ()).unwrap();
    let outcome = Outcome { command: "phase4 run scenario.toml".to_owned(), tally, hash, records, judged };
    run_data(scenario, outcome, blind).unwrap()
}
