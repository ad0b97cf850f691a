//! The canary: a second, short run with a planted fault, judged as this run is, that shows whether the judge was awake.

use super::HYPOTHESES;
use crate::run_data::Canary;
use crate::scenario::describe_fault;
use phase4::audit::{AuditSettings, RuleSet};
use phase4::base::{ParamError, Program};
use phase4::bench::canary;

/// Plants a fault that this seed draws from those that can show under the program, and looks whether the judge, blind to these rules
/// (none, in a real run), finds it; `None` if no fault can show.
///
/// # Errors
/// What the auditor refuses in its settings.
pub fn canary(program: &Program, settings: &AuditSettings, seed: u64, blind: RuleSet) -> Result<Option<Canary>, ParamError> {
    let Some(fault) = canary::draw_fault(program, settings, seed) else { return Ok(None) };
    let result = canary::run::<HYPOTHESES>(program, settings, fault, blind)?;
    let found = result.first.filter(|_| result.caught);
    let rules = found.map_or(Vec::new(), |found| found.also.with(found.rule).iter().collect());
    Ok(Some(Canary { fault: fault.id(), line: describe_fault(fault), caught: result.caught, rules }))
}
