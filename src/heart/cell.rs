//! Pacemaker cells: what beats by itself.

use super::SiteParams;
use super::check::{conflict, span_within};
use crate::base::{Interval, ParamError, Problem, SiteId, Span, wide, word};

/// A pacemaker at a site.
///
/// # Model
/// Left alone it fires its site after each interval, and the fraction of a microsecond is carried from beat to beat. Whatever
/// else fires the site discharges it: the interval then counts from that very instant. So the fastest cell leads, and a slower
/// one appears as escape rhythm when nothing reaches it for its own interval. Sinus node 60–100, junction 40–60, ventricle 20–40
/// per minute (textbooks: checked).
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct CellParams {
    /// The site it fires.
    pub site: SiteId,
    /// Its own interval; longer than its site's refractory period.
    pub interval: Interval,
}

impl CellParams {
    /// A cell at this site with this interval.
    pub const fn new(site: SiteId, interval: Interval) -> Self {
        Self { site, interval }
    }

    pub(super) const fn check(&self, site: &SiteParams) -> Result<(), ParamError> {
        let (interval, refractory) = (self.interval.nearest().as_micros(), site.refractory.as_micros());
        if interval == 0 {
            return span_within("interval", Span::ZERO, Span::from_micros(1), Interval::MAX.floor());
        }
        if self.interval.ceil().as_micros() <= refractory {
            let rule = "a cell's own interval must be longer than its site's refractory period";
            return conflict("interval", interval, "refractory", refractory, rule);
        }
        Ok(())
    }
}

/// Refuses a site that its table does not have.
pub(super) const fn known(parameter: &'static str, site: SiteId, rows: usize) -> Result<(), ParamError> {
    let (value, rows) = (wide(word(site.row())), super::anatomy::count(rows));
    if value < rows { Ok(()) } else { Err(ParamError::new(parameter, Problem::NoSuchRow { value, rows })) }
}
