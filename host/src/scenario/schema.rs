//! The tables and keys of a scenario file: what each holds, and an example to copy.

use super::units::Wanted;

/// What a key holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Holds {
    /// A quantity with its unit.
    Quantity(Wanted),
    /// A rate, an interval, or the word `off`.
    RateOrOff,
    /// A whole number.
    Whole,
    /// One of a few words.
    OneOf(&'static [&'static str]),
    /// Any text.
    Text,
    /// A text with a grammar of its own, told by an example.
    Words(&'static str),
    /// `true` or `false`.
    Switch,
    /// A list of texts.
    List,
    /// A table.
    Table,
    /// A table, or a list of tables.
    Tables,
}

/// One key of a table.
#[derive(Debug)]
pub(super) struct Key {
    pub(super) name: &'static str,
    pub(super) holds: Holds,
}

/// A table and its keys.
#[derive(Debug)]
pub(super) struct Schema {
    /// The table's name as it is printed, `[heart]`.
    pub(super) title: &'static str,
    pub(super) keys: &'static [Key],
}

const fn key(name: &'static str, holds: Holds) -> Key {
    Key { name, holds }
}

use Holds::{List, OneOf, Quantity, RateOrOff, Switch, Table, Tables, Text, Whole, Words};
use Wanted::{Duration, Rate, Share, Time, Voltage};

pub(super) static FILE: Schema = Schema {
    title: "the file",
    keys: &[
        key("scenario", Table),
        key("run", Table),
        key("heart", Table),
        key("lead", Table),
        key("device", Table),
        key("audit", Table),
        key("step", Tables),
    ],
};

pub(super) static SCENARIO: Schema =
    Schema { title: "[scenario]", keys: &[key("name", Text), key("note", Text), key("bench", Text)] };

pub(super) static RUN: Schema =
    Schema { title: "[run]", keys: &[key("length", Quantity(Duration)), key("seed", Whole), key("start", Quantity(Duration))] };

pub(super) static HEART: Schema = Schema {
    title: "[heart]",
    keys: &[
        key("anatomy", OneOf(&["plain", "plain-va"])),
        key("sinus", RateOrOff),
        key("junction", RateOrOff),
        key("ventricle", RateOrOff),
        key("replay", Words("\"intervals.csv\" or { file = \"intervals.csv\", repeat = true }")),
        key("premature", Tables),
        key("site", Table),
        key("tract", Table),
    ],
};

pub(super) static REPLAY: Schema = Schema { title: "[heart.replay]", keys: &[key("file", Text), key("repeat", Switch)] };

pub(super) static PREMATURE: Schema = Schema {
    title: "[heart.premature]",
    keys: &[key("site", Text), key("after", Text), key("coupling", Quantity(Time)), key("every", Whole)],
};

pub(super) static SITE: Schema = Schema {
    title: "[heart.site.…]",
    keys: &[
        key("refractory", Quantity(Time)),
        key("relative", Quantity(Time)),
        key("rheobase", Quantity(Voltage)),
        key("chronaxie", Quantity(Time)),
        key("latency", Quantity(Time)),
    ],
};

pub(super) static TRACT: Schema =
    Schema { title: "[heart.tract.…]", keys: &[key("gate", Quantity(Share)), key("forward", Table), key("backward", Table)] };

pub(super) static WAY: Schema = Schema {
    title: "[heart.tract.… forward or backward]",
    keys: &[
        key("base", Quantity(Time)),
        key("gain", Quantity(Time)),
        key("tau", Quantity(Time)),
        key("theta", Quantity(Time)),
        key("conceal", Quantity(Share)),
        key("shut", Switch),
    ],
};

pub(super) static LEADS: Schema = Schema { title: "[lead]", keys: &[key("ventricle", Table), key("atrium", Table)] };

pub(super) static LEAD: Schema = Schema {
    title: "[lead.…]",
    keys: &[
        key("peak", Quantity(Voltage)),
        key("delay", Quantity(Time)),
        key("width", Quantity(Time)),
        key("rheobase", Quantity(Voltage)),
        key("chronaxie", Quantity(Time)),
    ],
};

pub(super) static DEVICE: Schema = Schema {
    title: "[device]",
    keys: &[
        key("name", Text),
        key("mode", OneOf(&["OOO", "AOO", "VOO", "AAI", "VVI"])),
        key("lower_rate", Quantity(Rate)),
        key("hysteresis_rate", RateOrOff),
        key("refractory", Quantity(Time)),
        key("blanking", Quantity(Time)),
        key("sensitivity", Quantity(Voltage)),
        key("amplitude", Quantity(Voltage)),
        key("width", Quantity(Time)),
        key("edge", OneOf(&["outside", "inside"])),
        key("tie", OneOf(&["sense first", "expiry first"])),
        key("fault", Words("the number of a fault in the bank, such as 3, or { number = 23, size = \"-20 ms\" }")),
    ],
};

pub(super) static FAULT: Schema = Schema {
    title: "[device.fault]",
    keys: &[key("number", Whole), key("size", Words("what its row of the bank is measured in"))],
};

pub(super) static AUDIT: Schema = Schema {
    title: "[audit]",
    keys: &[
        key("tolerance", Words("a time such as \"8 ms\", or a table")),
        key("uncertainty", Quantity(Time)),
        key("decision", OneOf(&["simple", "guarded"])),
        key("ceiling", Quantity(Rate)),
        key("longest_pause", Quantity(Rate)),
        key("vulnerable", Words("\"150..400 ms\" or \"off\"")),
        key("decide", Quantity(Share)),
        key("require", List),
    ],
};

pub(super) static TOLERANCES: Schema = Schema {
    title: "[audit.tolerance]",
    keys: &[
        key("low", Quantity(Time)),
        key("high", Quantity(Time)),
        key("share", Quantity(Share)),
        key("tick", Quantity(Time)),
        key("lower_rate", Words("a time such as \"8 ms\", or a table")),
        key("hysteresis_rate", Words("a time such as \"8 ms\", or a table")),
        key("refractory", Words("a time such as \"8 ms\", or a table")),
        key("blanking", Words("a time such as \"8 ms\", or a table")),
        key("sensitivity", Quantity(Share)),
    ],
};

pub(super) static TOLERANCE: Schema = Schema {
    title: "[audit.tolerance.…]",
    keys: &[key("low", Quantity(Time)), key("high", Quantity(Time)), key("share", Quantity(Share)), key("tick", Quantity(Time))],
};

pub(super) static STEP: Schema = Schema {
    title: "[[step]]",
    keys: &[
        key("when", Words("a text such as \"after VP + 300 ms\"")),
        key("act", Words("a text such as \"beat ventricle\"")),
        key("times", Whole),
    ],
};

static ALL: [&Schema; 17] = [
    &FILE,
    &SCENARIO,
    &RUN,
    &HEART,
    &REPLAY,
    &PREMATURE,
    &SITE,
    &TRACT,
    &WAY,
    &LEADS,
    &LEAD,
    &DEVICE,
    &FAULT,
    &AUDIT,
    &TOLERANCES,
    &TOLERANCE,
    &STEP,
];

/// The name of every key there is, table by table.
pub fn key_names() -> impl Iterator<Item = &'static str> {
    ALL.iter().flat_map(|schema| schema.keys.iter().map(|key| key.name))
}

impl Holds {
    /// What is expected, in words.
    pub(super) fn expected(self) -> String {
        match self {
            Quantity(wanted) => wanted.expected().to_owned(),
            RateOrOff => format!("{}, or \"off\"", Rate.expected()),
            Whole => "a whole number".to_owned(),
            OneOf(words) => {
                let quoted: Vec<String> = words.iter().map(|word| format!("\"{word}\"")).collect();
                crate::refusal::list(quoted.iter().map(String::as_str))
            }
            Text => "a text in quotes".to_owned(),
            Words(example) => example.to_owned(),
            Switch => "true or false".to_owned(),
            List => "a list of texts".to_owned(),
            Table => "a table".to_owned(),
            Tables => "a table, or a list of tables".to_owned(),
        }
    }

    /// The unit to suggest when a bare number stands here.
    pub(super) const fn usual_unit(self) -> Option<&'static str> {
        match self {
            Quantity(wanted) => Some(wanted.usual_unit()),
            RateOrOff => Some(Rate.usual_unit()),
            _ => None,
        }
    }
}
