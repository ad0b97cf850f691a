//! Hearts as timelines: what is done, and what is then seen.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    reason = "tests may"
)]

mod heart_common;

use heart_common::{line, ms, run, times};
use phase4::base::{Instant, Record};
use phase4::heart::{Heart, plain};

fn lines(log: &[Record]) -> Vec<String> {
    log.iter().map(|record| line(record, &plain::SITE_NAMES)).collect()
}

#[test]
fn a_sinus_beat_goes_down_to_the_apex() {
    let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO).unwrap();
    let log = run(&mut heart, ms(1_600));
    println!("{:#?}", lines(&log));
    assert_eq!(times(&log, plain::APEX).len(), 1);
}
