//! Properties of the whole loop: heart, lead, device, auditor and script together.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::float_arithmetic,
    clippy::expect_used,
    reason = "a test may panic"
)]

#[path = "whole_loop/bytes.rs"]
mod bytes;

use bytes::{Outcome, run};
use phase4::audit::Outcome as Answer;
use phase4::base::{Span, Stream, draw, draw_below};
use std::fs;

/// How many events the split property covers: 10⁵ by default, more by the environment variable `PHASE4_EVENTS`.
fn wanted() -> usize {
    std::env::var("PHASE4_EVENTS").map_or(100_000, |text| text.parse().expect("PHASE4_EVENTS is a number"))
}

fn random_bytes(seed: u64) -> Vec<u8> {
    (0..160).map(|n| draw(seed, Stream(7), n).to_le_bytes()[1]).collect()
}

fn no_false_alarm(what: &str, outcome: &Outcome) {
    let broken: Vec<_> = outcome.judgements.iter().filter(|judgement| judgement.outcome == Answer::Broken).collect();
    assert!(broken.is_empty(), "{what}: the reference device was failed: {broken:#?}");
}

/// Promise: splitting a poll changes not one bit. And the reference device, which is exact, is never failed.
#[test]
fn however_it_is_polled_the_loop_is_the_same() {
    let (mut events, mut ties, mut instants, mut loops) = (0, 0, 0, 0);
    let mut seed = 0;
    while events < wanted() {
        seed += 1;
        let bytes = random_bytes(seed);
        let Some(whole) = run(&bytes, None) else { continue };
        let slice = Span::from_micros(u64::from(draw_below(seed, Stream(8), 0, 700_000)) + 1);
        let split = run(&bytes, Some(slice)).expect("the same bytes");
        assert_eq!(whole, split, "bytes of seed {seed} in slices of {slice:?}");
        no_false_alarm(&format!("bytes of seed {seed}"), &whole);
        events += whole.records.len();
        ties += whole.ties;
        instants += whole.instants;
        loops += 1;
    }
    println!("{events} events in {loops} loops; {ties} of {instants} instants hold more than one");
    assert!(f64::from(ties) >= 0.2 * f64::from(instants), "too few ties to prove anything: {ties} of {instants}");
}

/// Every file of the corpus runs without a panic, and twice the same.
#[test]
fn the_corpus_runs() {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/corpus/whole_loop");
    let mut files: Vec<_> = fs::read_dir(folder).expect("the corpus").map(|entry| entry.expect("a file").path()).collect();
    files.sort();
    assert!(files.len() >= 16, "the corpus has {} files", files.len());
    let mut loops = 0;
    for file in files {
        let bytes = fs::read(&file).expect("a readable file");
        let outcome = run(&bytes, None);
        assert_eq!(outcome, run(&bytes, Some(Span::from_micros(99_991))), "{}", file.display());
        if let Some(outcome) = &outcome {
            loops += 1;
            no_false_alarm(&file.display().to_string(), outcome);
        }
    }
    assert!(loops >= 8, "only {loops} files of the corpus describe a loop");
}
