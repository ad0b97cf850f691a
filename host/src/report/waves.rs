//! The heart's own story, put together again from its records: which wave ran where, from when to when, and what became of it.
//!
//! A launch that goes through leaves no record of its own: it is known from the activation it set out from, and its delay from the
//! record with which it ends. What a site launches at all follows from the anatomy: into every tract but the one that woke it.

use crate::run_data::TractShape;
use phase4::base::{BlockReason, Cause, CauseKind, Instant, Kind, Meeting, Record};

/// A site that fired.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Activation {
    pub(super) at: Instant,
    /// Row of the site.
    pub(super) site: u8,
    /// What fired it.
    pub(super) cause: Cause,
    /// Place of the activation that began the whole wave of which this is a part; its own if it began one.
    pub(super) root: usize,
}

/// A wave in one tract.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Wave {
    /// Row of the tract.
    pub(super) tract: u8,
    /// True if it ran from the tract's lower end to its upper one.
    pub(super) backward: bool,
    /// When it entered.
    pub(super) from: Instant,
    /// What became of it.
    pub(super) end: WaveEnd,
    /// Place of the activation that began it all, where that is known.
    pub(super) root: Option<usize>,
}

/// How a wave ended.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum WaveEnd {
    /// It came out and fired the site there, or met it firing by itself in the same instant.
    Arrived(Instant),
    /// It came out, and the site there was refractory.
    Refused(Instant),
    /// It entered and did not pass the gate.
    Blocked(BlockReason),
    /// It met another one, at this instant and at this part of the way from the tract's upper end.
    Met(Instant, f64),
}

/// Everything the heart did.
#[derive(Debug, Default)]
pub(super) struct HeartStory {
    /// Activations in order of time.
    pub(super) activations: Vec<Activation>,
    /// Waves in the order in which they ended; waves still on their way when the run ended are left out.
    pub(super) waves: Vec<Wave>,
}

#[derive(Debug, Clone, Copy)]
struct Flight {
    backward: bool,
    from: Instant,
    root: usize,
}

impl HeartStory {
    /// Reads the records of a run through an anatomy of these tracts.
    pub(super) fn read(records: &[Record], tracts: &[TractShape]) -> Self {
        let mut story = Self::default();
        let mut flights: Vec<Option<Flight>> = vec![None; tracts.len()];
        for instant in records.chunk_by(|one, next| one.at == next.at) {
            story.read_instant(instant, tracts, &mut flights);
        }
        story
    }

    /// What began the wave of which this activation is a part.
    pub(super) fn origin(&self, activation: &Activation) -> Cause {
        self.activations.get(activation.root).map_or(activation.cause, |root| root.cause)
    }

    fn read_instant(&mut self, records: &[Record], tracts: &[TractShape], flights: &mut [Option<Flight>]) {
        let first = self.activations.len();
        for record in records {
            match record.kind {
                Kind::Activated => {
                    let woken = matches!(record.cause.kind, CauseKind::Conducted).then_some(record.cause.id);
                    let flight = woken.and_then(|tract| self.land(tract, WaveEnd::Arrived(record.at), flights));
                    let root = flight.map_or(self.activations.len(), |flight| flight.root);
                    self.activations.push(Activation { at: record.at, site: record.place, cause: record.cause, root });
                }
                Kind::Joined => {
                    self.land(record.place, WaveEnd::Arrived(record.at), flights);
                }
                Kind::Blocked if block_details(record).0 == BlockReason::Site => {
                    self.land(record.place, WaveEnd::Refused(record.at), flights);
                }
                _ => {}
            }
        }
        // Only now is it known which sites fired in this instant: they are where blocked and colliding newcomers set out.
        for record in records {
            match record.kind {
                Kind::Blocked => self.block(record, tracts, first),
                Kind::Collided => self.collide(record, tracts, first, flights),
                _ => {}
            }
        }
        for index in first..self.activations.len() {
            if let Some(activation) = self.activations.get(index).copied() {
                launch(activation, records, tracts, flights);
            }
        }
    }

    fn land(&mut self, tract: u8, end: WaveEnd, flights: &mut [Option<Flight>]) -> Option<Flight> {
        let flight = flights.get_mut(usize::from(tract))?.take()?;
        let Flight { backward, from, root } = flight;
        self.waves.push(Wave { tract, backward, from, end, root: Some(root) });
        Some(flight)
    }

    fn block(&mut self, record: &Record, tracts: &[TractShape], first: usize) {
        let (reason, backward) = block_details(record);
        if reason != BlockReason::Site {
            let tract = record.place;
            let root = self.root_at(tracts, tract, backward, first);
            self.waves.push(Wave { tract, backward, from: record.at, end: WaveEnd::Blocked(reason), root });
        }
    }

    fn collide(&mut self, record: &Record, tracts: &[TractShape], first: usize, flights: &mut [Option<Flight>]) {
        let meeting = Meeting::unpack(record.a, record.b);
        let [left, took, delay] = [meeting.left, meeting.took, meeting.delay].map(|span| span.as_micros() as f64);
        let after = if took + delay > 0.0 { left * delay / (took + delay) } else { 0.0 };
        let newcomer_went = if delay > 0.0 { after / delay } else { 0.0 };
        let from_top = if meeting.backward { 1.0 - newcomer_went } else { newcomer_went };
        let end = WaveEnd::Met(Instant::from_micros(record.at.as_micros().saturating_add(after as u64)), from_top);
        let tract = record.place;
        if self.land(tract, end, flights).is_none() {
            // Both set out in this very instant.
            let backward = !meeting.backward;
            let root = self.root_at(tracts, tract, backward, first);
            self.waves.push(Wave { tract, backward, from: record.at, end, root });
        }
        let root = self.root_at(tracts, tract, meeting.backward, first);
        self.waves.push(Wave { tract, backward: meeting.backward, from: record.at, end, root });
    }

    /// What began the wave that entered this end of the tract in the instant whose activations begin at `first`.
    fn root_at(&self, tracts: &[TractShape], tract: u8, backward: bool, first: usize) -> Option<usize> {
        let shape = tracts.get(usize::from(tract))?;
        let site = if backward { shape.to } else { shape.from };
        self.activations.get(first..)?.iter().find(|activation| activation.site == site).map(|activation| activation.root)
    }
}

/// Sends a wave into every tract that touches the site, but the one that woke it and those that refused or ended it at once.
fn launch(activation: Activation, records: &[Record], tracts: &[TractShape], flights: &mut [Option<Flight>]) {
    for (row, tract) in tracts.iter().enumerate() {
        let backward = match activation.site {
            site if site == tract.from => false,
            site if site == tract.to => true,
            _ => continue,
        };
        let ended = records.iter().any(|record| usize::from(record.place) == row && ends_launch(record, backward));
        let came = activation.cause.kind == CauseKind::Conducted && usize::from(activation.cause.id) == row;
        if let (false, false, Some(flight)) = (ended, came, flights.get_mut(row)) {
            *flight = Some(Flight { backward, from: activation.at, root: activation.root });
        }
    }
}

fn ends_launch(record: &Record, backward: bool) -> bool {
    match record.kind {
        Kind::Joined | Kind::Collided => true,
        Kind::Blocked => {
            let (reason, ran_backward) = block_details(record);
            reason != BlockReason::Site && ran_backward == backward
        }
        _ => false,
    }
}

fn block_details(record: &Record) -> (BlockReason, bool) {
    let reason = match record.a & 0xff {
        1 => BlockReason::Refractory,
        3 => BlockReason::Occupied,
        4 => BlockReason::Site,
        _ => BlockReason::Shut,
    };
    (reason, record.a & 0x100 != 0)
}

/// Why a wave was blocked, in words.
pub(super) const fn block_word(reason: BlockReason) -> &'static str {
    match reason {
        BlockReason::Refractory => "not yet recovered",
        BlockReason::Shut => "shut",
        BlockReason::Occupied => "another wave was on its way",
        BlockReason::Site => "the site beyond was refractory",
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use phase4::base::Span;

    const SINUS: Cause = Cause::new(CauseKind::Own, 0);

    fn tracts() -> Vec<TractShape> {
        let shape = |from, to| TractShape {
            from,
            to,
            gate: 0.5,
            forward_base: Span::from_millis(50),
            backward_base: Span::from_millis(50),
        };
        vec![shape(0, 1), shape(1, 2)]
    }

    fn fired(ms: u64, site: u8, cause: Cause) -> Record {
        Record::new(Instant::from_micros(ms * 1_000), Kind::Activated, site, cause)
    }

    fn conducted(tract: u8) -> Cause {
        Cause::new(CauseKind::Conducted, tract)
    }

    #[test]
    fn a_delay_is_the_time_between_two_activations_and_the_origin_goes_along() {
        let records = [fired(0, 0, SINUS), fired(60, 1, conducted(0)), fired(150, 2, conducted(1))];
        let story = HeartStory::read(&records, &tracts());
        let forward = |tract, from: u64, to: u64| Wave {
            tract,
            backward: false,
            from: Instant::from_micros(from * 1_000),
            end: WaveEnd::Arrived(Instant::from_micros(to * 1_000)),
            root: Some(0),
        };
        assert_eq!(story.waves, [forward(0, 0, 60), forward(1, 60, 150)]);
        assert!(story.activations.iter().all(|activation| story.origin(activation) == SINUS));
    }

    #[test]
    fn a_blocked_wave_never_arrives_and_a_later_one_has_its_own_delay() {
        let shut = Record::new(Instant::from_micros(60_000), Kind::Blocked, 1, SINUS).with_details(2, 0);
        let records = [
            fired(0, 0, SINUS),
            fired(60, 1, conducted(0)),
            shut,
            fired(900, 0, SINUS),
            fired(961, 1, conducted(0)),
            fired(1_100, 2, conducted(1)),
        ];
        let waves = HeartStory::read(&records, &tracts()).waves;
        assert_eq!(waves.get(1).map(|wave| wave.end), Some(WaveEnd::Blocked(BlockReason::Shut)));
        assert_eq!(
            waves.last().map(|wave| (wave.from, wave.end)),
            Some((Instant::from_micros(961_000), WaveEnd::Arrived(Instant::from_micros(1_100_000))))
        );
        assert_eq!(waves.len(), 4);
    }

    #[test]
    fn two_waves_meet_where_their_delays_say() {
        // Down from 0 ms with a delay of 100 ms, up from 40 ms with 50 ms: 60 ms to go, so they meet after 60·50/150 = 20 ms, at 0.6.
        let meeting =
            Meeting { left: Span::from_millis(60), took: Span::from_millis(100), delay: Span::from_millis(50), backward: true };
        let (a, b) = meeting.pack();
        let records = [
            fired(0, 1, SINUS),
            fired(40, 2, Cause::new(CauseKind::Own, 2)),
            Record::new(Instant::from_micros(40_000), Kind::Collided, 1, Cause::NONE).with_details(a, b),
        ];
        let waves = HeartStory::read(&records, &tracts()).waves;
        let ends: Vec<_> =
            waves.iter().filter(|wave| wave.tract == 1).map(|wave| (wave.backward, wave.from.as_micros(), wave.end)).collect();
        let end = WaveEnd::Met(Instant::from_micros(60_000), 0.6);
        assert_eq!(ends, [(false, 0, end), (true, 40_000, end)]);
    }
}
