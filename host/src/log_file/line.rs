//! One line of a log: a record in words and numbers.

use super::words::{cause_of, cause_word, kind_of, kind_word, place_of, place_word, reason_of, reason_word};
use crate::run_data::Names;
use phase4::base::{Instant, Kind, Meeting, NoCapture, Record, Span};
use serde::{Deserialize, Serialize};
use std::borrow::Cow;

/// A record in words. What does not belong to its kind is absent.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize, Deserialize)]
pub struct Line<'a> {
    /// When, in µs of the bench's time line.
    pub at_us: u64,
    /// What happened.
    #[serde(borrow)]
    pub what: Cow<'a, str>,
    /// Where: a site, tract, cell, channel (`A`, `V`), step or `run`.
    #[serde(rename = "where", borrow)]
    pub place: Cow<'a, str>,
    /// Why: `own sinus`, `conducted atrium-junction`, `pulse V`, `focus premature-1`, `step 2` or `none`.
    #[serde(default, borrow)]
    pub cause: Cow<'a, str>,
    /// A signal's peak.
    #[serde(default)]
    pub peak_uv: Option<u32>,
    /// A signal's or a pulse's width.
    #[serde(default)]
    pub width_us: Option<u32>,
    /// A pulse's amplitude.
    #[serde(default)]
    pub amplitude_mv: Option<u32>,
    /// `forward` or `backward` through a tract.
    #[serde(default, borrow)]
    pub way: Option<Cow<'a, str>>,
    /// Why a wave was blocked, a pulse found no answer, or the run ended.
    #[serde(default, borrow)]
    pub reason: Option<Cow<'a, str>>,
    /// The recovery that a blocked wave found; absent if it was the first.
    #[serde(default)]
    pub recovery_us: Option<u32>,
    /// What a cell still had to run when it was reset, or a wave to go when it met another.
    #[serde(default)]
    pub left_us: Option<u32>,
    /// What the earlier of two waves that met takes for the whole tract.
    #[serde(default)]
    pub took_us: Option<u32>,
    /// What the later of two waves that met takes for the whole tract.
    #[serde(default)]
    pub delay_us: Option<u32>,
    /// What a pulse lacked in strength.
    #[serde(default)]
    pub missing_mv: Option<u32>,
    /// By how much a pulse came too early, or another beat forestalled it.
    #[serde(default)]
    pub missing_us: Option<u32>,
    /// Which of its acts a step's is, from 1.
    #[serde(default)]
    pub turn: Option<u32>,
    /// The number that was swept or drawn for it.
    #[serde(default)]
    pub value_us: Option<i32>,
    /// The run's seed.
    #[serde(default)]
    pub seed: Option<u64>,
    /// The record's running number.
    #[serde(default)]
    pub number: Option<u32>,
}

/// The columns, in the order in which they are written.
pub const COLUMNS: [&str; 19] = [
    "at_us",
    "what",
    "where",
    "cause",
    "peak_uv",
    "width_us",
    "amplitude_mv",
    "way",
    "reason",
    "recovery_us",
    "left_us",
    "took_us",
    "delay_us",
    "missing_mv",
    "missing_us",
    "turn",
    "value_us",
    "seed",
    "number",
];

/// In bit 8 of a block's first detail: it ran backward.
const BACKWARD: u32 = 1 << 8;

const fn way_word(backward: bool) -> &'static str {
    if backward { "backward" } else { "forward" }
}

impl<'a> Line<'a> {
    /// A record in words.
    pub fn of(record: &Record, names: &'a Names) -> Self {
        let mut line = Self {
            at_us: record.at.as_micros(),
            what: Cow::Borrowed(kind_word(record.kind)),
            place: place_word(record.kind, record.place, names),
            cause: cause_word(record.cause, names),
            number: Some(record.number),
            ..Self::default()
        };
        let (a, b) = (record.a, record.b);
        match record.kind {
            Kind::Signal => (line.peak_uv, line.width_us) = (Some(a), Some(b)),
            Kind::Pulse => (line.amplitude_mv, line.width_us) = (Some(a), Some(b)),
            Kind::Blocked => {
                line.way = Some(Cow::Borrowed(way_word(a & BACKWARD != 0)));
                line.reason = Some(reason_word(record.kind, a & !BACKWARD));
                line.recovery_us = (b != u32::MAX).then_some(b);
            }
            Kind::Collided => {
                let meeting = Meeting::unpack(a, b);
                line.way = Some(Cow::Borrowed(way_word(meeting.backward)));
                let micros = |span: Span| u32::try_from(span.as_micros()).ok();
                (line.left_us, line.took_us, line.delay_us) = (micros(meeting.left), micros(meeting.took), micros(meeting.delay));
            }
            Kind::Reset => line.left_us = Some(a),
            Kind::NotCaptured => {
                line.reason = Some(reason_word(record.kind, a));
                let missing = if is_too_weak(a) { &mut line.missing_mv } else { &mut line.missing_us };
                *missing = Some(b);
            }
            Kind::Step => (line.turn, line.value_us) = (Some(a), Some(b.cast_signed())),
            Kind::Start => line.seed = Some(u64::from(a) | u64::from(b) << 32),
            Kind::End => line.reason = Some(reason_word(record.kind, a)),
            _ => {}
        }
        line
    }

    /// The record of a line. `usual` stands in for what a device's own log may leave out of a pulse: amplitude in mV, width in µs.
    ///
    /// # Errors
    /// Says what is missing or not known, in words.
    pub fn record(&self, names: &Names, usual: (u32, u32)) -> Result<Record, String> {
        let kind = kind_of(&self.what)?;
        let place = place_of(kind, &self.place, names)?;
        let cause = cause_of(&self.cause, names)?;
        let need = |value: Option<u32>, column: &str| value.ok_or_else(|| format!("a {} needs {column}", kind_word(kind)));
        let backward = || match self.way.as_deref() {
            Some("forward") | None => Ok(false),
            Some("backward") => Ok(true),
            Some(other) => Err(format!("there is no way `{other}`: expected forward or backward")),
        };
        let reason = || reason_of(kind, self.reason.as_deref().unwrap_or_default());
        let (a, b) = match kind {
            Kind::Signal => (need(self.peak_uv, "peak_uv")?, self.width_us.unwrap_or(0)),
            Kind::Pulse => (self.amplitude_mv.unwrap_or(usual.0), self.width_us.unwrap_or(usual.1)),
            Kind::Blocked => {
                let way = if backward()? { BACKWARD } else { 0 };
                (reason()? | way, self.recovery_us.unwrap_or(u32::MAX))
            }
            Kind::Collided => {
                let span = |value: Option<u32>, column| need(value, column).map(|micros| Span::from_micros(u64::from(micros)));
                let meeting = Meeting {
                    left: span(self.left_us, "left_us")?,
                    took: span(self.took_us, "took_us")?,
                    delay: span(self.delay_us, "delay_us")?,
                    backward: backward()?,
                };
                meeting.pack()
            }
            Kind::Reset => (need(self.left_us, "left_us")?, 0),
            Kind::NotCaptured => {
                let reason = reason()?;
                let missing = if is_too_weak(reason) { (self.missing_mv, "missing_mv") } else { (self.missing_us, "missing_us") };
                (reason, need(missing.0, missing.1)?)
            }
            Kind::Step => (need(self.turn, "turn")?, self.value_us.unwrap_or(0).cast_unsigned()),
            Kind::Start => {
                let seed = self.seed.unwrap_or(0);
                let half = |part: u64| u32::try_from(part & u64::from(u32::MAX)).unwrap_or(0);
                (half(seed), half(seed >> 32))
            }
            Kind::End => (reason()?, 0),
            _ => (0, 0),
        };
        Ok(Record::new(Instant::from_micros(self.at_us), kind, place, cause).with_details(a, b))
    }
}

#[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
const fn is_too_weak(reason: u32) -> bool {
    reason == NoCapture::TooWeak as u32
}

#[cfg(test)]
mod tests {
    use super::*;
    use phase4::base::{Cause, CauseKind};
    use proptest::prelude::*;

    fn names() -> Names {
        let some = |names: &[&str]| names.iter().map(|name| (*name).to_owned()).collect();
        Names {
            sites: some(&["sinus", "atrium"]),
            tracts: some(&["sinus-atrium"]),
            cells: some(&["sinus"]),
            foci: some(&["premature-1"]),
        }
    }

    fn cause() -> impl Strategy<Value = Cause> {
        prop_oneof![
            Just(Cause::NONE),
            any::<u8>().prop_map(|id| Cause::new(CauseKind::Own, id)),
            any::<u8>().prop_map(|id| Cause::new(CauseKind::Conducted, id)),
            (0..2_u8).prop_map(|id| Cause::new(CauseKind::Pulse, id)),
            any::<u8>().prop_map(|id| Cause::new(CauseKind::Focus, id)),
            any::<u8>().prop_map(|id| Cause::new(CauseKind::Script, id)),
        ]
    }

    fn record() -> impl Strategy<Value = Record> {
        let kinds = proptest::sample::select(Kind::ALL.to_vec());
        (any::<u64>(), kinds, any::<u8>(), cause(), any::<u32>(), any::<u32>()).prop_map(|(at, kind, place, cause, a, b)| {
            let place = match kind {
                Kind::Signal | Kind::Pulse => place % 2,
                Kind::Start | Kind::End => 0,
                _ => place,
            };
            let (a, b) = match kind {
                Kind::Activated | Kind::Joined => (0, 0),
                Kind::Reset | Kind::End => (a, 0),
                _ => (a, b),
            };
            Record::new(Instant::from_micros(at), kind, place, cause).with_details(a, b)
        })
    }

    proptest! {
        #[test]
        fn a_record_survives_its_words(record in record()) {
            let names = names();
            let line = Line::of(&record, &names);
            prop_assert_eq!(line.record(&names, (0, 0)), Ok(record));
        }
    }

    #[test]
    fn what_is_not_known_is_named() {
        let names = names();
        let told = |line: Line<'_>| line.record(&names, (0, 0)).unwrap_err();
        let signal = Line { what: "signal".into(), place: "V".into(), peak_uv: Some(1), ..Line::default() };
        assert!(signal.record(&names, (0, 0)).is_ok());
        assert_eq!(told(Line { peak_uv: None, ..signal.clone() }), "a signal needs peak_uv");
        assert_eq!(told(Line { place: "X".into(), ..signal.clone() }), "there is no channel `X`: expected A or V");
        assert_eq!(told(Line { what: "signl".into(), ..signal.clone() }), "there is no `signl` in a log: did you mean `signal`?");
        assert_eq!(told(Line { cause: "own sinsu".into(), ..signal }), "there is no cell `sinsu`: did you mean `sinus`?");
    }
}
