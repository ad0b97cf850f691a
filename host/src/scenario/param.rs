//! What the library refuses, said where the user wrote it.

use super::units::{Thousandths, interval, show_micros, show_microvolts, show_rate};
use super::walk::Section;
use crate::refusal::Complaint;
use phase4::base::{ParamError, Problem};
use std::ops::Range;

/// Where a parameter was written.
#[derive(Debug, Clone)]
pub(super) struct Written {
    /// Its place: that of its value, or of its table where it has the value of the preset.
    pub(super) place: Range<usize>,
    /// Its name as the user would write it, with its table: `[device] blanking`.
    pub(super) name: String,
    /// Its value as the user wrote it; `None` if it is the preset's.
    pub(super) text: Option<String>,
}

impl Written {
    /// The value of a key of a table.
    pub(super) fn new(section: &Section<'_, '_>, key: &str) -> Self {
        let place = section.place(key);
        let text = section.has(key).then(|| section.source().text().get(place.clone()).unwrap_or_default().to_owned());
        Self { place, name: format!("{} {key}", section.title()), text }
    }
}

/// The complaint for an error of the library; `find` tells where each parameter was written.
pub(super) fn complaint(error: &ParamError, find: impl Fn(&str) -> Written) -> Complaint {
    let written = find(error.parameter);
    let by_default = if written.text.is_some() { "" } else { " by default" };
    match error.problem {
        Problem::OutOfRange { value, least, greatest } => {
            let message = format!("{} is {}{by_default}", written.name, show(error.parameter, value));
            let label = format!("accepted is {}", show_range(error.parameter, least, greatest));
            let other = written.text.as_deref().filter(|_| is_rate(error.parameter));
            let help = other.and_then(|text| other_reading(text, least, greatest));
            Complaint::new(message).at(written.place, label).maybe_help(help)
        }
        Problem::Conflict { value, with, other, rule } => {
            let against = find(with);
            let message = format!("{} is {}{by_default}: {rule}", written.name, show(error.parameter, value));
            let other_default = if against.text.is_some() { "" } else { " by default" };
            let complaint = Complaint::new(message).at(written.place.clone(), "this");
            let label = match (&against.text, other) {
                (None, 0) => format!("there is no {}", against.name),
                _ => format!("{} is {}{other_default}", against.name, show(with, other)),
            };
            if against.place == written.place { complaint.help(label) } else { complaint.at(against.place, label) }
        }
        Problem::NoSuchRow { value, rows } => {
            let label = format!("names row {value} of a table of {rows}");
            Complaint::new(format!("{} names nothing", written.name)).at(written.place, label)
        }
        Problem::Unsupported(what) => Complaint::new(format!("{}: {what}", written.name)).at(written.place, "here"),
        _ => Complaint::new(format!("{}: {error}", written.name)).at(written.place, "here"),
    }
}

/// The parameter's last name: `forward.base` is a `base`.
fn last(parameter: &str) -> &str {
    parameter.rsplit('.').next().unwrap_or(parameter)
}

fn is_rate(parameter: &str) -> bool {
    matches!(last(parameter), "lower_rate" | "hysteresis_rate" | "interval" | "ceiling" | "longest_pause")
}

/// A value in the parameter's own unit.
fn show(parameter: &str, value: u64) -> String {
    match last(parameter) {
        "sensitivity" | "peak" => show_microvolts(value),
        "amplitude" | "rheobase" => show_microvolts(value.saturating_mul(1_000)),
        "tolerance_share" => format!("{} %", Thousandths(value.checked_div(10).unwrap_or(0))),
        "sensitivity_tolerance" | "decide" => format!("{} %", Thousandths(value.saturating_mul(100))),
        "times" | "step" | "every" | "fault" | "foci" | "intervals" => value.to_string(),
        _ if is_rate(parameter) && value > 0 => format!("{} ({})", show_micros(value), show_rate(value)),
        _ => show_micros(value),
    }
}

fn show_range(parameter: &str, least: u64, greatest: u64) -> String {
    if is_rate(parameter) && least > 0 {
        // The shorter interval is the faster rate.
        let rates = format!("{} to {}", show_rate(greatest), show_rate(least));
        return format!("{} to {}, that is {rates}", show_micros(least), show_micros(greatest));
    }
    if greatest == u64::MAX {
        return format!("{} and more", show(parameter, least));
    }
    format!("{} to {}", show(parameter, least), show(parameter, greatest))
}

/// What to write if a number was given the wrong one of rate and interval: `"60 ms"` for `"60 /min"`.
fn other_reading(written: &str, least: u64, greatest: u64) -> Option<String> {
    let text = written.trim_matches(['"', '\'']).trim();
    let number: String = text.chars().take_while(|c| c.is_ascii_digit() || *c == '.').collect();
    let fits = |text: &str| interval(text).is_ok_and(|interval| (least..=greatest).contains(&interval.nearest().as_micros()));
    let other = if text.contains("/min") { format!("{number} ms") } else { format!("{number} /min") };
    let meant = if text.contains("/min") { "an interval" } else { "a rate" };
    fits(&other).then(|| format!("if {meant} was meant, write \"{other}\""))
}
