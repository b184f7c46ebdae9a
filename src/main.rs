//! The program: hands the arguments and the three streams to [`nulltray::cli`] and returns its exit code.

use std::process::ExitCode;
use std::{env, io};

use nulltray::cli;

fn main() -> ExitCode {
    cli::guard(|| {
        cli::run(
            env::args_os(),
            &mut io::stdin(),
            &mut io::stdout(),
            &mut io::stderr(),
        )
    })
}
