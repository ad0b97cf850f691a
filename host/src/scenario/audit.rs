//! `[audit]`: how the device is judged.

use super::device::set;
use super::param::{Written, complaint};
use super::require::{self, Required};
use super::schema::{TOLERANCE, TOLERANCES};
use super::units::{interval, span, span_range};
use super::walk::Section;
use crate::refusal::Complaint;
use phase4::audit::{AuditSettings, Decision, Limits, Tolerance};
use phase4::base::{Program, Span};

/// How a scenario's device is judged.
#[derive(Debug, Clone)]
pub struct AuditPart {
    /// What the auditor is told.
    pub settings: AuditSettings,
    /// Coverage cells that must be hit.
    pub require: Vec<Required>,
}

/// Reads how this program is judged; `device` is the table that tells the program.
pub(super) fn read(section: &Section<'_, '_>, device: &Section<'_, '_>, program: &Program) -> AuditPart {
    let mut settings = AuditSettings::new(program);
    tolerances(section, &mut settings);
    set(&mut settings.uncertainty, section.read("uncertainty", span));
    set(
        &mut settings.decision,
        section.choice("decision").map(|word| if word == "guarded" { Decision::Guarded } else { Decision::Simple }),
    );
    let mut limits = settings.limits;
    set(&mut limits.ceiling, section.read("ceiling", interval).map(|interval| interval.nearest()));
    if let Some(pause) = section.read("longest_pause", interval) {
        limits.longest_pause = Some(pause.nearest());
    }
    let window = |text: &str| if text.trim() == "off" { Ok(None) } else { span_range(text).map(Some) };
    set(&mut limits.vulnerable, section.read("vulnerable", window));
    settings.limits = check_limits(section, limits);
    let decide = section.share_millionths("decide").map(|millionths| millionths.checked_div(1_000).unwrap_or(0));
    set(&mut settings.decide_thousandths, decide);
    let checked = settings.check(program);
    if let Err(error) = &checked {
        section.complain(complaint(error, |parameter| written(section, device, parameter)));
    }
    // Which cells there are depends on settings that are sound.
    let require = if checked.is_ok() { require::read(section, program, &settings) } else { Vec::new() };
    AuditPart { settings, require }
}

/// Where a parameter of the audit settings was written.
fn written(audit: &Section<'_, '_>, device: &Section<'_, '_>, parameter: &str) -> Written {
    let in_tolerance = match parameter {
        "tolerance_share" => Some("share"),
        "sensitivity_tolerance" => Some("sensitivity"),
        _ => None,
    };
    match parameter {
        "lower_rate" | "hysteresis_rate" | "refractory" | "blanking" => Written::new(device, parameter),
        _ => match in_tolerance {
            Some(key) if audit.has_table("tolerance") => Written::new(&audit.open("tolerance", &TOLERANCES), key),
            Some(_) => Written::new(audit, "tolerance"),
            None => Written::new(audit, parameter),
        },
    }
}

fn check_limits(section: &Section<'_, '_>, limits: Limits) -> Limits {
    if let Some((from, to)) = limits.vulnerable
        && from == to
    {
        let label = "an empty window: write \"off\" if no pulse is to be judged by it";
        section.complain(Complaint::new("[audit] vulnerable has no length").at(section.place("vulnerable"), label));
    }
    limits
}

fn tolerances(section: &Section<'_, '_>, settings: &mut AuditSettings) {
    if !section.has_table("tolerance") {
        if let Some(fixed) = section.read("tolerance", span) {
            *settings = settings.with_tolerance(Tolerance::symmetric(fixed));
        }
        return;
    }
    let table = section.open("tolerance", &TOLERANCES);
    *settings = settings.with_tolerance(tolerance(&table, settings.lower));
    for (key, place) in [
        ("lower_rate", &mut settings.lower),
        ("hysteresis_rate", &mut settings.hysteresis),
        ("refractory", &mut settings.refractory),
        ("blanking", &mut settings.blanking),
    ] {
        if table.has_table(key) {
            *place = tolerance(&table.open_as(key, &TOLERANCE, format!("[audit.tolerance.{key}]")), *place);
        } else {
            set(place, table.read(key, span).map(Tolerance::symmetric));
        }
    }
    if let Some(share) = table.share_millionths("sensitivity") {
        settings.sensitivity_thousandths = share.checked_div(1_000).unwrap_or(0);
    }
}

/// A tolerance by its parts; what is not given is as in `usual`, and a share or a tick alone stands for itself.
fn tolerance(table: &Section<'_, '_>, usual: Tolerance) -> Tolerance {
    let alone = table.has("share") || table.has("tick");
    let mut tolerance = if alone && !table.has("low") && !table.has("high") { Tolerance::symmetric(Span::ZERO) } else { usual };
    set(&mut tolerance.low, table.read("low", span));
    set(&mut tolerance.high, table.read("high", span));
    set(&mut tolerance.share_millionths, table.share_millionths("share"));
    set(&mut tolerance.tick, table.read("tick", span));
    tolerance
}
