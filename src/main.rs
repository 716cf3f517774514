//! The `reboundary` program: everything is in the library's `cli` room.

use std::process::ExitCode;

fn main() -> ExitCode {
    reboundary::cli::main()
}
