//! Charting, the form, leaving and coming back: before, keys, after, and what is in the file.

use std::fs;

use tidewright::case::presets;
use tidewright::panel::recovery::Kept;
use tidewright::panel::state::Mode;

use crate::hands::Hands;

fn rate(hands: &Hands) -> Option<f64> {
    hands.state.turned.trial.rate_per_min
}

#[test]
fn the_form_takes_a_gas_and_says_what_is_wrong_beside_the_field() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bed.toml");
    fs::write(&path, presets::case("injured-lungs").unwrap().text).unwrap();
    let known = fs::read(&path).unwrap();
    let mut hands = Hands::on_file(&path);
    hands.press("e").types("11:40").press("Enter").types("7,31").press("Enter").types("490").press("Enter");
    assert!(hands.screen(160, 50).contains("PaCO2 of 490 mmHg is above what is plausible"));
    hands.press("Backspace PageDown Enter");
    let bytes = fs::read(&path).unwrap();
    assert!(bytes.starts_with(&known));
    let added = String::from_utf8(bytes[known.len()..].to_vec()).unwrap();
    assert_eq!(
        added,
        "\n[[entry]]\nat = 2026-03-20T12:00:00+01:00\n\n[entry.gas]\ndrawn_at = 2026-03-20T11:40:00+01:00\nph = 7.31\npaco2 = 49\n"
    );
    assert!(hands.screen(100, 30).contains("Charted as entry 3"));
    assert!(hands.row("PaCO2 mmHg").contains("49"));
}

#[test]
fn a_contradiction_is_said_at_its_field_and_nothing_is_written() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bed.toml");
    fs::write(&path, presets::case("injured-lungs").unwrap().text).unwrap();
    let known = fs::read(&path).unwrap();
    let mut hands = Hands::on_file(&path);
    hands.press("e Tab Down Down").types("22").press("Down").types("18").press("PageDown Enter");
    assert_eq!(fs::read(&path).unwrap(), known);
    let screen = hands.screen(160, 50);
    assert!(screen.contains("! ") && screen.contains("peak"), "{screen}");
    assert!(matches!(hands.state.mode, Mode::Form(_)));
}

#[test]
fn charting_shows_what_will_be_written_and_the_file_grows_by_that() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bed.toml");
    fs::write(&path, presets::case("injured-lungs").unwrap().text).unwrap();
    let known = fs::read(&path).unwrap();
    let mut hands = Hands::on_file(&path);
    hands.press("l l l l l l c");
    let shown = hands.screen(100, 30);
    for words in ["[entry.plan]", "rate = 26", "aim = \"rate\"", "tidal_volume = 300"] {
        assert!(shown.contains(words), "{words}\n{shown}");
    }
    hands.press("Space Enter");
    let bytes = fs::read(&path).unwrap();
    assert!(bytes.starts_with(&known));
    let added = String::from_utf8(bytes[known.len()..].to_vec()).unwrap();
    assert!(added.contains("[entry.settings]\nrate = 26\n") && added.contains("[entry.plan]"), "{added}");
    // Dialled as planned: now is a forecast from the gas before, and nothing is turned.
    assert!(hands.screen(100, 30).contains("now (forecast)"));
    assert_eq!(rate(&hands), None);
}

#[test]
fn nothing_turned_is_nothing_to_chart() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("c");
    assert!(hands.screen(100, 30).contains("Nothing is turned"));
}

#[test]
fn a_built_in_case_asks_for_a_file_and_never_writes_over_one() {
    let folder = tempfile::tempdir().unwrap();
    let taken = folder.path().join("taken.toml");
    fs::write(&taken, "mine").unwrap();
    let mut hands = Hands::on("injured-lungs");
    hands.press("l c Enter");
    let Mode::Naming { name, .. } = &mut hands.state.mode else { panic!("no name is asked for") };
    assert_eq!(name.value(), "bed-3.toml");
    *name = tui_input::Input::new(taken.display().to_string());
    hands.press("Enter");
    assert_eq!(fs::read_to_string(&taken).unwrap(), "mine");
    assert!(hands.screen(160, 50).contains("choose another name"));
    let Mode::Naming { name, .. } = &mut hands.state.mode else { panic!("the question is gone") };
    *name = tui_input::Input::new(folder.path().join("new.toml").display().to_string());
    hands.press("Enter");
    assert!(fs::read_to_string(folder.path().join("new.toml")).unwrap().contains("rate = 21"));
}

#[test]
fn a_second_panel_only_reads_and_says_so_and_a_file_changed_on_disk_is_noticed() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bed.toml");
    fs::write(&path, presets::case("injured-lungs").unwrap().text).unwrap();
    let mut first = Hands::on_file(&path);
    let mut second = Hands::on_file(&path);
    assert!(second.screen(160, 50).contains("READ ONLY"));
    second.press("l c");
    assert!(second.screen(160, 50).contains("is open elsewhere, so here it is read-only"));
    let other = fs::read_to_string(&path).unwrap().replace("paco2 = 60", "paco2 = 66");
    fs::write(&path, &other).unwrap();
    first.press("l c Enter");
    assert!(first.screen(160, 50).contains("was changed since it was read"));
    assert_eq!(fs::read_to_string(&path).unwrap(), other);
}

#[test]
fn leaving_asks_only_when_something_typed_is_not_charted() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("l l q");
    assert!(hands.left);
    let mut hands = Hands::on("injured-lungs");
    hands.press("e").types("08:00").press("Esc q");
    assert!(!hands.left && hands.screen(100, 30).contains("Not charted yet"));
    hands.press("^C ^C");
    assert!(!hands.left, "a second Ctrl-C is no answer");
    hands.press("Esc");
    assert!(matches!(hands.state.mode, Mode::Form(_)));
    hands.press("Esc q y");
    assert!(hands.left);
}

#[test]
fn what_was_typed_before_a_loss_is_brought_back_and_leaving_does_not_throw_it_away() {
    let mut before = Hands::on("injured-lungs");
    before.press("l l e Down").types("7.3").press("Esc");
    let kept = Kept::of(&before.state);
    let mut hands = Hands::on("injured-lungs");
    hands.state.mode = Mode::Recover(Box::new(kept.clone()));
    assert!(hands.screen(100, 30).contains("rate: 22") && hands.screen(100, 30).contains("ph: 7.3"));
    hands.press("^C");
    assert!(hands.left && matches!(hands.state.mode, Mode::Recover(_)));
    hands.press("Enter");
    assert_eq!(rate(&hands), Some(22.0));
    assert!(matches!(&hands.state.mode, Mode::Form(form) if form.holds_anything()));
    // The record grew meanwhile: what was turned no longer holds, what was typed does.
    let mut later = Hands::on("injured-lungs");
    later.state.mode = Mode::Recover(Box::new(Kept { entries: 9, ..kept }));
    later.press("y");
    assert_eq!(rate(&later), None);
    assert!(matches!(later.state.mode, Mode::Form(_)));
}
