//! phase4 itself: its closed loop on the common rhythm, its heart alone, and the plain heart with a VVI device.

use crate::rhythm::{BLOCKED, ESCAPE, LINK, LOWER, NODE_BASE, NODE_GAIN, NODE_TAU, REFRACTORY, SINUS, Tally};
use phase4::audit::AuditSettings;
use phase4::base::{
    Decay, Deviation, Instant, Interval, Kind, MilliVolts, Mode, Program, Rate, Record, Settings, SiteId, Span, TractId,
};
use phase4::bench::{Act, Amount, Bench, Coupling, Event, Setup, Sink, Step, When};
use phase4::device::ReferenceDevice;
use phase4::heart::{Anatomy, CellParams, Fraction, Heart, SiteParams, TractParams, Way, Ways, plain};
use phase4::lead::{ChannelParams, LeadParams, NearField};

const fn us(micros: u64) -> Span {
    Span::from_micros(micros)
}

/// Takes the ventricular activations out of a run's records.
struct Beats {
    site: SiteId,
    tally: Tally,
}

impl Sink for Beats {
    #[inline]
    fn take(&mut self, record: &Record) {
        if record.kind == Kind::Activated && record.place == self.site.row() {
            self.tally.beat(record.at.as_micros());
        }
    }
}

const SINUS_NODE: SiteId = SiteId::new(0);
const ATRIUM: SiteId = SiteId::new(1);
const VENTRICLE: SiteId = SiteId::new(2);
const SINUS_ATRIUM: TractId = TractId::new(0);

fn interval(micros: u64) -> Interval {
    Interval::from_span(us(micros)).unwrap_or(Interval::MAX)
}

/// The common rhythm: three sites, two tracts, two cells, a VVI device, and two steps that block every fifth beat.
pub fn common_rhythm(until: u64) -> Tally {
    let tissue = SiteParams::new(us(REFRACTORY)).with_latency(us(LINK));
    let tau = Decay::new(us(NODE_TAU)).expect("within range");
    let link = Way::new(us(LINK));
    let forward = Way::new(us(NODE_BASE)).with_recovery(us(NODE_GAIN), tau);
    // Nothing goes back, and what tries leaves the node as it was.
    let backward = Way::new(us(NODE_BASE)).with_theta(Span::from_secs(60)).with_conceal(Fraction::ZERO);
    let anatomy = Anatomy::new(
        [tissue; 3],
        [
            TractParams::new(SINUS_NODE, ATRIUM, Fraction::ZERO, link, link),
            TractParams::new(ATRIUM, VENTRICLE, Fraction::ONE, forward, backward),
        ],
        [CellParams::new(SINUS_NODE, interval(SINUS)), CellParams::new(VENTRICLE, interval(ESCAPE))],
    )
    .expect("a sound table");
    let lead = LeadParams {
        atrial: None,
        ventricular: Some(ChannelParams::at(VENTRICLE, NearField { delay: us(LINK), ..NearField::VENTRICULAR })),
    };
    let program = Settings::new(Mode::Vvi, interval(LOWER)).check().expect("a sound program");
    let soon = Coupling { window: None, shift: Amount::Fixed(Deviation::from_micros(1)) };
    let steps = [
        Step { when: When::Every(us(BLOCKED * SINUS)), act: Act::Shut(SINUS_ATRIUM, Ways::Forward), times: u32::MAX },
        Step {
            when: When::After { event: Event::Block(SINUS_ATRIUM), nth: 1, coupling: soon },
            act: Act::Open(SINUS_ATRIUM, Ways::Forward),
            times: u32::MAX,
        },
    ];
    let setup = Setup {
        anatomy: &anatomy,
        foci: &[],
        lead,
        judged: None,
        steps: &steps,
        start: Instant::ZERO,
        length: us(until),
        seed: 1,
    };
    let device = ReferenceDevice::new(program, Instant::ZERO);
    let mut bench: Bench<'_, _, 3, 2, 2, 0, 2, 3> = Bench::new(&setup, Some(device)).expect("a sound setup");
    let mut beats = Beats { site: VENTRICLE, tally: Tally::default() };
    bench.run(Instant::MAX, &mut beats);
    beats.tally
}

/// The plain heart alone: five activations a beat, and two records of a cell being reset. Gives its records and the last instant.
pub fn heart_alone(beats: u64) -> (u64, u64) {
    let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO).expect("no foci to refuse");
    // 800 ms a beat, and 260 ms from the sinus node to the apex.
    let until = Instant::from_micros(beats * 800_000 + 500_000);
    let (mut records, mut last) = (0, Instant::ZERO);
    while let Some(record) = heart.poll(until) {
        records += 1;
        last = record.at;
    }
    (records, last.as_micros())
}

/// What a VVI device does at a plain heart of 75 per minute.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Vvi {
    /// It is set to 60 per minute and senses every beat.
    Senses,
    /// It is set to 60 per minute, and the script blocks every fifth beat on its way to the atrium.
    Mixed,
    /// It is set to 90 per minute and paces every beat, against the sinus node.
    Paces,
}

impl Vvi {
    /// The kind of this name, and whether it is audited.
    pub fn of(name: &str) -> Option<(Self, bool)> {
        let kind = match name.strip_suffix("-audited").unwrap_or(name) {
            "vvi-senses" => Self::Senses,
            "vvi-mixed" => Self::Mixed,
            "vvi-paces" => Self::Paces,
            _ => return None,
        };
        Some((kind, name.ends_with("-audited")))
    }

    fn program(self) -> Program {
        let rate = if self == Self::Paces { 90 } else { 60 };
        let mut settings = Settings::new(Mode::Vvi, Interval::from_rate_nearest(Rate::per_minute(rate)));
        settings.amplitude = MilliVolts(3_500);
        settings.check().expect("a sound program")
    }
}

/// The plain heart and a VVI device in a closed loop. Gives the beats of the apex and the log's hash.
pub fn vvi_loop(kind: Vvi, audited: bool, beats: u64) -> (u64, u64) {
    let program = kind.program();
    let soon = Coupling { window: None, shift: Amount::Fixed(Deviation::from_micros(1)) };
    let blocked = When::After { event: Event::Block(plain::SINUS_ATRIUM), nth: 1, coupling: soon };
    let steps = [
        // Five times 800 ms.
        Step { when: When::Every(Span::from_secs(4)), act: Act::Shut(plain::SINUS_ATRIUM, Ways::Forward), times: u32::MAX },
        Step { when: blocked, act: Act::Open(plain::SINUS_ATRIUM, Ways::Forward), times: u32::MAX },
    ];
    let steps = if kind == Vvi::Mixed { &steps[..] } else { &[] };
    let setup = Setup {
        anatomy: &plain::ANATOMY,
        foci: &[],
        lead: LeadParams::PLAIN,
        judged: audited.then(|| (program, AuditSettings::new(&program))),
        steps,
        start: Instant::ZERO,
        length: us(u64::MAX / 2),
        seed: 1,
    };
    let device = ReferenceDevice::new(program, Instant::ZERO);
    let mut bench: Bench<'_, _, 5, 4, 3, 0, 2, 16> = Bench::new(&setup, Some(device)).expect("a sound setup");
    let mut counter = Beats { site: plain::APEX, tally: Tally::default() };
    while counter.tally.beats < beats {
        match bench.poll(Instant::MAX) {
            Some(phase4::bench::Entry::Record(record)) => counter.take(&record),
            Some(phase4::bench::Entry::Judged(_)) => {}
            None => break,
        }
    }
    (counter.tally.beats, bench.log().hash().value())
}
