//! A whole closed loop out of any bytes at all: the same function serves the stable test over the corpus and a fuzzer.

use phase4::audit::{AuditSettings, Decision, Judgement, Tolerance};
use phase4::base::{
    Channel, Deviation, Edge, Instant, Interval, MicroVolts, Mode, Program, Rate, Record, Settings, Signal, Span, Straddle, Tie,
};
use phase4::bench::{Act, Amount, Bench, Coupling, Entry, Event, Setup, Step, When, WindowEnd};
use phase4::device::ReferenceDevice;
use phase4::heart::{FocusParams, Ways, plain};
use phase4::lead::{LeadChange, LeadParams};

/// What a loop made of bytes came to.
#[derive(Debug, PartialEq, Eq)]
pub(crate) struct Outcome {
    pub(crate) hash: u64,
    pub(crate) records: Vec<Record>,
    pub(crate) judgements: Vec<Judgement>,
    /// Instants at which two or more records fall together, and all instants.
    pub(crate) ties: u32,
    pub(crate) instants: u32,
}

/// Reads choices off a string of bytes; past its end every byte is 0.
pub(crate) struct Bytes<'a>(&'a [u8]);

impl<'a> Bytes<'a> {
    pub(crate) fn new(bytes: &'a [u8]) -> Self {
        Self(bytes)
    }

    pub(crate) fn byte(&mut self) -> u8 {
        let (first, rest) = self.0.split_first().unwrap_or((&0, &[]));
        self.0 = rest;
        *first
    }

    pub(crate) fn pick<T: Copy>(&mut self, choices: &[T]) -> T {
        choices[usize::from(self.byte()) % choices.len()]
    }

    fn number(&mut self) -> u32 {
        u32::from_le_bytes([self.byte(), self.byte(), 0, 0])
    }
}

pub(crate) fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

/// A program; `None` where the settings that the bytes say are refused.
pub(crate) fn program(bytes: &mut Bytes) -> Option<Program> {
    let lower = match bytes.byte() % 6 {
        0 => Interval::from_rate_nearest(Rate::per_minute(60)),
        1 => Interval::from_rate_nearest(Rate::per_minute(65)),
        2 => Interval::from_rate_nearest(Rate::per_minute(70)),
        3 => Interval::from_rate_nearest(Rate::per_minute(90)),
        4 => Interval::from_rate_nearest(Rate::per_minute(150)),
        _ => Interval::from_span(Span::from_micros(u64::from(bytes.number()) * 16 + 300_000))?,
    };
    let mut settings = Settings::new(bytes.pick(&[Mode::Vvi, Mode::Aai, Mode::Voo, Mode::Aoo, Mode::Ooo, Mode::Vvi]), lower);
    let longer = bytes.pick(&[0, 0, 100, 200, 333]);
    if longer > 0 {
        settings.hysteresis = Interval::from_span(lower.nearest().saturating_add(ms(longer)));
    }
    settings.refractory = bytes.pick(&[ms(250), ms(320), ms(200), Span::from_micros(250_001)]);
    settings.blanking = bytes.pick(&[ms(100), ms(50), ms(200), ms(120)]);
    settings.edge = bytes.pick(&[Edge::Outside, Edge::Inside]);
    settings.tie = bytes.pick(&[Tie::SenseFirst, Tie::ExpiryFirst]);
    settings.straddle = bytes.pick(&[Straddle::Onset, Straddle::End]);
    settings.detect_delay = bytes.pick(&[Span::ZERO, Span::ZERO, ms(2), Span::from_micros(7_001)]);
    settings.check().ok()
}

fn amount(bytes: &mut Bytes) -> Amount {
    let from = Deviation::from_micros(i64::from(bytes.number()) * 20);
    match bytes.byte() % 4 {
        0 => Amount::Random { from, to: from.saturating_add(Deviation::from_millis(40)) },
        1 => Amount::Sweep { from, to: from.saturating_add(Deviation::from_millis(20)), step: ms(5) },
        _ => Amount::Fixed(from.saturating_add(Deviation::from_micros(1))),
    }
}

fn event(bytes: &mut Bytes) -> Event {
    let channel = bytes.pick(&Channel::ALL);
    match bytes.byte() % 8 {
        0 => Event::Capture(plain::APEX),
        1 => Event::NoCapture(plain::APEX),
        2 => Event::Activation(plain::ATRIUM),
        3 => Event::Activation(plain::VENTRICLE),
        4 => Event::Block(plain::ATRIUM_JUNCTION),
        5 => Event::Signal(channel),
        _ => Event::Pulse(channel),
    }
}

fn act(bytes: &mut Bytes, program: &Program) -> Act {
    let channel = bytes.pick(&Channel::ALL);
    let site = bytes.pick(&[plain::APEX, plain::VENTRICLE, plain::ATRIUM, plain::JUNCTION, plain::SINUS]);
    let tract = bytes.pick(&[plain::ATRIUM_JUNCTION, plain::JUNCTION_VENTRICLE, plain::SINUS_ATRIUM, plain::VENTRICLE_APEX]);
    let cell = bytes.pick(&[plain::SINUS_CELL, plain::JUNCTION_CELL, plain::VENTRICLE_CELL]);
    let ways = bytes.pick(&[Ways::Both, Ways::Forward, Ways::Backward]);
    let sensitivity = program.settings().sensitivity.0;
    let peak = MicroVolts(bytes.pick(&[
        sensitivity * 3,
        sensitivity * 3,
        sensitivity,
        sensitivity / 2,
        sensitivity * 6 / 5,
        sensitivity * 4 / 5,
    ]));
    match bytes.byte() % 10 {
        0 | 1 => Act::Beat(site),
        2 | 3 => Act::Signal(channel, Signal { peak, width: bytes.pick(&[ms(40), ms(1), ms(120)]) }),
        4 => Act::Arrest(cell),
        5 => Act::Release(cell),
        6 => Act::Shut(tract, ways),
        7 => Act::Open(tract, ways),
        8 => Act::Lead(channel, LeadChange::Peak(peak)),
        _ => Act::Quiet,
    }
}

fn step(bytes: &mut Bytes, program: &Program) -> Step {
    let window = bytes.pick(&[
        None,
        Some(WindowEnd::Refractory),
        Some(WindowEnd::Lower),
        Some(WindowEnd::Blanking),
        None,
        Some(WindowEnd::Hysteresis),
    ]);
    let edge = |bytes: &mut Bytes| Amount::Fixed(Deviation::from_micros(bytes.pick(&[0, -1, 1, -20_000, 30_000])));
    let when = match bytes.byte() % 6 {
        0 => When::At(Span::from_micros(u64::from(bytes.number()) * 256)),
        1 => When::Every(Span::from_micros(u64::from(bytes.number()) * 64 + 5_000)),
        2 => When::Without { event: event(bytes), span: Span::from_micros(u64::from(bytes.number()) * 64 + 1_000) },
        _ => {
            let shift = if window.is_some() { edge(bytes) } else { amount(bytes) };
            When::After { event: event(bytes), nth: u32::from(bytes.byte() % 3) + 1, coupling: Coupling { window, shift } }
        }
    };
    let times = if matches!(when, When::At(_)) { 1 } else { u32::from(bytes.byte() % 32) + 1 };
    Step { when, act: act(bytes, program), times }
}

/// Runs the loop that the bytes describe for 20 s, polled in slices of `slice` or in one go; `None` where they describe none.
pub(crate) fn run(bytes: &[u8], slice: Option<Span>) -> Option<Outcome> {
    let mut bytes = Bytes::new(bytes);
    let program = program(&mut bytes)?;
    let tolerance = bytes.pick(&[Span::ZERO, ms(1), ms(8)]);
    let (uncertainty, decision) = bytes.pick(&[(Span::ZERO, Decision::Simple), (ms(1), Decision::Guarded)]);
    let audit =
        AuditSettings::new(&program).with_tolerance(Tolerance::symmetric(tolerance)).with_uncertainty(uncertainty, decision);
    let start = Instant::from_micros(bytes.pick(&[0, (1 << 32) - 3_000_000, 1, 1 << 60]));
    let foci = [FocusParams::premature_after(
        bytes.pick(&[plain::APEX, plain::ATRIUM]),
        plain::VENTRICLE,
        Span::from_micros(u64::from(bytes.number()) * 8 + 300_000),
        u32::from(bytes.byte() % 7) + 1,
    )];
    let steps: Vec<Step> = (0..bytes.byte() % 9).map(|_| step(&mut bytes, &program)).collect();
    let setup = Setup {
        anatomy: &plain::ANATOMY,
        foci: &foci,
        lead: LeadParams::PLAIN,
        judged: Some((program, audit)),
        steps: &steps,
        start,
        length: Span::from_secs(20),
        seed: u64::from(bytes.byte()),
    };
    let device = ReferenceDevice::new(program, start);
    let mut bench: Bench<'_, _, 5, 4, 3, 1, 16, 64> = Bench::new(&setup, Some(device)).ok()?;
    Some(drain(&mut bench, start, slice))
}

fn drain<D: phase4::device::Device>(
    bench: &mut Bench<'_, D, 5, 4, 3, 1, 16, 64>,
    start: Instant,
    slice: Option<Span>,
) -> Outcome {
    let (mut records, mut judgements) = (Vec::new(), Vec::new());
    let mut until = start;
    while let Some(next) = bench.next_at() {
        until = match slice {
            Some(slice) => until.saturating_add(slice),
            None => Instant::MAX,
        };
        while let Some(entry) = bench.poll(until) {
            match entry {
                Entry::Record(record) => {
                    assert!(record.at <= until && record.at >= start, "{record:?} outside of what was asked for");
                    records.push(record);
                }
                Entry::Judged(judgement) => judgements.push(judgement),
            }
        }
        assert!(bench.next_at().is_none_or(|at| at > until && at >= next), "the loop wants to be polled in the past");
    }
    assert!(records.is_sorted_by_key(|record| record.at), "records out of order");
    assert!(records.iter().zip(0..).all(|(record, number)| record.number == number), "numbers with a gap");
    let (mut ties, mut instants) = (0, 0);
    for together in records.chunk_by(|one, next| one.at == next.at) {
        instants += 1;
        ties += u32::from(together.len() > 1);
    }
    Outcome { hash: bench.log().hash().value(), records, judgements, ties, instants }
}
