//! The table of a heart: which sites there are, which cells beat at them, which tracts join them.

use super::cell::known;
use super::check::{conflict, in_row, sound, within};
use super::rows::Rows;
use super::way::Direction;
use super::{CellParams, SiteParams, TractParams};
use crate::base::{CellId, ParamError, SiteId, Span, TractId};

/// A checked heart of `S` sites, `T` tracts and `C` cells: once there is one, nothing about it can fail.
///
/// It can be a `const`, so that a wrong table does not compile and a right one lies in flash.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Anatomy<const S: usize, const T: usize, const C: usize> {
    sites: [SiteParams; S],
    tracts: [TractParams; T],
    cells: [CellParams; C],
    links: [Links; S],
    memories: [Span; T],
}

/// What hangs on a site.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Links {
    /// Tracts that begin here.
    pub(super) forward: Rows,
    /// Tracts that end here.
    pub(super) backward: Rows,
    /// Cells that beat here.
    pub(super) cells: Rows,
}

impl<const S: usize, const T: usize, const C: usize> Anatomy<S, T, C> {
    /// The heart of these tables. Their rows are what [`SiteId`], [`TractId`] and [`CellId`] count.
    ///
    /// # Errors
    /// Names the first parameter that is out of range or in conflict with another, and its row: more than 32 rows in a table, a
    /// row that does not exist, a tract from a site to itself, a delay of zero or beyond 2 s, a cell at least as fast as its site's
    /// refractory period, a tract that the cell at its mouth would find occupied for ever; and whatever [`SiteParams`],
    /// [`CellParams`] and [`Way`](super::Way) call out of range.
    pub const fn new(sites: [SiteParams; S], tracts: [TractParams; T], cells: [CellParams; C]) -> Result<Self, ParamError> {
        sound!(within("sites", count(S), 1, count(Rows::MOST)));
        sound!(within("tracts", count(T), 0, count(Rows::MOST)));
        sound!(within("cells", count(C), 0, count(Rows::MOST)));
        sound!(check_sites(&sites));
        sound!(check_cells(&cells, &sites));
        sound!(check_tracts(&tracts, &cells, S));
        let links = links(&tracts, &cells);
        let memories = memories(&tracts);
        Ok(Self { sites, tracts, cells, links, memories })
    }

    /// The tissue of a site, if the table has it.
    pub fn site(&self, site: SiteId) -> Option<&SiteParams> {
        self.sites.get(usize::from(site.row()))
    }

    /// A tract, if the table has it.
    pub fn tract(&self, tract: TractId) -> Option<&TractParams> {
        self.tracts.get(usize::from(tract.row()))
    }

    /// A cell, if the table has it.
    pub fn cell(&self, cell: CellId) -> Option<&CellParams> {
        self.cells.get(usize::from(cell.row()))
    }

    /// The site table, as it was given.
    pub const fn sites(&self) -> &[SiteParams; S] {
        &self.sites
    }

    /// The tract table, as it was given.
    pub const fn tracts(&self) -> &[TractParams; T] {
        &self.tracts
    }

    /// The cell table, as it was given.
    pub const fn cells(&self) -> &[CellParams; C] {
        &self.cells
    }

    pub(super) fn links(&self, site: SiteId) -> Option<&Links> {
        self.links.get(usize::from(site.row()))
    }

    /// From where on an earlier passage through this tract no longer matters.
    pub(super) fn memory(&self, tract: TractId) -> Option<Span> {
        self.memories.get(usize::from(tract.row())).copied()
    }
}

/// A number of rows.
#[allow(clippy::as_conversions, reason = "no table of a supported target outgrows 64 bits")]
pub(super) const fn count(rows: usize) -> u64 {
    rows as u64
}

const fn check_sites(sites: &[SiteParams]) -> Result<(), ParamError> {
    let (mut rest, mut row) = (sites, 0_u8);
    while let [site, more @ ..] = rest {
        sound!(in_row(row, site.check()));
        (rest, row) = (more, row.wrapping_add(1));
    }
    Ok(())
}

const fn check_cells(cells: &[CellParams], sites: &[SiteParams]) -> Result<(), ParamError> {
    let (mut rest, mut row) = (cells, 0_u8);
    while let [cell, more @ ..] = rest {
        sound!(in_row(row, known("site", cell.site, sites.len())));
        if let Some((_, [site, ..])) = sites.split_at_checked(index(cell.site)) {
            sound!(in_row(row, cell.check(site)));
        }
        (rest, row) = (more, row.wrapping_add(1));
    }
    Ok(())
}

const fn check_tracts(tracts: &[TractParams], cells: &[CellParams], sites: usize) -> Result<(), ParamError> {
    let (mut rest, mut row) = (tracts, 0_u8);
    while let [tract, more @ ..] = rest {
        sound!(in_row(row, known("from", tract.from, sites)));
        sound!(in_row(row, known("to", tract.to, sites)));
        sound!(in_row(row, tract.check()));
        sound!(in_row(row, check_mouth(tract, Direction::Forward, cells)));
        sound!(in_row(row, check_mouth(tract, Direction::Backward, cells)));
        (rest, row) = (more, row.wrapping_add(1));
    }
    Ok(())
}

/// A tract holds one wave: a cell at its mouth must not fire again before the first has left it.
const fn check_mouth(tract: &TractParams, direction: Direction, cells: &[CellParams]) -> Result<(), ParamError> {
    let way = tract.way(direction);
    let (mouth, name) = if direction.is_backward() { (tract.to, "backward.base") } else { (tract.from, "forward.base") };
    let mut rest = cells;
    while let [cell, more @ ..] = rest {
        let (base, interval) = (way.base.as_micros(), cell.interval.floor().as_micros());
        if !way.shut && cell.site.row() == mouth.row() && base >= interval {
            let rule = "a tract holds one wave: split a delay longer than the cycle that drives it over two tracts";
            return conflict(name, base, "interval", interval, rule);
        }
        rest = more;
    }
    Ok(())
}

const fn links<const S: usize>(tracts: &[TractParams], cells: &[CellParams]) -> [Links; S] {
    let mut table = [Links { forward: Rows::NONE, backward: Rows::NONE, cells: Rows::NONE }; S];
    let (mut sites, mut site): (&mut [Links], u8) = (&mut table, 0);
    while let [links, others @ ..] = sites {
        let (mut rest, mut row) = (tracts, 0_u8);
        while let [tract, more @ ..] = rest {
            if tract.from.row() == site {
                links.forward = links.forward.with(Rows::one(row));
            }
            if tract.to.row() == site {
                links.backward = links.backward.with(Rows::one(row));
            }
            (rest, row) = (more, row.wrapping_add(1));
        }
        let (mut rest, mut row) = (cells, 0_u8);
        while let [cell, more @ ..] = rest {
            if cell.site.row() == site {
                links.cells = links.cells.with(Rows::one(row));
            }
            (rest, row) = (more, row.wrapping_add(1));
        }
        (sites, site) = (others, site.wrapping_add(1));
    }
    table
}

const fn memories<const T: usize>(tracts: &[TractParams; T]) -> [Span; T] {
    let mut table = [Span::ZERO; T];
    let (mut memories, mut rest): (&mut [Span], &[TractParams]) = (&mut table, tracts);
    while let ([memory, others @ ..], [tract, more @ ..]) = (memories, rest) {
        *memory = tract.memory();
        (memories, rest) = (others, more);
    }
    table
}

#[allow(clippy::as_conversions, reason = "lossless; `From` is not const yet")]
const fn index(site: SiteId) -> usize {
    site.row() as usize
}
