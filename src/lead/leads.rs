//! The leads: what the device is shown of the heart, and where its pulses arrive.

use super::{ChannelParams, LeadChange, LeadParams, NearField};
use crate::base::{Cause, Channel, Instant, Kind, MicroVolts, NotYet, ParamError, Record, Signal, SiteId, Span, word};

/// The leads between heart and device: activations in, signals out.
///
/// # Time
/// Pulled like every machine here: [`poll`](Self::poll) yields one signal at a time, stamped with its own onset; a late poll
/// changes nothing else. After `None`, [`next_at`](Self::next_at) is `None` or later than `now`. Within an instant
/// everything that comes in comes before the poll.
///
/// # Order
/// Signals with the same onset come out in a fixed order: those of the script before those of the heart, atrial before ventricular.
#[derive(Debug, Clone)]
pub struct Lead {
    /// Atrial, ventricular.
    channels: [Option<ChannelParams>; 2],
    /// Sites at which one of them senses, a bit each; a site from 32 on shares one.
    sensed: u32,
    /// When the next signal comes: the least of `due`.
    next: Instant,
    /// When the signal in each slot comes, in the order in which equal onsets come out.
    due: [Instant; 4],
    slots: [Record; 4],
    overtaken: u32,
}

/// What a slot waits for that is empty.
const NEVER: Instant = Instant::MAX;

/// A signal on its way has a slot for each of the two channels and the two sources.
#[derive(Debug, Clone, Copy)]
enum Source {
    Script,
    Heart,
}

const fn slot(channel: Channel, source: Source) -> usize {
    match (source, channel) {
        (Source::Script, Channel::Atrial) => 0,
        (Source::Script, Channel::Ventricular) => 1,
        (Source::Heart, Channel::Atrial) => 2,
        (Source::Heart, Channel::Ventricular) => 3,
    }
}

impl Lead {
    /// Leads with these parameters, nothing on its way.
    ///
    /// # Errors
    /// Names the first parameter out of range; its row is the channel: 0 atrial, 1 ventricular.
    pub const fn new(params: &LeadParams) -> Result<Self, ParamError> {
        if let Err(refused) = check(Channel::Atrial, &params.atrial) {
            return Err(refused);
        }
        if let Err(refused) = check(Channel::Ventricular, &params.ventricular) {
            return Err(refused);
        }
        let empty = Record::new(NEVER, Kind::Signal, 0, Cause::NONE);
        let channels = [params.atrial, params.ventricular];
        let sensed = bit_of(&params.atrial) | bit_of(&params.ventricular);
        Ok(Self { channels, sensed, next: NEVER, due: [NEVER; 4], slots: [empty; 4], overtaken: 0 })
    }

    /// Takes note of an activation ([`Kind::Activated`]); any other record is ignored. Each channel that senses at its site
    /// will show its near field `delay` later, with the activation's cause.
    #[inline]
    pub fn activated(&mut self, record: &Record) {
        if record.kind == Kind::Activated && self.sensed & bit(record.place) != 0 {
            self.sense(record);
        }
    }

    fn sense(&mut self, record: &Record) {
        let site = SiteId::new(record.place);
        for channel in Channel::ALL {
            let Some(ChannelParams { sense, near: NearField { peak, delay, width }, .. }) = *self.params(channel) else {
                continue;
            };
            if sense == site {
                let onset = record.at.saturating_add(delay);
                let shown = Record::signal(onset, channel, Signal { peak, width }, record.cause);
                if self.put(slot(channel, Source::Heart), shown) {
                    self.overtaken = self.overtaken.saturating_add(1);
                }
            }
        }
    }

    /// Shows a channel a signal that has no activation behind it, with its onset `at`. It needs no lead parameters: the bench
    /// puts it on the device's own terminals.
    ///
    /// # Errors
    /// [`NotYet`] if an earlier signal of the script has not been fetched from this channel: poll up to its onset first, then
    /// offer this one again. Nothing has changed then.
    pub fn show(&mut self, channel: Channel, signal: Signal, at: Instant, cause: Cause) -> Result<(), NotYet> {
        let slot = slot(channel, Source::Script);
        if let Some(&waiting) = self.due.get(slot).filter(|&&due| due != NEVER) {
            return Err(NotYet(waiting));
        }
        self.put(slot, Record::signal(at, channel, signal, cause));
        Ok(())
    }

    /// Changes what a channel makes of the activations to come; what is on its way stays as it was. A channel that is not
    /// connected has nothing to change. Values beyond the ranges of [`NearField`] are cut to them.
    pub fn change(&mut self, channel: Channel, change: LeadChange) {
        let [atrial, ventricular] = &mut self.channels;
        let params = match channel {
            Channel::Atrial => atrial,
            Channel::Ventricular => ventricular,
        };
        let Some(ChannelParams { near, .. }) = params else { return };
        let within = |span: Span, longest: Span| span.max(NearField::SHORTEST).min(longest);
        match change {
            LeadChange::Peak(peak) => near.peak = MicroVolts(peak.0.min(NearField::HIGHEST_PEAK.0)),
            LeadChange::Delay(delay) => near.delay = within(delay, NearField::LONGEST_DELAY),
            LeadChange::Width(width) => near.width = within(width, NearField::LONGEST_WIDTH),
        }
    }

    /// The site that this channel's pulses reach, `None` if it is not connected.
    pub const fn pace_site(&self, channel: Channel) -> Option<SiteId> {
        match self.params(channel) {
            Some(params) => Some(params.pace),
            None => None,
        }
    }

    const fn params(&self, channel: Channel) -> &Option<ChannelParams> {
        let [atrial, ventricular] = &self.channels;
        match channel {
            Channel::Atrial => atrial,
            Channel::Ventricular => ventricular,
        }
    }

    /// How many activations were never shown because the next one at their site came within the delay. Stays 0 as long as the
    /// delay is shorter than the site's absolute refractory period.
    pub const fn overtaken(&self) -> u32 {
        self.overtaken
    }

    /// The onset of the next signal, `None` if none is on its way.
    #[inline]
    pub fn next_at(&self) -> Option<Instant> {
        if self.next == NEVER { None } else { Some(self.next) }
    }

    /// The next signal with its onset at or before `now`; `None` when there is no more.
    #[inline]
    pub fn poll(&mut self, now: Instant) -> Option<Record> {
        if self.next > now || self.next == NEVER { None } else { self.take() }
    }

    /// Takes out the signal that comes next.
    fn take(&mut self) -> Option<Record> {
        let mut slots = self.due.iter_mut().zip(&self.slots);
        let record = slots.find(|(due, _)| **due == self.next).map(|(due, record)| {
            *due = NEVER;
            *record
        });
        self.next = self.due.iter().fold(NEVER, |least, &due| least.min(due));
        record
    }

    /// Puts a signal into a slot; true if one that was still in it is lost.
    fn put(&mut self, slot: usize, record: Record) -> bool {
        let (Some(due), Some(place)) = (self.due.get_mut(slot), self.slots.get_mut(slot)) else { return false };
        let overtakes = *due != NEVER;
        *due = record.at;
        *place = record;
        self.next = if overtakes { self.due.iter().fold(NEVER, |least, &due| least.min(due)) } else { self.next.min(record.at) };
        overtakes
    }
}

const fn bit(site: u8) -> u32 {
    1_u32.wrapping_shl(word(site))
}

const fn bit_of(params: &Option<ChannelParams>) -> u32 {
    match params {
        Some(params) => bit(params.sense.row()),
        None => 0,
    }
}

const fn check(channel: Channel, params: &Option<ChannelParams>) -> Result<(), ParamError> {
    if let Some(ChannelParams { near, .. }) = params
        && let Err(refused) = near.check()
    {
        return Err(refused.in_row(channel.number()));
    }
    Ok(())
}
