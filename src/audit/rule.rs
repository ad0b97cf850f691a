//! The rules as data: ids, tiers, plain lines, and the score each keeps.

use crate::base::Deviation;

/// Version of the rule set: raised whenever a verdict can change.
pub const RULE_SET: u32 = 1;

/// Whether a rule needs the program.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Tier {
    /// Holds whatever features the device has; needs a few declared limits.
    Envelope,
    /// Needs the program.
    Program,
}

macro_rules! rules {
    ($($id:ident $code:literal $tier:ident $line:literal;)*) => {
        /// A rule by its id.
        #[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        #[non_exhaustive]
        #[repr(u8)]
        pub enum RuleId {
            $(#[doc = $line] $id,)*
        }

        impl RuleId {
            /// Every rule, in the order of the tables.
            pub const ALL: [Self; RuleId::COUNT] = [$(Self::$id,)*];
            /// How many rules there are.
            pub const COUNT: usize = [$($code,)*].len();

            /// The id as it is printed.
            pub const fn code(self) -> &'static str {
                match self { $(Self::$id => $code,)* }
            }

            /// The rule in one plain line.
            pub const fn line(self) -> &'static str {
                match self { $(Self::$id => $line,)* }
            }

            /// The rule's tier.
            pub const fn tier(self) -> Tier {
                match self { $(Self::$id => Tier::$tier,)* }
            }
        }
    };
}

rules! {
    En1 "EN1" Envelope "two pulses of one chamber are never closer than the declared ceiling interval";
    En2 "EN2" Envelope "no span is longer than the declared longest pause without a pulse or a signal that may have been seen";
    En3 "EN3" Envelope "no pulse falls inside the vulnerable window after a signal that must have been seen";
    En4 "EN4" Envelope "every pulse leaves on a channel that the mode paces";
    En6 "EN6" Envelope "the device makes progress: a bounded number of pulses per instant, and time moves on";
    Lr1 "LR1" Program "with nothing that may delay it, the pulse comes not later than the lower rate interval from its anchor";
    Lr2 "LR2" Program "the pulse comes not earlier than the lower rate interval from its anchor";
    Hy1 "HY1" Program "after a sensed beat the escape interval is the hysteresis interval";
    Hy2 "HY2" Program "after a pulse the interval is the lower rate interval, not the hysteresis interval";
    In1 "IN1" Program "a signal that must be seen in the alert window removes the pending pulse";
    Rf1 "RF1" Program "a signal wholly inside blanking or refractory restarts no rate timer";
    Rf2 "RF2" Program "the first signal that must be seen wholly after refractory restarts the rate timer";
    Se1 "SE1" Program "a signal at or above the high limit of sensitivity acts as sensed in the alert window";
    Se2 "SE2" Program "a signal at or below the low limit of sensitivity never acts as sensed";
    Cm1 "CM1" Program "one pulse for each instant one is due";
}

impl RuleId {
    /// The rule of this code, if there is one.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|rule| rule.code() == code)
    }

    /// Its place in [`RuleId::ALL`].
    #[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
    pub const fn number(self) -> u8 {
        self as u8
    }
}

/// A set of rules.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct RuleSet(u32);

impl RuleSet {
    /// No rule.
    pub const EMPTY: Self = Self(0);

    /// Just this rule.
    pub const fn only(rule: RuleId) -> Self {
        Self::EMPTY.with(rule)
    }

    /// The set with this rule in it.
    #[must_use]
    pub const fn with(self, rule: RuleId) -> Self {
        Self(self.0 | 1_u32.rotate_left(widen(rule.number())))
    }

    /// True if the rule is in it.
    pub const fn has(self, rule: RuleId) -> bool {
        self.0 & 1_u32.rotate_left(widen(rule.number())) != 0
    }

    /// The rules of both sets.
    #[must_use]
    pub const fn and(self, other: Self) -> Self {
        Self(self.0 | other.0)
    }

    /// The set without the rules of the other.
    #[must_use]
    pub const fn without(self, other: Self) -> Self {
        Self(self.0 & !other.0)
    }

    /// True if no rule is in it.
    pub const fn is_empty(self) -> bool {
        self.0 == 0
    }

    /// Its rules, in the order of the tables.
    pub fn iter(self) -> impl Iterator<Item = RuleId> {
        RuleId::ALL.into_iter().filter(move |rule| self.has(*rule))
    }
}

#[allow(clippy::as_conversions, reason = "lossless; `From` is not const yet")]
const fn widen(number: u8) -> u32 {
    number as u32
}

/// What a rule has seen so far. A rule never tried has `checked` 0: *not exercised*, never *holds*.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Score {
    /// Cases judged or left undecided: `held + broken + undecided`.
    pub checked: u32,
    /// Cases in which it held.
    pub held: u32,
    /// Cases in which it was broken.
    pub broken: u32,
    /// Cases that could not be decided.
    pub undecided: u32,
    /// The deviation closest to (or farthest beyond) the rule's limit, signed from nominal, for rules that measure time.
    pub worst: Option<Deviation>,
    /// Signed distance of that case from the limit: negative is outside.
    pub margin: Option<Deviation>,
}
