//! The verdict in words, for every sort of verdict.

use super::support::{long, shipped, vvi, written};
use crate::report::wording::headline;
use crate::report::{facts::Facts, number::THIN};
use crate::run_data::{RunData, Verdict};

/// Both sentences, as one types them.
fn said(run: &RunData) -> (String, String) {
    let words = headline(&Facts::read(run));
    let plain = |text: &str| text.replace(THIN, " ").replace('\u{2212}', "-");
    (format!("{}. {}", words.word, plain(&words.sentence)), plain(&words.second.unwrap_or_default()))
}

const QUIET: &str = "[[step]]\nwhen = \"at 2 s\"\nact = \"quiet\"\n";

#[test]
fn a_run_that_holds_says_what_was_not_tried() {
    let (first, second) = said(&shipped("recorded.toml"));
    assert!(
        first.starts_with("Holds. In 5 min 1 s every rule that was tried held; ") && first.ends_with(" not tried."),
        "{first}"
    );
    assert!(
        second.starts_with("All ")
            && second.ends_with(" pulses that were judged came at their nominal instants, to the microsecond.")
    );
}

#[test]
fn a_shared_cause_is_named_only_if_no_held_case_has_it() {
    let steps = format!("{QUIET}[[step]]\nwhen = \"after 3rd VP + 600 ms\"\nact = \"beat apex\"\ntimes = 4\n");
    let seen = vvi("40 s", "lower_rate = \"60 /min\"\nhysteresis_rate = \"50 /min\"\nfault = 17", &steps);
    let (first, second) = said(&seen);
    assert!(first.starts_with("Broken. After a beat it has seen, Corncrake-3 paces 200.0 ms early, "), "{first}");
    assert!(first.ends_with(" times out of 5."), "{first}");
    assert!(second.contains("200.0 ms before its nominal instant, where rule HY1 allows 8 ms. "), "{second}");
    assert!(second.contains(" kept time, to the microsecond in "), "{second}");
}

#[test]
fn without_a_shared_cause_the_rule_is_named_with_its_count_and_size() {
    let (first, second) = said(&long(80, 8));
    assert_eq!(first, "Broken. Corncrake-3 broke LR1 10 times, by up to 23.1 ms.");
    assert!(second.starts_with("The worst is pulse 80 at "), "{second}");
    assert!(second.contains(": 31.1 ms after its nominal instant, where rule LR1 allows 8 ms."), "{second}");
}

#[test]
fn a_device_that_is_always_wrong_needs_no_cause() {
    let (first, _) = said(&vvi("20 s", "lower_rate = \"60 /min\"\nfault = 10", QUIET));
    assert!(first.starts_with("Broken. Corncrake-3 paces ") && first.contains(" ms late, "), "{first}");
}

#[test]
fn undecided_says_how_much_and_what_was_asked_for() {
    let mut run = shipped("steady.toml");
    (run.verdict, run.decided, run.undecided, run.decide_thousandths) = (Verdict::Undecided, 61, 15, 900);
    assert_eq!(said(&run).0, "Undecided. Only 61 of 76 cases could be decided; 90 per cent were asked for.");
    run.end_reason = 2;
    assert_eq!(said(&run).0, "Undecided. The run was interrupted after 2 min; what was tried until then held.");
    (run.end_reason, run.undecided) = (0, 0);
    assert_eq!(said(&run).0, "Undecided. Coverage that the scenario asks for was not reached.");
}

#[test]
fn void_names_the_fault_that_was_missed() {
    let mut run = shipped("steady.toml");
    run.verdict = Verdict::Void;
    if let Some(canary) = &mut run.canary {
        (canary.fault, canary.line, canary.caught) = (22, "refractory not started by a pulse".to_owned(), false);
    }
    let (first, second) = said(&run);
    assert_eq!(first, "Void. The judge missed its own planted fault (no. 22), so nothing here counts.");
    assert_eq!(second, "The fault was: refractory not started by a pulse.");
}

#[test]
fn unjudged_says_why() {
    let (first, second) = said(&shipped("arrest-escape.toml"));
    assert_eq!(first, "Unjudged. No device was connected.");
    assert!(second.starts_with("In 1 min 5 s the ventricle beat "), "{second}");
    let idle =
        written("[run]\nlength = \"5 s\"\n[heart]\nsinus = \"75 /min\"\n[device]\nmode = \"OOO\"\nlower_rate = \"60 /min\"\n");
    assert_eq!(said(&idle).0, "Unjudged. The device is set to OOO, which does nothing that could be judged.");
}

#[test]
fn no_word_that_promises_or_blames_is_used() {
    for name in ["steady.toml", "faulty-device.toml", "arrest-escape.toml"] {
        let (first, second) = said(&shipped(name));
        let words: Vec<String> =
            format!("{first} {second}").to_lowercase().split(|c: char| !c.is_alphabetic()).map(str::to_owned).collect();
        for unwelcome in ["error", "pass", "passed", "fail", "failed", "ok", "safe", "normal"] {
            assert!(!words.iter().any(|word| word == unwelcome), "{unwelcome} in {first} {second}");
        }
    }
}
