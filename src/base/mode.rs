//! Pacing modes by the generic code: chamber paced, chamber sensed, response to sensing.

use super::Channel;
use core::fmt;

/// A pacing mode of the generic code (Bernstein et al., revision of 2002). `O` is the capital letter, not a zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum Mode {
    /// Paces nothing, senses nothing.
    Ooo,
    /// Paces the atrium, senses nothing.
    Aoo,
    /// Paces the ventricle, senses nothing.
    Voo,
    /// Paces the atrium, inhibited by the atrium.
    Aai,
    /// Paces the ventricle, inhibited by the ventricle.
    Vvi,
}

impl Mode {
    /// Every mode this version knows.
    pub const ALL: [Self; 5] = [Self::Ooo, Self::Aoo, Self::Voo, Self::Aai, Self::Vvi];

    /// The mode's letters.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Ooo => "OOO",
            Self::Aoo => "AOO",
            Self::Voo => "VOO",
            Self::Aai => "AAI",
            Self::Vvi => "VVI",
        }
    }

    /// The mode of these letters, upper case and without spaces, if this version knows it.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|mode| mode.code() == code)
    }

    /// The chamber it paces.
    pub const fn paces(self) -> Option<Channel> {
        match self {
            Self::Ooo => None,
            Self::Aoo | Self::Aai => Some(Channel::Atrial),
            Self::Voo | Self::Vvi => Some(Channel::Ventricular),
        }
    }

    /// The chamber it senses.
    pub const fn senses(self) -> Option<Channel> {
        match self {
            Self::Ooo | Self::Aoo | Self::Voo => None,
            Self::Aai => Some(Channel::Atrial),
            Self::Vvi => Some(Channel::Ventricular),
        }
    }
}

impl fmt::Display for Mode {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.code())
    }
}
