//! One workload, so many beats: what `benches/instructions` counts and what memory is measured on.
//!
//! `workload NAME BEATS` prints beats, a digest or hash, and the peak memory in KiB.

use phase4_benches::ours::{self, Vvi};
use phase4_benches::peers::{general, heap, special, ticks};
use phase4_benches::rhythm::{Tally, length};

fn main() {
    let arguments: Vec<String> = std::env::args().collect();
    let [_, name, beats] = arguments.as_slice() else { return usage() };
    let Ok(beats) = beats.parse::<u64>() else { return usage() };
    let mut tally = Tally::default();
    let pair = |tally: Tally| (tally.beats, tally.digest);
    let counted = match name.as_str() {
        "common" => pair(ours::common_rhythm(length(beats))),
        "heart" => ours::heart_alone(beats),
        "vvi-senses" => ours::vvi_loop(Vvi::Senses, false, beats),
        "vvi-senses-audited" => ours::vvi_loop(Vvi::Senses, true, beats),
        "vvi-mixed" => ours::vvi_loop(Vvi::Mixed, false, beats),
        "vvi-mixed-audited" => ours::vvi_loop(Vvi::Mixed, true, beats),
        "vvi-paces" => ours::vvi_loop(Vvi::Paces, false, beats),
        "vvi-paces-audited" => ours::vvi_loop(Vvi::Paces, true, beats),
        "special-integer" => {
            special::integer_table(length(beats), |at| tally.beat(at));
            pair(tally)
        }
        "special-float" => {
            special::float_exponential(length(beats), |at| tally.beat(at));
            pair(tally)
        }
        "float" => {
            special::float_throughout(length(beats), |at| tally.beat((at * 1_000.0).round() as u64));
            pair(tally)
        }
        "heap" => pair(heap::run(length(beats))),
        "tick-whole" => {
            ticks::whole_milliseconds(length(beats), |at| tally.beat(at));
            pair(tally)
        }
        "tick-kept" => {
            ticks::kept_remainders(length(beats), |at| tally.beat(at));
            pair(tally)
        }
        "general" => match general::run(length(beats)) {
            Ok(tally) => pair(tally),
            Err(error) => return eprintln!("{error}"),
        },
        _ => return usage(),
    };
    println!("{name} {} beats {:016x}", counted.0, counted.1);
}

fn usage() {
    eprintln!("workload NAME BEATS");
    std::process::exit(2);
}
