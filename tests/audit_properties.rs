//! What holds for the auditor whatever it sees and however it is polled.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::indexing_slicing,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod judged;

use judged::sloppy::{Dice, Kind, Script, Slip, slipping};
use judged::{judge_with, scripts_or};
use phase4::audit::{Auditor, Coverage, Judgement, RuleId, Score};
use phase4::base::{Instant, Record, Span};
use std::fs;
use std::path::Path;

/// Scripts of every sort, clean ones and ones with a slip.
fn any(seed: u64) -> Script {
    let kind = [Kind::Wild, Kind::Exact, Kind::Ordinary][(seed % 3) as usize];
    let slip = [None, Some(Slip::Late(1_500)), Some(Slip::Missing), Some(Slip::Twice(3_000)), Some(Slip::IgnoresSense)];
    slipping(seed, kind, slip[(seed / 3 % 5) as usize])
}

fn auditor(script: &Script) -> Auditor<12> {
    match script.joins_at {
        Some(at) => Auditor::joining(&script.program, &script.settings, at).unwrap(),
        None => Auditor::new(&script.program, &script.settings, script.start).unwrap(),
    }
}

fn visible(script: &Script) -> Vec<Record> {
    let from = script.joins_at.unwrap_or(script.start);
    script.records.iter().copied().filter(|record| record.at >= from).collect()
}

fn scores(auditor: &Auditor<12>) -> Vec<Score> {
    RuleId::ALL.into_iter().map(|rule| auditor.score(rule)).collect()
}

/// Polled at random instants between and at the records, late, early and twice over.
fn polled_at_random(script: &Script, dice: &mut Dice) -> (Vec<Judgement>, Auditor<12>) {
    let mut auditor = auditor(script);
    let mut judgements = Vec::new();
    let mut last = script.joins_at.unwrap_or(script.start);
    for record in &visible(script) {
        for _ in 0..dice.below(4) {
            let between = record.at.saturating_since(last).as_micros();
            let now = last.saturating_add(Span::from_micros(dice.below(between + 1)));
            while let Some(judgement) = auditor.poll(now) {
                judgements.push(judgement);
                if dice.one_in(3) {
                    break;
                }
            }
        }
        // What waits must be fetched before more is observed: the queue is short.
        while let Some(judgement) = auditor.poll(last) {
            judgements.push(judgement);
        }
        auditor.observe(record);
        last = record.at;
    }
    auditor.finish(last);
    while let Some(judgement) = auditor.poll(last) {
        judgements.push(judgement);
    }
    (judgements, auditor)
}

#[test]
fn splitting_a_poll_changes_nothing() {
    let mut records = 0;
    for seed in 0..scripts_or(6_000) {
        let script = any(seed);
        let (whole, one) = judge_with(auditor(&script), &visible(&script));
        let (split, other) = polled_at_random(&script, &mut Dice::new(seed));
        assert_eq!(whole, split, "seed {seed}\n{script}");
        assert_eq!(scores(&one), scores(&other), "seed {seed}");
        assert_eq!((one.decided(), one.undecided(), other.lost()), (other.decided(), other.undecided(), 0));
        records += script.records.len();
    }
    println!("{records} records");
    assert!(records > 100_000);
}

#[test]
fn next_at_is_later_than_now_or_never_once_poll_has_nothing() {
    for seed in 0..scripts_or(3_000) {
        let script = any(seed);
        let mut auditor = auditor(&script);
        let check = |auditor: &mut Auditor<12>, now: Instant| {
            while auditor.poll(now).is_some() {}
            if let Some(next) = auditor.next_at() {
                assert!(next > now, "seed {seed}: spins at {now:?}");
                let just_before = Instant::from_micros(next.as_micros() - 1);
                assert_eq!(auditor.clone().poll(just_before), None, "seed {seed}: something came before it was announced");
            }
        };
        for record in &visible(&script) {
            check(&mut auditor, record.at);
            auditor.observe(record);
            check(&mut auditor, record.at);
        }
        let last = visible(&script).last().unwrap().at;
        // Left alone it comes to rest: nothing is awaited for ever.
        let mut steps = 0;
        while let Some(next) = auditor.next_at() {
            check(&mut auditor, next);
            steps += 1;
            assert!(steps < 50, "seed {seed}: no rest");
        }
        check(&mut auditor, last.saturating_add(Span::from_secs(1_000_000)));
    }
}

#[test]
fn the_counts_add_up() {
    for seed in 0..scripts_or(3_000) {
        let script = any(seed);
        let (judgements, auditor) = judge_with(auditor(&script), &visible(&script));
        for score in scores(&auditor) {
            assert_eq!(score.checked, score.held + score.broken + score.undecided);
        }
        assert_eq!(judgements.len() as u64, auditor.decided() + auditor.undecided(), "every case is told once");
        for judgement in &judgements {
            let window = judgement.window;
            assert!(window.is_none_or(|window| window.earliest <= window.nominal && window.nominal <= window.latest));
        }
    }
}

/// The same stream anywhere on the time line gives the same answers.
#[test]
fn the_start_instant_changes_nothing() {
    for seed in 0..scripts_or(2_000) {
        let script = any(seed);
        let by = 1 << (20 + seed % 40);
        let moved = |at: Instant| Instant::from_micros(at.as_micros() + by);
        let later = Script {
            start: moved(script.start),
            joins_at: script.joins_at.map(moved),
            records: script.records.iter().map(|record| Record { at: moved(record.at), ..*record }).collect(),
            ..script.clone()
        };
        let (here, one) = judge_with(auditor(&script), &visible(&script));
        let (there, other) = judge_with(auditor(&later), &visible(&later));
        let told = |judgements: &[Judgement], by: u64| {
            let rows =
                judgements.iter().map(|one| (one.at.as_micros() - by, one.rule, one.also, one.how, one.outcome, one.deviation));
            rows.collect::<Vec<_>>()
        };
        assert_eq!(told(&here, 0), told(&there, by), "seed {seed}");
        assert_eq!(scores(&one), scores(&other));
    }
}

/// Records out of order, of other kinds, doubled: no panic, no end, whatever comes.
#[test]
fn nonsense_is_survived() {
    for seed in 0..scripts_or(3_000) {
        let script = any(seed);
        let mut dice = Dice::new(seed ^ 0xBAD);
        let mut auditor = auditor(&script);
        let mut coverage = Coverage::new(&script.program, &script.settings);
        for record in &script.records {
            let at = match dice.below(6) {
                0 => Instant::ZERO,
                1 => Instant::MAX,
                2 => Instant::from_micros(1 << dice.below(63)),
                _ => record.at,
            };
            let record = Record { at, a: record.a ^ u32::try_from(dice.below(4)).unwrap(), ..*record };
            auditor.observe(&record);
            coverage.record(&record);
            for _ in 0..dice.below(3) {
                if let Some(judgement) = auditor.poll(at) {
                    coverage.judged(&judgement);
                }
            }
        }
        auditor.finish(Instant::MAX);
        for _ in 0..50 {
            if let Some(judgement) = auditor.poll(Instant::MAX) {
                coverage.judged(&judgement);
            }
        }
        assert_eq!(auditor.poll(Instant::MAX), None);
        assert!(coverage.score().hit <= coverage.score().required);
    }
}

/// What an auditor needs on a target: with the heart it must fit into 4 KiB.
#[test]
fn it_is_small() {
    let (target, host) = (size_of::<Auditor<12>>(), size_of::<Auditor<256>>());
    println!("{target} bytes with room for 12 hypotheses, {host} with 256");
    assert!(target <= 2_560, "{target}");
    assert!(host - target <= 244 * 12, "a hypothesis takes twelve bytes");
}

/// The judge shares no code with the defendant: neither room names the other, nor do rules see heart, lead or bench.
#[test]
fn the_judge_is_not_the_defendant() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut files = 0;
    for (room, others) in [("audit", &["device", "bench", "heart", "lead"][..]), ("device", &["audit", "bench", "heart", "lead"])]
    {
        for (path, text) in sources(&root.join(room)) {
            files += 1;
            for other in others {
                for way in [format!("crate::{other}"), format!("super::{other}"), format!("phase4::{other}")] {
                    let named = text.lines().any(|line| line.contains(&way) && !line.trim_start().starts_with("//"));
                    assert!(!named, "{path} names {way}");
                }
                let grouped = text.split("use crate::{").skip(1).any(|rest| rest.split('}').next().unwrap().contains(other));
                assert!(!grouped, "{path} uses {other}");
            }
        }
    }
    assert!(files > 20);
}

fn sources(room: &Path) -> Vec<(String, String)> {
    let mut found = Vec::new();
    for entry in fs::read_dir(room).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            found.extend(sources(&path));
        } else {
            found.push((path.display().to_string(), fs::read_to_string(&path).unwrap()));
        }
    }
    found
}
