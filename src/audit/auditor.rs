//! The auditor: what the bench sees goes in, judgements come out.

use super::clock::{Clock, FOREVER, Micros, short};
use super::envelope::Envelope;
use super::history::{Event, History, Origin};
use super::hypothesis::Hypotheses;
use super::late::Overdue;
use super::naming;
use super::scores::Scores;
use super::sense::Shown;
use super::windows::Windows;
use super::{AuditSettings, Judgement, Outcome, RuleId, RuleSet, Score};
use crate::base::{Channel, Instant, Kind, ParamError, Program, Record, Signal};
use heapless::Deque;

/// Signals that wait until their order against pulses is settled. Without uncertainty and detection delay none waits.
const WAITING_SIGNALS: usize = 16;
/// Pulses that wait for signals which may have preceded them. With an uncertainty below the shortest interval one waits.
const WAITING_PULSES: usize = 4;
/// Judgements that wait to be fetched. A caller that polls after every record never has more than five waiting.
const WAITING_JUDGEMENTS: usize = 6;

/// Judges a device by what a bench sees of it: the signals it is shown and the pulses it emits.
///
/// # Model
/// The auditor keeps every state the device may be in (at most `H`), each with the windows of the program counted from it.
/// A signal that may or may not have been sensed makes two of one; a pulse leaves one, exact to the tick; silence past a window
/// removes one. The device fails only if no state is left that explains its pulses. What cannot be told is counted as undecided, with
/// a hint, and is never a failure.
///
/// It never looks at causes, at capture, or at anything inside heart or device.
///
/// # Order
/// [`observe`](Self::observe) takes records in the order of their instants. Within an instant signals come before pulses.
///
/// # Time
/// A late [`poll`](Self::poll) changes nothing but the moment a judgement is fetched; an earlier `now` counts as the latest seen.
/// A judgement may come after its own instant: a missing pulse is known only when its window has passed.
///
/// # Bounds
/// Judgements wait in a queue of six until they are fetched; a caller that does not poll after each record may lose some
/// ([`lost`](Self::lost)), never their scores.
#[derive(Debug, Clone)]
pub struct Auditor<const H: usize> {
    pub(super) windows: Windows,
    /// The same with every rule in force: names are found with these.
    pub(super) whole: Windows,
    pub(super) paces: Option<Channel>,
    pub(super) senses: Option<Channel>,
    pub(super) clock: Clock,
    pub(super) states: Hypotheses<H>,
    pub(super) signals: Deque<Waiting, WAITING_SIGNALS>,
    pub(super) pulses: Deque<Micros, WAITING_PULSES>,
    pub(super) history: History,
    pub(super) overdue: Option<Overdue>,
    /// The limit of a pause that has become too long, while no pulse is overdue.
    pub(super) pause: Option<Instant>,
    pub(super) envelope: Envelope,
    pub(super) scores: Scores,
    /// What the next pulse in its window proves: signals in refractory and below the limit since the last anchor.
    pub(super) owed: RuleSet,
    /// The last pulse was one that no state allowed.
    pub(super) after_finding: bool,
    judgements: Deque<Judgement, WAITING_JUDGEMENTS>,
    pub(super) counts: Counts,
    now: Instant,
    wake: Option<Micros>,
    ended: bool,
}

/// Plain counters.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Counts {
    pub(super) decided: u64,
    pub(super) undecided: u64,
    pub(super) loosened: u32,
    broken: u32,
    lost: u32,
}

/// A signal that waits to be settled.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Waiting {
    pub(super) signal: Shown,
    /// A pulse came so close that either may have been first.
    pub(super) tied: bool,
}

impl<const H: usize> Auditor<H> {
    /// An auditor of a device that is started at `start`: its timers run from there as from a pulse.
    ///
    /// # Errors
    /// What [`AuditSettings::check`] refuses.
    pub fn new(program: &Program, settings: &AuditSettings, start: Instant) -> Result<Self, ParamError> {
        let start_offset = Clock::new(start).offset(start);
        Self::begin(program, settings, start, Origin::Start(start_offset))
    }

    /// An auditor of a device that was running already: its state at `start` is not known, and costs about one pulse.
    ///
    /// # Errors
    /// What [`AuditSettings::check`] refuses.
    pub fn joining(program: &Program, settings: &AuditSettings, start: Instant) -> Result<Self, ParamError> {
        let start_offset = Clock::new(start).offset(start);
        Self::begin(program, settings, start, Origin::Unknown(start_offset))
    }

    fn begin(program: &Program, settings: &AuditSettings, start: Instant, origin: Origin) -> Result<Self, ParamError> {
        settings.check(program)?;
        let windows = Windows::new(program, settings);
        let clock = Clock::new(start);
        let mut auditor = Self {
            windows,
            whole: windows,
            paces: program.paces(),
            senses: program.senses(),
            clock,
            states: Hypotheses::new(),
            signals: Deque::new(),
            pulses: Deque::new(),
            history: History::new(origin),
            overdue: None,
            pause: None,
            envelope: Envelope::new(program, settings, &windows, clock.offset(start), matches!(origin, Origin::Unknown(_))),
            scores: Scores::default(),
            owed: RuleSet::EMPTY,
            after_finding: false,
            judgements: Deque::new(),
            counts: Counts::default(),
            now: start,
            wake: None,
            ended: false,
        };
        if auditor.paces.is_some() {
            naming::begin(&mut auditor.states, &windows, origin);
        }
        auditor.wake = auditor.next_step();
        Ok(auditor)
    }

    /// Drops these rules whole: they forbid nothing and name nothing. To be called before anything is observed.
    pub fn blind(&mut self, rules: RuleSet) {
        self.scores.blind(rules);
        self.windows = self.whole.without(rules);
        self.wake = self.next_step();
    }

    /// Takes a record. Signals, pulses and the end count; all else is not visible at a bench and is ignored.
    pub fn observe(&mut self, record: &Record) {
        // What a channel that is not paced shows bears on no rule of a single-chamber mode.
        let elsewhere = record.kind == Kind::Signal && self.paces.is_none_or(|channel| channel.number() != record.place);
        if self.ended || elsewhere || !record.kind.is_bench_visible() {
            return;
        }
        let now = self.advance(record.at);
        if let Some((channel, signal)) = record.as_signal() {
            self.take_signal(channel, signal, now);
        } else if let Some(pulse) = record.as_pulse() {
            self.take_pulse(pulse.channel, now);
        } else if record.kind == Kind::End {
            if record.a == SPINNING {
                self.spinning(record.at);
            }
            self.finish(record.at);
        }
        if !self.ended {
            self.wake = self.next_step();
            self.settle(now);
        }
    }

    /// The next judgement settled at or before `now`, if there is one.
    #[inline]
    pub fn poll(&mut self, now: Instant) -> Option<Judgement> {
        self.now = self.now.max(now);
        if self.judgements.is_empty() && self.is_idle() { None } else { self.fetch() }
    }

    fn fetch(&mut self) -> Option<Judgement> {
        if self.judgements.is_empty() {
            self.advance(self.now);
        }
        self.judgements.pop_front()
    }

    /// When a judgement waits to be fetched or something will be settled; `None` if nothing is awaited.
    pub fn next_at(&self) -> Option<Instant> {
        if self.judgements.is_empty() { self.wake.map(|at| self.clock.instant(at)) } else { Some(self.now) }
    }

    /// Ends the run: what waits is settled, and an open finding is closed. Poll until `None` afterwards.
    pub fn finish(&mut self, at: Instant) {
        if self.ended {
            return;
        }
        let now = self.advance(at);
        while let Some(pulse) = self.pulses.pop_front() {
            self.judge_pulse(pulse);
        }
        self.close_at_end(now);
        self.close_pause();
        if self.scores.of(RuleId::En6).broken == 0 {
            self.scores.held(RuleId::En6, None);
        }
        self.ended = true;
        self.wake = None;
    }

    /// The bench reports that the device emits pulses, or asks to be polled, without time passing.
    pub fn spinning(&mut self, at: Instant) {
        if self.ended || self.scores.is_blind(RuleId::En6) || self.scores.of(RuleId::En6).broken > 0 {
            return;
        }
        let now = self.advance(at);
        self.report_spinning(now);
    }

    /// A rule's score so far.
    pub fn score(&self, rule: RuleId) -> Score {
        self.scores.of(rule)
    }

    /// Findings so far: one for each fault, though it may break several rules.
    pub const fn broken(&self) -> u32 {
        self.counts.broken
    }

    /// Windows and signals about which everything could be told.
    pub const fn decided(&self) -> u64 {
        self.counts.decided
    }

    /// Windows and signals about which not everything could be told.
    pub const fn undecided(&self) -> u64 {
        self.counts.undecided
    }

    /// How often two hypotheses had to be covered by a wider one to stay within the cap.
    pub const fn loosened(&self) -> u32 {
        self.counts.loosened
    }

    /// Judgements that nobody fetched in time; their scores were kept.
    pub const fn lost(&self) -> u32 {
        self.counts.lost
    }

    /// The latest instant of the pulse that is overdue now, while that finding is open.
    pub fn overdue_since(&self) -> Option<Instant> {
        self.overdue.as_ref().map(|overdue| overdue.window.latest)
    }

    fn take_signal(&mut self, channel: Channel, signal: Signal, now: Micros) {
        if self.paces == Some(channel) {
            if self.whole.may_see(signal.peak.0) {
                self.close_pause();
            }
            self.envelope.signal(now, signal.peak.0, &self.whole, &mut self.scores);
        }
        if self.senses != Some(channel) || self.paces != Some(channel) {
            return;
        }
        let signal = Shown { at: now, peak: signal.peak.0, width: short(signal.width) };
        self.history.push(Event::Signal(signal));
        let waiting = Waiting { signal, tied: false };
        if self.signals.is_empty() && self.windows.settles(now) <= now {
            self.settle_signal(waiting, now, false);
            return;
        }
        if self.signals.is_full() {
            // Settled before its time: it may have come after a pulse not yet looked at.
            self.settle_first(now, true);
        }
        let _ = self.signals.push_back(waiting);
    }

    fn take_pulse(&mut self, channel: Channel, now: Micros) {
        if self.paces != Some(channel) {
            self.judge_stray(channel, now);
            return;
        }
        if self.windows.uncertainty == 0 {
            self.judge_pulse(now);
            return;
        }
        if self.pulses.is_full()
            && let Some(first) = self.pulses.pop_front()
        {
            self.judge_pulse(first);
        }
        let _ = self.pulses.push_back(now);
    }

    /// Moves on to this instant, or stays at the latest one seen, and settles all that is due by then.
    ///
    /// Whatever may be due lies within the reach of an offset, so that a gap of any length takes a bounded number of steps.
    fn advance(&mut self, now: Instant) -> Micros {
        self.now = self.now.max(now);
        self.settle(self.clock.offset(self.now));
        if let Some(by) = self.clock.follow(self.now) {
            self.shift(by);
        }
        self.clock.offset(self.now)
    }

    fn shift(&mut self, by: Micros) {
        self.states.shift(by);
        self.history.shift(by);
        self.envelope.shift(by);
        for waiting in &mut self.signals {
            waiting.signal.at = waiting.signal.at.saturating_sub(by);
        }
        for pulse in &mut self.pulses {
            *pulse = pulse.saturating_sub(by);
        }
        self.wake = self.next_step();
    }

    #[inline]
    fn is_idle(&self) -> bool {
        self.ended || self.wake.is_none_or(|at| self.clock.offset(self.now) < at)
    }

    /// Does all that is due at or before `now`.
    fn settle(&mut self, now: Micros) {
        while let Some(at) = self.wake.filter(|at| *at <= now && !self.ended) {
            self.step(at);
            self.wake = self.next_step();
        }
    }

    /// The moment of the next thing to be settled.
    fn next_step(&self) -> Option<Micros> {
        let earlier = |least: Micros, due: Option<Micros>| due.map_or(least, |at| at.min(least));
        let least = earlier(earlier(FOREVER, self.signal_due()), self.pulse_due());
        let least = earlier(earlier(least, self.silence_due()), self.pause_due());
        (least < FOREVER).then_some(least)
    }

    fn signal_due(&self) -> Option<Micros> {
        self.signals.front().map(|waiting| self.windows.settles(waiting.signal.at))
    }

    fn pulse_due(&self) -> Option<Micros> {
        self.pulses.front().map(|at| at.saturating_add(self.windows.uncertainty))
    }

    /// When no state is left unless a pulse comes. A signal may still have come before the latest expiry: `uncertainty` later.
    fn silence_due(&self) -> Option<Micros> {
        let latest = self.states.iter().map(|state| self.windows.expires(state)).max()?;
        if latest == FOREVER {
            return None;
        }
        Some(latest.saturating_add(self.windows.uncertainty).saturating_add(1))
    }

    fn pause_due(&self) -> Option<Micros> {
        if self.paces.is_none() || self.scores.is_blind(RuleId::En2) {
            return None;
        }
        self.envelope.pause_ends().map(|end| end.saturating_add(self.windows.uncertainty))
    }

    /// Does the one thing due now: at the same moment silence first, which settles the signals that bear on it, then
    /// signals, then pulses. A pulse at the moment of silence is the first that comes too late.
    fn step(&mut self, at: Micros) {
        if self.silence_due() == Some(at) {
            self.judge_silence(at);
        } else if self.signal_due() == Some(at) {
            self.settle_first(at, false);
        } else if self.pulse_due() == Some(at) {
            if let Some(pulse) = self.pulses.pop_front() {
                self.judge_pulse(pulse);
            }
        } else {
            self.judge_pause();
        }
    }

    /// Hands out a judgement.
    pub(super) fn say(&mut self, judgement: Judgement) {
        if judgement.outcome == Outcome::Broken {
            self.counts.broken = self.counts.broken.saturating_add(1);
        }
        if self.judgements.push_back(judgement).is_err() {
            self.counts.lost = self.counts.lost.saturating_add(1);
        }
    }
}

/// The end record's reason for a device that does not let time pass.
const SPINNING: u32 = 3;
