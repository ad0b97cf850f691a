//! Names and shapes of a scenario's heart, for logs and drawings.

use crate::run_data::{Names, TractShape};
use crate::scenario::Scenario;
use phase4::base::Span;
use phase4::heart::plain::{CELL_NAMES, SITE_NAMES, TRACT_NAMES};

/// The names of a scenario's parts.
pub fn names(scenario: &Scenario) -> Names {
    let owned = |names: &[&str]| names.iter().map(|name| (*name).to_owned()).collect();
    Names {
        sites: owned(&SITE_NAMES),
        tracts: owned(&TRACT_NAMES),
        cells: owned(&CELL_NAMES),
        foci: scenario.heart.foci.iter().enumerate().map(|(row, focus)| focus.name(row)).collect(),
    }
}

/// What a drawing needs of a scenario's tracts.
pub fn tract_shapes(scenario: &Scenario) -> Vec<TractShape> {
    /// A span of which a share of one microsecond is one millionth.
    const MILLION: Span = Span::from_secs(1);
    let shape = |tract: &phase4::heart::TractParams| {
        let millionths = u32::try_from(tract.gate.of(MILLION).as_micros()).unwrap_or(u32::MAX);
        TractShape {
            from: tract.from.row(),
            to: tract.to.row(),
            gate: f64::from(millionths) / 1e6,
            forward_base: tract.forward.base,
            backward_base: tract.backward.base,
        }
    };
    scenario.heart.anatomy.tracts().iter().map(shape).collect()
}
