//! The command line: what is asked, what is answered, and with which exit code.

mod args;
mod commands;
mod progress;

use args::{Args, Command};
use clap::Parser;
use std::io::{ErrorKind, IsTerminal, Write};
use std::process::ExitCode;

/// Bad input, or an output that cannot be written.
const BAD_INPUT: u8 = 2;

/// Runs the command that the process was started with.
pub fn main() -> ExitCode {
    let args = Args::parse();
    let answer = match &args.command {
        Command::Run(run) => commands::run(run),
        Command::Judge(judge) => commands::judge(judge),
    };
    match answer {
        Ok(answer) => {
            let mut out = std::io::stdout().lock();
            match out.write_all(answer.text.as_bytes()).and_then(|()| out.flush()) {
                // A reader that has gone away has seen what it wanted: the verdict stands all the same.
                Err(error) if error.kind() != ErrorKind::BrokenPipe => {
                    let _ = writeln!(std::io::stderr(), "phase4: cannot write the answer: {error}");
                    ExitCode::from(BAD_INPUT)
                }
                _ => ExitCode::from(answer.verdict.exit_code()),
            }
        }
        Err(refusal) => {
            let mut err = std::io::stderr().lock();
            let fancy = err.is_terminal() && std::env::var_os("NO_COLOR").is_none();
            let _ = err.write_all(refusal.render(fancy).as_bytes());
            ExitCode::from(BAD_INPUT)
        }
    }
}
