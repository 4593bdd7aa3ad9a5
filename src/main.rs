//! The program: parse, call, print, end with a status.

fn main() -> std::process::ExitCode {
    tidewright::cli::run()
}
