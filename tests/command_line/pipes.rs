//! A closed pipe ends quietly.

use std::process::{Command, Stdio};

/// The reader is gone before anything is written, as with `tidewright … | head -0`.
#[test]
fn a_closed_pipe_ends_quietly() {
    for line in
        ["plan injured-lungs", "forecast leak --rate 20 --json", "plan --help", "manual", "completions bash"]
    {
        let (reader, writer) = std::io::pipe().unwrap();
        drop(reader);
        let ran = Command::new(env!("CARGO_BIN_EXE_tidewright"))
            .args(line.split(' '))
            .stdin(Stdio::null())
            .stdout(writer)
            .stderr(Stdio::piped())
            .output()
            .unwrap();
        assert_eq!(String::from_utf8(ran.stderr).unwrap(), "", "{line}");
        assert_eq!(ran.status.code(), Some(0), "{line}");
    }
}
