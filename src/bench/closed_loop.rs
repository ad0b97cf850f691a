//! The closed loop itself: a machine that is polled like every other and yields one entry at a time.

use super::{Act, Cued, Log, Script, Sink, Step};
use crate::audit::{AuditSettings, Auditor, Judgement, RuleSet};
use crate::base::{Cause, CauseKind, Instant, Kind, NotYet, ParamError, Program, Pulse, Record, Span};
use crate::device::Device;
use crate::heart::{Anatomy, FocusParams, Heart, PulseAnswer};
use crate::lead::{Lead, LeadParams};

/// A device that emits more pulses than this in one instant spins: the run ends there.
pub const MOST_PULSES_AT_ONCE: u32 = 8;

/// Everything a run is made of, but for the device itself.
#[derive(Debug, Clone, Copy)]
pub struct Setup<'a, const S: usize, const T: usize, const C: usize, const F: usize> {
    /// The heart's sites, tracts and cells.
    pub anatomy: &'a Anatomy<S, T, C>,
    /// What beats besides the cells.
    pub foci: &'a [FocusParams<'a>; F],
    /// What the channels see.
    pub lead: LeadParams,
    /// What the device was programmed to, and what the auditor is told; `None` where there is no device.
    pub judged: Option<(Program, AuditSettings)>,
    /// The script.
    pub steps: &'a [Step],
    /// Where the time line begins.
    pub start: Instant,
    /// How long the run lasts; an event exactly at its end no longer belongs to it.
    pub length: Span,
    /// Seed of all chance.
    pub seed: u64,
}

/// One entry of a run.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Entry {
    /// Something happened.
    Record(Record),
    /// The auditor judged a window.
    Judged(Judgement),
}

/// Why a run ended. The numbers are those of [`Kind::End`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[repr(u8)]
pub enum EndReason {
    /// Its length is reached.
    Length = 0,
    /// A step ended it.
    Script = 1,
    /// The caller stopped it.
    Interrupted = 2,
    /// The device emits pulses or asks to be polled without time passing.
    Spinning = 3,
}

impl EndReason {
    #[allow(clippy::as_conversions, reason = "reads the discriminant of a field-less enum")]
    const fn number(self) -> u32 {
        self as u32
    }
}

/// Heart, lead, device and auditor in a closed loop.
///
/// # Order
/// Within an instant: the script's steps; the heart; signals to the device; the device's pulses; those pulses into the heart; the
/// auditor.
///
/// # Time
/// The loop steps from event to event; between two events nothing happens, so that nothing depends on how it is polled.
#[derive(Debug)]
pub struct Bench<'a, D, const S: usize, const T: usize, const C: usize, const F: usize, const N: usize, const H: usize> {
    heart: Heart<'a, S, T, C, F>,
    lead: Lead,
    device: Option<D>,
    auditor: Option<Auditor<H>>,
    script: Script<'a, N>,
    log: Log,
    seed: u64,
    now: Instant,
    end_at: Instant,
    phase: Phase,
    /// The pulse on its way into the heart.
    pulse: Option<Pulse>,
    pulses_now: u32,
    /// A signal of the script waits to be shown before its next step acts.
    shows: bool,
    ended: Option<EndReason>,
}

/// Where in an instant the loop is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Phase {
    Start,
    Script,
    Heart,
    Lead,
    Device,
    Judge,
    Advance,
    End,
    Settle,
    Over,
}

impl<'a, D: Device, const S: usize, const T: usize, const C: usize, const F: usize, const N: usize, const H: usize>
    Bench<'a, D, S, T, C, F, N, H>
{
    /// A bench at the start of its run. The device must have been started at the same instant.
    ///
    /// # Errors
    /// Refuses foci, leads, audit settings or steps that do not fit, naming the parameter.
    pub fn new(setup: &Setup<'a, S, T, C, F>, device: Option<D>) -> Result<Self, ParamError> {
        let program = setup.judged.as_ref().map(|(program, _)| program);
        let auditor = match &setup.judged {
            Some((program, settings)) if device.is_some() => Some(Auditor::new(program, settings, setup.start)?),
            _ => None,
        };
        super::check::check_rows(setup.steps, S, T, C)?;
        Ok(Self {
            heart: Heart::new(setup.anatomy, setup.foci, setup.start)?,
            lead: Lead::new(&setup.lead)?,
            device,
            auditor,
            script: Script::new(setup.steps, program, setup.seed, setup.start)?,
            log: Log::new(),
            seed: setup.seed,
            now: setup.start,
            end_at: setup.start.saturating_add(setup.length),
            phase: Phase::Start,
            pulse: None,
            pulses_now: 0,
            shows: false,
            ended: None,
        })
    }

    /// The next entry at or before `until`; `None` when there is no more up to there.
    pub fn poll(&mut self, until: Instant) -> Option<Entry> {
        // Every turn either yields or moves on to a later instant, or to the end.
        loop {
            if let Some(record) = self.instant() {
                return Some(Entry::Record(record));
            }
            match self.phase {
                Phase::Judge => match self.judge() {
                    Some(judgement) => return Some(Entry::Judged(judgement)),
                    None => self.phase = Phase::Advance,
                },
                Phase::Settle => match self.judge() {
                    Some(judgement) => return Some(Entry::Judged(judgement)),
                    None => self.phase = Phase::Over,
                },
                Phase::Start if self.now <= until => return Some(Entry::Record(self.start())),
                Phase::End => return Some(Entry::Record(self.end())),
                Phase::Advance => {
                    if !self.advance(until) {
                        return None;
                    }
                }
                _ => return None,
            }
        }
    }

    /// The next record of this instant, phase by phase in their order.
    #[inline]
    fn instant(&mut self) -> Option<Record> {
        if self.phase == Phase::Script {
            if self.shows || self.script.is_due(self.now) {
                let record = self.run_script();
                if record.is_some() {
                    return record;
                }
            }
            self.phase = Phase::Heart;
        }
        if self.phase == Phase::Heart {
            if let Some(mut record) = self.heart.poll(self.now) {
                self.lead.activated(&record);
                self.write(&mut record);
                return Some(record);
            }
            self.phase = Phase::Lead;
        }
        if self.phase == Phase::Lead {
            if let Some(mut record) = self.lead.poll(self.now) {
                self.show(&mut record);
                return Some(record);
            }
            self.phase = Phase::Device;
        }
        if self.phase == Phase::Device {
            let record = self.run_device();
            if record.is_some() {
                return record;
            }
            if self.phase == Phase::Device {
                self.phase = Phase::Judge;
            }
        }
        None
    }

    /// When the next entry comes, `None` when the run is over.
    pub fn next_at(&self) -> Option<Instant> {
        match self.phase {
            Phase::Over => None,
            Phase::Advance => Some(self.next_event().min(self.end_at).max(self.now)),
            _ => Some(self.now),
        }
    }

    /// Ends the run at the latest instant it has reached; the entries that this causes are still to be polled.
    pub const fn interrupt(&mut self) {
        if self.ended.is_none() {
            self.stop(EndReason::Interrupted);
        }
    }

    /// Runs to `until`, handing every record to `sink`; judgements go to the auditor's scores alone.
    pub fn run(&mut self, until: Instant, sink: &mut impl Sink) {
        while let Some(entry) = self.poll(until) {
            if let Entry::Record(record) = entry {
                sink.take(&record);
            }
        }
    }

    /// The instant the run has reached.
    pub const fn now(&self) -> Instant {
        self.now
    }

    /// Why the run ended, once it has.
    pub const fn ended(&self) -> Option<EndReason> {
        self.ended
    }

    /// The log: number of records and their hash.
    pub const fn log(&self) -> &Log {
        &self.log
    }

    /// The auditor, where there is a device to judge.
    pub const fn auditor(&self) -> Option<&Auditor<H>> {
        self.auditor.as_ref()
    }

    /// Blinds the auditor to these rules, for tests of whether a run would notice.
    pub fn blind(&mut self, rules: RuleSet) {
        if let Some(auditor) = &mut self.auditor {
            auditor.blind(rules);
        }
    }

    /// Enters what the device and the auditor cannot see.
    #[inline]
    fn write(&mut self, record: &mut Record) {
        self.log.number(record);
        self.script.notice(record);
    }

    fn enter(&mut self, record: &mut Record) {
        self.write(record);
        if record.kind.is_bench_visible()
            && let Some(auditor) = &mut self.auditor
        {
            auditor.observe(record);
        }
    }

    fn entered(&mut self, mut record: Record) -> Record {
        self.enter(&mut record);
        record
    }

    fn start(&mut self) -> Record {
        self.phase = Phase::Script;
        let (low, high) = (self.seed & u64::from(u32::MAX), self.seed >> 32);
        let half = |part: u64| u32::try_from(part).unwrap_or(0);
        self.entered(Record::new(self.now, Kind::Start, 0, Cause::NONE).with_details(half(low), half(high)))
    }

    fn run_script(&mut self) -> Option<Record> {
        // Several steps may show a signal in one instant: each goes out at once, before the next step.
        if core::mem::take(&mut self.shows)
            && let Some(mut record) = self.lead.poll(self.now)
        {
            self.show(&mut record);
            return Some(record);
        }
        let cued = self.script.poll(self.now)?;
        // Nothing in the heart is due before now, so it takes every input.
        let taken = self.act(cued);
        debug_assert!(taken.is_ok());
        let value = u32::try_from(cued.value.rem_euclid(1 << 32)).unwrap_or(0);
        let cause = Cause::new(CauseKind::Script, cued.step);
        Some(self.entered(Record::new(self.now, Kind::Step, cued.step, cause).with_details(cued.turn, value)))
    }

    fn act(&mut self, cued: Cued) -> Result<(), NotYet> {
        let now = self.now;
        let cause = Cause::new(CauseKind::Script, cued.step);
        match cued.act {
            Act::Beat(site) => self.heart.beat(site, now, cause),
            Act::Arrest(cell) => self.heart.arrest(cell, now),
            Act::Release(cell) => self.heart.release(cell, now),
            Act::Quiet => self.heart.quiet(now),
            Act::Shut(tract, ways) => self.heart.shut(tract, ways, now),
            Act::Open(tract, ways) => self.heart.open(tract, ways, now),
            Act::Signal(channel, signal) => {
                self.shows = true;
                self.lead.show(channel, signal, now, cause)
            }
            Act::Lead(channel, change) => {
                self.lead.change(channel, change);
                Ok(())
            }
            Act::End => {
                self.end_at = now;
                self.ended = Some(EndReason::Script);
                Ok(())
            }
        }
    }

    /// Shows the device a signal.
    fn show(&mut self, record: &mut Record) {
        if let (Some(device), Some((channel, signal))) = (&mut self.device, record.as_signal())
            && device.signal(channel, signal, self.now).is_err()
        {
            // It claims that something was due before, though its `next_at` was obeyed.
            self.stop(EndReason::Spinning);
        }
        self.enter(record)
    }

    #[inline]
    fn run_device(&mut self) -> Option<Record> {
        if let Some(pulse) = self.pulse.take()
            && let Some(answer) = self.deliver(pulse)
        {
            return Some(self.entered(answer));
        }
        let (_, pulse) = self.device.as_mut()?.poll(self.now)?;
        self.pulses_now = self.pulses_now.saturating_add(1);
        if self.pulses_now > MOST_PULSES_AT_ONCE {
            self.stop(EndReason::Spinning);
            return None;
        }
        self.pulse = Some(pulse);
        // The bench's own stamp: what a device says of its instant is not evidence.
        Some(self.entered(Record::pulse(self.now, pulse)))
    }

    /// Brings a pulse to the tissue under its electrode; the record is that of a pulse without an answer.
    fn deliver(&mut self, pulse: Pulse) -> Option<Record> {
        let site = self.lead.pace_site(pulse.channel)?;
        match self.heart.pulse(site, pulse, self.now) {
            Ok(PulseAnswer::Unanswered(record)) => Some(record),
            Ok(PulseAnswer::Captured { .. }) | Err(NotYet(_)) => None,
        }
    }

    #[inline]
    fn judge(&mut self) -> Option<Judgement> {
        self.auditor.as_mut()?.poll(self.now)
    }

    /// The next event, at the end of the time line if there is none.
    #[inline]
    fn next_event(&self) -> Instant {
        let due = |next: Option<Instant>| next.unwrap_or(Instant::MAX);
        let device = due(self.device.as_ref().and_then(Device::next_at));
        due(self.heart.next_at()).min(due(self.lead.next_at())).min(due(self.script.next_at())).min(device)
    }

    /// Moves on to the next instant at or before `until`; false if there is none.
    fn advance(&mut self, until: Instant) -> bool {
        let next = self.next_event().min(self.end_at);
        if next >= self.end_at || self.ended.is_some() {
            if self.end_at > until {
                return false;
            }
            self.now = self.now.max(self.end_at);
            self.phase = Phase::End;
            return true;
        }
        if next <= self.now {
            self.stop(EndReason::Spinning);
            return true;
        }
        if next > until {
            return false;
        }
        self.now = next;
        self.pulses_now = 0;
        self.phase = Phase::Script;
        true
    }

    const fn stop(&mut self, reason: EndReason) {
        self.ended = Some(reason);
        self.end_at = self.now;
        self.pulse = None;
        self.phase = Phase::End;
    }

    fn end(&mut self) -> Record {
        self.phase = Phase::Settle;
        let reason = *self.ended.get_or_insert(EndReason::Length);
        // The auditor learns from this record, as from one in a log, that the run is over, and whether the device spun.
        self.entered(Record::new(self.now, Kind::End, 0, Cause::NONE).with_details(reason.number(), 0))
    }
}
