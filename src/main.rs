//! The program: a window, or one of the commands without one.

use bathwright::command::{Arguments, BAD_INPUT, run};
use clap::Parser as _;
use std::process::ExitCode;

fn main() -> ExitCode {
    let arguments = Arguments::parse();
    let mut out = std::io::stdout().lock();
    let result = match &arguments.command {
        Some(command) => run(command, &mut out),
        None => return ExitCode::SUCCESS,
    };
    match result {
        Ok(outcome) => ExitCode::from(outcome.code()),
        Err(error) => {
            eprintln!("bathwright: {error}");
            ExitCode::from(BAD_INPUT)
        }
    }
}
