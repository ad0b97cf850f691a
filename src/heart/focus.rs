//! Foci: small sources beside the cells, which fire a site and are reset by no wave.

use super::Anatomy;
use super::cell::known;
use super::check::{conflict, span_within, within};
use crate::base::{CellId, ParamError, SiteId, Span, wide, word};

/// A source that fires a site.
///
/// Its site may be refractory when it fires: a record tells so, and the source goes on.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub struct FocusParams<'a> {
    /// The site it fires.
    pub site: SiteId,
    /// How it decides when.
    pub kind: FocusKind<'a>,
}

/// How a focus decides when to fire.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum FocusKind<'a> {
    /// A premature beat at a fixed coupling to the beat before it.
    ///
    /// Activations of `trigger` that this focus caused itself do not count, nor do those that come while a beat is on its way.
    Premature {
        /// The site whose activations it counts.
        trigger: SiteId,
        /// From the activation that makes the number full to the premature beat, at least 1 µs.
        coupling: Span,
        /// Which one is followed by a premature beat: 1 for each, 2 for every other, and so on.
        every: u32,
    },
    /// A recorded series of intervals. It fires first [`FocusParams::REPLAY_LEAD`] after the start, then after each interval.
    Replay {
        /// The intervals, each at least 1 µs; at least one.
        intervals: &'a [Span],
        /// Whether the series begins again after its last interval, or the focus then falls silent.
        repeat: bool,
        /// The cell that falls silent for it: it must beat at the same site. Arresting and releasing that cell stops the series
        /// and lets it go on with its next interval.
        in_place_of: CellId,
    },
}

impl<'a> FocusParams<'a> {
    /// From the start to the first firing of a replayed series.
    pub const REPLAY_LEAD: Span = Span::from_secs(1);

    /// A premature beat at `site`, `coupling` after each activation of that same site.
    pub const fn premature(site: SiteId, coupling: Span) -> Self {
        Self { site, kind: FocusKind::Premature { trigger: site, coupling, every: 1 } }
    }

    /// A premature beat at `site` after every `every`-th activation of `trigger`.
    pub const fn premature_after(site: SiteId, trigger: SiteId, coupling: Span, every: u32) -> Self {
        Self { site, kind: FocusKind::Premature { trigger, coupling, every } }
    }

    /// A recorded series at `site` in place of a cell there.
    pub const fn replay(site: SiteId, intervals: &'a [Span], repeat: bool, in_place_of: CellId) -> Self {
        Self { site, kind: FocusKind::Replay { intervals, repeat, in_place_of } }
    }

    pub(super) const fn check<const S: usize, const T: usize, const C: usize>(
        &self,
        anatomy: &Anatomy<S, T, C>,
    ) -> Result<(), ParamError> {
        super::check::sound!(known("site", self.site, S));
        match self.kind {
            FocusKind::Premature { trigger, coupling, every } => {
                super::check::sound!(known("trigger", trigger, S));
                super::check::sound!(span_within("coupling", coupling, Span::from_micros(1), Span::from_secs(60)));
                within("every", wide(every), 1, wide(u32::MAX))
            }
            FocusKind::Replay { intervals, in_place_of, .. } => {
                super::check::sound!(within("intervals", super::anatomy::count(intervals.len()), 1, wide(u32::MAX)));
                let mut rest = intervals;
                while let [interval, more @ ..] = rest {
                    super::check::sound!(span_within("interval", *interval, Span::from_micros(1), Span::from_secs(3_600)));
                    rest = more;
                }
                self.check_place(in_place_of, anatomy.cells())
            }
        }
    }

    /// A cell gives up its place once at most.
    pub(super) fn check_alone<'f>(&self, mut earlier: impl Iterator<Item = &'f FocusParams<'f>>) -> Result<(), ParamError> {
        let Some(cell) = self.in_place_of() else { return Ok(()) };
        if earlier.any(|focus| focus.in_place_of() == Some(cell)) {
            let value = wide(word(cell.row()));
            return conflict("in_place_of", value, "in_place_of", value, "a cell gives up its place to one series only");
        }
        Ok(())
    }

    /// The cell whose place it takes, if it does.
    pub(super) const fn in_place_of(&self) -> Option<CellId> {
        match self.kind {
            FocusKind::Replay { in_place_of, .. } => Some(in_place_of),
            FocusKind::Premature { .. } => None,
        }
    }

    const fn check_place(&self, cell: CellId, cells: &[super::CellParams]) -> Result<(), ParamError> {
        let value = wide(word(cell.row()));
        let (mut rest, mut row) = (cells, 0_u8);
        while let [other, more @ ..] = rest {
            if row == cell.row() {
                let (site, own) = (other.site.row(), self.site.row());
                if site != own {
                    let rule = "a series beats where the cell beats whose place it takes";
                    return conflict("in_place_of", value, "site", wide(word(own)), rule);
                }
                return Ok(());
            }
            (rest, row) = (more, row.wrapping_add(1));
        }
        let problem = crate::base::Problem::NoSuchRow { value, rows: super::anatomy::count(cells.len()) };
        Err(ParamError::new("in_place_of", problem))
    }
}
