//! Anatomy, foci and leads as constants.

use super::quantity::{fraction, interval, option, span};
use crate::scenario::{Focus, Scenario};
use phase4::heart::plain::{SINUS, SINUS_CELL};
use phase4::heart::{CellParams, SiteParams, TractParams, Way};
use phase4::lead::ChannelParams;
use std::fmt::{Result, Write};

pub(super) fn write(out: &mut String, scenario: &Scenario) -> Result {
    let anatomy = &scenario.heart.anatomy;
    writeln!(
        out,
        "const fn sound<T: Copy>(value: Result<T, base::ParamError>) -> T {{\n    \
         match value {{\n        Ok(value) => value,\n        Err(error) => panic!(\"{{}}\", error.parameter),\n    }}\n}}\n"
    )?;
    writeln!(out, "/// The heart.\npub static ANATOMY: heart::Anatomy<SITES, TRACTS, CELLS> = match heart::Anatomy::new(")?;
    list(out, anatomy.sites(), site)?;
    list(out, anatomy.tracts(), tract)?;
    list(out, anatomy.cells(), cell)?;
    writeln!(out, ") {{\n    Ok(anatomy) => anatomy,\n    Err(error) => panic!(\"{{}}\", error.parameter),\n}};\n")?;
    for focus in &scenario.heart.foci {
        if let Focus::Replay { intervals, .. } = focus {
            writeln!(out, "/// The replayed series.\nstatic SERIES: [base::Span; {}] = [", intervals.len())?;
            for interval in intervals {
                writeln!(out, "    {},", span(*interval))?;
            }
            writeln!(out, "];\n")?;
        }
    }
    writeln!(out, "/// The foci.\npub static FOCUS_PARAMS: [heart::FocusParams<'static>; FOCI] = [")?;
    for focus in &scenario.heart.foci {
        writeln!(out, "    {},", show_focus(focus))?;
    }
    writeln!(out, "];\n")?;
    let lead = &scenario.lead;
    writeln!(
        out,
        "/// The leads.\npub const LEAD: lead::LeadParams = lead::LeadParams {{ atrial: {}, ventricular: {} }};\n",
        option(lead.atrial, channel),
        option(lead.ventricular, channel)
    )
}

fn list<T>(out: &mut String, rows: &[T], show: impl Fn(&T) -> String) -> Result {
    writeln!(out, "    [")?;
    for row in rows {
        writeln!(out, "        {},", show(row))?;
    }
    writeln!(out, "    ],")
}

fn site(site: &SiteParams) -> String {
    format!(
        "heart::SiteParams::new({}).with_relative({}).with_threshold(base::MilliVolts({}), {}).with_latency({})",
        span(site.refractory),
        span(site.relative),
        site.rheobase.0,
        span(site.chronaxie),
        span(site.latency)
    )
}

fn tract(tract: &TractParams) -> String {
    format!(
        "heart::TractParams::new(base::SiteId::new({}), base::SiteId::new({}), {}, {}, {})",
        tract.from.row(),
        tract.to.row(),
        fraction(tract.gate),
        way(&tract.forward),
        way(&tract.backward)
    )
}

fn way(way: &Way) -> String {
    let recovery = match way.tau {
        Some(tau) => format!(".with_recovery({}, sound(base::Decay::new({})))", span(way.gain), span(tau.tau())),
        None => String::new(),
    };
    let closed = if way.shut { ".closed()" } else { "" };
    format!(
        "heart::Way::new({}){recovery}.with_theta({}).with_conceal({}){closed}",
        span(way.base),
        span(way.theta),
        fraction(way.conceal)
    )
}

fn cell(cell: &CellParams) -> String {
    format!("heart::CellParams::new(base::SiteId::new({}), {})", cell.site.row(), interval(cell.interval))
}

fn show_focus(focus: &Focus) -> String {
    match focus {
        Focus::Premature { site, after, coupling, every } => format!(
            "heart::FocusParams::premature_after(base::SiteId::new({}), base::SiteId::new({}), {}, {every})",
            site.row(),
            after.row(),
            span(*coupling)
        ),
        Focus::Replay { repeat, .. } => format!(
            "heart::FocusParams::replay(base::SiteId::new({}), &SERIES, {repeat}, base::CellId::new({}))",
            SINUS.row(),
            SINUS_CELL.row()
        ),
    }
}

fn channel(channel: ChannelParams) -> String {
    format!(
        "lead::ChannelParams {{ sense: base::SiteId::new({}), pace: base::SiteId::new({}), near: lead::NearField {{ \
         peak: base::MicroVolts({}), delay: {}, width: {} }} }}",
        channel.sense.row(),
        channel.pace.row(),
        channel.near.peak.0,
        span(channel.near.delay),
        span(channel.near.width)
    )
}
