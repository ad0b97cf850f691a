//! What lies where in a ladder, from top to bottom.

use crate::report::facts::Facts;
use crate::report::svg::{Anchor, Svg};
use crate::report::text::{capital, short};
use crate::run_data::TractShape;
use phase4::base::{Channel, Kind, Record};

/// The line of the axis, and the end of the row of steps.
pub(super) const AXIS: f64 = 24.0;
const STEPS_END: f64 = 52.0;
/// Height of the row of signals and pulses, of the lane of windows, of the row of gauges.
const SIGNALS: f64 = 62.0;
const LANE: f64 = 14.0;
const GAUGES: f64 = 104.0;
/// Most tracts drawn beside the chain.
const MOST_BESIDE: usize = 8;

/// One stretch of tract.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Tier {
    /// Row of the tract.
    pub(super) tract: u8,
    pub(super) shape: TractShape,
    pub(super) top: f64,
    pub(super) bottom: f64,
    /// True if it stands beside the chain, with borders of its own.
    pub(super) beside: bool,
}

impl Tier {
    /// Height of a place along the tract, 0 at its upper end.
    pub(super) fn y(&self, part: f64) -> f64 {
        self.top + (self.bottom - self.top) * part
    }

    /// Where the gate is drawn: visibly inside, with room for a bar on both sides.
    pub(super) fn gate_y(&self) -> f64 {
        let room = 14.0_f64.min((self.bottom - self.top) / 3.0);
        self.y(self.shape.gate).max(self.top + room).min(self.bottom - room)
    }
}

/// What belongs to one channel: signals and pulses, and the windows and gauges of the judged one.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Block {
    pub(super) channel: Channel,
    /// The border towards the heart.
    pub(super) edge: f64,
    /// 1 if the block lies below the heart, −1 above.
    pub(super) down: f64,
    /// True if windows and gauges are drawn.
    pub(super) judged: bool,
}

impl Block {
    /// A height this far from the heart's border.
    pub(super) fn off(&self, distance: f64) -> f64 {
        self.edge + self.down * distance
    }

    /// The border of the lane that is nearer to the heart.
    pub(super) fn lane_near(&self) -> f64 {
        self.off(SIGNALS)
    }

    /// A height this far beyond the lane.
    pub(super) fn beyond(&self, distance: f64) -> f64 {
        self.off(SIGNALS + LANE + distance)
    }

    /// Upper border of the lane.
    pub(super) fn lane_top(&self) -> f64 {
        self.lane_near().min(self.beyond(0.0))
    }

    fn height(&self) -> f64 {
        SIGNALS + if self.judged { LANE + GAUGES } else { 0.0 }
    }

    /// Upper end of a thing of this height whose nearer side is this far beyond the lane.
    pub(super) fn top_of(&self, distance: f64, height: f64) -> f64 {
        self.beyond(distance).min(self.beyond(distance + height))
    }
}

/// The rows of a ladder.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Layout {
    pub(super) tiers: Vec<Tier>,
    /// Sites with their borders; a site beside the chain can have several.
    pub(super) sites: Vec<(u8, f64)>,
    pub(super) above: Option<Block>,
    pub(super) below: Option<Block>,
    /// Upper and lower end of the heart.
    pub(super) heart: (f64, f64),
    pub(super) height: f64,
    /// Names of sites and of tracts.
    names: Vec<String>,
    tract_names: Vec<String>,
}

impl Layout {
    pub(super) fn of(facts: &Facts<'_>) -> Self {
        let has = |channel: Channel| {
            let on = |record: &Record| matches!(record.kind, Kind::Signal | Kind::Pulse) && record.place == channel.number();
            facts.channel() == Some(channel) || facts.run.records.iter().any(on)
        };
        let block =
            |channel, edge, down| Block { channel, edge, down, judged: facts.channel() == Some(channel) && facts.is_judged() };
        let above = has(Channel::Atrial).then(|| {
            let block = block(Channel::Atrial, 0.0, -1.0);
            Block { edge: STEPS_END + block.height(), ..block }
        });
        let top = above.map_or(STEPS_END, |block| block.edge);
        // Without a single activation the log has no causes: then only what the bench itself sees is drawn.
        let drawn = !facts.heart.activations.is_empty();
        let tiers = if drawn { tiers(&facts.run.tracts, facts.top_site(), top) } else { Vec::new() };
        let bottom = tiers.iter().map(|tier| tier.bottom).fold(top, f64::max);
        let below = has(Channel::Ventricular).then(|| block(Channel::Ventricular, bottom, 1.0));
        let height = below.map_or(bottom + 14.0, |block| block.edge + block.height());
        let fit = |names: &[String]| names.iter().map(|name| short(name, 14)).collect::<Vec<_>>();
        let names = fit(&facts.run.names.sites).iter().map(|name| capital(name)).collect();
        let tract_names = fit(&facts.run.names.tracts);
        Self { sites: sites(&tiers), tiers, above, below, heart: (top, bottom), height, names, tract_names }
    }

    pub(super) fn blocks(&self) -> impl Iterator<Item = &Block> {
        self.above.iter().chain(&self.below)
    }

    /// The border on which a site is drawn first.
    pub(super) fn site_y(&self, site: u8) -> Option<f64> {
        self.sites.iter().find(|(other, _)| *other == site).map(|(_, y)| *y)
    }

    /// The column of names.
    pub(super) fn labels(&self) -> Svg {
        let mut svg = Svg::new();
        svg.text("t2", (10.0, 15.0), Anchor::Start, "time");
        svg.line("tier", (0.0, AXIS), (100.0, AXIS));
        for (site, y) in &self.sites {
            svg.line("tier", (86.0, *y), (100.0, *y));
            let name = self.names.get(usize::from(*site)).cloned().unwrap_or_else(|| format!("Site {site}"));
            svg.text("bold", (10.0, y + 4.0), Anchor::Start, &name);
        }
        for tier in self.tiers.iter().filter(|tier| tier.beside) {
            if let Some(name) = self.tract_names.get(usize::from(tier.tract)) {
                svg.text("t2", (10.0, tier.y(0.5) + 4.0), Anchor::Start, name);
            }
        }
        for block in self.blocks() {
            let letter = if block.channel == Channel::Atrial { "A" } else { "V" };
            let middle = if block.down > 0.0 { block.off(29.0) } else { block.off(40.0) };
            svg.text("bold", (10.0, middle - 2.0), Anchor::Start, &format!("{letter} signals,"));
            svg.text("bold", (10.0, middle + 13.0), Anchor::Start, "pulses");
            if block.judged {
                svg.text("bold", (10.0, block.lane_top() + 11.0), Anchor::Start, &format!("{letter} windows"));
                let middle = block.beyond(49.0);
                svg.text("bold", (10.0, middle - 3.0), Anchor::Start, "Deviation");
                svg.text("t2", (10.0, middle + 12.0), Anchor::Start, "10 × wider");
            }
        }
        svg
    }
}

/// The chain of tracts from the top site down, each a tier; then the tracts beside it, each with borders of its own.
fn tiers(tracts: &[TractShape], top_site: u8, top: f64) -> Vec<Tier> {
    let mut chain: Vec<usize> = Vec::new();
    let mut site = top_site;
    while let Some(next) = tracts.iter().enumerate().position(|(row, tract)| tract.from == site && !chain.contains(&row)) {
        chain.push(next);
        site = tracts.get(next).map_or(site, |tract| tract.to);
    }
    let delay = |row: &usize| tracts.get(*row).map_or(0, |tract| tract.forward_base.as_micros());
    let slowest = chain.iter().copied().rev().max_by_key(delay);
    let mut tiers = Vec::new();
    let mut y = top;
    let mut add = |row: usize, y: f64, height: f64, beside: bool| {
        if let (Some(shape), Ok(tract)) = (tracts.get(row), u8::try_from(row)) {
            tiers.push(Tier { tract, shape: *shape, top: y, bottom: y + height, beside });
        }
    };
    for (place, row) in chain.iter().enumerate() {
        let height = match place {
            _ if Some(*row) == slowest => 72.0,
            0 => 40.0,
            _ if place + 1 == chain.len() => 48.0,
            _ => 32.0,
        };
        add(*row, y, height, false);
        y += height;
    }
    for row in (0..tracts.len()).filter(|row| !chain.contains(row)).take(MOST_BESIDE) {
        y += 26.0;
        add(row, y, 48.0, true);
        y += 48.0;
    }
    tiers
}

fn sites(tiers: &[Tier]) -> Vec<(u8, f64)> {
    let mut sites: Vec<(u8, f64)> = Vec::new();
    for (site, y) in tiers.iter().flat_map(|tier| [(tier.shape.from, tier.top), (tier.shape.to, tier.bottom)]) {
        if !sites.contains(&(site, y)) {
            sites.push((site, y));
        }
    }
    sites
}
