//! pH at constant base excess, on pairs of consecutive arterial gases of an open ICU database.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    clippy::print_stdout,
    reason = "a test may stop at the first surprise, and its figures are meant to be read with --nocapture"
)]

use tidewright::physiology::acid_base::{base_excess, ph_at};

/// MIMIC-IV Clinical Database Demo v2.2 (PhysioNet 2023, doi:10.13026/dp1f-ex47), ODbL: see tests/reference/data/LICENCE.md.
const PAIRS: &str = include_str!("reference/data/open_icu_ph_pairs.csv");

/// Mean absolute errors of the second pH: with base excess kept, and by "unchanged"; and the number of pairs.
fn errors() -> (f64, f64, usize) {
    let rows = PAIRS.lines().filter(|line| line.starts_with(|first: char| first.is_ascii_digit()));
    let (mut kept, mut unchanged, mut pairs) = (0.0, 0.0, 0);
    for row in rows {
        // patient, stay, gap_h, pco2_1, ph_1, pco2_2, ph_2
        let cells: Vec<f64> = row.split(',').map(|cell| cell.parse().unwrap()).collect();
        let [_, _, _, paco2_before, ph_before, paco2_after, ph_after] = cells[..] else { panic!("{row}") };
        let excess = base_excess(ph_before, paco2_before);
        kept += (ph_at(excess, paco2_after) - ph_after).abs();
        unchanged += (ph_before - ph_after).abs();
        pairs += 1;
    }
    let count = f64::from(u32::try_from(pairs).unwrap());
    (kept / count, unchanged / count, pairs)
}

/// The file holds 129 pairs below its header. Known of it from an earlier count outside this project: about 0.04 against
/// 0.07; 0.05 is the bound that the engine's contract sets.
#[test]
fn ph_at_constant_base_excess_errs_less_than_an_unchanged_ph() {
    let (kept, unchanged, pairs) = errors();
    println!("mean |error| of pH over {pairs} pairs: base excess kept {kept:.4}, unchanged {unchanged:.4}");
    assert_eq!(pairs, 129);
    assert!(kept < 0.05, "base excess kept: {kept}");
    assert!(kept < unchanged, "base excess kept {kept}, unchanged {unchanged}");
}
