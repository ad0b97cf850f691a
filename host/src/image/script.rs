//! The script as a constant.

use super::quantity::{deviation, option, span};
use phase4::base::Channel;
use phase4::bench::{Act, Amount, Coupling, Event, Step, When, WindowEnd};
use phase4::heart::Ways;
use phase4::lead::LeadChange;
use std::fmt::{Result, Write};

pub(super) fn write(out: &mut String, steps: &[Step]) -> Result {
    writeln!(out, "/// The script.\npub static SCRIPT: [bench::Step; {}] = [", steps.len())?;
    for step in steps {
        writeln!(out, "    bench::Step {{ when: {}, act: {}, times: {} }},", when(step.when), act(step.act), step.times)?;
    }
    writeln!(out, "];\n")
}

/// Stands for a word that this file does not know: the text then does not compile.
const UNKNOWN: &str = "a_word_of_the_script_that_cannot_be_written_yet";

fn when(when: When) -> String {
    match when {
        When::At(at) => format!("bench::When::At({})", span(at)),
        When::Every(every) => format!("bench::When::Every({})", span(every)),
        When::After { event: what, nth, coupling: by } => {
            format!("bench::When::After {{ event: {}, nth: {nth}, coupling: {} }}", event(what), coupling(by))
        }
        When::Without { event: what, span: long } => {
            format!("bench::When::Without {{ event: {}, span: {} }}", event(what), span(long))
        }
        _ => UNKNOWN.to_owned(),
    }
}

fn event(event: Event) -> String {
    match event {
        Event::Pulse(of) => format!("bench::Event::Pulse({})", channel(of)),
        Event::Signal(of) => format!("bench::Event::Signal({})", channel(of)),
        Event::Activation(site) => format!("bench::Event::Activation(base::SiteId::new({}))", site.row()),
        Event::Capture(site) => format!("bench::Event::Capture(base::SiteId::new({}))", site.row()),
        Event::NoCapture(site) => format!("bench::Event::NoCapture(base::SiteId::new({}))", site.row()),
        Event::Block(tract) => format!("bench::Event::Block(base::TractId::new({}))", tract.row()),
        _ => UNKNOWN.to_owned(),
    }
}

fn coupling(coupling: Coupling) -> String {
    let window = |window| match window {
        WindowEnd::Blanking => "bench::WindowEnd::Blanking".to_owned(),
        WindowEnd::Refractory => "bench::WindowEnd::Refractory".to_owned(),
        WindowEnd::Lower => "bench::WindowEnd::Lower".to_owned(),
        WindowEnd::Hysteresis => "bench::WindowEnd::Hysteresis".to_owned(),
        _ => UNKNOWN.to_owned(),
    };
    let shift = match coupling.shift {
        Amount::Fixed(by) => format!("Fixed({})", deviation(by)),
        Amount::Sweep { from, to, step } => {
            format!("Sweep {{ from: {}, to: {}, step: {} }}", deviation(from), deviation(to), span(step))
        }
        Amount::Random { from, to } => format!("Random {{ from: {}, to: {} }}", deviation(from), deviation(to)),
    };
    format!("bench::Coupling {{ window: {}, shift: bench::Amount::{shift} }}", option(coupling.window, window))
}

const fn channel(channel: Channel) -> &'static str {
    match channel {
        Channel::Atrial => "base::Channel::Atrial",
        Channel::Ventricular => "base::Channel::Ventricular",
    }
}

fn act(act: Act) -> String {
    let ways = |ways| match ways {
        Ways::Forward => "heart::Ways::Forward",
        Ways::Backward => "heart::Ways::Backward",
        Ways::Both => "heart::Ways::Both",
    };
    match act {
        Act::Beat(site) => format!("bench::Act::Beat(base::SiteId::new({}))", site.row()),
        Act::Signal(on, signal) => format!(
            "bench::Act::Signal({}, base::Signal {{ peak: base::MicroVolts({}), width: {} }})",
            channel(on),
            signal.peak.0,
            span(signal.width)
        ),
        Act::Arrest(cell) => format!("bench::Act::Arrest(base::CellId::new({}))", cell.row()),
        Act::Release(cell) => format!("bench::Act::Release(base::CellId::new({}))", cell.row()),
        Act::Quiet => "bench::Act::Quiet".to_owned(),
        Act::Shut(tract, way) => format!("bench::Act::Shut(base::TractId::new({}), {})", tract.row(), ways(way)),
        Act::Open(tract, way) => format!("bench::Act::Open(base::TractId::new({}), {})", tract.row(), ways(way)),
        Act::Lead(on, change) => format!("bench::Act::Lead({}, {})", channel(on), lead_change(change)),
        Act::End => "bench::Act::End".to_owned(),
        _ => UNKNOWN.to_owned(),
    }
}

fn lead_change(change: LeadChange) -> String {
    match change {
        LeadChange::Peak(peak) => format!("lead::LeadChange::Peak(base::MicroVolts({}))", peak.0),
        LeadChange::Delay(delay) => format!("lead::LeadChange::Delay({})", span(delay)),
        LeadChange::Width(width) => format!("lead::LeadChange::Width({})", span(width)),
        _ => UNKNOWN.to_owned(),
    }
}
