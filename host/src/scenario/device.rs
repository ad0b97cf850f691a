//! `[device]`: what is under test and how it is programmed.

use super::fault;
use super::param::{Written, complaint};
use super::scan::Wrong;
use super::units::{interval, microvolts, millivolts, span};
use super::walk::Section;
use phase4::base::{Edge, Interval, Mode, Program, Rate, Settings, Tie};
use phase4::device::Fault;

/// The device of a scenario.
#[derive(Debug, Clone)]
pub struct DevicePart {
    /// Its name, [`UNNAMED`] if the scenario gives none.
    pub name: String,
    /// What it is set to.
    pub program: Program,
    /// What is wrong with it.
    pub fault: Option<Fault>,
}

/// The name of a device that the scenario does not name.
pub const UNNAMED: &str = "reference device";

/// Reads an interval, or `off` as none.
pub(super) fn interval_or_off(text: &str) -> Result<Option<Interval>, Wrong> {
    if text.trim() == "off" { Ok(None) } else { interval(text).map(Some) }
}

/// Reads the device; `None` if there is none, or if a complaint was made.
pub(super) fn read(section: &Section<'_, '_>) -> Option<DevicePart> {
    if !section.exists() {
        return None;
    }
    let name = section.text("name").map_or_else(|| UNNAMED.to_owned(), |name| name.value.to_owned());
    if !section.has("mode") {
        section.missing("mode");
    }
    let mode = section.choice("mode").and_then(Mode::from_code)?;
    let lower = match section.read("lower_rate", interval) {
        Some(lower) => lower,
        // A mode that does nothing needs no rate.
        None if mode == Mode::Ooo => Interval::from_rate_nearest(Rate::per_minute(60)),
        None => {
            if !section.has("lower_rate") {
                section.missing("lower_rate");
            }
            return None;
        }
    };
    let mut settings = Settings::new(mode, lower);
    settings.hysteresis = section.read("hysteresis_rate", interval_or_off).flatten();
    set(&mut settings.refractory, section.read("refractory", span));
    set(&mut settings.blanking, section.read("blanking", span));
    set(&mut settings.sensitivity, section.read("sensitivity", microvolts));
    set(&mut settings.amplitude, section.read("amplitude", millivolts));
    set(&mut settings.width, section.read("width", span));
    settings.edge = if section.choice("edge") == Some("inside") { Edge::Inside } else { Edge::Outside };
    settings.tie = if section.choice("tie") == Some("expiry first") { Tie::ExpiryFirst } else { Tie::SenseFirst };
    let fault = fault::read(section);
    match settings.check() {
        Ok(program) => Some(DevicePart { name, program, fault }),
        Err(error) => {
            section.complain(complaint(&error, |parameter| Written::new(section, parameter)));
            None
        }
    }
}

/// Puts a value in its place, if there is one.
pub(super) fn set<T>(place: &mut T, value: Option<T>) {
    if let Some(value) = value {
        *place = value;
    }
}
