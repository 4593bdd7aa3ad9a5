use super::*;
use crate::case::entry::Gas;
use crate::case::presets;

fn entry_with(paco2_mmhg: f64) -> Entry {
    let offset = jiff::tz::offset(1);
    let datetime = jiff::civil::datetime(2026, 3, 20, 9, 0, 0, 0);
    let at = crate::case::moment::Moment { instant: offset.to_timestamp(datetime).unwrap(), offset };
    Entry {
        at: Some(at),
        gas: Gas { ph: Some(7.31), paco2_mmhg: Some(paco2_mmhg), ..Gas::default() },
        ..Entry::default()
    }
}

fn case_in(folder: &Path) -> (PathBuf, Vec<u8>) {
    let path = folder.join("bed.toml");
    let bytes = presets::case("injured-lungs").unwrap().text.as_bytes().to_vec();
    fs::write(&path, &bytes).unwrap();
    (path, bytes)
}

#[test]
fn earlier_bytes_are_untouched_and_the_entry_is_there() {
    let folder = tempfile::tempdir().unwrap();
    let (path, known) = case_in(folder.path());
    let (bytes, record) = append(&path, &known, &entry_with(49.0)).unwrap();
    assert!(bytes.starts_with(&known) && fs::read(&path).unwrap() == bytes);
    assert_eq!(record.entries().last(), Some(&entry_with(49.0)));
    // A second one after it.
    let (more, _) = append(&path, &bytes, &entry_with(47.0)).unwrap();
    assert!(more.starts_with(&bytes));
}

#[test]
fn a_file_changed_meanwhile_is_left_alone() {
    let folder = tempfile::tempdir().unwrap();
    let (path, known) = case_in(folder.path());
    let other = [known.as_slice(), b"# someone else\n"].concat();
    fs::write(&path, &other).unwrap();
    assert!(matches!(append(&path, &known, &entry_with(49.0)), Err(NotAdded::Changed(_))));
    assert_eq!(fs::read(&path).unwrap(), other);
}

#[test]
fn a_faulty_record_is_not_written() {
    let folder = tempfile::tempdir().unwrap();
    let (path, known) = case_in(folder.path());
    assert!(matches!(append(&path, &known, &entry_with(490.0)), Err(NotAdded::Faulty(_))));
    assert_eq!(fs::read(&path).unwrap(), known);
}

#[test]
fn the_second_to_hold_a_file_is_told_and_the_third_may_after_the_first_is_done() {
    let folder = tempfile::tempdir().unwrap();
    let (path, _) = case_in(folder.path());
    let first = hold(&path).unwrap();
    let said = hold(&path).unwrap_err().to_string();
    assert!(said.contains("another program") && said.contains("bed.toml"), "{said}");
    drop(first);
    assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1, "the lock is left behind");
    assert!(hold(&path).is_ok());
}

#[test]
fn windows_line_ends_are_kept() {
    let folder = tempfile::tempdir().unwrap();
    let (path, known) = case_in(folder.path());
    let windows = String::from_utf8(known).unwrap().replace('\n', "\r\n");
    let windows = windows.trim_end().as_bytes().to_vec();
    fs::write(&path, &windows).unwrap();
    let (bytes, _) = append(&path, &windows, &entry_with(49.0)).unwrap();
    let text = String::from_utf8(bytes).unwrap();
    assert_eq!(text.matches('\n').count(), text.matches("\r\n").count());
}

#[cfg(unix)]
#[test]
fn the_mode_is_kept_and_a_new_file_is_for_its_owner_only() {
    use std::os::unix::fs::PermissionsExt;
    let mode = |path: &Path| fs::metadata(path).unwrap().permissions().mode() & 0o777;
    let folder = tempfile::tempdir().unwrap();
    let (path, known) = case_in(folder.path());
    fs::set_permissions(&path, fs::Permissions::from_mode(0o640)).unwrap();
    append(&path, &known, &entry_with(49.0)).unwrap();
    assert_eq!(mode(&path), 0o640);
    let new = folder.path().join("new.toml");
    create(&new, presets::case("leak").unwrap().text, &entry_with(49.0)).unwrap();
    assert_eq!(mode(&new), 0o600);
    assert!(matches!(create(&new, "", &entry_with(49.0)), Err(NotAdded::There(_))));
}
