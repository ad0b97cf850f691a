//! One thing that happened: 24 bytes, the same on a link, in a file and under the hash.

use super::convert::{low_u32, wide};
use super::{Channel, Instant, MicroVolts, MilliVolts, Pulse, Signal, Span};

/// One thing that happened at one instant.
///
/// # Shape
/// 24 bytes, little-endian: 0–7 [`at`](Self::at) in µs; 8 [`kind`](Self::kind); 9 [`place`](Self::place); 10 and 11 the
/// [`cause`](Self::cause); 12–15 and 16–19 two details whose meaning [`Kind`] tells; 20–23 the running number.
///
/// It lies in memory as in its canonical form, so that on a little-endian machine hashing it moves nothing.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[repr(C)]
pub struct Record {
    /// When.
    pub at: Instant,
    /// What.
    pub kind: Kind,
    /// Where: a site, tract, cell, channel or script step, as the kind says.
    pub place: u8,
    /// Why.
    pub cause: Cause,
    /// First detail.
    pub a: u32,
    /// Second detail.
    pub b: u32,
    /// Running number within the run, given by the log: 0 in a record that no log has taken yet.
    pub number: u32,
}

/// What happened. The numbers are those of the canonical form.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[non_exhaustive]
#[repr(u8)]
pub enum Kind {
    /// A site fired. Place: site. Cause: what fired it. Details: none.
    Activated = 1,
    /// A wave ended in a tract, or at the refractory site beyond it. Place: tract. Cause: what had fired the site it came from.
    /// `a`: [`BlockReason`] in bits 0–7, bit 8 set if it ran backward. `b`: µs of recovery it found (time since the gate was last
    /// passed; for a refractory site since that fired), [`u32::MAX`] if never.
    Blocked = 2,
    /// Two waves met in a tract and both ended. Place: tract. Cause: of the newcomer. `a`, `b`: a [`Meeting`].
    Collided = 3,
    /// A wave reached a site that fired in this very instant. Place: tract. Cause: of the site's activation.
    Joined = 4,
    /// Something else than its own rhythm fired a cell's site and so discharged it. Place: cell. Cause: of the site's activation. `a`: µs that the cell still had to run.
    Reset = 5,
    /// A pulse found no answer. Place: site. Cause: the pulse. `a`: [`NoCapture`]. `b`: what was missing, in mV or µs.
    NotCaptured = 6,
    /// A channel is shown a signal. Place: channel. Cause: of the activation behind it, or the script. `a`: peak in µV. `b`: width in µs.
    Signal = 16,
    /// The device emits a pulse. Place: channel. `a`: amplitude in mV. `b`: width in µs.
    Pulse = 17,
    /// A step of the script acts. Place: step. `a`: which of its firings, from 1. `b`: the value drawn or swept, in µs.
    Step = 32,
    /// The run starts. `a`, `b`: low and high half of the seed.
    Start = 33,
    /// The run ends. `a`: 0 its length is reached, 1 a step ended it, 2 interrupted, 3 the device spins, 4 too many events.
    End = 34,
}

impl Kind {
    /// Every kind this version writes.
    pub const ALL: [Self; 11] = [
        Self::Activated,
        Self::Blocked,
        Self::Collided,
        Self::Joined,
        Self::Reset,
        Self::NotCaptured,
        Self::Signal,
        Self::Pulse,
        Self::Step,
        Self::Start,
        Self::End,
    ];

    /// The kind's number in the canonical form.
    #[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
    pub const fn number(self) -> u8 {
        self as u8
    }

    /// True for what the bench itself sees and an auditor may use: signals, pulses, start and end.
    pub const fn is_bench_visible(self) -> bool {
        matches!(self, Self::Signal | Self::Pulse | Self::Start | Self::End)
    }
}

/// Why something happened.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[repr(C)]
pub struct Cause {
    /// Of what sort.
    pub kind: CauseKind,
    /// Which one of that sort: a cell, tract, channel, focus or step.
    pub id: u8,
}

/// The sorts of cause. The numbers are those of the canonical form.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[repr(u8)]
pub enum CauseKind {
    /// None, or not known.
    None = 0,
    /// A cell's own rhythm; the id is the cell.
    Own = 1,
    /// A conducted wave; the id is the tract.
    Conducted = 2,
    /// A pulse of the device; the id is its channel.
    Pulse = 3,
    /// A focus; the id is the focus.
    Focus = 4,
    /// The script; the id is the step.
    Script = 5,
}

impl Cause {
    /// No cause, or none known.
    pub const NONE: Self = Self { kind: CauseKind::None, id: 0 };

    /// A cause of this sort.
    pub const fn new(kind: CauseKind, id: u8) -> Self {
        Self { kind, id }
    }
}

/// Why a wave was blocked. The numbers are those of the canonical form.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[repr(u8)]
pub enum BlockReason {
    /// The gate had not recovered.
    Refractory = 1,
    /// The gate is shut in this direction.
    Shut = 2,
    /// Another wave was on its way in the same direction.
    Occupied = 3,
    /// It arrived, and the site beyond was refractory.
    Site = 4,
}

impl BlockReason {
    /// The reason's number in the canonical form.
    #[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
    pub const fn number(self) -> u32 {
        self as u32
    }
}

/// Why a pulse was not answered. The numbers are those of the canonical form.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[repr(u8)]
pub enum NoCapture {
    /// Too weak at its width; the margin is in mV.
    TooWeak = 1,
    /// The site was absolutely refractory; the margin is in µs.
    Refractory = 2,
    /// Something else fired the site during the capture latency; the margin is in µs, from that to when the pulse would have.
    Forestalled = 3,
}

impl NoCapture {
    /// The reason's number in the canonical form.
    #[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
    pub const fn number(self) -> u32 {
        self as u32
    }
}

/// Where two opposite waves met: all that is needed to draw it, without a division in the core.
///
/// The earlier wave needs `took` for the whole tract and had `left` of that to go when the newcomer set out, which needs `delay`.
/// They meet when `left − x` of the one and `x · delay/took` of the other are the same place.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Meeting {
    /// What the earlier wave still had to go. Below 2²¹ µs.
    pub left: Span,
    /// What the earlier wave takes for the whole tract. Below 2²¹ µs.
    pub took: Span,
    /// What the newcomer takes for the whole tract. Below 2²¹ µs.
    pub delay: Span,
    /// True if the newcomer ran backward.
    pub backward: bool,
}

impl Meeting {
    const BITS: u32 = 21;
    const MASK: u64 = (1 << Self::BITS) - 1;

    /// As the two details of a record.
    pub const fn pack(self) -> (u32, u32) {
        let bits = (self.left.as_micros() & Self::MASK)
            | ((self.took.as_micros() & Self::MASK) << Self::BITS)
            | ((self.delay.as_micros() & Self::MASK) << (2 * Self::BITS))
            | if self.backward { 1 << 63 } else { 0 };
        (low_u32(bits), low_u32(bits >> 32))
    }

    /// From the two details of a record.
    pub const fn unpack(a: u32, b: u32) -> Self {
        let bits = wide(a) | (wide(b) << 32);
        Self {
            left: Span::from_micros(bits & Self::MASK),
            took: Span::from_micros((bits >> Self::BITS) & Self::MASK),
            delay: Span::from_micros((bits >> (2 * Self::BITS)) & Self::MASK),
            backward: bits >> 63 == 1,
        }
    }
}

impl Record {
    /// A record without details and without a number.
    pub const fn new(at: Instant, kind: Kind, place: u8, cause: Cause) -> Self {
        Self { at, kind, place, cause, a: 0, b: 0, number: 0 }
    }

    /// The same record with these details.
    #[must_use]
    pub const fn with_details(self, a: u32, b: u32) -> Self {
        Self { a, b, ..self }
    }

    /// A channel is shown a signal. A width beyond `u32` microseconds is cut to it.
    pub const fn signal(at: Instant, channel: Channel, signal: Signal, cause: Cause) -> Self {
        Self::new(at, Kind::Signal, channel.number(), cause).with_details(signal.peak.0, short(signal.width))
    }

    /// The device emits a pulse. A width beyond `u32` microseconds is cut to it.
    pub const fn pulse(at: Instant, pulse: Pulse) -> Self {
        Self::new(at, Kind::Pulse, pulse.channel.number(), Cause::NONE).with_details(pulse.amplitude.0, short(pulse.width))
    }

    /// The signal in a [`Kind::Signal`] record and the channel it is shown on.
    pub const fn as_signal(&self) -> Option<(Channel, Signal)> {
        match (self.kind, Channel::from_number(self.place)) {
            (Kind::Signal, Some(channel)) => {
                Some((channel, Signal { peak: MicroVolts(self.a), width: Span::from_micros(wide(self.b)) }))
            }
            _ => None,
        }
    }

    /// The pulse in a [`Kind::Pulse`] record.
    pub const fn as_pulse(&self) -> Option<Pulse> {
        match (self.kind, Channel::from_number(self.place)) {
            (Kind::Pulse, Some(channel)) => {
                Some(Pulse { channel, amplitude: MilliVolts(self.a), width: Span::from_micros(wide(self.b)) })
            }
            _ => None,
        }
    }

    /// The six little-endian words of the canonical form.
    #[allow(clippy::as_conversions, reason = "lossless, and reads the discriminant of a field-less enum")]
    #[inline]
    pub const fn to_words(&self) -> [u32; 6] {
        let at = self.at.as_micros();
        let what =
            self.kind as u32 | ((self.place as u32) << 8) | ((self.cause.kind as u32) << 16) | ((self.cause.id as u32) << 24);
        [low_u32(at), low_u32(at >> 32), what, self.a, self.b, self.number]
    }

    /// The canonical 24 bytes.
    pub fn to_bytes(&self) -> [u8; 24] {
        let mut bytes = [0; 24];
        for (four, word) in bytes.chunks_exact_mut(4).zip(self.to_words()) {
            four.copy_from_slice(&word.to_le_bytes());
        }
        bytes
    }
}

const fn short(span: Span) -> u32 {
    let micros = span.as_micros();
    if micros > wide(u32::MAX) { u32::MAX } else { low_u32(micros) }
}

#[cfg(test)]
mod tests {
    use super::super::RecordHash;
    use super::*;

    fn some() -> [Record; 3] {
        let beat = Record::new(Instant::from_micros(800_000), Kind::Activated, 2, Cause::new(CauseKind::Own, 0));
        let wave = Signal { peak: MicroVolts(8_000), width: Span::from_millis(40) };
        let seen = Record::signal(Instant::from_micros(803_000), Channel::Ventricular, wave, beat.cause);
        let block = Record::new(Instant::from_micros(900_000), Kind::Blocked, 1, beat.cause).with_details(1, 70_000);
        [beat, Record { number: 1, ..seen }, Record { number: 2, ..block }]
    }

    fn hash(records: &[Record]) -> u64 {
        let mut hash = RecordHash::new();
        records.iter().for_each(|record| hash.add(record));
        hash.value()
    }

    #[test]
    fn the_canonical_form_is_pinned() {
        let [beat, ..] = some();
        assert_eq!(beat.to_bytes(), [0x00, 0x35, 0x0c, 0, 0, 0, 0, 0, 1, 2, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0]);
        assert_eq!(size_of::<Record>(), 24);
    }

    #[test]
    fn the_hash_has_a_known_answer() {
        assert_eq!(std::format!("{}", RecordHash::new()), "243f6a8885a308d3");
        assert_eq!(hash(&some()), KNOWN);
    }
    // Computed apart, by a few lines of another language from the rule alone.
    const KNOWN: u64 = 0x4c07_6aa4_9ecd_e6a9;

    #[test]
    fn every_change_of_a_log_changes_the_hash() {
        let [first, second, third] = some();
        let whole = hash(&[first, second, third]);
        assert_ne!(whole, hash(&[second, first, third]), "two swapped");
        assert_ne!(whole, hash(&[first, third]), "one dropped");
        for (position, record) in [first, second, third].into_iter().enumerate() {
            for bit in 0..192 {
                let mut words = record.to_words();
                words[bit / 32] ^= 1 << (bit % 32);
                let mut flipped = RecordHash::new();
                for (row, other) in [first, second, third].into_iter().enumerate() {
                    flipped.add_words(if row == position { words } else { other.to_words() });
                }
                assert_ne!(whole, flipped.value(), "bit {bit} of record {position}");
            }
        }
    }

    #[test]
    fn a_meeting_survives_the_packing() {
        let meeting = Meeting {
            left: Span::from_micros(1_999_999),
            took: Span::from_micros(2_000_000),
            delay: Span::from_micros(1),
            backward: true,
        };
        let (a, b) = meeting.pack();
        assert_eq!(Meeting::unpack(a, b), meeting);
    }
}
