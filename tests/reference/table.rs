//! Reading a reference table.

use std::path::Path;

use toml::{Table, Value};

/// A table of `tests/reference/`.
pub fn read(name: &str) -> Table {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference").join(name);
    std::fs::read_to_string(&path).unwrap().parse().unwrap()
}

/// The rows under a key.
pub fn rows(table: &Table, key: &str) -> Vec<Table> {
    let list = table[key].as_array().unwrap_or_else(|| panic!("{key} is no list"));
    list.iter().map(|row| row.as_table().unwrap().clone()).collect()
}

/// A number of a row.
pub fn number(row: &Table, key: &str) -> f64 {
    maybe(row, key).unwrap_or_else(|| panic!("{key} is missing in {row:?}"))
}

/// A number of a row that may be missing.
pub fn maybe(row: &Table, key: &str) -> Option<f64> {
    match row.get(key)? {
        Value::Float(value) => Some(*value),
        Value::Integer(value) => Some(*value as f64),
        other => panic!("{key} = {other:?} is no number"),
    }
}

/// The worst disagreement of a comparison, and the row it stood in.
pub struct Worst {
    limit: f64,
    off: f64,
    at: String,
    count: usize,
}

impl Worst {
    /// None yet; more than `limit` will not do.
    pub fn allowed(limit: f64) -> Self {
        Self { limit, off: 0.0, at: String::new(), count: 0 }
    }

    /// Compares two values by the larger of an absolute and a relative measure: |found − expected| over
    /// max(|expected|, `floor`).
    pub fn compare(&mut self, found: f64, expected: f64, floor: f64, at: impl Into<String>) {
        let off = (found - expected).abs() / expected.abs().max(floor);
        self.count += 1;
        if off.is_nan() || off > self.off {
            self.off = if off.is_nan() { f64::INFINITY } else { off };
            self.at = format!("{}: found {found}, expected {expected}", at.into());
        }
    }

    /// Fails when anything was further off than allowed, or when fewer than `least` values were compared.
    pub fn judge(self, least: usize) {
        assert!(self.count >= least, "only {} values compared", self.count);
        assert!(self.off <= self.limit, "off by {:e} (allowed {:e}) at {}", self.off, self.limit, self.at);
    }
}
