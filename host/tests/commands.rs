//! The command as a user meets it: what it prints, what it writes, and with which code it ends.
#![allow(clippy::panic, clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may")]

mod common;

use assert_cmd::Command;
use common::{SCENARIOS, root};
use serde_json::Value;
use std::fs;
use std::path::Path;

fn phase4(words: &[&str]) -> (i32, String, String) {
    let output = Command::cargo_bin("phase4").unwrap().current_dir(root()).args(words).output().unwrap();
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
    (output.status.code().unwrap(), text(output.stdout), text(output.stderr))
}

fn path(path: &Path) -> &str {
    path.to_str().unwrap()
}

fn json(text: &str) -> Value {
    serde_json::from_str(text).unwrap()
}

#[test]
fn the_six_scenarios_end_as_named() {
    for (name, code, word) in [
        ("steady", 0, "Holds."),
        ("conduction-returns", 0, "Holds."),
        ("arrest-escape", 0, "Unjudged."),
        ("premature", 0, "Holds."),
        ("recorded", 0, "Holds."),
        ("faulty-device", 1, "Broken. Gannet-4 broke HY2 "),
    ] {
        let (status, out, err) = phase4(&["run", &format!("examples/scenarios/{name}.toml")]);
        assert_eq!((status, err.as_str()), (code, ""), "{name}");
        assert!(out.starts_with(word) && out.lines().count() == 1, "{name}: {out}");
    }
}

#[test]
fn the_recorded_heart_is_paced_at_least_forty_times() {
    let (_, out, _) = phase4(&["run", "examples/scenarios/recorded.toml", "--json"]);
    let summary = json(&out);
    assert!(summary["pulses"].as_u64().unwrap() >= 40, "{summary}");
    assert_eq!(summary["verdict"], "holds");
}

#[test]
fn the_other_codes_are_shown_by_demonstrations() {
    let (status, out, _) = phase4(&["run", "host/tests/scenarios/undecided.toml"]);
    assert_eq!(status, 3);
    assert!(out.starts_with("Undecided. Only "), "{out}");
    let (status, out, _) = phase4(&["run", "host/tests/scenarios/idle-mode.toml"]);
    assert_eq!(status, 0);
    assert!(out.starts_with("Unjudged. The reference device is in a mode that does nothing"), "{out}");
    let (status, out, err) = phase4(&["run", "host/tests/data/good.csv"]);
    assert_eq!((status, out.as_str()), (2, ""));
    assert!(err.contains("this is not TOML"), "{err}");
}

#[test]
fn the_summary_has_the_promised_fields() {
    let (_, out, _) = phase4(&["run", "examples/scenarios/premature.toml", "--json", "--seed", "18446744073709551615"]);
    let summary = json(&out);
    for field in ["verdict", "beats", "pulses", "simulated_us", "hash", "seed", "rule_set", "rules", "coverage"] {
        assert!(summary.get(field).is_some(), "{field}");
    }
    assert_eq!(summary["seed"].as_u64(), Some(u64::MAX));
    assert_eq!(summary["simulated_us"], 180_000_000);
    assert_eq!(summary["hash"].as_str().unwrap().len(), 16);
    for rule in summary["rules"].as_array().unwrap() {
        let mut fields: Vec<&str> = rule.as_object().unwrap().keys().map(String::as_str).collect();
        fields.sort_unstable();
        assert_eq!(fields, ["broken", "checked", "held", "id", "undecided", "worst_us"]);
    }
    assert_eq!(summary["command"], "phase4 run examples/scenarios/premature.toml --seed 18446744073709551615");
}

#[test]
fn without_out_nothing_is_written() {
    let folder = tempfile::tempdir().unwrap();
    let file = root().join("examples/scenarios/steady.toml").canonicalize().unwrap();
    let mut command = Command::cargo_bin("phase4").unwrap();
    command.current_dir(folder.path()).args(["run", path(&file), "--json"]).assert().code(0);
    assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 0);
}

#[test]
fn out_is_filled_and_only_our_own_files_are_replaced() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("deep/er/out");
    let (status, printed, _) = phase4(&["run", "examples/scenarios/faulty-device.toml", "--json", "--out", path(&out)]);
    assert_eq!(status, 1);
    assert_eq!(fs::read_to_string(out.join("summary.json")).unwrap(), printed);
    let mut files: Vec<String> =
        fs::read_dir(&out).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    files.sort_unstable();
    assert_eq!(files, ["log.csv", "log.jsonl", "report.html", "summary.json"]);
    assert_eq!(fs::read_dir(out.parent().unwrap()).unwrap().count(), 1, "nothing is left beside it");

    fs::write(out.join("notes.txt"), "mine").unwrap();
    fs::write(out.join("log.csv"), "old").unwrap();
    let (status, ..) = phase4(&["run", "examples/scenarios/steady.toml", "--out", path(&out)]);
    assert_eq!(status, 0);
    assert_eq!(fs::read_to_string(out.join("notes.txt")).unwrap(), "mine");
    assert!(fs::read_to_string(out.join("log.csv")).unwrap().starts_with("at_us,what,where,cause,"));
    assert_eq!(json(&fs::read_to_string(out.join("summary.json")).unwrap())["verdict"], "holds");
    assert_eq!(fs::read_dir(&out).unwrap().count(), 5, "nothing is left inside it");
}

#[cfg(unix)]
#[test]
fn a_new_folder_has_the_rights_of_any_new_folder() {
    use std::os::unix::fs::PermissionsExt;
    let folder = tempfile::tempdir().unwrap();
    let (out, plain) = (folder.path().join("out"), folder.path().join("plain"));
    phase4(&["run", "examples/scenarios/steady.toml", "--out", path(&out)]);
    fs::create_dir(&plain).unwrap();
    let mode = |path: &Path| fs::metadata(path).unwrap().permissions().mode();
    assert_eq!(mode(&out), mode(&plain));
}

#[test]
fn an_out_that_cannot_be_written_is_refused_and_nothing_is_left() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("file");
    fs::write(&file, "mine").unwrap();
    let blocked = folder.path().join("blocked");
    fs::create_dir_all(blocked.join("summary.json")).unwrap();
    for out in [file.clone(), file.join("below"), file.join("far/below"), blocked.clone()] {
        let (status, printed, err) = phase4(&["run", "examples/scenarios/steady.toml", "--out", path(&out)]);
        assert_eq!((status, printed.as_str()), (2, ""), "{out:?}");
        assert!(err.contains("cannot write to"), "{err}");
    }
    assert_eq!(fs::read_to_string(&file).unwrap(), "mine");
    assert_eq!(fs::read_dir(&blocked).unwrap().count(), 1);
    assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 2);
}

#[test]
fn a_bad_scenario_leaves_an_older_out_alone() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("out");
    phase4(&["run", "examples/scenarios/steady.toml", "--out", path(&out)]);
    let before = fs::read_to_string(out.join("summary.json")).unwrap();
    let (status, ..) = phase4(&["run", "host/tests/data/bad-row.csv", "--out", path(&out)]);
    assert_eq!(status, 2);
    assert_eq!(fs::read_to_string(out.join("summary.json")).unwrap(), before);
}

#[test]
fn a_log_judged_gives_its_runs_verdict() {
    let folder = tempfile::tempdir().unwrap();
    for name in SCENARIOS {
        let file = format!("examples/scenarios/{name}.toml");
        let out = folder.path().join(name);
        let (status, words, _) = phase4(&["run", &file, "--out", path(&out)]);
        let of_run = json(&fs::read_to_string(out.join("summary.json")).unwrap());
        for log in ["log.jsonl", "log.csv"] {
            let log = out.join(log);
            let (judged, said, err) = phase4(&["judge", path(&log), "--program", &file]);
            assert_eq!((judged, said.as_str(), err.as_str()), (status, words.as_str(), ""), "{name}");
            let (_, said, _) = phase4(&["judge", path(&log), "--program", &file, "--json"]);
            let of_log = json(&said);
            for field in ["verdict", "beats", "pulses", "simulated_us", "hash", "seed", "rules", "coverage", "decided", "canary"]
            {
                assert_eq!(of_log[field], of_run[field], "{name} {field}");
            }
        }
    }
}

#[test]
fn every_line_of_a_log_is_a_record_and_both_forms_agree() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("out");
    phase4(&["run", "examples/scenarios/premature.toml", "--out", path(&out)]);
    let lines = fs::read_to_string(out.join("log.jsonl")).unwrap();
    let mut table = csv::Reader::from_path(out.join("log.csv")).unwrap();
    let header = table.headers().unwrap().clone();
    let mut rows = table.records();
    for line in lines.lines() {
        let record = json(line);
        assert!(
            record["at_us"].is_u64() && record["what"].is_string() && record["where"].is_string() && record["cause"].is_string()
        );
        let row = rows.next().unwrap().unwrap();
        for (column, field) in header.iter().zip(&row) {
            let value = match &record[column] {
                Value::Null => String::new(),
                Value::String(text) => text.clone(),
                other => other.to_string(),
            };
            assert_eq!(field, value, "{line}");
        }
    }
    assert!(rows.next().is_none());
}

#[test]
fn a_seed_changes_what_is_drawn_and_nothing_else() {
    let hash = |words: &[&str]| json(&phase4(words).1)["hash"].clone();
    let (steady, premature) = ("examples/scenarios/steady.toml", "examples/scenarios/premature.toml");
    assert_eq!(hash(&["run", premature, "--json"]), hash(&["run", premature, "--json", "--seed", "11"]));
    assert_ne!(hash(&["run", premature, "--json"]), hash(&["run", premature, "--json", "--seed", "12"]));
    // The seed itself is in the log, so that two seeds never share a hash.
    assert_ne!(hash(&["run", steady, "--json"]), hash(&["run", steady, "--json", "--seed", "2"]));
}

#[cfg(unix)]
#[test]
fn an_interrupted_run_is_undecided_and_still_written() {
    let folder = tempfile::tempdir().unwrap();
    let scenario = folder.path().join("long.toml");
    let text = fs::read_to_string(root().join("examples/scenarios/steady.toml")).unwrap();
    fs::write(&scenario, text.replace("2 min", "300 d")).unwrap();
    let out = folder.path().join("out");
    let mut child = std::process::Command::new(assert_cmd::cargo::cargo_bin("phase4"))
        .args(["run", path(&scenario), "--out", path(&out)])
        .stdout(std::process::Stdio::piped())
        .spawn()
        .unwrap();
    // It writes beside its place once it listens.
    while fs::read_dir(folder.path()).unwrap().count() < 2 {
        std::thread::sleep(std::time::Duration::from_millis(5));
    }
    let asked = std::process::Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap();
    assert!(asked.success());
    let status = child.wait().unwrap();
    assert_eq!(status.code(), Some(3));
    let mut said = String::new();
    std::io::Read::read_to_string(&mut child.stdout.take().unwrap(), &mut said).unwrap();
    assert_eq!(said, "Undecided. The run was interrupted.\n");
    assert_eq!(json(&fs::read_to_string(out.join("summary.json")).unwrap())["end_reason"], 2);
    assert!(fs::read_to_string(out.join("log.jsonl")).unwrap().trim_end().ends_with('}'));
}

#[test]
fn every_help_says_that_it_is_for_the_bench_only() {
    for words in [&["--help"][..], &["-h"], &["run", "--help"], &["judge", "--help"]] {
        let (status, out, _) = phase4(words);
        assert_eq!(status, 0);
        assert!(out.contains("Bench use only. Never connect"), "{out}");
    }
    let (_, out, _) = phase4(&["run", "examples/scenarios/steady.toml", "--json"]);
    assert!(json(&out)["caution"].as_str().unwrap().contains("bench only"));
}

#[test]
fn wrong_words_end_with_2() {
    for words in [&[][..], &["walk"], &["run"], &["run", "a", "b"], &["judge", "a"], &["run", "a", "--seed", "x"]] {
        let (status, out, err) = phase4(words);
        assert_eq!((status, out.as_str()), (2, ""), "{words:?}");
        assert!(!err.is_empty());
    }
}

#[cfg(target_os = "linux")]
#[test]
fn an_answer_that_cannot_be_written_ends_with_2_and_one_that_nobody_reads_does_not() {
    use std::process::Stdio;
    let run = |out: Stdio| {
        let mut command = std::process::Command::new(assert_cmd::cargo::cargo_bin("phase4"));
        command.current_dir(root()).args(["run", "examples/scenarios/faulty-device.toml", "--json"]).stdout(out);
        command.stderr(Stdio::null());
        command
    };
    let full = fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    assert_eq!(run(Stdio::from(full)).status().unwrap().code(), Some(2));
    let mut child = run(Stdio::piped()).spawn().unwrap();
    drop(child.stdout.take());
    assert_eq!(child.wait().unwrap().code(), Some(1));
}
