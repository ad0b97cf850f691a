//! Program, audit settings and device as constants.

use super::quantity::{deviation, interval, option, span};
use crate::scenario::{AuditPart, DevicePart, Scenario};
use phase4::audit::{Decision, Tolerance};
use phase4::base::{Edge, Mode, Straddle, Tie};
use phase4::device::{Fault, Size};
use std::fmt::{Result, Write};

pub(super) fn write(out: &mut String, scenario: &Scenario) -> Result {
    writeln!(
        out,
        "/// When it starts.\npub const START: base::Instant = base::Instant::from_micros({});\n",
        scenario.start.as_micros()
    )?;
    match scenario.device.as_ref().zip(scenario.audit.as_ref()) {
        Some((device, audit)) => {
            write_program(out, device)?;
            write_audit(out, audit)?;
            write_device(out, device.fault)
        }
        None => {
            writeln!(out, "/// No device is connected.\npub fn device() -> Option<device::ReferenceDevice> {{\n    None\n}}\n")
        }
    }
}

const fn mode(mode: Mode) -> Option<&'static str> {
    match mode {
        Mode::Ooo => Some("Ooo"),
        Mode::Aoo => Some("Aoo"),
        Mode::Voo => Some("Voo"),
        Mode::Aai => Some("Aai"),
        Mode::Vvi => Some("Vvi"),
        _ => None,
    }
}

fn write_program(out: &mut String, device: &DevicePart) -> Result {
    let set = device.program.settings();
    // A mode this file does not know makes a text that does not compile.
    let mode = mode(set.mode).unwrap_or(set.mode.code());
    writeln!(out, "/// What the device is set to.\npub const PROGRAM: base::Program = {{")?;
    writeln!(out, "    let mut settings = base::Settings::new(base::Mode::{mode}, {});", interval(set.lower))?;
    let edge = if set.edge == Edge::Inside { "Inside" } else { "Outside" };
    let tie = if set.tie == Tie::ExpiryFirst { "ExpiryFirst" } else { "SenseFirst" };
    let straddle = if set.straddle == Straddle::End { "End" } else { "Onset" };
    for (name, value) in [
        ("hysteresis", option(set.hysteresis, interval)),
        ("refractory", span(set.refractory)),
        ("blanking", span(set.blanking)),
        ("sensitivity", format!("base::MicroVolts({})", set.sensitivity.0)),
        ("amplitude", format!("base::MilliVolts({})", set.amplitude.0)),
        ("width", span(set.width)),
        ("edge", format!("base::Edge::{edge}")),
        ("tie", format!("base::Tie::{tie}")),
        ("straddle", format!("base::Straddle::{straddle}")),
        ("detect_delay", span(set.detect_delay)),
    ] {
        writeln!(out, "    settings.{name} = {value};")?;
    }
    writeln!(out, "    sound(settings.check())\n}};\n")
}

fn write_audit(out: &mut String, audit: &AuditPart) -> Result {
    let set = &audit.settings;
    let decision = if set.decision == Decision::Guarded { "Guarded" } else { "Simple" };
    let limits = &set.limits;
    writeln!(out, "/// How it is judged.\npub const AUDIT: audit::AuditSettings = {{")?;
    writeln!(out, "    let mut settings = audit::AuditSettings::new(&PROGRAM);")?;
    let pair = |(from, to)| format!("({}, {})", span(from), span(to));
    for (name, value) in [
        ("lower", tolerance(&set.lower)),
        ("hysteresis", tolerance(&set.hysteresis)),
        ("refractory", tolerance(&set.refractory)),
        ("blanking", tolerance(&set.blanking)),
        ("uncertainty", span(set.uncertainty)),
        ("decision", format!("audit::Decision::{decision}")),
        ("sensitivity_thousandths", set.sensitivity_thousandths.to_string()),
        ("detect", pair(set.detect)),
        (
            "limits",
            format!(
                "audit::Limits {{ ceiling: {}, longest_pause: {}, vulnerable: {} }}",
                span(limits.ceiling),
                option(limits.longest_pause, span),
                option(limits.vulnerable, pair)
            ),
        ),
        ("decide_thousandths", set.decide_thousandths.to_string()),
    ] {
        writeln!(out, "    settings.{name} = {value};")?;
    }
    writeln!(out, "    settings\n}};\n")
}

fn tolerance(tolerance: &Tolerance) -> String {
    format!(
        "audit::Tolerance {{ low: {}, high: {}, share_millionths: {}, tick: {} }}",
        span(tolerance.low),
        span(tolerance.high),
        tolerance.share_millionths,
        span(tolerance.tick)
    )
}

fn write_device(out: &mut String, fault: Option<Fault>) -> Result {
    writeln!(out, "/// The device.\npub fn device() -> Option<device::ReferenceDevice> {{")?;
    match fault {
        Some(fault) => {
            let size = match fault.size() {
                Size::Whole => "Whole".to_owned(),
                Size::Span(size) => format!("Span({})", span(size)),
                Size::Shift(by) => format!("Shift({})", deviation(by)),
                Size::Millionths(share) => format!("Millionths({share})"),
                Size::Divisor(by) => format!("Divisor({by})"),
            };
            writeln!(out, "    let fault = device::Fault::new({}, device::Size::{size}).ok()?;", fault.id())?;
            writeln!(out, "    Some(device::ReferenceDevice::with_fault(PROGRAM, fault, START))\n}}\n")
        }
        None => writeln!(out, "    Some(device::ReferenceDevice::new(PROGRAM, START))\n}}\n"),
    }
}
