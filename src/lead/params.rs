//! What each channel's electrode sees and where it paces: parameters, their checks and their defaults.

use crate::base::{MicroVolts, ParamError, Problem, SiteId, Span};
use crate::heart::plain;

/// What a channel makes of an activation at its sense site.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct NearField {
    /// Peak of the deflection, base to peak, at most 100 mV.
    pub peak: MicroVolts,
    /// From the activation to the deflection's onset, 1 µs to 100 ms. Keep it below the site's absolute refractory period:
    /// of two activations within it only the later one is shown.
    pub delay: Span,
    /// From the deflection's onset to its end, 1 µs to 1 s.
    pub width: Span,
}

impl NearField {
    /// The highest accepted peak.
    pub const HIGHEST_PEAK: MicroVolts = MicroVolts(100_000);
    /// The shortest accepted delay and width: an instant never holds an endless chain.
    pub const SHORTEST: Span = Span::from_micros(1);
    /// The longest accepted delay.
    pub const LONGEST_DELAY: Span = Span::from_millis(100);
    /// The longest accepted width.
    pub const LONGEST_WIDTH: Span = Span::from_secs(1);

    /// An atrial near field: 3 mV, 2 ms after the activation, 20 ms wide. Values of our own, common practice, no source.
    pub const ATRIAL: Self = Self { peak: MicroVolts(3_000), delay: Span::from_millis(2), width: Span::from_millis(20) };
    /// A ventricular near field: 8 mV, 2 ms after the activation, 40 ms wide. Values of our own, common practice, no source.
    pub const VENTRICULAR: Self = Self { peak: MicroVolts(8_000), delay: Span::from_millis(2), width: Span::from_millis(40) };

    /// Accepts or refuses the values.
    ///
    /// # Errors
    /// Names the first of `peak` (µV), `delay` (µs) and `width` (µs) that is out of its range.
    pub const fn check(&self) -> Result<(), ParamError> {
        if let Err(refused) = check_peak(self.peak) {
            return Err(refused);
        }
        if let Err(refused) = check_delay(self.delay) {
            return Err(refused);
        }
        check_width(self.width)
    }
}

/// One channel: where it listens, where it paces, what it sees.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct ChannelParams {
    /// The site whose activations it sees.
    pub sense: SiteId,
    /// The site its pulses reach.
    pub pace: SiteId,
    /// What it sees of an activation.
    pub near: NearField,
}

impl ChannelParams {
    /// A channel with one electrode: it senses and paces at the same site.
    pub const fn at(site: SiteId, near: NearField) -> Self {
        Self { sense: site, pace: site, near }
    }
}

/// The channels that are connected.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct LeadParams {
    /// The atrial channel, if there is an atrial lead.
    pub atrial: Option<ChannelParams>,
    /// The ventricular channel, if there is a ventricular lead.
    pub ventricular: Option<ChannelParams>,
}

impl LeadParams {
    /// Both leads on the plain anatomy: the atrial one at the atrium, the ventricular one at the apex, with the usual near fields.
    pub const PLAIN: Self = Self {
        atrial: Some(ChannelParams::at(plain::ATRIUM, NearField::ATRIAL)),
        ventricular: Some(ChannelParams::at(plain::APEX, NearField::VENTRICULAR)),
    };
}

/// A change of a channel's near field, for the activations to come.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum LeadChange {
    /// Its peak.
    Peak(MicroVolts),
    /// Its delay after the activation, at least 1 µs.
    Delay(Span),
    /// Its width.
    Width(Span),
}

impl LeadChange {
    /// Accepts or refuses the new value.
    ///
    /// # Errors
    /// Names `peak` (µV), `delay` (µs) or `width` (µs) if it is out of the range of [`NearField`].
    pub const fn check(&self) -> Result<(), ParamError> {
        match *self {
            Self::Peak(peak) => check_peak(peak),
            Self::Delay(delay) => check_delay(delay),
            Self::Width(width) => check_width(width),
        }
    }
}

const fn check_peak(peak: MicroVolts) -> Result<(), ParamError> {
    let (value, greatest) = (crate::base::wide(peak.0), crate::base::wide(NearField::HIGHEST_PEAK.0));
    if value > greatest { Err(out_of_range("peak", value, 0, greatest)) } else { Ok(()) }
}

const fn check_delay(delay: Span) -> Result<(), ParamError> {
    check_span("delay", delay, NearField::LONGEST_DELAY)
}

const fn check_width(width: Span) -> Result<(), ParamError> {
    check_span("width", width, NearField::LONGEST_WIDTH)
}

const fn check_span(name: &'static str, span: Span, longest: Span) -> Result<(), ParamError> {
    let (value, least, greatest) = (span.as_micros(), NearField::SHORTEST.as_micros(), longest.as_micros());
    if value < least || value > greatest { Err(out_of_range(name, value, least, greatest)) } else { Ok(()) }
}

const fn out_of_range(name: &'static str, value: u64, least: u64, greatest: u64) -> ParamError {
    ParamError::new(name, Problem::OutOfRange { value, least, greatest })
}
