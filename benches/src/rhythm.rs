//! The rhythm that everything is measured on, and what is kept of its beats.
//!
//! - The sinus node fires every 833 333 µs, first at that instant, and the atrium 1 µs later. Every fifth beat is blocked between them.
//! - The AV node delays by 90 + 780 · exp(−r/110) ms to the nearest microsecond, r = time since the last conducted wave left it;
//!   at the start it is fully recovered.
//! - The ventricle is refractory for 250 ms. An escape cell of 1 714 ms is restarted by every ventricular beat.
//! - A VVI device of 1 000 ms senses a beat 1 µs after it and paces each one that was blocked; a pulse is answered 1 µs later.
//!
//! Those microseconds are the shortest delays that phase4 allows, and every program here has them.
//!
//! A beat is a ventricular beat: five in every five cycles of the sinus node, four conducted and one paced.

/// Interval of the sinus node, µs.
pub const SINUS: u64 = 833_333;
/// Shortest delay of the AV node, µs.
pub const NODE_BASE: u64 = 90_000;
/// What an unrecovered AV node adds, µs.
pub const NODE_GAIN: u64 = 780_000;
/// How fast that wears off, µs.
pub const NODE_TAU: u64 = 110_000;
/// Every such beat of the sinus node is blocked.
pub const BLOCKED: u64 = 5;
/// Refractory period of the ventricle, µs.
pub const REFRACTORY: u64 = 250_000;
/// Interval of the escape cell, µs.
pub const ESCAPE: u64 = 1_714_000;
/// Lower rate interval of the device, µs.
pub const LOWER: u64 = 1_000_000;
/// How long the device is blind after its own pulse, µs.
pub const BLANKING: u64 = 100_000;
/// From sinus node to atrium, from a beat to its sense, from a pulse to its beat, µs.
pub const LINK: u64 = 1;
/// No time: what is not due.
pub const NEVER: u64 = u64::MAX;

/// How long to simulate for so many beats, µs: to the middle of the silence after the last one. Rounded up to five beats.
pub const fn length(beats: u64) -> u64 {
    beats.div_ceil(5) * BLOCKED * SINUS + 500_000
}

/// What is kept of a run's beats: enough to tell whether two programs agree.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Tally {
    /// How many there were.
    pub beats: u64,
    /// A running digest of their times.
    pub digest: u64,
}

impl Tally {
    /// Takes in a beat at this time in µs.
    #[inline]
    pub fn beat(&mut self, at: u64) {
        self.beats += 1;
        self.digest = (self.digest ^ at).wrapping_mul(0x9E37_79B9_7F4A_7C15).rotate_left(29);
    }
}
