//! What is said about wrong calls: nothing on standard output, a sentence with the next step on standard error.

use crate::program::{matches, run, run_with, shown};

/// Runs calls that must be refused with this status, and keeps what is said of them in one snapshot.
fn refused(name: &str, status: i32, lines: &[&str]) {
    let mut text = String::new();
    for line in lines {
        let ran = run(line);
        assert_eq!(ran.status, status, "{line}: {}{}", ran.out, ran.err);
        assert!(ran.out.is_empty(), "{line} mixes errors and output");
        assert!(ran.err.starts_with("error: "), "{line}: {}", ran.err);
        text.push_str(&shown(line, &ran));
        text.push('\n');
    }
    matches(name, &text);
}

#[test]
fn wrong_flags() {
    refused(
        "wrong_flags",
        2,
        &[
            "plan --tidal-volum 380",
            "plan injured-lungs --to-paco2 50 --to-ph 7.3",
            "plan injured-lungs --aim fastest",
            "plan injured-lungs --paco2 60",
            "plan injured-lungs --try-rate 20",
            "plan injured-lungs --inspiratory-time 0.8 --ratio 1:2",
            "plan injured-lungs --inspiratory-pressure 14",
            "plan injured-lungs --to-paco2 fifty",
            "plan injured-lungs --to-ph 73",
            "plan injured-lungs --profile nowhere",
            "forecast injured-lungs --co2-production x9",
            "forecast injured-lungs --rate 60 --inspiratory-time 2",
            "forecast injured-lungs --tidal-volume 60",
            "plan",
            "plann injured-lungs",
            "check",
            "completions basic",
            "cases --show nobody",
        ],
    );
}

/// Slips of a decimal or a unit, on the command line.
#[test]
fn tenfold_and_unit_slips() {
    refused(
        "slips",
        2,
        &[
            "plan --rate 220 --tidal-volume 380 --paco2 63",
            "plan --rate 22 --tidal-volume 38 --paco2 63",
            "plan --rate 22 --tidal-volume 3800 --paco2 63",
            "plan --rate 22 --tidal-volume 0.38 --paco2 63",
            "plan --rate 22 --tidal-volume 380 --paco2 8.4",
            "plan --rate 22 --tidal-volume 380 --paco2 630",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --ph 72.4",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --height 1.63",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --fio2 60",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --peep \"10 kPa\"",
            "plan injured-lungs --to-paco2 6",
            "forecast injured-lungs --rate 200",
            "forecast injured-lungs --tidal-volume 30",
        ],
    );
}

/// Numbers that cannot be true together.
#[test]
fn contradictions_among_flags() {
    refused(
        "contradictions",
        2,
        &[
            "plan --rate 22 --total-rate 16 --tidal-volume 380 --paco2 63",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --peep 12 --plateau 10",
            "plan --rate 22 --tidal-volume 380 --paco2 40 --end-tidal-co2 60",
            "plan --rate 22 --tidal-volume 100 --paco2 63 --apparatus-dead-space 120",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --control pressure --inspiratory-pressure 14",
            "plan --rate 22 --tidal-volume 380 --paco2 63 --auto-peep 2 --total-peep 20 --peep 10",
            "plan --rate 22 --tidal-volume 380",
            "plan --paco2 63",
        ],
    );
}

/// Under support every breath is the patient's own: refused with the reason.
#[test]
fn support_is_refused() {
    refused(
        "support",
        2,
        &[
            "plan ready-to-wean",
            "forecast ready-to-wean --rate 14",
            "plan --control support --inspiratory-pressure 8 --rate 14 --paco2 45",
        ],
    );
}

#[test]
fn what_cannot_be_read_ends_in_3() {
    refused(
        "unreadable",
        3,
        &[
            "plan no-such-file.toml",
            "forecast reference --rate 20",
            "check no-such-file.toml",
            "review no-such-file.csv",
        ],
    );
    let binary = run_with("plan -", &[0xff, 0xfe, 0x00]);
    assert_eq!((binary.status, binary.out.as_str()), (2, ""));
    assert!(binary.err.contains("UTF-8"), "{}", binary.err);
    let nothing = run_with("plan -", b"");
    assert_eq!(nothing.status, 2);
    assert!(nothing.err.starts_with("error: "), "{}", nothing.err);
}
