//! Random hearts and what is done to them. All times lie on a coarse grid, so that ties are the rule and not the exception.

use crate::heart_common::{drain, ms, span};
use phase4::base::{
    Cause, CauseKind, CellId, Channel, Decay, Instant, Interval, MilliVolts, Pulse, Record, SiteId, Span, Stream, TractId, draw,
};
use phase4::heart::{
    Anatomy, CellParams, FocusKind, FocusParams, Fraction, Heart, PulseAnswer, SiteParams, TractParams, Way, Ways,
};

pub(crate) const S: usize = 6;
pub(crate) const T: usize = 8;
pub(crate) const C: usize = 3;
pub(crate) const F: usize = 2;

pub(crate) type RandomAnatomy = Anatomy<S, T, C>;
pub(crate) type RandomHeart<'a> = Heart<'a, S, T, C, F>;
pub(crate) type Foci = [FocusParams<'static>; F];

/// Bytes from which a heart and a script follow: every value of every byte is valid, so that shrinking never gets stuck.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Genes {
    pub(crate) sites: [[u8; 2]; S],
    pub(crate) tracts: [[u8; 13]; T],
    pub(crate) cells: [[u8; 2]; C],
    pub(crate) foci: [[u8; 5]; F],
    pub(crate) acts: Vec<[u8; 4]>,
}

impl Genes {
    /// The genes of this seed.
    pub(crate) fn from_seed(seed: u64, acts: usize) -> Self {
        let mut dice = Dice::new(seed);
        let mut byte = || dice.below(256) as u8;
        Self {
            sites: core::array::from_fn(|_| core::array::from_fn(|_| byte())),
            tracts: core::array::from_fn(|_| core::array::from_fn(|_| byte())),
            cells: core::array::from_fn(|_| core::array::from_fn(|_| byte())),
            foci: core::array::from_fn(|_| core::array::from_fn(|_| byte())),
            acts: (0..acts).map(|_| core::array::from_fn(|_| byte())).collect(),
        }
    }

    pub(crate) fn tables(&self) -> ([SiteParams; S], [TractParams; T], [CellParams; C]) {
        (self.sites.map(site), self.tracts.map(tract), self.cells.map(cell))
    }

    pub(crate) fn foci(&self) -> Foci {
        core::array::from_fn(|row| focus(row, self.foci[row], &self.cells.map(cell)))
    }

    pub(crate) fn acts(&self) -> Vec<(Instant, Act)> {
        let mut at = 0;
        let acts = self.acts.iter().map(|&[wait, kind, target, more]| {
            at += u64::from(wait % 16) * 20;
            (ms(at), act(kind, target, more))
        });
        acts.collect()
    }
}

/// What is done to a heart.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Act {
    Pulse(SiteId, MilliVolts),
    Beat(SiteId),
    Arrest(CellId),
    Release(CellId),
    Shut(TractId, Ways),
    Open(TractId, Ways),
    Quiet,
}

fn pick<const N: usize, X: Copy>(of: [X; N], gene: u8) -> X {
    of[usize::from(gene) % N]
}

const fn among(rows: usize, gene: u8) -> u8 {
    gene % rows as u8
}

fn site([refractory, relative]: [u8; 2]) -> SiteParams {
    let site = SiteParams::new(span(20 * (1 + u64::from(refractory % 12)))).with_relative(span(20 * u64::from(relative % 4)));
    site.with_latency(span(pick([3, 20, 40], refractory)))
}

fn way([base, curve, gain, theta, conceal]: [u8; 5]) -> Way {
    let quarter = |millionths| Fraction::from_millionths(millionths).unwrap();
    let way = Way::new(span(20 * (1 + u64::from(base % 6))))
        .with_theta(span(20 * u64::from(theta % 12)))
        .with_conceal(pick([Fraction::ZERO, Fraction::ONE, quarter(190_000), quarter(500_000)], conceal));
    let mut way = if curve % 4 == 0 {
        way.with_recovery(span(20 * u64::from(gain % 12)), Decay::new(span(50 + u64::from(gain))).unwrap())
    } else {
        way
    };
    way.shut = conceal >= 224;
    way
}

fn tract(genes: [u8; 13]) -> TractParams {
    let [from, to, gate, f0, f1, f2, f3, f4, b0, b1, b2, b3, b4] = genes;
    let from = among(S, from);
    let to = (from + 1 + among(S - 1, to)) % S as u8;
    let part = |millionths| Fraction::from_millionths(millionths).unwrap();
    let gate = pick([Fraction::ZERO, Fraction::ONE, part(500_000), part(250_000), part(333_333)], gate);
    TractParams::new(SiteId::new(from), SiteId::new(to), gate, way([f0, f1, f2, f3, f4]), way([b0, b1, b2, b3, b4]))
}

fn cell([at, interval]: [u8; 2]) -> CellParams {
    let interval = Interval::from_span(span(260 + 20 * u64::from(interval % 48))).unwrap();
    CellParams::new(SiteId::new(among(S, at)), interval)
}

static SERIES: [&[Span]; 3] = [
    &[Span::from_millis(400), Span::from_millis(600), Span::from_millis(500)],
    &[Span::from_millis(800)],
    &[Span::from_millis(60), Span::from_millis(300), Span::from_millis(300), Span::from_millis(1_000)],
];

fn focus(row: usize, [kind, at, trigger, coupling, every]: [u8; 5], cells: &[CellParams; C]) -> FocusParams<'static> {
    match kind % 3 {
        0 => FocusParams::replay(cells[row].site, pick(SERIES, at), every % 2 == 0, CellId::new(row as u8)),
        _ => FocusParams::premature_after(
            SiteId::new(among(S, at)),
            SiteId::new(among(S, trigger)),
            span(20 * (1 + u64::from(coupling % 20))),
            1 + u32::from(every % 4),
        ),
    }
}

fn act(kind: u8, target: u8, more: u8) -> Act {
    let ways = pick([Ways::Forward, Ways::Backward, Ways::Both], more);
    match kind {
        0..=69 => Act::Pulse(SiteId::new(among(S, target)), MilliVolts(if more < 200 { 5_000 } else { 900 })),
        70..=169 => Act::Beat(SiteId::new(among(S, target))),
        170..=184 => Act::Arrest(CellId::new(among(C, target))),
        185..=214 => Act::Release(CellId::new(among(C, target))),
        215..=229 => Act::Shut(TractId::new(among(T, target)), ways),
        230..=253 => Act::Open(TractId::new(among(T, target)), ways),
        254..=255 => Act::Quiet,
    }
}

/// Does one act, at an instant whose earlier events have been handed out; what a pulse answers belongs to the log.
pub(crate) fn perform(heart: &mut RandomHeart<'_>, at: Instant, row: usize, act: Act, log: &mut Vec<Record>) {
    let cause = Cause::new(CauseKind::Script, row as u8);
    let done = match act {
        Act::Beat(site) => heart.beat(site, at, cause),
        Act::Arrest(cell) => heart.arrest(cell, at),
        Act::Release(cell) => heart.release(cell, at),
        Act::Shut(tract, ways) => heart.shut(tract, ways, at),
        Act::Open(tract, ways) => heart.open(tract, ways, at),
        Act::Quiet => heart.quiet(at),
        Act::Pulse(site, amplitude) => {
            let pulse = Pulse { channel: Channel::Ventricular, amplitude, width: Span::from_micros(400) };
            heart.pulse(site, pulse, at).map(|answer| match answer {
                PulseAnswer::Unanswered(record) => log.push(record),
                PulseAnswer::Captured { due } => assert!(due > at),
            })
        }
    };
    done.expect("everything due before has been handed out");
}

/// Plays a script. `drain` hands out everything up to an instant, in whatever steps it likes.
pub(crate) fn play<'a>(
    anatomy: &'a RandomAnatomy,
    foci: &'a Foci,
    acts: &[(Instant, Act)],
    mut drain: impl FnMut(&mut RandomHeart<'a>, Instant, &mut Vec<Record>),
) -> (Vec<Record>, RandomHeart<'a>) {
    let mut heart = Heart::new(anatomy, foci, Instant::ZERO).unwrap();
    let mut log = Vec::new();
    for (row, &(at, act)) in acts.iter().enumerate() {
        // Script before heart, pulses after it.
        let until = if matches!(act, Act::Pulse(..)) { at } else { at.saturating_sub(Span::from_micros(1)) };
        drain(&mut heart, until, &mut log);
        perform(&mut heart, at, row, act, &mut log);
    }
    let end = acts.last().map_or(ms(3_000), |&(at, _)| at.saturating_add(span(3_000)));
    drain(&mut heart, end, &mut log);
    (log, heart)
}

/// Plays a script in one go between the acts.
pub(crate) fn play_plainly<'a>(
    anatomy: &'a RandomAnatomy,
    foci: &'a Foci,
    acts: &[(Instant, Act)],
) -> (Vec<Record>, RandomHeart<'a>) {
    play(anatomy, foci, acts, drain)
}

/// Polls at random instants, too early ones among them, one record or many at a time, until everything up to `until` is out.
pub(crate) fn drain_in_pieces(dice: &mut Dice, heart: &mut RandomHeart<'_>, until: Instant, log: &mut Vec<Record>) {
    for _ in 0..dice.below(6) {
        let seen = log.last().map_or(Instant::ZERO, |record| record.at);
        let ahead = until.saturating_since(seen).as_micros();
        let now = match dice.below(4) {
            0 => Instant::from_micros(u64::from(dice.below(1 << 20))).min(until), // often long ago
            1 => heart.next_at().unwrap_or(until).min(until),
            _ => seen.saturating_add(Span::from_micros((u64::from(dice.below(1 << 10)) * ahead) >> 10)),
        };
        for _ in 0..=dice.below(5) {
            log.extend(heart.poll(now));
        }
    }
    drain(heart, until, log);
}

/// A throw of dice: the crate's own draws, one after the other.
pub(crate) struct Dice {
    seed: u64,
    thrown: u64,
}

impl Dice {
    pub(crate) const fn new(seed: u64) -> Self {
        Self { seed, thrown: 0 }
    }

    pub(crate) fn below(&mut self, bound: u32) -> u32 {
        self.thrown += 1;
        ((u64::from(draw(self.seed, Stream(77), self.thrown)) * u64::from(bound)) >> 32) as u32
    }

    /// The rows 0 to N − 1 in random order.
    pub(crate) fn shuffled<const N: usize>(&mut self) -> [usize; N] {
        let mut rows: [usize; N] = core::array::from_fn(|row| row);
        for last in (1..N).rev() {
            rows.swap(last, self.below(last as u32 + 1) as usize);
        }
        rows
    }
}

/// The focus table with every site renamed.
pub(crate) fn renamed(foci: &Foci, site: impl Fn(SiteId) -> SiteId) -> Foci {
    foci.map(|focus| match focus.kind {
        FocusKind::Replay { intervals, repeat, in_place_of } => {
            FocusParams::replay(site(focus.site), intervals, repeat, in_place_of)
        }
        FocusKind::Premature { trigger, coupling, every } => {
            FocusParams::premature_after(site(focus.site), site(trigger), coupling, every)
        }
        _ => unreachable!("no other kind is made here"),
    })
}
