//! The command `phase4`.

use std::process::ExitCode;

fn main() -> ExitCode {
    phase4_host::cli::main()
}
