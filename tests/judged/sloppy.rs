//! A device that keeps its program only within tolerance: every timer of every cycle, every detection and every look at a peak
//! is drawn anew. Written apart from the library's own device and auditor, from the words of the program alone.

use super::{A, V, pulse_us, signal_us};
use phase4::audit::{AuditSettings, Decision, Tolerance};
use phase4::base::{
    Channel, Edge, Instant, Interval, MicroVolts, Mode, Program, Rate, Record, Settings, Span, Straddle, Stream, Tie, draw_below,
};

/// Draws in order; the same seed gives the same draws.
#[derive(Debug, Clone)]
pub(crate) struct Dice {
    seed: u64,
    n: u64,
}

impl Dice {
    pub(crate) fn new(seed: u64) -> Self {
        Self { seed, n: 0 }
    }

    pub(crate) fn below(&mut self, bound: u64) -> u64 {
        self.n += 1;
        u64::from(draw_below(self.seed, Stream(7), self.n, u32::try_from(bound).unwrap()))
    }

    pub(crate) fn one_in(&mut self, n: u64) -> bool {
        self.below(n) == 0
    }

    /// Between both ends, which come up often.
    pub(crate) fn between(&mut self, least: u64, greatest: u64) -> u64 {
        match self.below(4) {
            0 => least,
            1 => greatest,
            _ => least + self.below(greatest - least + 1),
        }
    }

    pub(crate) fn pick<T: Copy>(&mut self, of: &[T]) -> T {
        of[usize::try_from(self.below(of.len() as u64)).unwrap()]
    }
}

/// Which scripts are wanted.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Kind {
    /// Anything: tolerances, uncertainty, delays, near-threshold peaks, bursts, events on every edge.
    Wild,
    /// An exact device, no tolerance, no uncertainty, peaks outside the band, events on every edge.
    Exact,
    /// Tolerance 8 ms, peaks outside the band, beats 600 to 1200 ms apart, one in twenty at any time.
    Ordinary,
}

/// One thing that a device does wrong once.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Slip {
    /// An escape interval is this much longer than its tolerance allows.
    Late(u64),
    /// An escape interval is this much shorter than its tolerance allows.
    Early(u64),
    /// A pulse is left out; the timers run on as if it had come.
    Missing,
    /// A pulse comes again this much later.
    Twice(u64),
    /// A sense changes nothing.
    IgnoresSense,
    /// A signal inside refractory, clear of its edge, restarts everything.
    RestartsInRefractory,
    /// The escape interval after a pulse is that after a sense.
    HysteresisAfterPulse,
    /// The escape interval after a sense is that after a pulse.
    NoHysteresisAfterSense,
}

/// A program, how it is judged, and what a device did with it.
#[derive(Debug, Clone)]
pub(crate) struct Script {
    pub(crate) program: Program,
    pub(crate) settings: AuditSettings,
    pub(crate) records: Vec<Record>,
    pub(crate) start: Instant,
    /// When a judge that joins late begins to watch.
    pub(crate) joins_at: Option<Instant>,
    /// When the slip happened, if it did.
    pub(crate) slipped_at: Option<Instant>,
}

impl core::fmt::Display for Script {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        writeln!(f, "{:?}", self.program.settings())?;
        writeln!(f, "{:?}", self.settings)?;
        writeln!(f, "start {} joins {:?}", self.start.as_micros(), self.joins_at.map(Instant::as_micros))?;
        for record in &self.records {
            let at = record.at.as_micros() as i64 - self.start.as_micros() as i64;
            writeln!(f, "{at:>12} {:?} channel {} a {} b {}", record.kind, record.place, record.a, record.b)?;
        }
        Ok(())
    }
}

/// The script of this number, without a slip.
pub(crate) fn script(seed: u64, kind: Kind) -> Script {
    slipping(seed, kind, None)
}

/// The script of this number, with this slip where it has an occasion for it.
pub(crate) fn slipping(seed: u64, kind: Kind, slip: Option<Slip>) -> Script {
    let mut dice = Dice::new(seed);
    let program = program(&mut dice, kind);
    let settings = settings(&mut dice, kind, &program);
    let start = 1_000_000 + if dice.one_in(3) { (1 << 32) - 4_000_000 } else { dice.below(1_000_000) };
    let mut run = Run::new(program, settings, start, dice, kind);
    run.slip = slip.map(|slip| (slip, run.dice.below(4)));
    let wanted = 12 + run.dice.below(30);
    while (run.seen.len() as u64) < wanted {
        run.step();
    }
    run.finish()
}

fn program(dice: &mut Dice, kind: Kind) -> Program {
    loop {
        let mode = dice.pick(&[Mode::Vvi, Mode::Vvi, Mode::Vvi, Mode::Aai, Mode::Aai, Mode::Voo, Mode::Aoo]);
        let per_minute = dice.pick(&[30, 50, 60, 60, 65, 70, 72, 90, 120, 150, 175]);
        let mut settings = Settings::new(mode, Interval::from_rate_nearest(Rate::per_minute(per_minute)));
        if dice.one_in(2) {
            settings.hysteresis = Some(Interval::from_rate_nearest(Rate::per_minute(dice.pick(&[29, 40, 50, 55, 60, 100]))));
        }
        settings.refractory = Span::from_micros(dice.pick(&[150_000, 200_000, 250_000, 250_000, 320_000, 400_123]));
        settings.blanking = match dice.below(4) {
            0 => settings.refractory,
            1 => Span::from_micros(settings.refractory.as_micros() - 5_000),
            _ => Span::from_millis(100),
        };
        settings.sensitivity = MicroVolts(dice.pick(&[500, 2_500, 2_501]));
        settings.edge = dice.pick(&[Edge::Outside, Edge::Outside, Edge::Inside]);
        settings.tie = dice.pick(&[Tie::SenseFirst, Tie::SenseFirst, Tie::ExpiryFirst]);
        settings.straddle = dice.pick(&[Straddle::Onset, Straddle::Onset, Straddle::End]);
        settings.detect_delay = Span::from_micros(if kind == Kind::Ordinary { 0 } else { dice.pick(&[0, 0, 0, 12_345, 60_000]) });
        if let Ok(program) = settings.check() {
            return program;
        }
    }
}

fn settings(dice: &mut Dice, kind: Kind, program: &Program) -> AuditSettings {
    loop {
        let mut settings = AuditSettings::new(program);
        match kind {
            Kind::Exact => settings = settings.with_tolerance(Tolerance::symmetric(Span::ZERO)),
            Kind::Ordinary => {}
            Kind::Wild => {
                let mut tolerance = || Tolerance {
                    low: Span::from_micros(dice.pick(&[0, 1, 8_000, 8_000, 20_000])),
                    high: Span::from_micros(dice.pick(&[0, 1, 8_000, 8_000, 20_000])),
                    share_millionths: u32::try_from(dice.pick(&[0, 0, 2_000])).unwrap(),
                    tick: Span::from_micros(dice.pick(&[0, 0, 31])),
                };
                settings.lower = tolerance();
                settings.hysteresis = if program.settings().hysteresis.is_some() { tolerance() } else { settings.lower };
                settings.refractory = tolerance();
                settings.blanking = tolerance();
                let uncertainty = Span::from_micros(dice.pick(&[0, 0, 0, 50, 1_000, 3_000]));
                settings = settings.with_uncertainty(uncertainty, Decision::Guarded);
                if dice.one_in(2) {
                    let delay = program.settings().detect_delay.as_micros();
                    let least = delay - delay.min(dice.pick(&[0, 1, 5_000]));
                    settings.detect = (Span::from_micros(least), Span::from_micros(delay + dice.pick(&[0, 1, 5_000])));
                }
            }
        }
        if settings.check(program).is_ok() {
            return settings;
        }
    }
}

/// A signal on its way from onset to detection.
#[derive(Debug, Clone, Copy)]
struct Coming {
    detected_at: u64,
    blanked: bool,
    loud: bool,
}

/// What a cycle began with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum After {
    Pulse,
    Sense,
}

/// What happens next, and when.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Next {
    Signal(u64),
    Detection(u64),
    Expiry(u64),
}

struct Run {
    program: Program,
    settings: AuditSettings,
    start: u64,
    dice: Dice,
    kind: Kind,
    now: u64,
    /// The last anchor as the device has it.
    anchor: u64,
    /// Fraction of a microsecond carried from pulse to pulse, in units of 2^-32.
    carried: u64,
    expires: u64,
    refractory_to: u64,
    blanked_to: u64,
    coming: std::collections::VecDeque<Coming>,
    planned: u64,
    /// What still goes wrong, and after how many occasions.
    slip: Option<(Slip, u64)>,
    slipped_at: Option<u64>,
    /// True instants with what was recorded.
    seen: Vec<(u64, Seen)>,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Seen {
    Signal { channel: Channel, peak: u32, width: u64 },
    Pulse,
}

impl Run {
    fn new(program: Program, settings: AuditSettings, start: u64, dice: Dice, kind: Kind) -> Self {
        let mut run = Self {
            program,
            settings,
            start,
            dice,
            kind,
            now: start,
            anchor: start,
            carried: 0,
            expires: 0,
            refractory_to: 0,
            blanked_to: 0,
            coming: std::collections::VecDeque::new(),
            planned: 0,
            slip: None,
            slipped_at: None,
            seen: Vec::new(),
        };
        run.restart(start, After::Pulse);
        run.plan();
        run
    }

    fn channel(&self) -> Channel {
        self.program.paces().unwrap()
    }

    /// A timer of this nominal length, somewhere within its tolerance.
    fn timer(&mut self, nominal: u64, tolerance: Tolerance) -> u64 {
        let share = (nominal * u64::from(tolerance.share_millionths)).div_ceil(1_000_000) + tolerance.tick.as_micros();
        let (low, high) = (tolerance.low.as_micros() + share, tolerance.high.as_micros() + share);
        if self.dice.one_in(3) { nominal } else { self.dice.between(nominal.saturating_sub(low), nominal + high) }
    }

    /// True if this is the occasion for the slip that is still to come.
    fn slips(&mut self, at: u64, suits: impl Fn(Slip) -> bool) -> Option<Slip> {
        let (slip, wait) = self.slip.filter(|(slip, _)| suits(*slip))?;
        self.slip = (wait > 0).then(|| (slip, wait - 1));
        if wait > 0 {
            return None;
        }
        self.slipped_at = Some(at);
        Some(slip)
    }

    fn restart(&mut self, at: u64, after: After) {
        let set = *self.program.settings();
        let hysteresis = set.hysteresis.is_some() && self.program.senses().is_some();
        let slip = self.slips(at, |slip| match slip {
            Slip::Late(_) | Slip::Early(_) => true,
            Slip::HysteresisAfterPulse => hysteresis && after == After::Pulse,
            Slip::NoHysteresisAfterSense => hysteresis && after == After::Sense,
            _ => false,
        });
        let as_after = match slip {
            Some(Slip::HysteresisAfterPulse) => After::Sense,
            Some(Slip::NoHysteresisAfterSense) => After::Pulse,
            _ => after,
        };
        let (escape, tolerance) = match as_after {
            After::Sense if hysteresis => (self.program.escape_after_sense(), self.settings.hysteresis),
            _ => (set.lower, self.settings.lower),
        };
        let bits = escape.as_fixed().to_bits() + self.carried;
        let whole = (bits + (1 << 31)) >> 32;
        let fraction = bits.wrapping_sub(whole << 32);
        self.anchor = at;
        let escape = match slip {
            Some(Slip::Late(by)) => whole + tolerance.high.as_micros() + by,
            Some(Slip::Early(by)) => whole - tolerance.low.as_micros() - by,
            _ => self.timer(whole, tolerance),
        };
        self.expires = at + escape;
        // Carried only while the timer is exact: a sloppy one has its own way with fractions.
        self.carried = if escape == whole && fraction < (1 << 31) { fraction } else { 0 };
        let more = u64::from(set.edge == Edge::Inside);
        self.refractory_to = at + more + self.timer(set.refractory.as_micros(), self.settings.refractory);
        self.blanked_to = at + more + self.timer(set.blanking.as_micros(), self.settings.blanking);
    }

    /// Plans the next signal: on an edge of the cycle or beside it, close to another signal, or anywhere.
    fn plan(&mut self) {
        let set = *self.program.settings();
        let edges = [
            set.blanking.as_micros(),
            set.refractory.as_micros(),
            set.lower.nearest().as_micros(),
            self.program.escape_after_sense().nearest().as_micros(),
        ];
        let anywhere = self.kind == Kind::Ordinary || self.dice.one_in(3);
        let at = if anywhere {
            let beats = self.kind == Kind::Ordinary && !self.dice.one_in(20);
            self.now + 1 + if beats { 600_000 + self.dice.below(600_000) } else { self.dice.below(2 * edges[2]) }
        } else if self.kind == Kind::Wild && self.dice.one_in(5) {
            self.now + self.dice.pick(&[0, 1, 500, 3_000, 30_000])
        } else {
            let edge = self.dice.pick(&edges);
            let beside =
                self.dice.pick(&[0, 8_000, 16_000, self.settings.detect.1.as_micros(), self.settings.uncertainty.as_micros()]);
            let tick = self.dice.below(3);
            let own =
                self.dice.pick(&[self.anchor + edge, self.anchor + edge, self.expires, self.refractory_to, self.blanked_to]);
            if self.dice.one_in(2) { (own + tick).saturating_sub(1 + beside) } else { own + tick + beside - 1 }
        };
        // Within an instant a bench shows all signals before it looks for pulses.
        let paced_now = self.seen.last() == Some(&(self.now, Seen::Pulse));
        self.planned = if at >= self.now + u64::from(paced_now) { at } else { self.now + 1 + self.dice.below(400_000) };
    }

    fn next(&self) -> Next {
        let sense_first = self.program.settings().tie == Tie::SenseFirst;
        let rank = |next: &Next| match (next, sense_first) {
            (Next::Expiry(at), false) => (*at, 0),
            (Next::Signal(at), _) => (*at, 1),
            (Next::Detection(at), _) => (*at, 2),
            (Next::Expiry(at), true) => (*at, 3),
        };
        let detection = self.coming.front().map(|coming| Next::Detection(coming.detected_at));
        [Some(Next::Signal(self.planned)), detection, Some(Next::Expiry(self.expires))]
            .into_iter()
            .flatten()
            .min_by_key(rank)
            .unwrap()
    }

    fn step(&mut self) {
        match self.next() {
            Next::Signal(at) => {
                self.now = at;
                self.show(at);
                self.plan();
            }
            Next::Detection(at) => {
                self.now = at;
                let coming = self.coming.pop_front().unwrap();
                let blanked = coming.blanked || at < self.blanked_to;
                let clearly = self.program.settings().refractory.as_micros() - self.settings.refractory.low.as_micros();
                let inside = at < self.refractory_to && at + 1 < self.anchor + clearly;
                let acts = if blanked {
                    false
                } else if inside && coming.loud {
                    self.slips(at, |slip| slip == Slip::RestartsInRefractory).is_some()
                } else {
                    at >= self.refractory_to && self.slips(at, |slip| slip == Slip::IgnoresSense).is_none()
                };
                if acts {
                    self.carried = 0;
                    self.restart(at, After::Sense);
                    if self.dice.one_in(2) {
                        self.plan();
                    }
                }
            }
            Next::Expiry(at) => {
                self.now = at;
                match self.slips(at, |slip| matches!(slip, Slip::Missing | Slip::Twice(_))) {
                    Some(Slip::Missing) => {}
                    Some(Slip::Twice(later)) => self.seen.extend([(at + later, Seen::Pulse), (at, Seen::Pulse)]),
                    _ => self.seen.push((at, Seen::Pulse)),
                }
                self.restart(at, After::Pulse);
                if self.dice.one_in(2) {
                    self.plan();
                }
            }
        }
    }

    fn show(&mut self, at: u64) {
        let set = *self.program.settings();
        let level = |thousandths: u64| u64::from(set.sensitivity.0) * thousandths / 1_000;
        let (lo, hi) = (level(800), u64::from(set.sensitivity.0 * 1_200).div_ceil(1_000));
        let peak = match (self.kind, self.dice.below(8)) {
            (_, 0) => 1 + self.dice.below(lo),
            (_, 1) => lo,
            (_, 2) => hi,
            (Kind::Wild, 3) => self.dice.between(lo, hi),
            _ => 4 * hi,
        };
        let width = self.dice.pick(&[10_000, 40_000, 120_000]);
        let channel = if self.dice.one_in(12) { self.dice.pick(&[A, V]) } else { self.channel() };
        let record = Seen::Signal { channel, peak: u32::try_from(peak).unwrap(), width };
        self.seen.push((at, record));
        if self.program.senses() != Some(channel) {
            return;
        }
        // Somewhere in the band the device sees: never at its low end, always at its high end.
        let threshold = self.dice.between(lo + 1, hi);
        if peak < threshold {
            return;
        }
        let (least, greatest) = (self.settings.detect.0.as_micros(), self.settings.detect.1.as_micros());
        let detected_at = at + self.dice.between(least, greatest);
        let began_blanked = at < self.blanked_to && at >= self.anchor;
        let outlasts = set.straddle == Straddle::End && at + width > self.blanked_to;
        let coming = if began_blanked && outlasts {
            Coming { detected_at: detected_at.max(self.blanked_to), blanked: false, loud: peak >= hi }
        } else {
            Coming { detected_at, blanked: began_blanked, loud: peak >= hi }
        };
        // Detections keep the order of the onsets.
        let after = self.coming.back().map_or(0, |before| before.detected_at);
        self.coming.push_back(Coming { detected_at: coming.detected_at.max(after), ..coming });
    }

    /// Stamps everything as a bench would: each instant off by at most half the uncertainty of an interval.
    fn finish(mut self) -> Script {
        let uncertainty = self.settings.uncertainty.as_micros();
        let channel = self.channel();
        let mut records: Vec<Record> = Vec::new();
        for (at, seen) in core::mem::take(&mut self.seen) {
            let at = if uncertainty == 0 { at } else { at + self.dice.between(0, uncertainty) - uncertainty / 2 };
            records.push(match seen {
                Seen::Pulse => pulse_us(channel, at),
                Seen::Signal { channel, peak, width } => signal_us(channel, at, peak, width),
            });
        }
        records.sort_by_key(|record| (record.at, record.kind));
        let joins_at = if self.dice.one_in(3) {
            let after = self.dice.below(records.len() as u64 / 2);
            Some(records[usize::try_from(after).unwrap()].at)
        } else {
            None
        };
        Script {
            program: self.program,
            settings: self.settings,
            records,
            start: Instant::from_micros(self.start),
            joins_at,
            slipped_at: self.slipped_at.map(Instant::from_micros),
        }
    }
}
