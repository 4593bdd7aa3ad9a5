//! Which keys stand in which table; the numeric ones come from the table of inputs.

use crate::quantity::input::INPUTS;

/// The tables of a case file: name, header, keys that are not single numbers.
const TABLES: [(&str, &str, &[&str]); 11] = [
    ("", "", &["format", "label", "profile", "steadiness", "patient", "entry"]),
    ("patient", "[patient]", &["sex", "airway"]),
    (
        "entry",
        "[[entry]]",
        &["at", "by", "settings", "measured", "gas", "weaning", "trial", "plan", "note", "amends"],
    ),
    ("settings", "[entry.settings]", &["control", "flow_pattern"]),
    ("measured", "[entry.measured]", &[]),
    ("gas", "[entry.gas]", &["drawn_at"]),
    ("weaning", "[entry.weaning]", &[]),
    ("trial", "[entry.trial]", &["started_at", "outcome", "observation"]),
    ("observation", "[[entry.trial.observation]]", &[]),
    ("plan", "[entry.plan]", &["aim"]),
    ("note", "[entry.note]", &["text", "amends"]),
];

/// The header of a table as it is written.
pub(super) fn header(table: &str) -> &'static str {
    TABLES.iter().find(|(name, _, _)| *name == table).map_or("", |(_, header, _)| header)
}

/// The keys of a table.
pub(super) fn keys(table: &str) -> Vec<&'static str> {
    let named =
        TABLES.iter().filter(|(name, _, _)| *name == table).flat_map(|(_, _, keys)| keys.iter().copied());
    let numbers = INPUTS.iter().filter(|input| input.table == table).map(|input| input.name);
    named.chain(numbers).collect()
}

/// Where a key that was typed under `table` belongs, when it is a key of another one.
pub(super) fn home_of(key: &str, table: &str) -> Option<String> {
    // Trials, plans and observations repeat keys of other tables and are rarely meant.
    let likely = ["", "patient", "entry", "settings", "measured", "gas", "weaning", "note"];
    likely.into_iter().find(|home| *home != table && keys(home).contains(&key)).map(|home| {
        if home.is_empty() { "no header, at the top of the file".to_owned() } else { header(home).to_owned() }
    })
}
