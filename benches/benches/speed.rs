//! `cargo bench --manifest-path benches/Cargo.toml`: phase4 beside its peers, the audited loop, memory, two cores. One table each.

use phase4_benches::measure::{load, processor_time, spread};
use phase4_benches::ours::{self, Vvi};
use phase4_benches::rhythm::{Tally, length};
use phase4_benches::table::{PROGRAMS, Program};
use std::process::Command;
use std::time::{Duration, Instant};

/// How often everything is measured; the middle one counts.
const ROUNDS: usize = 5;
/// Beats of 24 h at 72 per minute.
const DAY: u64 = 103_680;
/// Beats of a year of the plain heart at 75 per minute.
const YEAR: u64 = 75 * 60 * 24 * 365;

fn main() {
    println!("load average before: {}\n", load());
    agree();
    beside_peers();
    loops();
    year();
    memory();
    two_cores();
    println!("\nload average after: {}", load());
}

/// Nothing is timed before all programs have the same beats: digests where they are exact, distances where they are not.
fn agree() {
    println!("Beat times over 24 h ({DAY} beats)");
    let until = length(DAY);
    let ours: Tally = ours::common_rhythm(until);
    let mut exact = Vec::new();
    phase4_benches::peers::special::float_exponential(until, |at| exact.push(at));
    for Program { name, line, inexact, tally, .. } in PROGRAMS {
        let verdict = match inexact {
            None => {
                assert_eq!(tally(until), ours, "{name} has other beats");
                format!("the same, digest {:016x}", ours.digest)
            }
            Some(times) => {
                let apart = times(until).iter().zip(&exact).map(|(one, other)| one.abs_diff(*other)).max().unwrap_or(0);
                format!("up to {apart} µs away")
            }
        };
        println!("  {line:<72} {verdict}");
    }
}

fn beside_peers() {
    println!("\nThe common rhythm, without auditor: beats per second of processor time, median (least..most) of {ROUNDS} rounds");
    let mut speeds = vec![Vec::new(); PROGRAMS.len()];
    for _ in 0..ROUNDS {
        for (program, speeds) in PROGRAMS.iter().zip(&mut speeds) {
            let (tally, time) = processor_time(|| program.beat(program.beats));
            speeds.push(tally.beats as f64 / time.as_secs_f64());
        }
    }
    let spreads: Vec<_> = speeds.into_iter().map(spread).collect();
    let ours = spreads.first().map_or(0.0, |(middle, ..)| *middle);
    println!("  {:<72} {:>9} {:>20} {:>10} {:>14}", "program", "M beats/s", "(least..most)", "ns a beat", "phase4 ÷ peer");
    for (program, (middle, least, most)) in PROGRAMS.iter().zip(spreads) {
        let range = format!("({:.3}..{:.3})", least / 1e6, most / 1e6);
        println!("  {:<72} {:>9.3} {range:>20} {:>10.1} {:>14.3}", program.line, middle / 1e6, 1e9 / middle, ours / middle);
    }
}

fn loops() {
    println!(
        "\nThe plain heart (five sites) and a VVI device: beats per second of processor time, median (least..most) of {ROUNDS}"
    );
    let kinds = [
        ("VVI, senses every beat", Vvi::Senses, false),
        ("VVI, senses every beat, audited", Vvi::Senses, true),
        ("VVI, every fifth beat blocked and paced", Vvi::Mixed, false),
        ("VVI, every fifth beat blocked and paced, audited", Vvi::Mixed, true),
        ("VVI, paces every beat against the sinus node", Vvi::Paces, false),
        ("VVI, paces every beat against the sinus node, audited", Vvi::Paces, true),
    ];
    let beats = 500_000;
    let mut speeds = vec![Vec::new(); kinds.len() + 1];
    for _ in 0..ROUNDS {
        let (_, time) = processor_time(|| ours::heart_alone(beats));
        speeds[0].push(beats as f64 / time.as_secs_f64());
        for ((_, kind, audited), speeds) in kinds.into_iter().zip(&mut speeds[1..]) {
            let ((beats, _), time) = processor_time(|| ours::vvi_loop(kind, audited, beats));
            speeds.push(beats as f64 / time.as_secs_f64());
        }
    }
    let names = ["heart alone"].into_iter().chain(kinds.into_iter().map(|(name, ..)| name));
    for (name, speeds) in names.zip(speeds) {
        let (middle, least, most) = spread(speeds);
        println!("  {name:<72} {:>9.3} ({:.3}..{:.3})", middle / 1e6, least / 1e6, most / 1e6);
    }
}

fn year() {
    let ((beats, _), time) = processor_time(|| ours::vvi_loop(Vvi::Senses, true, YEAR));
    println!(
        "\nA simulated year, audited (VVI, senses every beat): {beats} beats in {:.1} s of processor time",
        time.as_secs_f64()
    );
}

/// Each length in a process of its own, since a peak never goes down.
fn memory() {
    println!("\nPeak memory of the whole process, VVI, every fifth beat paced, audited");
    for beats in [10_000_u64, 1_000_000, 100_000_000] {
        let run = Command::new(env!("CARGO_BIN_EXE_workload")).args(["vvi-mixed-audited", &beats.to_string()]).output();
        match run {
            Ok(done) => println!("  {}", String::from_utf8_lossy(&done.stdout).trim()),
            Err(error) => println!("  not measured: {error}"),
        }
    }
}

/// Independent runs on one thread and on two. In wall time others on the machine count, so the best of several; in processor
/// time they do not: that tells what two runs cost each other.
fn two_cores() {
    let beats = 500_000;
    let run = || processor_time(|| ours::vvi_loop(Vvi::Mixed, true, beats)).1;
    let on = |threads: usize| -> (Duration, Duration) {
        let before = Instant::now();
        let times: Vec<Duration> = std::thread::scope(|scope| {
            let runs: Vec<_> = (0..threads).map(|_| scope.spawn(run)).collect();
            runs.into_iter().map(|run| run.join().expect("the run ends")).collect()
        });
        (before.elapsed(), times.into_iter().max().unwrap_or_default())
    };
    let least = |one: (Duration, Duration), other: (Duration, Duration)| (one.0.min(other.0), one.1.min(other.1));
    let (mut one, mut two) = ((Duration::MAX, Duration::MAX), (Duration::MAX, Duration::MAX));
    for _ in 0..4 * ROUNDS {
        one = least(one, on(1));
        two = least(two, on(2));
    }
    let gain = |one: Duration, two: Duration| 2.0 * one.as_secs_f64() / two.as_secs_f64();
    println!("\nTwo independent audited runs at once on two threads, against one on one, best of {} each", 4 * ROUNDS);
    println!("  by processor time {:.2} times the beats, by wall time {:.2} times", gain(one.1, two.1), gain(one.0, two.0));
}
