//! What crosses between heart and device: signals towards it, pulses from it.

use super::Span;

/// A chamber's channel of the device.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Channel {
    /// The atrial channel.
    Atrial,
    /// The ventricular channel.
    Ventricular,
}

impl Channel {
    /// Both channels, atrial first.
    pub const ALL: [Self; 2] = [Self::Atrial, Self::Ventricular];

    /// 0 for the atrial channel, 1 for the ventricular one: its number in a [`Record`](super::Record).
    pub const fn number(self) -> u8 {
        match self {
            Self::Atrial => 0,
            Self::Ventricular => 1,
        }
    }

    /// The channel of this number, if there is one.
    pub const fn from_number(number: u8) -> Option<Self> {
        match number {
            0 => Some(Self::Atrial),
            1 => Some(Self::Ventricular),
            _ => None,
        }
    }
}

/// A signal's height or a sensitivity, in microvolts.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct MicroVolts(pub u32);

/// A pulse's height or a threshold, in millivolts.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct MilliVolts(pub u32);

/// What a channel is shown: a deflection with its peak and its width. Its instant is its onset.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Signal {
    /// Peak, base to peak.
    pub peak: MicroVolts,
    /// From onset to end.
    pub width: Span,
}

/// What a device emits. Its instant is the leading edge.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Pulse {
    /// The channel it leaves on.
    pub channel: Channel,
    /// Amplitude.
    pub amplitude: MilliVolts,
    /// From the leading to the trailing edge.
    pub width: Span,
}
