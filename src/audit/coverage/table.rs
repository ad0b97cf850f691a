//! The table of what should be tried: windows of a cycle by anchor, kinds of event, and which cells are asked for.
//!
//! Windows, columns and needs are general experience with device timing, from memory, written down as data.

use crate::base::{Channel, Mode};
use core::fmt;

/// What a cycle begins with.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum After {
    /// A sensed beat.
    Sense,
    /// A pulse that the tissue answered.
    CapturedPulse,
    /// A pulse that the tissue did not answer.
    LostPulse,
}

/// A window of a cycle.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Stretch {
    /// Blanking.
    Blanking,
    /// The rest of the refractory period.
    Refractory,
    /// Alert, but for its end.
    Alert,
    /// The last 100 ms of the lower rate interval.
    Last,
    /// What hysteresis adds after a sense.
    Hysteresis,
    /// A whole cycle, in modes that do not sense.
    Cycle,
}

/// A kind of event.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Column {
    /// A beat of the heart's own rhythm.
    Beat,
    /// A premature or scripted beat.
    Premature,
    /// A signal that may or may not be seen.
    NearThreshold,
    /// A signal that must not be seen.
    SubThreshold,
    /// A T wave.
    TWave,
    /// A beat of the other chamber seen from afar.
    FarField,
    /// A run of noise.
    NoiseRun,
    /// A signal that begins in the window and outlasts it.
    Straddle,
    /// Two signals within 1 ms.
    TwoAtOnce,
    /// A command.
    Command,
    /// A magnet.
    Magnet,
    /// Nothing at all, and the next pulse was judged.
    Empty,
}

/// Whether a cell is asked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Need {
    /// It counts.
    Required,
    /// It is shown and does not count.
    Optional,
    /// It cannot be hit, or means nothing.
    Impossible,
}

/// How a cell stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum CellState {
    /// At least one hit well inside the window, with a decided answer.
    Hit,
    /// Only hits that prove nothing: too near an end, or undecided.
    BandOnly,
    /// Nothing yet.
    Untried,
    /// The window is too narrow under this program and tolerance: out of the count.
    Void,
    /// The bench has no such stimulus yet: stays in the count.
    NoStimulus,
    /// Impossible or meaningless.
    Impossible,
}

/// A cell by its place in the table.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct CellId {
    /// What the cycle begins with.
    pub after: After,
    /// The window.
    pub stretch: Stretch,
    /// The kind of event.
    pub column: Column,
}

impl After {
    /// Every beginning, in the order of the table.
    pub const ALL: [Self; 3] = [Self::Sense, Self::CapturedPulse, Self::LostPulse];

    /// Its short name, on the channel the mode paces.
    pub const fn code(self, channel: Channel) -> &'static str {
        match (self, channel) {
            (Self::Sense, Channel::Atrial) => "AS",
            (Self::CapturedPulse, Channel::Atrial) => "AP",
            (Self::LostPulse, Channel::Atrial) => "AP-lost",
            (Self::Sense, Channel::Ventricular) => "VS",
            (Self::CapturedPulse, Channel::Ventricular) => "VP",
            (Self::LostPulse, Channel::Ventricular) => "VP-lost",
        }
    }

    /// What it is, in words.
    pub const fn line(self) -> &'static str {
        match self {
            Self::Sense => "after a sensed beat",
            Self::CapturedPulse => "after a pulse that captured",
            Self::LostPulse => "after a pulse that did not capture",
        }
    }

    pub(super) const fn place(self) -> usize {
        match self {
            Self::Sense => 0,
            Self::CapturedPulse => 1,
            Self::LostPulse => 2,
        }
    }
}

impl Stretch {
    /// Its short name.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Blanking => "blanking",
            Self::Refractory => "refractory",
            Self::Alert => "alert",
            Self::Last => "last-100",
            Self::Hysteresis => "hysteresis",
            Self::Cycle => "cycle",
        }
    }

    const fn needs(self) -> &'static [u8; Column::COUNT] {
        // Columns in the order of [`Column::ALL`]; R required, o optional, . impossible or meaningless.
        match self {
            Self::Blanking => b"oRo..RRooooR",
            Self::Refractory => b"RRooRoRRoooR",
            Self::Alert => b"RRRRRRRoRRRR",
            Self::Last => b"RRRR.RooRRoR",
            Self::Hysteresis => b"Rooo.oo.oooR",
            Self::Cycle => b"...........R",
        }
    }
}

impl Column {
    /// How many kinds there are.
    pub const COUNT: usize = 12;

    /// Every kind, in the order of the table.
    pub const ALL: [Self; Self::COUNT] = [
        Self::Beat,
        Self::Premature,
        Self::NearThreshold,
        Self::SubThreshold,
        Self::TWave,
        Self::FarField,
        Self::NoiseRun,
        Self::Straddle,
        Self::TwoAtOnce,
        Self::Command,
        Self::Magnet,
        Self::Empty,
    ];

    /// Its short name, on the channel the mode paces.
    pub const fn code(self, channel: Channel) -> &'static str {
        match (self, channel) {
            (Self::Beat, Channel::Atrial) => "P",
            (Self::Beat, Channel::Ventricular) => "R",
            (Self::Premature, Channel::Atrial) => "PAC",
            (Self::Premature, Channel::Ventricular) => "PVC",
            (Self::NearThreshold, _) => "near",
            (Self::SubThreshold, _) => "sub",
            (Self::TWave, _) => "T",
            (Self::FarField, Channel::Atrial) => "far-R",
            (Self::FarField, Channel::Ventricular) => "far-P",
            (Self::NoiseRun, _) => "noise",
            (Self::Straddle, _) => "straddle",
            (Self::TwoAtOnce, _) => "two",
            (Self::Command, _) => "command",
            (Self::Magnet, _) => "magnet",
            (Self::Empty, _) => "empty",
        }
    }

    /// False while the bench has no way to bring it about.
    pub const fn has_stimulus(self) -> bool {
        !matches!(self, Self::TWave | Self::FarField | Self::NoiseRun | Self::Command | Self::Magnet)
    }

    pub(super) const fn place(self) -> usize {
        match self {
            Self::Beat => 0,
            Self::Premature => 1,
            Self::NearThreshold => 2,
            Self::SubThreshold => 3,
            Self::TWave => 4,
            Self::FarField => 5,
            Self::NoiseRun => 6,
            Self::Straddle => 7,
            Self::TwoAtOnce => 8,
            Self::Command => 9,
            Self::Magnet => 10,
            Self::Empty => 11,
        }
    }
}

/// Every row of the table. Which of them a program has, [`rows_of`] tells.
const ROWS: [(After, Stretch); 15] = [
    (After::Sense, Stretch::Blanking),
    (After::Sense, Stretch::Refractory),
    (After::Sense, Stretch::Alert),
    (After::Sense, Stretch::Last),
    (After::Sense, Stretch::Hysteresis),
    (After::CapturedPulse, Stretch::Blanking),
    (After::CapturedPulse, Stretch::Refractory),
    (After::CapturedPulse, Stretch::Alert),
    (After::CapturedPulse, Stretch::Last),
    (After::LostPulse, Stretch::Blanking),
    (After::LostPulse, Stretch::Refractory),
    (After::LostPulse, Stretch::Alert),
    (After::LostPulse, Stretch::Last),
    (After::CapturedPulse, Stretch::Cycle),
    (After::LostPulse, Stretch::Cycle),
];

/// How many rows there are at most.
pub(super) const ROW_COUNT: usize = ROWS.len();

/// The rows of a mode, with their places: none where nothing is paced, whole cycles where nothing is sensed.
pub(super) fn rows_of(mode: Mode, hysteresis: bool) -> impl Iterator<Item = (usize, After, Stretch)> + Clone {
    let (paces, senses) = (mode.paces().is_some(), mode.senses().is_some());
    ROWS.into_iter().enumerate().map(|(place, (after, stretch))| (place, after, stretch)).filter(move |(_, _, stretch)| {
        match stretch {
            Stretch::Cycle => paces && !senses,
            Stretch::Hysteresis => paces && senses && hysteresis,
            _ => paces && senses,
        }
    })
}

/// Whether a cell is asked for.
pub(super) fn need(stretch: Stretch, column: Column) -> Need {
    match stretch.needs().get(column.place()) {
        Some(b'R') => Need::Required,
        Some(b'o') => Need::Optional,
        _ => Need::Impossible,
    }
}

impl CellId {
    /// The cell of this name, such as `VS/alert/PVC`, on the channel the mode paces.
    pub fn from_name(name: &str, channel: Channel) -> Option<Self> {
        // Codes are stripped rather than the name split: core's search for a separator can reach a panic.
        let ((after, stretch), column) = ROWS.into_iter().find_map(|(after, stretch)| {
            let rest = name.strip_prefix(after.code(channel))?.strip_prefix('/')?;
            Some(((after, stretch), rest.strip_prefix(stretch.code())?.strip_prefix('/')?))
        })?;
        let column = Column::ALL.into_iter().find(|one| one.code(channel) == column)?;
        Some(Self { after, stretch, column })
    }

    /// Its name, for printing.
    pub const fn name(self, channel: Channel) -> CellName {
        CellName { cell: self, channel }
    }
}

/// A cell's name, such as `VS/alert/PVC`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct CellName {
    cell: CellId,
    channel: Channel,
}

impl fmt::Display for CellName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let CellId { after, stretch, column } = self.cell;
        write!(f, "{}/{}/{}", after.code(self.channel), stretch.code(), column.code(self.channel))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_cell_is_found_by_its_name() {
        for channel in Channel::ALL {
            for (after, stretch) in ROWS {
                for column in Column::ALL {
                    let cell = CellId { after, stretch, column };
                    assert_eq!(CellId::from_name(&std::format!("{}", cell.name(channel)), channel), Some(cell));
                }
            }
        }
        assert_eq!(CellId::from_name("VS/alert", Channel::Ventricular), None);
        assert_eq!(CellId::from_name("VS/alert/PVC/more", Channel::Ventricular), None);
    }

    #[test]
    fn places_are_those_of_the_lists() {
        assert!(Column::ALL.into_iter().enumerate().all(|(place, column)| column.place() == place));
        assert!(After::ALL.into_iter().enumerate().all(|(place, after)| after.place() == place));
    }
}
