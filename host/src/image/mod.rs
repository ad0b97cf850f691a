//! A scenario as the constants of a firmware image: source text in Rust, so that a core without files and without a heap runs the
//! very same scenario, checked when it is compiled.

mod device;
mod heart;
mod quantity;
mod script;

use crate::scenario::Scenario;
use std::fmt::Write;

/// The constants of a scenario with this seed, as the text of a Rust module that needs nothing but the library.
///
/// It has the numbers `SITES`, `TRACTS`, `CELLS`, `FOCI` and `STEPS` that a `Bench` has in its type, the `SETUP` of the run, and
/// `device()`, the device that belongs to it.
pub fn constants(scenario: &Scenario, seed: u64) -> String {
    let mut text = String::new();
    // Writing into a string cannot fail.
    let _ = write_constants(&mut text, scenario, seed);
    text
}

fn write_constants(out: &mut String, scenario: &Scenario, seed: u64) -> std::fmt::Result {
    let anatomy = &scenario.heart.anatomy;
    // The name of a file may hold anything, a comment may not.
    let file = scenario.source.name().replace(|c: char| c.is_control(), " ");
    writeln!(out, "// Written from {file} with seed {seed}. Change that file, not this text.\n")?;
    writeln!(out, "use phase4::{{audit, base, bench, device, heart, lead}};\n")?;
    let foci = scenario.heart.foci.len();
    // A script of no steps still has room for one.
    let steps = scenario.steps.steps.len().max(1);
    for (name, what, number) in [
        ("SITES", "Sites of the anatomy.", anatomy.sites().len()),
        ("TRACTS", "Tracts of the anatomy.", anatomy.tracts().len()),
        ("CELLS", "Cells of the anatomy.", anatomy.cells().len()),
        ("FOCI", "Foci beside the cells.", foci),
        ("STEPS", "Room for the steps of the script.", steps),
    ] {
        writeln!(out, "/// {what}\npub const {name}: usize = {number};")?;
    }
    writeln!(out)?;
    heart::write(out, scenario)?;
    device::write(out, scenario)?;
    script::write(out, &scenario.steps.steps)?;
    let judged = if scenario.device.is_some() { "Some((PROGRAM, AUDIT))" } else { "None" };
    writeln!(
        out,
        "/// The run.\n\
         pub static SETUP: bench::Setup<'static, SITES, TRACTS, CELLS, FOCI> = bench::Setup {{\n    \
         anatomy: &ANATOMY,\n    foci: &FOCUS_PARAMS,\n    lead: LEAD,\n    judged: {judged},\n    steps: &SCRIPT,\n    \
         start: START,\n    length: {},\n    seed: {seed},\n}};",
        quantity::span(scenario.length),
    )
}
