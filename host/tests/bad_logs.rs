//! What a user is told who gives `judge` something that is not a log of one run: with the line, and without a panic.
#![allow(clippy::panic, clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may")]

mod common;

use common::parsed;
use phase4_host::log_file::{Usual, parse, read};
use phase4_host::run::names;
use phase4_host::scenario::Scenario;
use proptest::prelude::*;
use std::path::Path;

const PROGRAM: &str = "[run]\nlength = \"1 s\"\n[device]\nmode = \"VVI\"\nlower_rate = \"60 /min\"\n";

fn program() -> Scenario {
    parsed(PROGRAM)
}

fn told(log: &[u8]) -> Result<usize, String> {
    let scenario = program();
    let usual = scenario.device.as_ref().map(|device| Usual::of(&device.program)).unwrap_or_default();
    let log = parse(log, "out/log.jsonl", &names(&scenario), usual);
    log.map(|log| log.records.len()).map_err(|refusal| refusal.render(false))
}

fn refused(log: impl AsRef<[u8]>) -> String {
    told(log.as_ref()).unwrap_err()
}

const START: &str = "{\"at_us\":0,\"what\":\"start\",\"where\":\"run\",\"cause\":\"none\",\"seed\":1}\n";
const PULSE: &str = "{\"at_us\":1000000,\"what\":\"pulse\",\"where\":\"V\",\"cause\":\"none\"}\n";
const HEADER: &str = "at_us,what,where,cause,peak_uv\n";

macro_rules! told {
    ($($name:ident: $log:expr;)*) => {
        $(#[test]
        fn $name() {
            insta::assert_snapshot!(refused($log));
        })*
    };
}

told! {
    an_empty_log: "";
    a_log_of_blank_lines: "\n\n  \n";
    a_header_and_no_row: HEADER;
    a_log_cut_off: format!("{START}{}", &PULSE[..40]);
    a_row_cut_off: format!("{HEADER}0,start,run,none,\n5,sig");
    time_running_backwards: format!("{START}{PULSE}{}", PULSE.replace("1000000", "999999"));
    time_running_backwards_in_a_table: format!("{HEADER}7,pulse,V,none,\n5,pulse,V,none,\n");
    a_word_that_is_none: format!("{START}{}", PULSE.replace("pulse", "pluse"));
    a_channel_that_is_none: format!("{START}{}", PULSE.replace('V', "W"));
    a_site_that_is_none: format!("{START}{}", PULSE.replace("pulse", "activated").replace('V', "ventricel"));
    a_signal_without_a_peak: format!("{START}{}", PULSE.replace("pulse", "signal"));
    an_instant_that_is_no_number: format!("{START}{}", PULSE.replace("1000000", "\"soon\""));
    a_negative_instant: format!("{START}{}", PULSE.replace("1000000", "-1"));
    a_missing_instant: format!("{START}{}", PULSE.replace("\"at_us\":1000000,", ""));
    a_second_start: format!("{START}{START}");
    a_record_after_the_end: format!("{}{PULSE}", START.replace("start", "end").replace("\"seed\":1", "\"reason\":\"interrupted\""));
    a_scenario_instead_of_a_log: PROGRAM;
    a_table_of_something_else: "time,event\n0,VP\n";
    a_number_that_is_none: format!("{HEADER}7,signal,V,none,high\n");
}

#[test]
fn ten_megabytes_of_noise_are_refused_in_a_few_lines() {
    let mut state = 1_u32;
    let mut byte = || {
        state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
        (state >> 24) as u8
    };
    let noise: Vec<u8> = (0..10_000_000).map(|_| byte()).collect();
    let printable: Vec<u8> = noise.iter().map(|byte| b' ' + byte % 95).collect();
    let mut like_json = b"{".to_vec();
    like_json.extend_from_slice(&printable);
    for log in [noise, printable, like_json] {
        let message = refused(log);
        assert!(message.len() < 2_000, "{} bytes", message.len());
    }
}

#[test]
fn a_log_that_is_not_there_is_named() {
    let scenario = program();
    let refusal = read(Path::new("no/such.jsonl"), &names(&scenario), Usual::default()).unwrap_err();
    assert!(refusal.render(false).contains("cannot read no/such.jsonl"));
}

#[test]
fn a_devices_own_log_may_leave_out_what_it_does_not_know() {
    assert_eq!(told(format!("{PULSE}{PULSE}").as_bytes()), Ok(2));
    assert_eq!(told(b"what,at_us,where,temperature\npulse,5,V,21\n\npulse,6,V,21\n"), Ok(2));
}

proptest! {
    #[test]
    fn nothing_makes_it_panic(text in "(\\{\"at_us\":[0-9]{1,3},\"what\":\"(pulse|signal|end|blocked)\",\"where\":\"(V|A|run|apex)\"[a-z\",:0-9]{0,12}\\}?\n){0,5}") {
        let _ = told(text.as_bytes());
    }

    #[test]
    fn nor_does_a_table(text in "at_us,what,where,cause\n([0-9]{1,3},(pulse|signal|end|reset),(V|sinus|run),(none|own sinus|pulse X|,){1,2}\n){0,5}") {
        let _ = told(text.as_bytes());
    }

    #[test]
    fn nor_do_bytes(bytes in proptest::collection::vec(any::<u8>(), 0..300)) {
        let _ = told(&bytes);
    }
}
