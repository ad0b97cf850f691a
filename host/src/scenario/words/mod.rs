//! The words of a step: `when` it acts and `act`, what it does.

mod act;
mod amount;
mod when;

pub(super) use act::act;
pub(super) use when::when;

use super::scan::{Scan, Wrong};
use crate::refusal::{list, nearest};
use phase4::base::{Channel, MicroVolts, Span};
use std::ops::Range;

/// What the words can refer to.
#[derive(Debug, Clone)]
pub(super) struct Vocabulary {
    pub(super) sites: &'static [&'static str],
    pub(super) tracts: &'static [&'static str],
    pub(super) cells: &'static [&'static str],
    /// The least peak that must be seen and the greatest that must not, where a device is programmed.
    pub(super) limits: Option<(MicroVolts, MicroVolts)>,
    /// The width of a signal that is given none: that of each channel's own beats, atrial first.
    pub(super) widths: [Span; 2],
}

/// The row of a name among `names`.
fn row(scan: &mut Scan<'_>, noun: &str, names: &[&'static str]) -> Result<u8, Wrong> {
    let Some((word, range)) = scan.word() else {
        return Err(scan.wrong(format!("expected a {noun} here: {}", list(names.iter().copied()))));
    };
    position(word, range, noun, names)
}

fn position(word: &str, range: Range<usize>, noun: &str, names: &[&'static str]) -> Result<u8, Wrong> {
    match names.iter().position(|name| *name == word).and_then(|row| u8::try_from(row).ok()) {
        Some(row) => Ok(row),
        None => {
            let wrong = Wrong::instead(range, &format!("no such {noun}"), nearest(word, names.iter().copied()));
            Err(wrong.help(format!("expected {}", list(names.iter().copied()))))
        }
    }
}

/// A channel by its letter.
fn channel(scan: &mut Scan<'_>) -> Result<Channel, Wrong> {
    let place = scan.here();
    match scan.word() {
        Some(("A", _)) => Ok(Channel::Atrial),
        Some(("V", _)) => Ok(Channel::Ventricular),
        _ => Err(Wrong::new(place, "expected a channel here: A or V")),
    }
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    pub(super) fn vocabulary() -> Vocabulary {
        Vocabulary {
            sites: &["sinus", "atrium", "junction", "ventricle", "apex"],
            tracts: &["sinus-atrium", "atrium-junction", "junction-ventricle", "ventricle-apex"],
            cells: &["sinus", "junction", "ventricle"],
            limits: Some((MicroVolts(3_000), MicroVolts(2_000))),
            widths: [Span::from_millis(30), Span::from_millis(40)],
        }
    }
}
