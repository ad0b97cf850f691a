//! The leads: what the device is shown of the heart, and where its pulses arrive.

use super::{ChannelParams, LeadChange, LeadParams, NearField};
use crate::base::{Cause, Channel, Instant, Kind, MicroVolts, NotYet, ParamError, Record, Signal, SiteId, Span};

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
    channels: [Line; 2],
    overtaken: u32,
}

/// One channel: its parameters, and a slot for each of its two sources.
#[derive(Debug, Clone, Copy)]
struct Line {
    channel: Channel,
    params: Option<ChannelParams>,
    from_script: Option<Record>,
    from_heart: Option<Record>,
}

impl Lead {
    /// Leads with these parameters, nothing on its way.
    ///
    /// # Errors
    /// Names the first parameter out of range; its row is the channel: 0 atrial, 1 ventricular.
    pub const fn new(params: &LeadParams) -> Result<Self, ParamError> {
        let atrial = match Line::new(Channel::Atrial, params.atrial) {
            Ok(line) => line,
            Err(refused) => return Err(refused),
        };
        let ventricular = match Line::new(Channel::Ventricular, params.ventricular) {
            Ok(line) => line,
            Err(refused) => return Err(refused),
        };
        Ok(Self { channels: [atrial, ventricular], overtaken: 0 })
    }

    /// Takes note of an activation ([`Kind::Activated`]); any other record is ignored. Each channel that senses at its site
    /// will show its near field `delay` later, with the activation's cause.
    pub fn activated(&mut self, record: &Record) {
        if record.kind != Kind::Activated {
            return;
        }
        let site = SiteId::new(record.place);
        for line in &mut self.channels {
            let Some(ChannelParams { sense, near, .. }) = line.params else { continue };
            if sense == site {
                let NearField { peak, delay, width } = near;
                let onset = record.at.saturating_add(delay);
                let shown = Record::signal(onset, line.channel, Signal { peak, width }, record.cause);
                if line.from_heart.replace(shown).is_some() {
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
    pub const fn show(&mut self, channel: Channel, signal: Signal, at: Instant, cause: Cause) -> Result<(), NotYet> {
        let line = self.line_mut(channel);
        if let Some(waiting) = line.from_script {
            return Err(NotYet(waiting.at));
        }
        line.from_script = Some(Record::signal(at, channel, signal, cause));
        Ok(())
    }

    /// Changes what a channel makes of the activations to come; what is on its way stays as it was. A channel that is not
    /// connected has nothing to change. Values beyond the ranges of [`NearField`] are cut to them.
    pub fn change(&mut self, channel: Channel, change: LeadChange) {
        let Some(ChannelParams { near, .. }) = &mut self.line_mut(channel).params else { return };
        let within = |span: Span, longest: Span| span.max(NearField::SHORTEST).min(longest);
        match change {
            LeadChange::Peak(peak) => near.peak = MicroVolts(peak.0.min(NearField::HIGHEST_PEAK.0)),
            LeadChange::Delay(delay) => near.delay = within(delay, NearField::LONGEST_DELAY),
            LeadChange::Width(width) => near.width = within(width, NearField::LONGEST_WIDTH),
        }
    }

    /// The site that this channel's pulses reach, `None` if it is not connected.
    pub const fn pace_site(&self, channel: Channel) -> Option<SiteId> {
        match self.line(channel).params {
            Some(params) => Some(params.pace),
            None => None,
        }
    }

    /// How many activations were never shown because the next one at their site came within the delay. Stays 0 as long as the
    /// delay is shorter than the site's absolute refractory period.
    pub const fn overtaken(&self) -> u32 {
        self.overtaken
    }

    /// The onset of the next signal, `None` if none is on its way.
    pub fn next_at(&self) -> Option<Instant> {
        self.slots().flatten().map(|record| record.at).min()
    }

    /// The next signal with its onset at or before `now`; `None` when there is no more.
    pub fn poll(&mut self, now: Instant) -> Option<Record> {
        let due = self.next_at().filter(|at| *at <= now)?;
        self.slots_mut().find(|slot| slot.is_some_and(|record| record.at == due))?.take()
    }

    /// Every slot, in the order in which equal onsets come out.
    fn slots(&self) -> impl Iterator<Item = &Option<Record>> {
        let script = self.channels.iter().map(|line| &line.from_script);
        script.chain(self.channels.iter().map(|line| &line.from_heart))
    }

    fn slots_mut(&mut self) -> impl Iterator<Item = &mut Option<Record>> {
        let [atrial, ventricular] = &mut self.channels;
        let script = [&mut atrial.from_script, &mut ventricular.from_script];
        script.into_iter().chain([&mut atrial.from_heart, &mut ventricular.from_heart])
    }

    const fn line(&self, channel: Channel) -> &Line {
        let [atrial, ventricular] = &self.channels;
        match channel {
            Channel::Atrial => atrial,
            Channel::Ventricular => ventricular,
        }
    }

    const fn line_mut(&mut self, channel: Channel) -> &mut Line {
        let [atrial, ventricular] = &mut self.channels;
        match channel {
            Channel::Atrial => atrial,
            Channel::Ventricular => ventricular,
        }
    }
}

impl Line {
    const fn new(channel: Channel, params: Option<ChannelParams>) -> Result<Self, ParamError> {
        if let Some(ChannelParams { near, .. }) = &params
            && let Err(refused) = near.check()
        {
            return Err(refused.in_row(channel.number()));
        }
        Ok(Self { channel, params, from_script: None, from_heart: None })
    }
}
