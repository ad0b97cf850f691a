//! Writes a scenario as the constants of a firmware image: `image_constants FILE [--seed N]`, the text to standard output.
//!
//! The image is for a bench: never connected to a person.

use phase4_host::image::constants;
use phase4_host::scenario::Scenario;
use std::path::Path;
use std::process::ExitCode;

fn main() -> ExitCode {
    let words: Vec<String> = std::env::args().skip(1).collect();
    let (file, seed) = match words.iter().map(String::as_str).collect::<Vec<_>>().as_slice() {
        [file] => ((*file).to_owned(), None),
        [file, "--seed", seed] => match seed.parse() {
            Ok(seed) => ((*file).to_owned(), Some(seed)),
            Err(error) => {
                eprintln!("{seed} is no seed: {error}");
                return ExitCode::from(2);
            }
        },
        _ => {
            eprintln!("image_constants FILE [--seed N]");
            return ExitCode::from(2);
        }
    };
    match Scenario::load(Path::new(&file)) {
        Ok(scenario) => {
            print!("{}", constants(&scenario, seed.unwrap_or(scenario.seed)));
            ExitCode::SUCCESS
        }
        Err(refusal) => {
            eprint!("{}", refusal.render(false));
            ExitCode::from(2)
        }
    }
}
