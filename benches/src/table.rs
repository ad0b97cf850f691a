//! The programs of the common rhythm as one list.

use crate::ours;
use crate::peers::{general, heap, special, ticks};
use crate::rhythm::{Tally, length};

/// A program that gets the beats of the common rhythm.
#[derive(Debug, Clone, Copy)]
pub struct Program {
    /// Its name on the command line.
    pub name: &'static str,
    /// What it is, in one line.
    pub line: &'static str,
    /// How many beats it can do in about a fifth of a second.
    pub beats: u64,
    /// Gives the beat times until this time in µs, where they are not those of phase4 to the microsecond and so no digest tells
    /// how far off they are.
    pub inexact: Option<fn(u64) -> Vec<u64>>,
    /// Runs it and keeps a digest alone.
    pub tally: fn(u64) -> Tally,
}

fn tallied(run: impl FnOnce(&mut Tally)) -> Tally {
    let mut tally = Tally::default();
    run(&mut tally);
    tally
}

fn listed(run: impl FnOnce(&mut Vec<u64>)) -> Vec<u64> {
    let mut times = Vec::new();
    run(&mut times);
    times
}

/// A beat's time in milliseconds to the nearest microsecond.
fn nearest(millis: f64) -> u64 {
    (millis * 1_000.0).round() as u64
}

/// phase4 first, then its peers from the most special to the most general.
pub const PROGRAMS: [Program; 8] = [
    Program {
        name: "common",
        line: "phase4: heart, lead, device, script, log with hash",
        beats: 1_000_000,
        inexact: None,
        tally: ours::common_rhythm,
    },
    Program {
        name: "special-integer",
        line: "special-case loop, whole µs, exponential from an integer table",
        beats: 40_000_000,
        inexact: None,
        tally: |until| tallied(|tally| special::integer_table(until, |at| tally.beat(at))),
    },
    Program {
        name: "special-float",
        line: "special-case loop, whole µs, f64 exponential then rounded",
        beats: 10_000_000,
        inexact: None,
        tally: |until| tallied(|tally| special::float_exponential(until, |at| tally.beat(at))),
    },
    Program {
        name: "float",
        line: "special-case loop, f64 ms throughout",
        beats: 10_000_000,
        inexact: Some(|until| listed(|times| special::float_throughout(until, |at| times.push(nearest(at))))),
        tally: |until| tallied(|tally| special::float_throughout(until, |at| tally.beat(at.to_bits()))),
    },
    Program {
        name: "heap",
        line: "small general engine, BinaryHeap and boxed components",
        beats: 2_000_000,
        inexact: None,
        tally: heap::run,
    },
    Program {
        name: "tick-whole",
        line: "1 ms tick loop, whole milliseconds",
        beats: 200_000,
        inexact: Some(|until| listed(|times| ticks::whole_milliseconds(until, |at| times.push(at)))),
        tally: |until| tallied(|tally| ticks::whole_milliseconds(until, |at| tally.beat(at))),
    },
    Program {
        name: "tick-kept",
        line: "1 ms tick loop, remainders kept",
        beats: 200_000,
        inexact: Some(|until| listed(|times| ticks::kept_remainders(until, |at| times.push(at)))),
        tally: |until| tallied(|tally| ticks::kept_remainders(until, |at| tally.beat(at))),
    },
    Program {
        name: "general",
        line: "general discrete-event engine (nexosim 1.0), five models, one thread",
        beats: 200_000,
        inexact: None,
        tally: |until| general::run(until).expect("the engine runs"),
    },
];

impl Program {
    /// The program of this name.
    pub fn of(name: &str) -> Option<&'static Self> {
        PROGRAMS.iter().find(|program| program.name == name)
    }

    /// Runs it for so many beats.
    pub fn beat(&self, beats: u64) -> Tally {
        (self.tally)(length(beats))
    }
}
