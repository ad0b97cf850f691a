//! What is counted of a run's records, whoever made them.

use phase4::base::{Instant, Kind, Record, Span};
use phase4::bench::Log;
use phase4::heart::plain::VENTRICLE;

/// Counts over a run's records.
#[derive(Debug, Clone, Copy, Default)]
pub struct Tally {
    /// Ventricular activations.
    pub beats: u64,
    /// Pulses of the device.
    pub pulses: u64,
    /// The seed that the start names.
    pub seed: u64,
    /// Why it ended, as the [`End`](Kind::End) record says; 0 if there is none.
    pub end_reason: u32,
    first: Option<Instant>,
    last: Option<Instant>,
}

impl Tally {
    /// Counts a record in.
    pub fn take(&mut self, record: &Record) {
        match record.kind {
            Kind::Activated if record.place == VENTRICLE.row() => self.beats = self.beats.saturating_add(1),
            Kind::Pulse => self.pulses = self.pulses.saturating_add(1),
            Kind::Start => self.seed = u64::from(record.a) | u64::from(record.b) << 32,
            Kind::End => self.end_reason = record.a,
            _ => {}
        }
        self.first = self.first.or(Some(record.at));
        self.last = Some(record.at);
    }

    /// The instant of the first record; zero if there is none.
    pub fn start(&self) -> Instant {
        self.first.unwrap_or(Instant::ZERO)
    }

    /// From the first to the last record.
    pub fn simulated(&self) -> Span {
        self.last.unwrap_or(Instant::ZERO).saturating_since(self.start())
    }
}

/// Numbers records that were read back, as the run that wrote them did, and gives their hash.
pub fn number(records: &mut [Record]) -> u64 {
    let mut log = Log::new();
    for record in records {
        *record = log.take(*record);
    }
    log.hash().value()
}
