//! The thrustmark program; everything is in the library.

use std::process::ExitCode;

fn main() -> ExitCode {
    thrustmark::cli::run()
}
