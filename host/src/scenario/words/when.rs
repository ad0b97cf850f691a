//! `when`: at an instant, every so often, after an event, at a window's end, or when no event comes.

use super::super::scan::{Scan, Wrong};
use super::super::units::scan_span;
use super::amount::{amount, values};
use super::{Vocabulary, channel, position, row};
use crate::refusal::{list, nearest};
use phase4::base::{Channel, Deviation, SiteId, TractId};
use phase4::bench::{Amount, Coupling, Event, When, WindowEnd};

const OPENINGS: [&str; 5] = ["at", "every", "after", "edge", "no"];
const WINDOWS: [(&str, WindowEnd); 4] = [
    ("blanking", WindowEnd::Blanking),
    ("refractory", WindowEnd::Refractory),
    ("lower_rate", WindowEnd::Lower),
    ("hysteresis_rate", WindowEnd::Hysteresis),
];

/// Reads a `when`, with how often the step acts if nothing else is said: once, once for each value of a sweep, or for ever with `every`.
pub(in crate::scenario) fn when(text: &str, words: &Vocabulary) -> Result<(When, u32), Wrong> {
    let mut scan = Scan::new(text);
    let Some((opening, range)) = scan.word() else {
        return Err(scan.wrong(openings()));
    };
    let read = match opening {
        "at" => (When::At(scan_span(&mut scan)?), 1),
        "every" => (When::Every(scan_span(&mut scan)?), u32::MAX),
        "no" => (without(&mut scan, words)?, 1),
        "after" => after(&mut scan, words, None)?,
        "edge" => edge(&mut scan, words)?,
        _ => {
            return Err(Wrong::instead(range, "no such beginning", nearest(opening, OPENINGS)).help(openings()));
        }
    };
    scan.finish()?;
    Ok(read)
}

fn openings() -> String {
    "expected `at 10 s`, `every 5 s`, `after VP + 300 ms`, `edge(refractory) - 5 ms after VP` or `no VP for 2 s`".to_owned()
}

fn without(scan: &mut Scan<'_>, words: &Vocabulary) -> Result<When, Wrong> {
    let event = event(scan, words)?;
    if !scan.take_word("for") {
        return Err(scan.wrong("expected `for` and a time here, as in `no VP for 2 s`"));
    }
    Ok(When::Without { event, span: scan_span(scan)? })
}

fn after(scan: &mut Scan<'_>, words: &Vocabulary, edge: Option<(WindowEnd, Amount)>) -> Result<(When, u32), Wrong> {
    let nth = ordinal(scan)?;
    let event = event(scan, words)?;
    let (window, shift) = match edge {
        Some((window, shift)) => (Some(window), shift),
        None => {
            let place = scan.here();
            let minus = scan.take("-");
            if !minus && !scan.take("+") {
                return Err(scan.wrong("expected `+` and a time here, as in `after VP + 300 ms`"));
            }
            let shift = amount(scan, minus)?;
            if least(shift) < 1 {
                let label = "a step comes after its event, by at least 1 us: an event cannot be foreseen";
                return Err(Wrong::new(place.start..scan.position(), label));
            }
            (None, shift)
        }
    };
    Ok((When::After { event, nth, coupling: Coupling { window, shift } }, values(shift)))
}

fn least(amount: Amount) -> i64 {
    match amount {
        Amount::Fixed(by) => by.as_micros(),
        Amount::Sweep { from, to, .. } | Amount::Random { from, to } => from.min(to).as_micros(),
    }
}

fn edge(scan: &mut Scan<'_>, words: &Vocabulary) -> Result<(When, u32), Wrong> {
    if !scan.take("(") {
        return Err(scan.wrong("expected `(` and a window here, as in `edge(refractory)`"));
    }
    let names = WINDOWS.map(|(name, _)| name);
    let row = row(scan, "window", &names)?;
    let window = WINDOWS.get(usize::from(row)).map_or(WindowEnd::Refractory, |(_, window)| *window);
    if !scan.take(")") {
        return Err(scan.wrong("expected `)` here"));
    }
    let minus = scan.take("-");
    let shift = if minus || scan.take("+") { amount(scan, minus)? } else { Amount::Fixed(Deviation::ZERO) };
    if !scan.take_word("after") {
        return Err(scan.wrong("expected `after` and an event here, as in `edge(refractory) - 5 ms after VP`"));
    }
    after(scan, words, Some((window, shift)))
}

/// `3rd`, if it comes next; 1 otherwise.
fn ordinal(scan: &mut Scan<'_>) -> Result<u32, Wrong> {
    let Some((digits, range)) = scan.digits() else { return Ok(1) };
    let place = scan.here();
    match scan.word() {
        Some(("st" | "nd" | "rd" | "th", _)) => {}
        _ => return Err(Wrong::new(place, "expected `st`, `nd`, `rd` or `th` here, as in `after 3rd VP + 300 ms`")),
    }
    match digits.parse() {
        Ok(nth) if nth >= 1 => Ok(nth),
        _ => Err(Wrong::new(range, "events are counted from the 1st")),
    }
}

fn event(scan: &mut Scan<'_>, words: &Vocabulary) -> Result<Event, Wrong> {
    let Some((word, range)) = scan.word() else {
        return Err(scan.wrong(format!("expected an event here: {}", events(words))));
    };
    match word {
        "AP" => Ok(Event::Pulse(Channel::Atrial)),
        "VP" => Ok(Event::Pulse(Channel::Ventricular)),
        "A" | "V" => {
            let mut back = Scan::new(word);
            let channel = channel(&mut back)?;
            if scan.take_word("signal") {
                return Ok(Event::Signal(channel));
            }
            Err(scan.wrong(format!("expected `signal` here, as in `{word} signal`")))
        }
        "capture" => row(scan, "site", words.sites).map(|row| Event::Capture(SiteId::new(row))),
        "no" => {
            if !scan.take_word("capture") {
                return Err(scan.wrong("expected `capture` here, as in `no capture apex`"));
            }
            row(scan, "site", words.sites).map(|row| Event::NoCapture(SiteId::new(row)))
        }
        "block" => row(scan, "tract", words.tracts).map(|row| Event::Block(TractId::new(row))),
        site if words.sites.contains(&site) => {
            position(site, range, "site", words.sites).map(|row| Event::Activation(SiteId::new(row)))
        }
        "VS" | "AS" => {
            let channel = if word == "VS" { "V" } else { "A" };
            let label = "whether a device has sensed cannot be seen from outside";
            Err(Wrong::new(range, label).help(format!("did you mean `{channel} signal`?")))
        }
        _ => {
            let simple = ["AP", "VP", "capture", "block"].into_iter().chain(words.sites.iter().copied());
            Err(Wrong::instead(range, "no such event", nearest(word, simple)).help(format!("expected {}", events(words))))
        }
    }
}

fn events(words: &Vocabulary) -> String {
    let fixed = ["AP", "VP", "A signal", "V signal", "capture apex", "no capture apex", "block atrium-junction"];
    list(fixed.into_iter().chain(words.sites.iter().copied()))
}

#[cfg(test)]
mod tests {
    use super::super::tests::vocabulary;
    use super::*;
    use phase4::base::Span;

    fn ms(millis: i64) -> Deviation {
        Deviation::from_millis(millis)
    }

    fn coupled(event: Event, nth: u32, window: Option<WindowEnd>, shift: Amount) -> When {
        When::After { event, nth, coupling: Coupling { window, shift } }
    }

    #[test]
    fn every_form_is_read() {
        let vp = Event::Pulse(Channel::Ventricular);
        let sweep = Amount::Sweep { from: ms(210), to: ms(290), step: Span::from_millis(5) };
        let apex = SiteId::new(4);
        for (text, expected, times) in [
            ("at 10 s", When::At(Span::from_secs(10)), 1),
            ("every 5 s", When::Every(Span::from_secs(5)), u32::MAX),
            ("after VP + 300 ms", coupled(vp, 1, None, Amount::Fixed(ms(300))), 1),
            ("after VP+300ms", coupled(vp, 1, None, Amount::Fixed(ms(300))), 1),
            ("after 3rd V signal + 300 ms", coupled(Event::Signal(Channel::Ventricular), 3, None, Amount::Fixed(ms(300))), 1),
            ("after VP + [210..290/5] ms", coupled(vp, 1, None, sweep), 17),
            ("after VP + [210..290] ms", coupled(vp, 1, None, Amount::Random { from: ms(210), to: ms(290) }), 1),
            ("edge(refractory) - 5 ms after VP", coupled(vp, 1, Some(WindowEnd::Refractory), Amount::Fixed(ms(-5))), 1),
            (
                "edge(lower_rate) after AP",
                { coupled(Event::Pulse(Channel::Atrial), 1, Some(WindowEnd::Lower), Amount::Fixed(ms(0))) },
                1,
            ),
            (
                "edge(blanking) + [-20..20/10] ms after 2nd ventricle",
                {
                    let sweep = Amount::Sweep { from: ms(-20), to: ms(20), step: Span::from_millis(10) };
                    coupled(Event::Activation(SiteId::new(3)), 2, Some(WindowEnd::Blanking), sweep)
                },
                5,
            ),
            ("no VP for 2 s", When::Without { event: vp, span: Span::from_secs(2) }, 1),
            ("no no capture apex for 2 s", When::Without { event: Event::NoCapture(apex), span: Span::from_secs(2) }, 1),
            (
                "after no capture apex + 1 us",
                coupled(Event::NoCapture(apex), 1, None, Amount::Fixed(Deviation::from_micros(1))),
                1,
            ),
            ("after block atrium-junction + 1 ms", coupled(Event::Block(TractId::new(1)), 1, None, Amount::Fixed(ms(1))), 1),
        ] {
            assert_eq!(when(text, &vocabulary()), Ok((expected, times)), "{text}");
        }
    }

    #[test]
    fn what_goes_wrong_is_shown_where() {
        for (text, at, label) in [
            ("", 0..0, "expected `at 10 s`, `every"),
            ("on 10 s", 0..2, "no such beginning"),
            ("at ten", 3..6, "expected a time with its unit"),
            ("after VP", 8..8, "expected `+` and a time"),
            ("after VP 300 ms", 9..12, "expected `+` and a time"),
            ("after VP - 300 ms", 9..17, "a step comes after its event"),
            ("after VP + [0..5/1] ms", 9..22, "a step comes after its event"),
            ("after VS + 300 ms", 6..8, "whether a device has sensed"),
            ("after V + 300 ms", 8..9, "expected `signal` here"),
            ("after ventrical + 1 ms", 6..15, "did you mean `ventricle`?"),
            ("after dinner + 1 ms", 6..12, "no such event"),
            ("after 0th VP + 1 ms", 6..7, "events are counted from the 1st"),
            ("after 3 VP + 1 ms", 8..10, "expected `st`, `nd`"),
            ("edge(refractry) after VP", 5..14, "did you mean `refractory`?"),
            ("edge(refractory) + 5 ms", 23..23, "expected `after` and an event"),
            ("after VP + [210..290/0] ms", 21..22, "a sweep needs a step above zero"),
            ("after VP + [210-290] ms", 15..19, "expected `..` here"),
            ("no VP", 5..5, "expected `for` and a time"),
            ("at 10 s please", 8..14, "nothing more was expected"),
        ] {
            let wrong = when(text, &vocabulary()).unwrap_err();
            assert_eq!(wrong.at, at, "{text}: {wrong:?}");
            assert!(wrong.label.starts_with(label), "{text}: {wrong:?}");
        }
    }
}
