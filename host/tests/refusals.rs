//! What a user is told who writes a scenario wrongly: every sort of mistake once, with the whole message as it is printed.
#![allow(clippy::panic, clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may")]

use phase4_host::refusal::Source;
use phase4_host::scenario::Scenario;
use std::path::Path;

fn refused(text: &str) -> String {
    match Scenario::parse(Source::new("scenario.toml", text), Path::new("tests/data")) {
        Ok(_) => panic!("accepted:\n{text}"),
        Err(refusal) => refusal.render(false),
    }
}

fn device(lines: &str) -> String {
    refused(&format!("[run]\nlength = \"10 s\"\n\n[device]\n{lines}\n"))
}

fn heart(lines: &str) -> String {
    refused(&format!("[run]\nlength = \"10 s\"\n\n[heart]\n{lines}\n"))
}

fn step(when: &str, act: &str) -> String {
    refused(&format!(
        "[run]\nlength = \"10 s\"\n[device]\nmode = \"VVI\"\nlower_rate = \"60 /min\"\n[[step]]\nwhen = \"{when}\"\nact = \"{act}\"\n"
    ))
}

macro_rules! told {
    ($($name:ident: $message:expr;)*) => {
        $(#[test]
        fn $name() {
            insta::assert_snapshot!($message);
        })*
    };
}

told! {
    an_empty_file: refused("");
    a_file_of_comments: refused("# nothing here yet\n");
    a_file_cut_off: refused("[run]\nlength = \"10 s\"\n[device]\nmode = \"VV");
    no_toml: refused("this is no scenario\n");
    a_table_twice: refused("[run]\nlength = \"1 s\"\n[run]\nseed = 1\n");
    no_length: refused("[run]\nseed = 1\n");
    a_misspelt_table: refused("[run]\nlength = \"10 s\"\n[devcie]\nmode = \"VVI\"\n");
    a_misspelt_key: device("mode = \"VVI\"\nlower_rat = \"60 /min\"");
    a_key_of_later: refused("[run]\nlength = \"10 s\"\n[[step]]\nwhen = \"at 1 s\"\nact = \"quiet\"\nrequirement = \"R-1\"\n");
    an_interval_for_a_rate: device("mode = \"VVI\"\nlower_rate = \"60 ms\"");
    a_rate_for_an_interval: device("mode = \"VVI\"\nlower_rate = \"1000 /min\"");
    a_number_without_unit: device("mode = \"VVI\"\nlower_rate = 60");
    a_text_without_unit: device("mode = \"VVI\"\nlower_rate = \"60\"");
    another_spelling_of_a_unit: device("mode = \"VVI\"\nlower_rate = \"60 bpm\"");
    a_voltage_for_a_time: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nblanking = \"100 mV\"");
    finer_than_a_microsecond: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nwidth = \"0.4001 ms\"");
    no_such_mode: device("mode = \"DDD\"\nlower_rate = \"60 /min\"");
    a_mode_in_small_letters: device("mode = \"vvi\"\nlower_rate = \"60 /min\"");
    a_mode_that_is_no_text: device("mode = 3\nlower_rate = \"60 /min\"");
    no_mode: device("lower_rate = \"60 /min\"");
    no_rate: device("mode = \"VVI\"");
    blanking_beyond_refractory: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nrefractory = \"200 ms\"\nblanking = \"300 ms\"");
    blanking_beyond_the_usual_refractory: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nblanking = \"300 ms\"");
    a_window_that_swallows_the_lower_rate: device("mode = \"VVI\"\nlower_rate = \"240 /min\"\nrefractory = \"250 ms\"");
    hysteresis_faster_than_the_lower_rate: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nhysteresis_rate = \"70 /min\"");
    no_such_tie: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\ntie = \"senes first\"");
    no_such_fault: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nfault = 2");
    a_fault_too_large: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nfault = { number = 5, size = \"2 s\" }");
    a_fault_without_sizes: device("mode = \"VVI\"\nlower_rate = \"60 /min\"\nfault = { number = 3, size = \"2 ms\" }");
    an_interval_of_zero: heart("sinus = \"0 ms\"");
    a_negative_interval: heart("sinus = \"-800 ms\"");
    a_cell_within_its_refractory_period: heart("sinus = \"100 ms\"");
    a_cell_within_a_longer_refractory_period: heart("ventricle = \"400 ms\"\n[heart.site.ventricle]\nrefractory = \"400 ms\"");
    no_such_site: heart("[heart.site.ventrikle]\nrefractory = \"300 ms\"");
    no_such_tract: heart("[heart.tract.atrium-ventricle]\nforward = { base = \"100 ms\" }");
    a_delay_of_zero: heart("[heart.tract.atrium-junction]\nforward = { base = \"0 ms\" }");
    a_gain_without_a_time_constant: heart("[heart.tract.ventricle-apex]\nbackward = { gain = \"10 ms\" }");
    a_time_constant_out_of_range: heart("[heart.tract.atrium-junction]\nforward.tau = \"1 us\"");
    no_such_anatomy: heart("anatomy = \"plane\"");
    a_series_that_is_not_there: heart("replay = \"nowhere.csv\"");
    a_series_with_a_bad_row: heart("replay = \"bad-row.csv\"");
    a_series_without_a_column: heart("replay = \"no-column.csv\"");
    a_series_and_a_sinus: heart("sinus = \"70 /min\"\nreplay = \"good.csv\"");
    a_premature_beat_without_coupling: heart("premature = { site = \"ventricle\" }");
    a_premature_beat_at_no_site: heart("premature = { site = \"ventrical\", coupling = \"400 ms\" }");
    a_threshold_given_twice: refused(
        "[run]\nlength = \"1 s\"\n[lead.ventricle]\nrheobase = \"1 V\"\n[heart.site.apex]\nrheobase = \"2 V\"\n"
    );
    a_peak_too_high: refused("[run]\nlength = \"1 s\"\n[lead.ventricle]\npeak = \"500 mV\"\n");
    a_run_of_no_length: refused("[run]\nlength = \"0 s\"\n");
    a_negative_seed: refused("[run]\nlength = \"1 s\"\nseed = -1\n");
    no_such_beginning: step("when 10 s", "quiet");
    no_such_event: step("after ventrical + 10 ms", "quiet");
    a_sense_as_an_event: step("after VS + 10 ms", "quiet");
    no_coupling: step("after VP", "quiet");
    before_its_event: step("after VP - 10 ms", "quiet");
    no_such_window: step("edge(refratory) after VP", "quiet");
    a_window_without_a_device: refused("[run]\nlength = \"1 s\"\n[[step]]\nwhen = \"edge(refractory) after VP\"\nact = \"quiet\"\n");
    no_such_act: step("at 1 s", "stop sinus");
    no_such_cell: step("at 1 s", "arrest atrium");
    a_signal_of_no_height: step("at 1 s", "signal V 40 ms");
    a_lead_that_is_not_there: step("after A signal + 10 ms", "quiet");
    a_lead_changed_too_much: step("at 1 s", "lead V peak 1 V");
    no_act: refused("[run]\nlength = \"1 s\"\n[[step]]\nwhen = \"at 1 s\"\n");
    contradictory_steps: refused(
        "[run]\nlength = \"10 s\"\n\n[[step]]\nwhen = \"at 3 s\"\nact = \"arrest sinus\"\n\n[[step]]\nwhen = \"at 4 s\"\n\
         act = \"beat ventricle\"\n\n[[step]]\nwhen = \"at 3000 ms\"\nact = \"release sinus\"\n"
    );
    a_cell_off_and_released: refused(
        "[run]\nlength = \"10 s\"\n[heart]\nsinus = \"off\"\n[[step]]\nwhen = \"at 0 s\"\nact = \"release sinus\"\n"
    );
    an_instant_that_comes_twice: refused("[run]\nlength = \"1 s\"\n[[step]]\nwhen = \"at 1 s\"\nact = \"quiet\"\ntimes = 2\n");
    a_step_that_never_acts: refused("[run]\nlength = \"1 s\"\n[[step]]\nwhen = \"every 1 s\"\nact = \"quiet\"\ntimes = 0\n");
    a_decision_that_is_none: refused(
        "[run]\nlength = \"1 s\"\n[device]\nmode = \"VVI\"\nlower_rate = \"60 /min\"\n[audit]\ndecision = \"strict\"\n"
    );
    a_share_above_the_whole: refused(
        "[run]\nlength = \"1 s\"\n[device]\nmode = \"VVI\"\nlower_rate = \"60 /min\"\n[audit]\ndecide = \"120 %\"\n"
    );
    many_mistakes_at_once: refused(
        "[run]\nlenght = \"10 s\"\n[device]\nmode = \"VVI\"\nlower_rate = 60\nblanking = \"100\"\n[lead.ventrcle]\npeak = \"8 V\"\n"
    );
}

#[test]
fn a_file_that_cannot_be_opened_is_named() {
    let message = Scenario::load(Path::new("no/such/scenario.toml")).unwrap_err().render(false);
    assert!(message.contains("cannot read no/such/scenario.toml"), "{message}");
}

#[test]
fn ten_megabytes_of_noise_are_refused_in_a_few_lines() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("noise.toml");
    for seed in 0..8_u8 {
        // Bytes of every sort, then printable ones on one line: neither is text nor TOML, and neither floods the terminal.
        let mut state = u32::from(seed).wrapping_add(1);
        let mut byte = || {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            (state >> 24) as u8
        };
        let length = if seed < 4 { 10_000_000 } else { 900_000 };
        let noise: Vec<u8> = (0..length).map(|_| if seed < 6 { byte() } else { b' ' + byte() % 95 }).collect();
        std::fs::write(&path, noise).unwrap();
        let message = Scenario::load(&path).unwrap_err().render(false);
        assert!(message.len() < 2_000, "seed {seed}: {} bytes", message.len());
    }
}

#[test]
fn any_cut_of_a_good_file_is_read_or_refused() {
    let good = include_str!("../../examples/scenarios/conduction-returns.toml");
    for cut in (0..good.len()).filter(|cut| good.is_char_boundary(*cut)) {
        if let Err(refusal) = Scenario::parse(Source::new("cut.toml", &good[..cut]), Path::new("")) {
            assert!(!refusal.render(false).is_empty());
        }
    }
}

#[test]
fn any_changed_byte_of_a_good_file_is_read_or_refused() {
    let good = include_str!("../../examples/scenarios/premature.toml");
    for (place, _) in good.char_indices() {
        for other in ["", "\"", "[", "=", "9", "\n", "-", "µ"] {
            let mut bad = good.to_owned();
            bad.replace_range(place..place + good[place..].chars().next().unwrap().len_utf8(), other);
            if let Err(refusal) = Scenario::parse(Source::new("bad.toml", bad), Path::new("")) {
                assert!(!refusal.render(false).is_empty());
            }
        }
    }
}

fn audit(lines: &str) -> String {
    refused(&format!("[run]\nlength = \"1 s\"\n[device]\nmode = \"VVI\"\nlower_rate = \"60 /min\"\n[audit]\n{lines}\n"))
}

told! {
    a_tolerance_beyond_its_window: audit("tolerance = \"600 ms\"");
    a_share_of_everything: audit("tolerance = { share = \"80 %\" }");
    a_ceiling_beyond_the_lower_rate: audit("ceiling = \"40 /min\"");
    a_pause_shorter_than_the_escape: audit("longest_pause = \"900 ms\"");
    a_window_that_ends_before_it_begins: audit("vulnerable = \"400..150 ms\"");
    an_uncertainty_beyond_reason: audit("uncertainty = \"1 s\"");
    a_sensitivity_without_bounds: audit("tolerance.sensitivity = \"95 %\"");
}

told! {
    a_cell_that_is_none: audit("require = [\"VS/alert/PVX\"]");
    a_cell_of_no_sort: audit("require = [\"everything\"]");
    a_cell_without_stimulus: audit("require = [\"VS/alert/noise\"]");
    a_cell_that_nothing_hits: audit("require = [\"VS/blanking/sub\"]");
    a_cell_of_another_program: audit("require = [\"VS/hysteresis/R\"]");
    a_cell_too_narrow: audit("tolerance = \"60 ms\"\nrequire = [\"VS/blanking/empty\"]");
    a_list_that_is_none: audit("require = \"VS/alert/PVC\"");
}
