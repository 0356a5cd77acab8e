//! The `frostclock` command: hands the arguments to the library and its answer to the shell.

use std::process::ExitCode;

fn main() -> ExitCode {
    ExitCode::from(frostclock::command::main())
}
