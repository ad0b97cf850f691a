//! The page as a file: well-formed, bounded, the same every time, closed to what comes from outside.

use super::reading::{drawings, text};
use super::support::{coverage, long, shipped, vvi};
use crate::report::page;
use crate::run_data::{RunData, StepText, Verdict};

const SCENARIOS: [&str; 6] =
    ["steady.toml", "conduction-returns.toml", "arrest-escape.toml", "premature.toml", "recorded.toml", "faulty-device.toml"];

/// What no run's page may exceed.
const MOST_BYTES: usize = 400_000;

#[test]
fn every_drawing_is_well_formed_and_every_reference_leads_somewhere() {
    for name in SCENARIOS {
        let page = page(&shipped(name));
        assert!(drawings(&page).len() > 5, "{name}");
        for (place, _) in page.match_indices("href=\"#") {
            let id: String = page[place + 7..].chars().take_while(|c| *c != '"').collect();
            assert!(page.contains(&format!(" id=\"{id}\"")), "{name}: nothing has the id {id}");
        }
        for (place, _) in page.match_indices(" id=\"") {
            let id: String = page[place + 5..].chars().take_while(|c| *c != '"').collect();
            assert_eq!(page.matches(&format!(" id=\"{id}\"")).count(), 1, "{name}: {id} twice");
        }
    }
}

#[test]
fn the_page_is_self_contained() {
    let page = page(&shipped("faulty-device.toml"));
    for outside in ["http:", "https:", "src=", "@import", "url(h", "<link"] {
        assert!(!page.contains(outside), "{outside}");
    }
}

#[test]
fn the_same_run_gives_the_same_page() {
    for name in SCENARIOS {
        assert_eq!(page(&shipped(name)), page(&shipped(name)), "{name}");
    }
}

#[test]
fn the_page_stays_small_whatever_the_run() {
    for (pulses, broken_every) in [(100_000, 0), (100_000, 50), (100_000, 2), (1_900, 2), (50, 2)] {
        let size = page(&long(pulses, broken_every)).len();
        assert!(size < MOST_BYTES, "{pulses} pulses, every {broken_every}th broken: {size} bytes");
    }
    for fault in [1, 3, 15, 16, 69] {
        let run = vvi("300 s", &format!("lower_rate = \"60 /min\"\nhysteresis_rate = \"50 /min\"\nfault = {fault}"), FLOOD);
        let size = page(&run).len();
        assert!(size < MOST_BYTES, "fault {fault}: {size} bytes");
    }
}

/// A signal every 40 ms.
const FLOOD: &str = "[[step]]\nwhen = \"every 40 ms\"\nact = \"signal V hi\"\n";

#[test]
fn texts_without_end_are_cut_and_counted() {
    let mut run = shipped("faulty-device.toml");
    run.scenario_text = "x = \"0123456789\"\n".repeat(60_000);
    run.name = "n".repeat(100_000);
    run.note = Some("o".repeat(100_000));
    run.steps = (0..60_000).map(|line| StepText { when: String::new(), act: "a".repeat(500), times: None, line }).collect();
    let page = page(&run);
    assert!(page.len() < MOST_BYTES, "{} bytes", page.len());
    assert!(text(&page).contains(" more lines in the file"));
}

#[test]
fn what_comes_from_outside_stays_text() {
    const HOSTILE: &str = "</title></svg><script>alert(1)</script>\" onload=\"x' & \u{0}\u{202e}<!--";
    let mut run = shipped("faulty-device.toml");
    set_everything(&mut run, HOSTILE);
    let page = page(&run);
    assert_eq!(page.matches("<script>").count(), 1, "only our own");
    assert!(!page.contains("alert(1)</script>\"") && !page.contains("onload=\"x"));
    assert!(!page.contains('\u{0}') && !page.contains('\u{202e}'));
    assert!(drawings(&page).len() > 100, "every drawing still ends where it should");
}

fn set_everything(run: &mut RunData, words: &str) {
    let text = || words.to_owned();
    (run.name, run.scenario_file, run.command, run.scenario_text) = (text(), text(), text(), text());
    (run.note, run.bench, run.device_name, run.fault) = (Some(text()), Some(text()), Some(text()), Some(text()));
    for step in &mut run.steps {
        (step.when, step.act) = (text(), text());
    }
    let names = &mut run.names;
    for name in [&mut names.sites, &mut names.tracts, &mut names.cells, &mut names.foci].into_iter().flatten() {
        *name = text();
    }
    if let Some(canary) = &mut run.canary {
        canary.line = text();
    }
    if let Some(coverage) = &mut run.coverage {
        coverage.columns.iter_mut().for_each(|column| *column = text());
        for row in &mut coverage.rows {
            (row.anchor, row.window) = (text(), text());
        }
        for edge in &mut coverage.edges {
            (edge.anchor, edge.edge, edge.column) = (text(), text(), text());
        }
        coverage.whole_run.iter_mut().for_each(|(name, _)| *name = text());
    }
}

#[test]
fn the_manifest_names_what_gives_the_same_page_again() {
    let run = shipped("faulty-device.toml");
    let text = text(&page(&run));
    let hash = format!("running hash {:016x}", run.hash);
    for needed in [hash.as_str(), "Seed 3", "rule set", "broken, exit code 1", run.command.as_str(), "Wall clock not recorded"] {
        assert!(text.contains(needed), "{needed}");
    }
    assert!(text.contains("Never connect this bench, or a device driven by it, to a person."));
}

#[test]
fn a_rule_that_was_not_tried_shows_no_figure() {
    let page = page(&shipped("steady.toml"));
    let rows: Vec<&str> = page.split("<tr ").skip(1).filter_map(|row| row.split("</tr>").next()).collect();
    let rows: Vec<&str> = rows.into_iter().filter(|row| row.contains("not exercised</span>")).collect();
    assert!(!rows.is_empty());
    for row in rows {
        assert!(!row.contains("data-l=") && !row.contains("mbar"), "{row}");
    }
}

#[test]
fn only_a_broken_run_has_the_colour_of_a_finding() {
    let marks = |page: &str| {
        let used = page.split("</defs>").nth(1).unwrap_or_default().to_owned();
        ["class=\"dotb\"", "class=\"late\"", "class=\"tb", "#g-broken", "class=\"w\"", "ns found"]
            .map(|mark| used.matches(mark).count())
    };
    assert_eq!(marks(&page(&shipped("recorded.toml"))), [0; 6]);
    assert!(marks(&page(&shipped("faulty-device.toml"))).iter().sum::<usize>() > 4);
}

#[test]
fn without_a_device_there_is_no_table_of_rules() {
    let page = page(&shipped("arrest-escape.toml"));
    assert!(page.contains("id=\"seconds\"") && page.contains("id=\"manifest\""));
    for absent in ["id=\"rules\"", "id=\"coverage\"", "id=\"undecided\"", "class=\"lens\""] {
        assert!(!page.contains(absent), "{absent}");
    }
}

#[test]
fn a_void_run_is_marked_void() {
    let mut run = shipped("steady.toml");
    run.verdict = Verdict::Void;
    assert!(text(&page(&run)).contains("nothing counts"));
}

#[test]
fn every_sort_of_coverage_cell_has_its_picture_and_its_words() {
    let mut run = shipped("steady.toml");
    run.coverage = Some(coverage());
    let page = page(&run);
    let table = page.split("class=\"cov\"").nth(1).unwrap();
    let words = ["core hit", "band only", "required, not hit", "optional, not tried", "void", "no stimulus", "impossible"];
    for word in words {
        assert_eq!(
            table.split("</table>").next().unwrap().matches(&format!(">{word}<")).count(),
            3,
            "{word}: once in each of three rows"
        );
    }
    let text = text(&page);
    for needed in [
        "3 of 12 required cells hit (25 per cent). Edges: 1 of 2 tried from both sides.",
        "tried from both sides",
        "longest silence not hit",
    ] {
        assert!(text.contains(needed), "{needed}");
    }
}
