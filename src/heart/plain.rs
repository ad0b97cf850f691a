//! The plain heart: sinus node, atrium, junction, ventricle and the ventricle's apex, where an electrode sits.
//!
//! The apex is a site of its own so that fusion and the delay of sensing exist.
//!
//! # Model
//! | site | refractory | source |
//! |---|---|---|
//! | sinus node | 144 ms | action potential of the human sinus node, 143.5 ± 34.9 ms (Fabbri et al. 2017, experimental column: from memory) |
//! | atrium | 210 ms, then 30 | effective refractory period 211 ± 27 ms (Alboni et al., Eur Heart J 1985;6:602: checked); 30: textbook, from memory |
//! | junction | 200 ms, then 50 | ours |
//! | ventricle, apex | 250 ms, then 50 | 250–300 ms, then about 50 (textbook: checked) |
//!
//! | tract | forward | backward | gate |
//! |---|---|---|---|
//! | sinus – atrium | 70 ms: one-way sinoatrial time 40–98, mean 70 (checked) | 70 ms, blocked below 220 of recovery (ours) | at the sinus node |
//! | atrium – junction | 110 + 400 · exp(−recovery/110) ms, blocked below 150, concealment 0.19 (tuned here: functional refractory period 362 ms, in Alboni's 330–450) | shut; open in [`ANATOMY_VA`]: 150 ms, blocked below 380 (tuned here: V-A time 230 from the apex; mean about 235, from memory) | at the junction |
//! | junction – ventricle | 40 ms: HV 39.5 ± 3.9 (Alboni 1985: checked) | the same | at the junction |
//! | ventricle – apex | 40 ms: half a QRS of 80 (common practice, no source) | the same | at the ventricle |
//!
//! Cells: 75, 50 and 34.3 per minute, in the textbook bands 60–100, 40–60 and 20–40 (checked).
//! Refractory periods are those at a cycle of 800 ms and do not change with the cycle.

use super::{Anatomy, CellParams, Fraction, SiteParams, TractParams, Way};
use crate::base::{CellId, Decay, Interval, ParamError, SiteId, Span, TractId};

/// The sinus node.
pub const SINUS: SiteId = SiteId::new(0);
/// The atrium.
pub const ATRIUM: SiteId = SiteId::new(1);
/// The junction: AV node and His bundle.
pub const JUNCTION: SiteId = SiteId::new(2);
/// The ventricle, where conduction from above first reaches it.
pub const VENTRICLE: SiteId = SiteId::new(3);
/// The apex of the right ventricle.
pub const APEX: SiteId = SiteId::new(4);

/// Between sinus node and atrium.
pub const SINUS_ATRIUM: TractId = TractId::new(0);
/// Between atrium and junction: the AV node.
pub const ATRIUM_JUNCTION: TractId = TractId::new(1);
/// Between junction and ventricle.
pub const JUNCTION_VENTRICLE: TractId = TractId::new(2);
/// Between ventricle and apex.
pub const VENTRICLE_APEX: TractId = TractId::new(3);

/// The cell that leads.
pub const SINUS_CELL: CellId = CellId::new(0);
/// The junction's own cell.
pub const JUNCTION_CELL: CellId = CellId::new(1);
/// The ventricle's own cell.
pub const VENTRICLE_CELL: CellId = CellId::new(2);

/// Names of the sites, in the order of their table.
pub const SITE_NAMES: [&str; 5] = ["sinus", "atrium", "junction", "ventricle", "apex"];
/// Names of the tracts, in the order of their table.
pub const TRACT_NAMES: [&str; 4] = ["sinus-atrium", "atrium-junction", "junction-ventricle", "ventricle-apex"];
/// Names of the cells, in the order of their table.
pub const CELL_NAMES: [&str; 3] = ["sinus", "junction", "ventricle"];

/// The site table.
pub const SITES: [SiteParams; 5] = [
    SiteParams::new(Span::from_millis(144)),
    SiteParams::new(Span::from_millis(210)).with_relative(Span::from_millis(30)),
    SiteParams::new(Span::from_millis(200)).with_relative(Span::from_millis(50)),
    SiteParams::new(Span::from_millis(250)).with_relative(Span::from_millis(50)),
    SiteParams::new(Span::from_millis(250)).with_relative(Span::from_millis(50)),
];

/// The tract table. The ventricle does not drive the atrium: the way back through the node is shut.
pub const TRACTS: [TractParams; 4] = tracts(NODE_BACKWARD.closed());

/// The tract table of a heart whose ventricle drives the atrium when it can.
pub const TRACTS_VA: [TractParams; 4] = tracts(NODE_BACKWARD);

/// The cell table.
pub const CELLS: [CellParams; 3] =
    [CellParams::new(SINUS, millis(800)), CellParams::new(JUNCTION, millis(1_200)), CellParams::new(VENTRICLE, millis(1_750))];

/// The plain heart, without conduction from ventricle to atrium.
pub const ANATOMY: Anatomy<5, 4, 3> = sound(Anatomy::new(SITES, TRACTS, CELLS));

/// The plain heart with conduction from ventricle to atrium.
pub const ANATOMY_VA: Anatomy<5, 4, 3> = sound(Anatomy::new(SITES, TRACTS_VA, CELLS));

const NODE_CONCEAL: Fraction = checked(Fraction::from_millionths(190_000));

const NODE_BACKWARD: Way = Way::new(Span::from_millis(150)).with_theta(Span::from_millis(380)).with_conceal(NODE_CONCEAL);

const fn tracts(node_backward: Way) -> [TractParams; 4] {
    let sinus = Way::new(Span::from_millis(70));
    let node = Way::new(Span::from_millis(110))
        .with_recovery(Span::from_millis(400), checked(Decay::new(Span::from_millis(110))))
        .with_theta(Span::from_millis(150))
        .with_conceal(NODE_CONCEAL);
    let fast = Way::new(Span::from_millis(40));
    [
        TractParams::new(SINUS, ATRIUM, Fraction::ZERO, sinus, sinus.with_theta(Span::from_millis(220))),
        TractParams::new(ATRIUM, JUNCTION, Fraction::ONE, node, node_backward),
        TractParams::new(JUNCTION, VENTRICLE, Fraction::ZERO, fast, fast),
        TractParams::new(VENTRICLE, APEX, Fraction::ZERO, fast, fast),
    ]
}

const fn millis(millis: u64) -> Interval {
    match Interval::from_span(Span::from_millis(millis)) {
        Some(interval) => interval,
        None => Interval::MAX,
    }
}

#[allow(clippy::panic, reason = "only the compiler runs this: a wrong table does not compile")]
const fn sound(anatomy: Result<Anatomy<5, 4, 3>, ParamError>) -> Anatomy<5, 4, 3> {
    match anatomy {
        Ok(anatomy) => anatomy,
        Err(error) => panic!("{}", error.parameter),
    }
}

#[allow(clippy::panic, reason = "only the compiler runs this: a wrong value does not compile")]
const fn checked<T: Copy>(value: Result<T, ParamError>) -> T {
    match value {
        Ok(value) => value,
        Err(error) => panic!("{}", error.parameter),
    }
}
