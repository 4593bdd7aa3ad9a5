use super::*;
use std::fs;
use tempfile::TempDir;

const CASE: &str = "# Bay 3\nformat = 1\n[patient]\nsex = \"female\"\nheight = 163\n\n[[entry]]\nat = 2026-03-04T08:10:00+01:00\n[entry.settings]\nrate = 22 # set\ntidal_volume = 380\n[entry.gas]\npaco2 = 63";

fn gas(time: &str, paco2_mmhg: f64) -> Entry {
    let offset = jiff::tz::Offset::UTC;
    let at = crate::case::moment::Moment { instant: time.parse().unwrap(), offset };
    let mut entry = Entry { at: Some(at), ..Entry::default() };
    entry.gas.paco2_mmhg = Some(paco2_mmhg);
    entry
}

fn case(text: &str) -> (TempDir, PathBuf, Seen) {
    let folder = TempDir::new().unwrap();
    let path = folder.path().join("bed3.toml");
    fs::write(&path, text).unwrap();
    (folder, path, Seen::of(text.as_bytes()))
}

fn names(folder: &TempDir) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder.path())
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    names
}

#[test]
fn earlier_bytes_stay_and_the_new_entry_follows_after_one_empty_line() {
    let (folder, path, seen) = case(CASE);
    let appended = append(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap();
    let text = fs::read_to_string(&path).unwrap();
    let added = "\n\n[[entry]]\nat = 2026-03-04T08:10:00+00:00\n\n[entry.gas]\npaco2 = 52\n";
    assert_eq!(text, format!("{CASE}{added}"));
    assert_eq!((appended.text.as_str(), appended.numbers, appended.meanwhile), (added, 2..3, 0));
    assert_eq!(appended.seen, Seen::of(text.as_bytes()));
    assert_eq!(names(&folder), [".bed3.toml.lock", "bed3.toml"]);
}

#[test]
fn a_file_of_carriage_returns_gets_more_of_them() {
    let (_folder, path, seen) = case(&format!("{CASE}\n").replace('\n', "\r\n"));
    append(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap();
    let text = fs::read_to_string(&path).unwrap();
    assert_eq!(text.matches('\n').count(), text.matches("\r\n").count());
    assert!(text.ends_with(
        "paco2 = 63\r\n\r\n[[entry]]\r\nat = 2026-03-04T08:10:00+00:00\r\n\r\n[entry.gas]\r\npaco2 = 52\r\n"
    ));
}

#[test]
fn what_contradicts_the_record_is_not_written() {
    let (_folder, path, seen) = case(CASE);
    let mut wrong = gas("2026-03-04T08:10:00Z", 52.0);
    wrong.measured.total_rate_per_min = Some(12.0);
    let error = append(&path, &[wrong], &seen).unwrap_err();
    let AppendError::Invalid { problems, .. } = &error else { panic!("{error}") };
    // The record sets 22/min, and no total rate can be below that by more than 1.
    assert!(problems[0].message.contains("22"), "{}", problems[0].message);
    assert_eq!(fs::read_to_string(&path).unwrap(), CASE);
}

#[test]
fn a_second_writer_is_told_and_the_first_loses_nothing() {
    let (_folder, path, seen) = case(CASE);
    let hold = Hold::take(&path).unwrap();
    let entries = [gas("2026-03-04T08:10:00Z", 52.0)];
    assert!(matches!(append(&path, &entries, &seen), Err(AppendError::Elsewhere(_))));
    let first = hold.append(&entries, &seen).unwrap();
    hold.append(&[gas("2026-03-04T09:10:00Z", 50.0)], &first.seen).unwrap();
    drop(hold);
    let now = Seen::of(&fs::read(&path).unwrap());
    assert_eq!(append(&path, &[gas("2026-03-04T10:10:00Z", 48.0)], &now).unwrap().numbers, 4..5);
}

#[test]
fn what_others_added_at_the_end_is_kept_and_counted() {
    let (_folder, path, seen) = case(CASE);
    append(&path, &[gas("2026-03-04T08:10:00Z", 52.0), gas("2026-03-04T08:40:00Z", 51.0)], &seen).unwrap();
    let late = append(&path, &[gas("2026-03-04T09:10:00Z", 50.0)], &seen).unwrap();
    assert_eq!((late.meanwhile, late.numbers), (2, 4..5));
}

#[test]
fn a_file_changed_in_what_was_read_is_left_alone() {
    let (_folder, path, seen) = case(CASE);
    let other = CASE.replace("paco2 = 63", "paco2 = 36");
    fs::write(&path, &other).unwrap();
    let error = append(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap_err();
    assert!(matches!(error, AppendError::Changed(_)), "{error}");
    assert_eq!(fs::read_to_string(&path).unwrap(), other);
    fs::remove_file(&path).unwrap();
    let error = append(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap_err();
    assert!(matches!(error, AppendError::Gone(_)), "{error}");
    assert!(!path.exists());
}

#[test]
fn a_new_file_is_its_owners_alone_and_never_takes_the_place_of_another() {
    let folder = TempDir::new().unwrap();
    let path = folder.path().join("new.toml");
    let created = create(&path, CASE, &[gas("2026-03-04T08:10:00Z", 52.0)]).unwrap();
    assert_eq!(created.record.entries().len(), 2);
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        assert_eq!(fs::metadata(&path).unwrap().permissions().mode() & 0o777, 0o600);
    }
    assert!(matches!(create(&path, CASE, &[]), Err(AppendError::Exists(_))));
    let nowhere = folder.path().join("nowhere").join("new.toml");
    assert!(matches!(create(&nowhere, CASE, &[]), Err(AppendError::NoFolder(_))));
}

#[cfg(unix)]
#[test]
fn mode_and_links_are_kept_and_a_read_only_file_is_not_written() {
    use std::os::unix::fs::{PermissionsExt, symlink};
    let (folder, path, seen) = case(CASE);
    fs::set_permissions(&path, fs::Permissions::from_mode(0o640)).unwrap();
    let link = folder.path().join("link.toml");
    symlink("bed3.toml", &link).unwrap();
    let appended = append(&link, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap();
    assert!(fs::symlink_metadata(&link).unwrap().is_symlink());
    assert_eq!(fs::metadata(&path).unwrap().permissions().mode() & 0o777, 0o640);
    fs::set_permissions(&path, fs::Permissions::from_mode(0o440)).unwrap();
    let error = append(&path, &[gas("2026-03-04T09:10:00Z", 50.0)], &appended.seen).unwrap_err();
    assert!(matches!(error, AppendError::ReadOnly(_)), "{error}");
}

#[test]
fn what_a_killed_program_left_behind_is_swept_away_and_nothing_else() {
    let (folder, path, seen) = case(CASE);
    for name in [".bed3.toml.a1B2c3.part", ".bed3.toml.notes.part", ".bed4.toml.a1B2c3.part"] {
        fs::write(folder.path().join(name), "half").unwrap();
    }
    append(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap();
    let left = [".bed3.toml.lock", ".bed3.toml.notes.part", ".bed4.toml.a1B2c3.part", "bed3.toml"];
    assert_eq!(names(&folder), left);
}

#[test]
fn a_rehearsal_writes_nothing() {
    let (folder, path, seen) = case(CASE);
    let shown = rehearse(&path, &[gas("2026-03-04T08:10:00Z", 52.0)], &seen).unwrap();
    assert_eq!(shown.numbers, 2..3);
    assert_eq!(fs::read_to_string(&path).unwrap(), CASE);
    assert_eq!(names(&folder), ["bed3.toml"]);
}
