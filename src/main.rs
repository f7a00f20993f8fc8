//! The command-line tool; everything is in the library.

use std::process::ExitCode;

fn main() -> ExitCode {
    eyot::cli::main(std::env::args_os())
}
