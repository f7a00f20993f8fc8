//! The commands. Each is one file: it parses, calls the library, and prints.
//!
//! Only this room prints, reads the clock, listens for signals, or decides how the process ends.

mod check;
mod interrupt;
mod new;
mod progress;
mod run;

use std::ffi::OsString;
use std::path::Path;
use std::process::ExitCode;

use clap::{Parser, Subcommand};

use crate::mistake::{Failure, Mistake, Warning};

/// The job is done.
pub const DONE: u8 = 0;
/// The job failed, or was stopped before it was done.
pub const FAILED: u8 = 1;
/// The study, its data or the call is wrong.
pub const WRONG: u8 = 2;

#[derive(Debug, Parser)]
#[command(
    name = "eyot",
    version,
    about = "Does this network of habitat keep its population?",
    long_about = "Reads habitat patches (GeoJSON) and a study (TOML), links the patches by dispersal, runs each \
                  patch's own stochastic population over thousands of replicates, and says how likely the network is \
                  to persist and which patches stay occupied.\n\n\
                  Exit codes: 0 done; 1 failed, or stopped before it was done; 2 the study or the call is wrong.",
    after_help = "A first study around your own patches:  eyot new my-study --patches patches.geojson\n\
                  Then:                                  eyot check my-study/study.toml\n\
                  And:                                   eyot run my-study/study.toml"
)]
struct Call {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    New(new::Arguments),
    Check(check::Arguments),
    Run(run::Arguments),
}

/// Runs the command line `arguments`, the program's name first, and says how the process should end.
pub fn main(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    let call = match Call::try_parse_from(arguments) {
        Ok(call) => call,
        Err(error) => {
            // Help and the version come this way too, and go to standard output with code 0.
            let code = if error.use_stderr() { WRONG } else { DONE };
            return if error.print().is_ok() { ExitCode::from(code) } else { ExitCode::from(FAILED) };
        }
    };
    let done = match call.command {
        Command::New(arguments) => new::main(&arguments),
        Command::Check(arguments) => check::main(&arguments),
        Command::Run(arguments) => run::main(&arguments),
    };
    match done {
        Ok(code) => ExitCode::from(code),
        Err(failure) => {
            complain(&failure.to_string());
            ExitCode::from(match failure {
                Failure::Input(_) => WRONG,
                Failure::System { .. } => FAILED,
            })
        }
    }
}

/// Prints the answer to standard output. A reader that has gone away (`eyot run .. | head`) is not a failure.
fn say(text: &str) {
    use std::io::Write;
    let _ = writeln!(std::io::stdout(), "{}", text.trim_end_matches('\n'));
}

/// Prints to standard error.
fn complain(text: &str) {
    use std::io::Write;
    let _ = writeln!(std::io::stderr(), "{}", text.trim_end_matches('\n'));
}

/// A path as one would type it.
fn quoted(path: &Path) -> String {
    let text = path.display().to_string();
    if text.contains(char::is_whitespace) { format!("\"{text}\"") } else { text }
}

fn warn(warnings: &[Mistake]) {
    for warning in warnings {
        complain(&Warning(warning).to_string());
    }
}
