//! `act`: what a step does.

use super::super::scan::{Scan, Wrong};
use super::super::units::{decimal, scan_microvolts, scan_span};
use super::{Vocabulary, channel, row};
use crate::refusal::nearest;
use phase4::base::{CellId, Channel, MicroVolts, Signal, SiteId, TractId};
use phase4::bench::Act;
use phase4::heart::Ways;
use phase4::lead::LeadChange;

const VERBS: [&str; 9] = ["beat", "signal", "arrest", "release", "quiet", "shut", "open", "lead", "end"];

/// Reads an `act`.
pub(in crate::scenario) fn act(text: &str, words: &Vocabulary) -> Result<Act, Wrong> {
    let mut scan = Scan::new(text);
    let Some((verb, range)) = scan.word() else {
        return Err(scan.wrong(verbs()));
    };
    let act = match verb {
        "beat" => Act::Beat(SiteId::new(row(&mut scan, "site", words.sites)?)),
        "signal" => signal(&mut scan, words)?,
        "arrest" => Act::Arrest(CellId::new(row(&mut scan, "cell", words.cells)?)),
        "release" => Act::Release(CellId::new(row(&mut scan, "cell", words.cells)?)),
        "quiet" => Act::Quiet,
        "shut" => tract(&mut scan, words, Act::Shut)?,
        "open" => tract(&mut scan, words, Act::Open)?,
        "lead" => lead(&mut scan)?,
        "end" => Act::End,
        _ => {
            return Err(Wrong::instead(range, "no such act", nearest(verb, VERBS)).help(verbs()));
        }
    };
    scan.finish()?;
    Ok(act)
}

fn verbs() -> String {
    "expected `beat ventricle`, `signal V 2 mV`, `arrest sinus`, `release sinus`, `shut atrium-junction`, `open atrium-junction`, \
     `lead V peak 3 mV`, `quiet` or `end`"
        .to_owned()
}

fn signal(scan: &mut Scan<'_>, words: &Vocabulary) -> Result<Act, Wrong> {
    let channel = channel(scan)?;
    let peak = peak(scan, words)?;
    let [atrial, ventricular] = words.widths;
    let usual = match channel {
        Channel::Atrial => atrial,
        Channel::Ventricular => ventricular,
    };
    let width = if scan.is_done() { usual } else { scan_span(scan)? };
    Ok(Act::Signal(channel, Signal { peak, width }))
}

/// A voltage, or `hi`, `lo` and parts of them: what this device must see and must not see.
fn peak(scan: &mut Scan<'_>, words: &Vocabulary) -> Result<MicroVolts, Wrong> {
    let place = scan.here();
    let named = match scan.peek_word() {
        Some(name @ ("hi" | "lo")) => name,
        Some(_) => return Err(Wrong::new(place, "expected a voltage, `hi` or `lo` here")),
        None => return scan_microvolts(scan),
    };
    scan.word();
    let Some((hi, lo)) = words.limits else {
        return Err(Wrong::new(
            place,
            format!("`{named}` is a limit of the device's sensitivity, and there is no device that senses"),
        ));
    };
    let MicroVolts(limit) = if named == "hi" { hi } else { lo };
    if !scan.take("/") {
        return Ok(MicroVolts(limit));
    }
    let part = decimal(scan)?;
    let Some(part_number) = part.whole().and_then(|part| u32::try_from(part).ok()).filter(|part| *part > 0) else {
        return Err(Wrong::new(part.range, "expected a whole number above zero"));
    };
    Ok(MicroVolts(limit.checked_div(part_number).unwrap_or(0)))
}

fn tract(scan: &mut Scan<'_>, words: &Vocabulary, act: fn(TractId, Ways) -> Act) -> Result<Act, Wrong> {
    let tract = TractId::new(row(scan, "tract", words.tracts)?);
    if scan.is_done() {
        return Ok(act(tract, Ways::Both));
    }
    let place = scan.here();
    match scan.word() {
        Some(("forward", _)) => Ok(act(tract, Ways::Forward)),
        Some(("backward", _)) => Ok(act(tract, Ways::Backward)),
        other => {
            let meant = other.and_then(|(word, _)| nearest(word, ["forward", "backward"]));
            Err(Wrong::instead(place, "not a direction", meant).help("expected `forward`, `backward` or nothing here"))
        }
    }
}

fn lead(scan: &mut Scan<'_>) -> Result<Act, Wrong> {
    let channel = channel(scan)?;
    let place = scan.here();
    let change = match scan.word() {
        Some(("peak", _)) => LeadChange::Peak(scan_microvolts(scan)?),
        Some(("delay", _)) => LeadChange::Delay(scan_span(scan)?),
        Some(("width", _)) => LeadChange::Width(scan_span(scan)?),
        _ => return Err(Wrong::new(place, "expected `peak`, `delay` or `width` here")),
    };
    Ok(Act::Lead(channel, change))
}

#[cfg(test)]
mod tests {
    use super::super::tests::vocabulary;
    use super::*;
    use phase4::base::Span;

    #[test]
    fn every_form_is_read() {
        let node = TractId::new(1);
        let shown = |peak: u32, width: u64| {
            Act::Signal(Channel::Ventricular, Signal { peak: MicroVolts(peak), width: Span::from_millis(width) })
        };
        for (text, expected) in [
            ("beat ventricle", Act::Beat(SiteId::new(3))),
            ("signal V 2 mV", shown(2_000, 40)),
            ("signal V 2 mV 80 ms", shown(2_000, 80)),
            ("signal V hi", shown(3_000, 40)),
            ("signal V lo/2 10 ms", shown(1_000, 10)),
            ("arrest sinus", Act::Arrest(CellId::new(0))),
            ("release ventricle", Act::Release(CellId::new(2))),
            ("quiet", Act::Quiet),
            ("shut atrium-junction", Act::Shut(node, Ways::Both)),
            ("shut atrium-junction forward", Act::Shut(node, Ways::Forward)),
            ("open atrium-junction backward", Act::Open(node, Ways::Backward)),
            ("lead V peak 3 mV", Act::Lead(Channel::Ventricular, LeadChange::Peak(MicroVolts(3_000)))),
            ("lead A delay 2 ms", Act::Lead(Channel::Atrial, LeadChange::Delay(Span::from_millis(2)))),
            ("lead A width 20 ms", Act::Lead(Channel::Atrial, LeadChange::Width(Span::from_millis(20)))),
            ("end", Act::End),
        ] {
            assert_eq!(act(text, &vocabulary()), Ok(expected), "{text}");
        }
    }

    #[test]
    fn what_goes_wrong_is_shown_where() {
        let bare = Vocabulary { limits: None, ..vocabulary() };
        for (text, at, label) in [
            ("", 0..0, "expected `beat ventricle`"),
            ("baet ventricle", 0..4, "did you mean `beat`?"),
            ("dance", 0..5, "no such act"),
            ("beat ventricel", 5..14, "did you mean `ventricle`?"),
            ("beat", 4..4, "expected a site here"),
            ("signal X 2 mV", 7..8, "expected a channel here"),
            ("signal V 2 ms", 11..13, "ms is a time, expected a voltage"),
            ("signal V", 8..8, "expected a voltage"),
            ("signal V hi", 9..11, "`hi` is a limit of the device's sensitivity"),
            ("arrest atrium", 7..13, "no such cell"),
            ("shut atrium-junction forwards", 21..29, "did you mean `forward`?"),
            ("lead V height 2 mV", 7..13, "expected `peak`"),
            ("quiet now", 6..9, "nothing more"),
        ] {
            let wrong = act(text, &bare).unwrap_err();
            assert_eq!(wrong.at, at, "{text}: {wrong:?}");
            assert!(wrong.label.starts_with(label), "{text}: {wrong:?}");
        }
    }
}
