//! Heart, device and auditor in one image: it runs one scenario to its end and prints what came of it.
//!
//! The host writes the scenario's constants. `check` compares what is printed, line by line, with the host's own run of the same
//! file; lines that begin with `image` tell of the image alone.
#![no_std]
#![no_main]

mod stack;

/// The scenario, as the host's example `image_constants` wrote it.
#[allow(unused_imports, reason = "a scenario without a device needs less of the library")]
mod scenario {
    include!(concat!(env!("OUT_DIR"), "/constants.rs"));
}

use cortex_m::singleton;
use cortex_m_rt::entry;
use phase4::audit::{Auditor, Findings, RuleId, Verdict};
use phase4::base::{Instant, Kind, ParamError, Record};
use phase4::bench::{Bench, EndReason, Entry};
use phase4::device::ReferenceDevice;
use phase4::heart::plain;
use scenario::{CELLS, FOCI, SETUP, SITES, STEPS, TRACTS};
use semihosting::{print, println, process};

/// As many states of the device as a small target can keep apart.
const HYPOTHESES: usize = 12;

/// Bytes of stack that must never have been touched.
const STACK_TO_SPARE: usize = 256;

type Loop = Bench<'static, ReferenceDevice, SITES, TRACTS, CELLS, FOCI, STEPS, HYPOTHESES>;

#[entry]
fn main() -> ! {
    let bench = match build() {
        Ok(bench) => bench,
        Err(refused) => {
            println!("image refused: {refused}");
            process::exit(2)
        }
    };
    let building = stack::deepest();
    stack::repaint();
    let counts = run(bench);
    let running = stack::deepest();
    tell(bench, &counts);
    let room = stack::room();
    println!("image loop {} bytes; stack {building} building, {running} running, of {room}", size_of::<Loop>());
    // A stack that has come this near its end may have been beyond it, and then nothing above is worth anything.
    let enough = building.max(running) + STACK_TO_SPARE <= room;
    process::exit(if enough { 0 } else { 3 })
}

/// Builds the loop in a place of its own, and in a function of its own: what it takes of the stack is given back before the run.
#[inline(never)]
fn build() -> &'static mut Result<Loop, ParamError> {
    let place = singleton!(: Option<Result<Loop, ParamError>> = None).expect("main runs once");
    place.insert(Bench::new(&SETUP, scenario::device()))
}

/// What is counted on the way.
#[derive(Default)]
struct Counts {
    beats: u32,
    pulses: u32,
}

impl Counts {
    fn take(&mut self, record: &Record) {
        match record.kind {
            Kind::Activated if record.place == plain::VENTRICLE.row() => self.beats += 1,
            Kind::Pulse => self.pulses += 1,
            _ => {}
        }
    }
}

#[inline(never)]
fn run(bench: &mut Loop) -> Counts {
    let mut counts = Counts::default();
    while let Some(entry) = bench.poll(Instant::MAX) {
        if let Entry::Record(record) = entry {
            counts.take(&record);
        }
    }
    counts
}

fn tell(bench: &Loop, counts: &Counts) {
    println!("verdict {}", verdict(bench).word());
    println!("hash {}", bench.log().hash());
    println!("beats {}", counts.beats);
    println!("pulses {}", counts.pulses);
    let Some(auditor) = bench.auditor() else { return };
    for rule in RuleId::ALL {
        let score = auditor.score(rule);
        print!("rule {} {} {} {} {} ", rule.code(), score.checked, score.held, score.broken, score.undecided);
        match score.worst {
            Some(worst) => println!("{}", worst.as_micros()),
            None => println!("null"),
        }
    }
}

/// The verdict, but for what only the host does: the canary, and coverage that is asked for by name.
fn verdict(bench: &Loop) -> Verdict {
    let judged = SETUP.judged.filter(|(program, _)| program.paces().is_some() || program.senses().is_some());
    Verdict::of(&Findings {
        judged: judged.is_some() && bench.auditor().is_some(),
        canary_caught: true,
        broken: bench.auditor().map_or(0, Auditor::broken),
        decided: bench.auditor().map_or(0, Auditor::decided),
        undecided: bench.auditor().map_or(0, Auditor::undecided),
        decide_thousandths: judged.map_or(0, |(_, settings)| settings.decide_thousandths),
        required_missing: false,
        interrupted: bench.ended() == Some(EndReason::Interrupted),
    })
}
