//! One workload, so many beats: what `benches/instructions` counts and what memory is measured on.
//!
//! `workload NAME BEATS` prints what it came to and the peak memory.

use phase4_benches::measure::peak_memory_kib;
use phase4_benches::ours::{self, Vvi};
use phase4_benches::table::Program;

fn main() {
    let arguments: Vec<String> = std::env::args().collect();
    let [_, name, beats] = arguments.as_slice() else { return usage() };
    let Ok(beats) = beats.parse::<u64>() else { return usage() };
    let (count, digest) = match name.as_str() {
        "heart" => ours::heart_alone(beats),
        _ => match (Program::of(name), Vvi::of(name)) {
            (Some(program), _) => {
                let tally = program.beat(beats);
                (tally.beats, tally.digest)
            }
            (None, Some((vvi, audited))) => ours::vvi_loop(vvi, audited, beats),
            (None, None) => return usage(),
        },
    };
    let memory = peak_memory_kib().map_or_else(|| "unknown".to_owned(), |kib| format!("{kib} KiB"));
    println!("{name} {count} {digest:016x} {memory}");
}

fn usage() {
    eprintln!("workload NAME BEATS");
    std::process::exit(2);
}
