//! Sinks of a host: a `Vec`, and a writer of the canonical form.

use super::Sink;
use crate::base::Record;
use std::io::{Error, Write};
use std::vec::Vec;

impl Sink for Vec<Record> {
    fn take(&mut self, record: &Record) {
        self.push(*record);
    }
}

/// Writes every record's canonical 24 bytes, one after the other: the hash of the run is the hash of what it wrote.
#[derive(Debug)]
pub struct RecordWriter<W> {
    out: W,
    failed: Option<Error>,
}

impl<W: Write> RecordWriter<W> {
    /// Writes to `out`, which should be buffered.
    pub const fn new(out: W) -> Self {
        Self { out, failed: None }
    }

    /// Flushes, and gives back what it wrote to.
    ///
    /// # Errors
    /// The first error of the writer. Nothing was written after it.
    pub fn finish(mut self) -> Result<W, Error> {
        match self.failed {
            Some(error) => Err(error),
            None => self.out.flush().map(|()| self.out),
        }
    }
}

impl<W: Write> Sink for RecordWriter<W> {
    fn take(&mut self, record: &Record) {
        if self.failed.is_none() {
            self.failed = self.out.write_all(&record.to_bytes()).err();
        }
    }
}
