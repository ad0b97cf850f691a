//! The reference device on a time line: published timing, worked by hand.
#![allow(clippy::arithmetic_side_effects, clippy::as_conversions, clippy::float_arithmetic, reason = "tests may")]

mod timeline;

use phase4::base::{Channel, Mode};
use timeline::{at, pulses, v};

/// VVI 60 /min without a beat paces each second, and VOO 60 /min does so whatever the heart does [derived].
#[test]
fn nothing_sensed_nothing_changed() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &[], 3_000), [1_000, 2_000, 3_000]);
    let beats = v(&[100, 400, 700, 999, 1_000, 1_001, 1_500, 2_400]);
    assert_eq!(pulses(at(Mode::Voo, 60), &beats, 3_000), [1_000, 2_000, 3_000]);
}

/// Refractory period 320 ms, half-open: a beat at 319 ms is refractory, one at 320 ms is sensed [derived].
#[test]
fn the_end_of_refractory_lies_outside() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[319]), 1_400), [1_000]);
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[320]), 1_400), [1_320]);
}

/// VVI 60 /min with beats at 700, 1800 and 3100 ms: sensed, refractory, sensed [derived].
#[test]
fn a_sense_restarts_the_cycle() {
    assert_eq!(pulses(at(Mode::Vvi, 60), &v(&[700, 1_800, 3_100]), 4_100), [1_700, 2_700, 4_100]);
    assert_eq!(Mode::Vvi.senses(), Some(Channel::Ventricular));
}
