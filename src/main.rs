//! The program: a window, or one of the commands without one.

use bathwright::bath::{DEMOS, Project, load};
use bathwright::command::{Arguments, BAD_INPUT, report, run};
use bathwright::window;
use clap::Parser as _;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

fn main() -> ExitCode {
    // Libraries log what the user is told in plain words anyway; RUST_LOG shows it.
    env_logger::Builder::from_env(env_logger::Env::default().default_filter_or("off")).init();
    let arguments = Arguments::parse();
    let result = match &arguments.command {
        Some(command) => run(command, &mut std::io::stdout().lock()),
        None => match open(arguments.file.as_deref()) {
            Ok((project, path, shown)) => match window::open(project.clone(), path) {
                Ok(()) => return ExitCode::SUCCESS,
                Err(error) => {
                    eprintln!("bathwright: {error}; printing the report instead");
                    report(&project, &shown, &mut std::io::stdout().lock())
                }
            },
            Err(error) => {
                eprintln!("bathwright: {error}");
                return ExitCode::from(BAD_INPUT);
            }
        },
    };
    match result {
        Ok(outcome) => ExitCode::from(outcome.code()),
        Err(error) => {
            eprintln!("bathwright: {error}");
            ExitCode::from(BAD_INPUT)
        }
    }
}

/// The named project, or the first demo bath; with the name to show.
fn open(file: Option<&Path>) -> Result<(Project, Option<PathBuf>, String), bathwright::bath::FileError> {
    match file {
        Some(path) => Ok((load(path)?, Some(path.to_path_buf()), path.display().to_string())),
        None => {
            let demo = &DEMOS[0];
            Ok((demo.project()?, None, format!("demo_baths/{}", demo.file)))
        }
    }
}
