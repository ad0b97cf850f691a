//! The drawings as geometry: nothing outside its frame, no words over words, no finding lost.

use super::reading::{Drawing, Mark, drawings, ladders, text};
use super::support::{long, shipped, vvi, written};
use crate::report::page;
use crate::run_data::{RunData, TractShape};
use phase4::base::Span;
use proptest::prelude::*;

/// Room for strokes and for rounding to a tenth of a pixel.
const SLACK: f64 = 0.3;

fn assert_inside(drawing: &Drawing, what: &str) {
    let [left, top, width, height] = drawing.view;
    for mark in &drawing.marks {
        for (x, y) in &mark.points {
            let inside = (left - SLACK..=left + width + SLACK).contains(x) && (top - SLACK..=top + height + SLACK).contains(y);
            assert!(inside, "{what}: {mark:?} leaves {:?}", drawing.view);
        }
    }
}

/// The box that words take at least: narrower than what is kept free for them, since fonts differ.
fn words_box(mark: &Mark) -> [f64; 4] {
    let (x, y) = mark.points[0];
    let width = mark.words.chars().count() as f64 * 6.0;
    let left = match mark.anchor.as_str() {
        "middle" => x - width / 2.0,
        "end" => x - width,
        _ => x,
    };
    [left, left + width, y - 9.0, y + 2.0]
}

fn assert_no_words_over_words(drawing: &Drawing, what: &str) {
    let words: Vec<&Mark> = drawing.marks.iter().filter(|mark| mark.element == "text").collect();
    for (place, one) in words.iter().enumerate() {
        for other in words.iter().skip(place + 1) {
            let ([l1, r1, t1, b1], [l2, r2, t2, b2]) = (words_box(one), words_box(other));
            assert!(!(l1 < r2 && l2 < r1 && t1 < b2 && t2 < b1), "{what}: {:?} over {:?}", one.words, other.words);
        }
    }
}

fn check(run: &RunData, what: &str) {
    let page = page(run);
    for drawing in drawings(&page).iter().filter(|drawing| drawing.view != [0.0; 4]) {
        assert_inside(drawing, what);
    }
    let ladders = ladders(&page);
    assert!(!ladders.is_empty(), "{what}: no ladder");
    for ladder in &ladders {
        assert_no_words_over_words(ladder, what);
    }
}

#[test]
fn the_shipped_scenarios_are_drawn_inside_their_frames() {
    for name in
        ["steady.toml", "conduction-returns.toml", "arrest-escape.toml", "premature.toml", "recorded.toml", "faulty-device.toml"]
    {
        check(&shipped(name), name);
    }
}

#[test]
fn so_is_every_fault() {
    for fault in [1, 3, 4, 10, 15, 16, 17, 22, 23, 26, 69] {
        check(&faulty(fault, "20 s"), &format!("fault {fault}"));
    }
}

#[test]
fn so_are_long_runs() {
    for (pulses, broken_every) in [(3_000, 0), (3_000, 3), (30, 2), (9, 9)] {
        check(&long(pulses, broken_every), &format!("{pulses} pulses, every {broken_every}th broken"));
    }
}

fn faulty(fault: u8, length: &str) -> RunData {
    let steps = "[[step]]\nwhen = \"at 2 s\"\nact = \"quiet\"\n\
        [[step]]\nwhen = \"after 3rd VP + 600 ms\"\nact = \"beat apex\"\n\
        [[step]]\nwhen = \"after VP + [120..280/20] ms\"\nact = \"signal V hi\"\ntimes = 30\n";
    vvi(length, &format!("lower_rate = \"60 /min\"\nhysteresis_rate = \"50 /min\"\nfault = {fault}"), steps)
}

#[test]
fn an_atrial_device_stands_above_the_heart() {
    let run = written(
        "[run]\nlength = \"6 s\"\n[heart]\nsinus = \"50 /min\"\n[lead.atrium]\npeak = \"4 mV\"\n\
         [device]\nmode = \"AAI\"\nlower_rate = \"60 /min\"\nfault = 10\n",
    );
    check(&run, "AAI");
    let ladder = ladders(&page(&run)).remove(0);
    let marks = &ladder.marks;
    let height_of = |class: &'static str| {
        marks.iter().filter(move |mark| mark.class == class).flat_map(|mark| mark.points.clone()).map(|(_, y)| y)
    };
    let heart = height_of("wave").fold(f64::INFINITY, f64::min);
    assert!(height_of("pul").chain(height_of("blank")).all(|y| y <= heart), "no stem crosses the heart");
    assert!(height_of("pul").count() > 0 && height_of("wave").count() > 0);
}

#[test]
fn every_broken_pulse_in_the_drawn_seconds_is_marked_and_numbered() {
    for (fault, length) in [(16, "20 s"), (15, "20 s"), (69, "7 s"), (1, "20 s")] {
        let run = faulty(fault, length);
        let page = page(&run);
        for ladder in ladders(&page) {
            let across = ladder.marks.iter().filter(|mark| mark.class == "dotb" && is_tall(mark, 22.0)).count();
            let words: Vec<&str> = ladder
                .marks
                .iter()
                .filter(|mark| mark.class == "tb")
                .map(|mark| mark.words.as_str())
                .filter(|words| words.ends_with("broken"))
                .collect();
            let numbered: usize = words.iter().map(|words| findings_named(words)).sum();
            let overdue = ladder.marks.iter().filter(|mark| mark.class == "late").count();
            assert!(numbered >= across.max(usize::from(overdue > 0)), "fault {fault}: {across} marks, but {words:?}");
        }
    }
}

fn is_tall(mark: &Mark, height: f64) -> bool {
    matches!(mark.points.as_slice(), [(_, top), (_, bottom)] if (bottom - top - height).abs() < 0.5)
}

/// How many findings `3: LR1 broken`, `3–7: …` or `3 and 4 more: …` stand for.
fn findings_named(words: &str) -> usize {
    let numbers = words.split(':').next().unwrap_or_default();
    if let Some((_, more)) = numbers.split_once(" and ") {
        return 1 + more.trim_end_matches(" more").parse::<usize>().unwrap_or(0);
    }
    match numbers.split_once('–') {
        Some((from, to)) => to.parse::<usize>().unwrap_or(0) + 1 - from.parse::<usize>().unwrap_or(0),
        None => 1,
    }
}

#[test]
fn a_log_without_causes_draws_no_heart_and_says_so() {
    let mut run = faulty(16, "20 s");
    run.records.retain(|record| record.kind.is_bench_visible());
    check(&run, "no causes");
    let page = page(&run);
    for ladder in ladders(&page) {
        assert!(!ladder.marks.iter().any(|mark| ["wave", "hid", "org"].contains(&mark.class.as_str())));
        assert!(ladder.marks.iter().any(|mark| mark.class == "lensf"), "what the bench sees is still drawn");
    }
    assert!(text(&page).contains("The log holds no causes, so the heart is not drawn"));
}

#[test]
fn tracts_beside_the_chain_have_tiers_of_their_own() {
    let mut run = written("[run]\nlength = \"5 s\"\n[heart]\nsinus = \"60 /min\"\n");
    let chain = ladders(&page(&run)).remove(0);
    let accessory =
        TractShape { from: 1, to: 3, gate: 0.0, forward_base: Span::from_millis(300), backward_base: Span::from_millis(300) };
    run.tracts.push(accessory);
    run.names.tracts.push("bypass".to_owned());
    check(&run, "a bypass");
    let beside = ladders(&page(&run)).remove(0);
    let borders = |ladder: &Drawing| ladder.marks.iter().filter(|mark| mark.class == "tier").count();
    assert_eq!(borders(&beside), borders(&chain) + 2);
    assert!(beside.view[3] > chain.view[3]);
    let names = drawings(&page(&run)).into_iter().find(|drawing| drawing.class == "lab").unwrap();
    assert!(names.marks.iter().any(|mark| mark.words == "bypass"));
}

#[test]
fn a_wave_is_as_wide_as_its_delay() {
    let run = written("[run]\nlength = \"5 s\"\n[heart]\nsinus = \"60 /min\"\n");
    let ladder = ladders(&page(&run)).remove(0);
    let waves: Vec<&Mark> = ladder.marks.iter().filter(|mark| mark.class == "wave").collect();
    // Sinus to atrium takes 70 ms; at 170 pixels a second that is 11.9 pixels.
    let widths: Vec<f64> =
        waves.iter().filter(|mark| mark.points[0].1 == 52.0).map(|mark| mark.points[1].0 - mark.points[0].0).collect();
    assert!(widths.len() >= 4 && widths.iter().all(|width| (width - 11.9).abs() < 0.15), "{widths:?}");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(24))]

    #[test]
    fn whatever_the_rhythm_nothing_leaves_its_frame(sinus in 30_u32..180, lower in 40_u32..120, fault in 0_usize..6, early in 200_u32..900) {
        let fault = ["", "fault = 3", "fault = 10", "fault = 15", "fault = 22", "fault = 69"][fault];
        let text = format!(
            "[run]\nlength = \"20 s\"\n[heart]\nsinus = \"{sinus} /min\"\n[device]\nmode = \"VVI\"\nlower_rate = \"{lower} /min\"\n{fault}\n\
             [[step]]\nwhen = \"every {early} ms\"\nact = \"beat ventricle\"\ntimes = 9\n"
        );
        check(&written(&text), &text);
    }
}
