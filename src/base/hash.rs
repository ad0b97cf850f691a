//! The running hash over a run's records: the name of everything that happened.

use super::Record;
use core::fmt;

/// A 64-bit running hash over the canonical bytes of records, word by word.
///
/// Per 32-bit little-endian word `w`: `a = rotl(a ^ w, 5) · 0x9E3779B1`, `b = rotl(b + w, 13) · 0x85EBCA77`, both wrapping, from
/// 0x243F6A88 and 0x85A308D3. Two 32-bit lanes because the smallest cores have no 64-bit multiply.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct RecordHash {
    a: u32,
    b: u32,
}

impl RecordHash {
    /// The hash of an empty run.
    pub const fn new() -> Self {
        Self { a: 0x243F_6A88, b: 0x85A3_08D3 }
    }

    /// Takes one record in.
    #[inline]
    pub fn add(&mut self, record: &Record) {
        self.add_words(record.to_words());
    }

    #[inline]
    pub(super) fn add_words(&mut self, words: [u32; 6]) {
        for word in words {
            self.a = (self.a ^ word).rotate_left(5).wrapping_mul(0x9E37_79B1);
            self.b = self.b.wrapping_add(word).rotate_left(13).wrapping_mul(0x85EB_CA77);
        }
    }

    /// Both lanes in one number, `a` above `b`.
    pub const fn value(self) -> u64 {
        (super::wide(self.a) << 32) | super::wide(self.b)
    }
}

impl Default for RecordHash {
    fn default() -> Self {
        Self::new()
    }
}

impl fmt::Display for RecordHash {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:08x}{:08x}", self.a, self.b)
    }
}
