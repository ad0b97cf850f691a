//! The log: numbers every record, keeps the running hash, and hands on to whatever stores it.

use crate::base::{Record, RecordHash, low_u32};
use heapless::Deque;

/// Numbers records in the order they happen and keeps their hash.
#[derive(Debug, Clone, Copy, Default)]
pub struct Log {
    hash: RecordHash,
    count: u64,
}

impl Log {
    /// An empty log.
    pub const fn new() -> Self {
        Self { hash: RecordHash::new(), count: 0 }
    }

    /// Takes a record in: gives it the next number (modulo 2³²) and adds it to the hash.
    #[inline]
    pub fn take(&mut self, mut record: Record) -> Record {
        self.number(&mut record);
        record
    }

    /// The same in place.
    #[inline]
    pub(super) fn number(&mut self, record: &mut Record) {
        record.number = low_u32(self.count);
        self.count = self.count.saturating_add(1);
        self.hash.add(record);
    }

    /// The hash of all records so far.
    pub const fn hash(&self) -> RecordHash {
        self.hash
    }

    /// How many records there are.
    pub const fn count(&self) -> u64 {
        self.count
    }
}

/// Something that stores records: a [`Ring`] on a target; on a host, with the feature `std`, a `Vec` or a writer. What it does never
/// changes the hash.
pub trait Sink {
    /// Takes one record, in order.
    fn take(&mut self, record: &Record);
}

/// Keeps the last `N` records and counts those it had to forget.
#[derive(Debug)]
pub struct Ring<const N: usize> {
    records: Deque<Record, N>,
    taken: u64,
}

impl<const N: usize> Ring<N> {
    /// An empty ring.
    pub const fn new() -> Self {
        Self { records: Deque::new(), taken: 0 }
    }

    /// The records it holds, oldest first.
    pub fn iter(&self) -> impl Iterator<Item = &Record> {
        self.records.iter()
    }

    /// How many records it has forgotten.
    pub fn forgotten(&self) -> u64 {
        let held = u64::try_from(self.records.len()).unwrap_or(u64::MAX);
        self.taken.saturating_sub(held)
    }
}

impl<const N: usize> Default for Ring<N> {
    fn default() -> Self {
        Self::new()
    }
}

impl<const N: usize> Sink for Ring<N> {
    fn take(&mut self, record: &Record) {
        if self.records.is_full() {
            let _oldest = self.records.pop_front();
        }
        let _kept = self.records.push_back(*record);
        self.taken = self.taken.saturating_add(1);
    }
}

/// Stores nothing: the hash alone is wanted.
impl Sink for () {
    fn take(&mut self, _: &Record) {}
}
