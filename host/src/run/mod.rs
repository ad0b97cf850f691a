//! Running a scenario: the closed loop, its records handed on as they come, and everything there is to tell afterwards.

mod names;

pub use names::{names, tract_shapes};

use crate::judge::{HYPOTHESES, Judged, coverage};
use crate::scenario::{MOST_STEPS, Scenario};
use crate::tally::Tally;
use phase4::audit::RuleSet;
use phase4::base::{Instant, ParamError, Problem, Record};
use phase4::bench::{Bench, Entry, Setup};
use phase4::device::ReferenceDevice;
use phase4::heart::FocusParams;
use std::io;
use std::sync::atomic::{AtomicBool, Ordering};

/// What a run left behind.
#[derive(Debug, Clone)]
pub struct Finished {
    /// Counts.
    pub tally: Tally,
    /// The running hash over all records.
    pub hash: u64,
    /// What the auditor made of it; `None` where there was no device.
    pub judged: Option<Judged>,
}

/// Why a run did not come to its end.
#[derive(Debug)]
pub enum Failed {
    /// The library refuses a part of it.
    Refused(ParamError),
    /// What watches the records could not store them.
    Output(io::Error),
}

/// Entries between two looks at the clock and at the wish to stop.
const ENTRIES_A_TURN: u32 = 4_096;

/// What is asked of a run besides its scenario.
#[derive(Debug, Clone, Copy)]
pub struct Order<'a> {
    /// The seed of all chance.
    pub seed: u64,
    /// Rules the auditor is blind to: none but in a test of whether a run would notice.
    pub blind: RuleSet,
    /// The run ends, interrupted, soon after this becomes true.
    pub stop: &'a AtomicBool,
    /// Whether judgements are kept: a report needs them, their counts do not.
    pub keep: bool,
}

/// Runs a scenario. `watch` is handed every record in order; `progress` now and then the instant reached.
///
/// # Errors
/// What the library refuses, and what `watch` could not do.
pub fn run(
    scenario: &Scenario,
    order: Order<'_>,
    watch: impl FnMut(&Record) -> io::Result<()>,
    progress: impl FnMut(Instant),
) -> Result<Finished, Failed> {
    let foci = scenario.foci();
    let (watch, progress) = (watch, progress);
    // How many foci a heart has is part of its type.
    match foci.as_slice() {
        [] => Loop::<0> { scenario, foci: &[], order }.run(watch, progress),
        [a] => Loop::<1> { scenario, foci: &[*a], order }.run(watch, progress),
        [a, b] => Loop::<2> { scenario, foci: &[*a, *b], order }.run(watch, progress),
        [a, b, c] => Loop::<3> { scenario, foci: &[*a, *b, *c], order }.run(watch, progress),
        [a, b, c, d] => Loop::<4> { scenario, foci: &[*a, *b, *c, *d], order }.run(watch, progress),
        more => {
            let value = u64::try_from(more.len()).unwrap_or(u64::MAX);
            Err(Failed::Refused(ParamError::new("foci", Problem::OutOfRange { value, least: 0, greatest: 4 })))
        }
    }
}

struct Loop<'a, const F: usize> {
    scenario: &'a Scenario,
    foci: &'a [FocusParams<'a>; F],
    order: Order<'a>,
}

impl<const F: usize> Loop<'_, F> {
    fn run(
        &self,
        mut watch: impl FnMut(&Record) -> io::Result<()>,
        mut progress: impl FnMut(Instant),
    ) -> Result<Finished, Failed> {
        let scenario = self.scenario;
        let device = scenario.device.as_ref().map(|device| match device.fault {
            Some(fault) => ReferenceDevice::with_fault(device.program, fault, scenario.start),
            None => ReferenceDevice::new(device.program, scenario.start),
        });
        let judged = scenario.device.as_ref().zip(scenario.audit.as_ref());
        let setup = Setup {
            anatomy: &scenario.heart.anatomy,
            foci: self.foci,
            lead: scenario.lead,
            judged: judged.map(|(device, audit)| (device.program, audit.settings)),
            steps: &scenario.steps.steps,
            start: scenario.start,
            length: scenario.length,
            seed: self.order.seed,
        };
        let bench = Bench::<_, 5, 4, 3, F, MOST_STEPS, HYPOTHESES>::new(&setup, device).map_err(Failed::Refused)?;
        let mut bench = Box::new(bench);
        if !self.order.blind.is_empty() {
            bench.blind(self.order.blind);
        }
        let (mut tally, mut judgements) = (Tally::default(), Vec::new());
        let mut coverage = judged.map(|(device, audit)| coverage(scenario, &device.program, &audit.settings));
        let mut turn: u32 = 0;
        while let Some(entry) = bench.poll(Instant::MAX) {
            match entry {
                Entry::Record(record) => {
                    tally.take(&record);
                    if let Some(coverage) = &mut coverage {
                        coverage.record(&record);
                    }
                    watch(&record).map_err(Failed::Output)?;
                }
                Entry::Judged(judgement) => {
                    if let Some(coverage) = &mut coverage {
                        coverage.judged(&judgement);
                    }
                    if self.order.keep {
                        judgements.push(judgement);
                    }
                }
            }
            turn = turn.wrapping_add(1);
            if turn.is_multiple_of(ENTRIES_A_TURN) {
                progress(bench.now());
                if self.order.stop.load(Ordering::Relaxed) {
                    bench.interrupt();
                }
            }
        }
        let judged = bench.auditor().map(|auditor| Judged::of(auditor, judgements, coverage));
        Ok(Finished { tally, hash: bench.log().hash().value(), judged })
    }
}
