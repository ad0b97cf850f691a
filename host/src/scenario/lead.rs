//! `[lead.ventricle]` and `[lead.atrium]`: what each channel sees of the heart.

use super::device::set;
use super::param::{Written, complaint};
use super::schema::LEAD;
use super::units::{microvolts, span};
use super::walk::Section;
use phase4::base::{Channel, Mode};
use phase4::lead::{ChannelParams, LeadParams, NearField};

/// The key of a channel's lead.
pub(super) const fn key(channel: Channel) -> &'static str {
    match channel {
        Channel::Atrial => "atrium",
        Channel::Ventricular => "ventricle",
    }
}

/// Reads the leads. One is connected where the mode uses its channel, and where the file has its table.
pub(super) fn read(leads: &Section<'_, '_>, mode: Option<Mode>, at: impl Fn(Channel) -> phase4::base::SiteId) -> LeadParams {
    let mut params = LeadParams::default();
    for channel in Channel::ALL {
        let table = open(leads, channel);
        let used = mode.is_some_and(|mode| mode.paces() == Some(channel) || mode.senses() == Some(channel));
        if !used && !table.exists() {
            continue;
        }
        let (place, usual) = match channel {
            Channel::Atrial => (&mut params.atrial, NearField::ATRIAL),
            Channel::Ventricular => (&mut params.ventricular, NearField::VENTRICULAR),
        };
        let mut near = usual;
        set(&mut near.peak, table.read("peak", microvolts));
        set(&mut near.delay, table.read("delay", span));
        set(&mut near.width, table.read("width", span));
        let channel = ChannelParams::at(at(channel), near);
        if let Err(error) = near.check() {
            table.complain(complaint(&error, |parameter| Written::new(&table, parameter)));
        }
        *place = Some(channel);
    }
    params
}

/// The table of a channel's lead.
pub(super) fn open<'a, 'w>(leads: &Section<'a, 'w>, channel: Channel) -> Section<'a, 'w> {
    leads.open_as(key(channel), &LEAD, format!("[lead.{}]", key(channel)))
}
