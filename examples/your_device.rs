//! "What does my timing code do when a beat lands just around the end of the refractory period?"
//!
//! A device of your own in the loop: implement `Device`, run a `Bench`, read the judgements. The one here is a small VVI timer with
//! a mistake in it: it lets a sense in the refractory period restart the rate timer.
//!
//! Bench use only: never connected to a person, not a medical device, not evidence of conformity by itself.
//!
//! `cargo run --example your_device`
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::float_arithmetic,
    clippy::missing_const_for_fn,
    reason = "an example prints; the library's own lints are stricter"
)]

use phase4::audit::{AuditSettings, Outcome};
use phase4::base::{
    Channel, Deviation, Instant, Interval, MicroVolts, Mode, NotYet, ParamError, Program, Pulse, Rate, Settings, Signal, Span,
};
use phase4::bench::{Act, Amount, Bench, Coupling, Entry, Event, Setup, Step, When, WindowEnd};
use phase4::device::Device;
use phase4::heart::plain;
use phase4::lead::LeadParams;

/// Your timing code, with its own idea of when the next pulse is due.
struct MyTimer {
    program: Program,
    last_beat: Instant,
    pulse_due: Instant,
}

impl MyTimer {
    fn new(program: Program, start: Instant) -> Self {
        let pulse_due = start.saturating_add(program.settings().lower.nearest());
        Self { program, last_beat: start, pulse_due }
    }

    fn restart(&mut self, at: Instant) {
        self.pulse_due = at.saturating_add(self.program.settings().lower.nearest());
    }
}

impl Device for MyTimer {
    fn signal(&mut self, channel: Channel, signal: Signal, at: Instant) -> Result<(), NotYet> {
        if self.pulse_due < at {
            return Err(NotYet(self.pulse_due));
        }
        let settings = self.program.settings();
        let since = at.saturating_since(self.last_beat);
        if channel != Channel::Ventricular || signal.peak < settings.sensitivity || since < settings.blanking {
            return Ok(());
        }
        if since >= settings.refractory {
            self.last_beat = at;
        }
        self.restart(at); // the mistake: this belongs inside the `if`
        Ok(())
    }

    fn poll(&mut self, now: Instant) -> Option<(Instant, Pulse)> {
        let at = self.pulse_due;
        if at > now {
            return None;
        }
        self.last_beat = at;
        self.restart(at);
        let settings = self.program.settings();
        Some((at, Pulse { channel: Channel::Ventricular, amplitude: settings.amplitude, width: settings.width }))
    }

    fn next_at(&self) -> Option<Instant> {
        Some(self.pulse_due)
    }
}

fn main() -> Result<(), ParamError> {
    let program = Settings::new(Mode::Vvi, Interval::from_rate_nearest(Rate::per_minute(60))).check()?;
    let around_the_end = Coupling {
        window: Some(WindowEnd::Refractory),
        shift: Amount::Sweep { from: Deviation::from_millis(-30), to: Deviation::from_millis(30), step: Span::from_millis(20) },
    };
    let after_a_pulse = When::After { event: Event::Pulse(Channel::Ventricular), nth: 2, coupling: around_the_end };
    let signal = Signal { peak: MicroVolts(8_000), width: Span::from_millis(40) };
    let steps = [
        Step { when: When::At(Span::ZERO), act: Act::Quiet, times: 1 },
        Step { when: after_a_pulse, act: Act::Signal(Channel::Ventricular, signal), times: 4 },
    ];
    let start = Instant::ZERO;
    let setup = Setup {
        anatomy: &plain::ANATOMY,
        foci: &[],
        lead: LeadParams::PLAIN,
        judged: Some((program, AuditSettings::new(&program))),
        steps: &steps,
        start,
        length: Span::from_secs(20),
        seed: 1,
    };
    // Room for 8 steps and 64 explanations at once.
    let mut bench: Bench<'_, _, 5, 4, 3, 0, 8, 64> = Bench::new(&setup, Some(MyTimer::new(program, start)))?;
    let mut broken = 0;
    while let Some(entry) = bench.poll(Instant::MAX) {
        if let Entry::Judged(judgement) = entry
            && judgement.outcome == Outcome::Broken
        {
            broken += 1;
            let late = judgement.deviation.map_or(0, Deviation::as_micros);
            println!(
                "{:>9.3} s  {}: {}, {:+.1} ms from nominal",
                judgement.at.as_micros() as f64 / 1e6,
                judgement.rule.code(),
                judgement.rule.line(),
                late as f64 / 1e3,
            );
        }
    }
    println!("{broken} broken; log hash {}", bench.log().hash());
    Ok(())
}
