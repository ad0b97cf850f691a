//! The words of a log for what happened, where and why.

use crate::refusal::{list, nearest};
use crate::run_data::Names;
use phase4::base::{BlockReason, Cause, CauseKind, Channel, Kind, NoCapture};
use std::borrow::Cow;

/// The word for each kind of record.
pub(super) const fn kind_word(kind: Kind) -> &'static str {
    match kind {
        Kind::Activated => "activated",
        Kind::Blocked => "blocked",
        Kind::Collided => "collided",
        Kind::Joined => "joined",
        Kind::Reset => "reset",
        Kind::NotCaptured => "not captured",
        Kind::Signal => "signal",
        Kind::Pulse => "pulse",
        Kind::Step => "step",
        Kind::Start => "start",
        Kind::End => "end",
        _ => "unknown",
    }
}

/// The kind of a word.
pub(super) fn kind_of(word: &str) -> Result<Kind, String> {
    Kind::ALL.into_iter().find(|kind| kind_word(*kind) == word).ok_or_else(|| {
        let words = Kind::ALL.map(kind_word);
        format!("there is no `{word}` in a log: {}", meant(word, &words))
    })
}

/// What was meant, or else which words there are.
fn meant(word: &str, words: &[&str]) -> String {
    match nearest(word, words.iter().copied()) {
        Some(name) => format!("did you mean `{name}`?"),
        None => format!("expected {}", list(words.iter().copied())),
    }
}

/// Where the whole run is meant.
pub(super) const RUN: &str = "run";

/// The word for a row of a table of names; its number, from 1, where it has no name.
fn name_of<'n>(names: &'n [String], row: u8) -> Cow<'n, str> {
    match names.get(usize::from(row)) {
        Some(name) => Cow::Borrowed(name.as_str()),
        None => Cow::Owned(format!("{}", u32::from(row).saturating_add(1))),
    }
}

fn row_of(names: &[String], word: &str, noun: &str) -> Result<u8, String> {
    let row = names.iter().position(|name| name == word).and_then(|row| u8::try_from(row).ok());
    row.or_else(|| number_from_one(word)).ok_or_else(|| {
        let words: Vec<&str> = names.iter().map(String::as_str).collect();
        format!("there is no {noun} `{word}`: {}", meant(word, &words))
    })
}

fn number_from_one(word: &str) -> Option<u8> {
    word.parse::<u32>().ok()?.checked_sub(1).and_then(|row| u8::try_from(row).ok())
}

fn channel_word(number: u8) -> &'static str {
    match Channel::from_number(number) {
        Some(Channel::Atrial) => "A",
        Some(Channel::Ventricular) => "V",
        None => "?",
    }
}

fn channel_of(word: &str) -> Result<u8, String> {
    match word {
        "A" => Ok(Channel::Atrial.number()),
        "V" => Ok(Channel::Ventricular.number()),
        _ => Err(format!("there is no channel `{word}`: expected A or V")),
    }
}

/// The word for where a record of this kind happened.
pub(super) fn place_word(kind: Kind, place: u8, names: &Names) -> Cow<'_, str> {
    match kind {
        Kind::Activated | Kind::NotCaptured => name_of(&names.sites, place),
        Kind::Blocked | Kind::Collided | Kind::Joined => name_of(&names.tracts, place),
        Kind::Reset => name_of(&names.cells, place),
        Kind::Signal | Kind::Pulse => Cow::Borrowed(channel_word(place)),
        Kind::Step => Cow::Owned(step_word(place)),
        _ => Cow::Borrowed(RUN),
    }
}

fn step_word(row: u8) -> String {
    format!("step {}", u32::from(row).saturating_add(1))
}

/// The place of a word.
pub(super) fn place_of(kind: Kind, word: &str, names: &Names) -> Result<u8, String> {
    match kind {
        Kind::Activated | Kind::NotCaptured => row_of(&names.sites, word, "site"),
        Kind::Blocked | Kind::Collided | Kind::Joined => row_of(&names.tracts, word, "tract"),
        Kind::Reset => row_of(&names.cells, word, "cell"),
        Kind::Signal | Kind::Pulse => channel_of(word),
        Kind::Step => step_of(word),
        _ if word == RUN => Ok(0),
        _ => Err(format!("expected `{RUN}`, found `{word}`")),
    }
}

fn step_of(word: &str) -> Result<u8, String> {
    word.strip_prefix("step ")
        .and_then(number_from_one)
        .ok_or_else(|| format!("expected a step such as `step 1`, found `{word}`"))
}

/// The words for a cause: its sort and which one, `own sinus`.
pub(super) fn cause_word(cause: Cause, names: &Names) -> Cow<'_, str> {
    let of = |sort: &str, name: Cow<'_, str>| Cow::Owned(format!("{sort} {name}"));
    match cause.kind {
        CauseKind::None => Cow::Borrowed("none"),
        CauseKind::Own => of("own", name_of(&names.cells, cause.id)),
        CauseKind::Conducted => of("conducted", name_of(&names.tracts, cause.id)),
        CauseKind::Pulse => of("pulse", Cow::Borrowed(channel_word(cause.id))),
        CauseKind::Focus => of("focus", name_of(&names.foci, cause.id)),
        CauseKind::Script => Cow::Owned(step_word(cause.id)),
    }
}

/// The cause of its words; an empty text is no cause.
pub(super) fn cause_of(words: &str, names: &Names) -> Result<Cause, String> {
    if words.is_empty() || words == "none" {
        return Ok(Cause::NONE);
    }
    let (sort, name) = words.split_once(' ').unwrap_or((words, ""));
    let (kind, id) = match sort {
        "own" => (CauseKind::Own, row_of(&names.cells, name, "cell")?),
        "conducted" => (CauseKind::Conducted, row_of(&names.tracts, name, "tract")?),
        "pulse" => (CauseKind::Pulse, channel_of(name)?),
        "focus" => (CauseKind::Focus, row_of(&names.foci, name, "focus")?),
        "step" => (CauseKind::Script, step_of(words)?),
        _ => {
            return Err(format!(
                "there is no cause `{words}`: {}",
                meant(sort, &["none", "own", "conducted", "pulse", "focus", "step"])
            ));
        }
    };
    Ok(Cause::new(kind, id))
}

const BLOCK_REASONS: [(u32, &str); 4] = [
    (number(BlockReason::Refractory), "refractory"),
    (number(BlockReason::Shut), "shut"),
    (number(BlockReason::Occupied), "occupied"),
    (number(BlockReason::Site), "site refractory"),
];
const NO_CAPTURE_REASONS: [(u32, &str); 3] = [
    (no_capture(NoCapture::TooWeak), "too weak"),
    (no_capture(NoCapture::Refractory), "refractory"),
    (no_capture(NoCapture::Forestalled), "forestalled"),
];
const END_REASONS: [(u32, &str); 4] =
    [(0, "length reached"), (1, "ended by a step"), (2, "interrupted"), (3, "the device spins")];

#[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
const fn number(reason: BlockReason) -> u32 {
    reason as u32
}

#[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
const fn no_capture(reason: NoCapture) -> u32 {
    reason as u32
}

fn reasons(kind: Kind) -> &'static [(u32, &'static str)] {
    match kind {
        Kind::Blocked => &BLOCK_REASONS,
        Kind::NotCaptured => &NO_CAPTURE_REASONS,
        Kind::End => &END_REASONS,
        _ => &[],
    }
}

/// The words for a reason in a record of this kind.
pub(super) fn reason_word(kind: Kind, reason: u32) -> Cow<'static, str> {
    match reasons(kind).iter().find(|(number, _)| *number == reason) {
        Some((_, word)) => Cow::Borrowed(word),
        None => Cow::Owned(reason.to_string()),
    }
}

/// The reason of its words.
pub(super) fn reason_of(kind: Kind, words: &str) -> Result<u32, String> {
    let found = reasons(kind).iter().find(|(_, word)| *word == words).map(|(number, _)| *number);
    found.or_else(|| words.parse().ok()).ok_or_else(|| {
        let known: Vec<&str> = reasons(kind).iter().map(|(_, word)| *word).collect();
        format!("there is no reason `{words}` for {}: {}", kind_word(kind), meant(words, &known))
    })
}
