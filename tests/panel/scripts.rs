//! Key scripts: before, keys, after.

use std::fs;

use ratatui::layout::{Position, Rect};
use tidewright::case::presets;
use tidewright::panel::action::Action;
use tidewright::panel::key::{KEYS, When};
use tidewright::panel::line::LineId;
use tidewright::panel::state::{Mode, View};
use tidewright::panel::view;
use tidewright::planning::target::Asked;
use tidewright::quantity::show::PressureUnit;

use crate::hands::Hands;

fn rate(hands: &Hands) -> Option<f64> {
    hands.state.turned.trial.rate_per_min
}

#[test]
fn arrows_turn_by_the_ventilators_step_and_undo_brings_back() {
    let mut hands = Hands::on("injured-lungs"); // set rate 20
    let before = hands.screen(100, 30);
    hands.press("Right Right l");
    assert_eq!(rate(&hands), Some(23.0));
    hands.press("L H Left");
    assert_eq!(rate(&hands), Some(22.0));
    hands.press("u u u u u u");
    assert_eq!(
        (rate(&hands), hands.screen(100, 30).replace(" Undone: rate 21/min.", "")),
        (None, again(&before, &hands))
    );
    hands.press("^R ^R");
    assert_eq!(rate(&hands), Some(22.0));
}

/// The same screen, but for the row that says what was undone.
fn again(before: &str, hands: &Hands) -> String {
    let now = hands.screen(100, 30);
    let rows = before.lines().zip(now.lines()).enumerate();
    rows.map(|(y, (before, now))| if y == 28 { now.replace(" Undone: rate 21/min.", "") } else { before.to_owned() } + "\n").collect()
}

#[test]
fn a_value_is_typed_with_any_unit_and_counts_only_after_enter() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("j").types("0.35 L");
    assert_eq!(hands.state.turned.trial.tidal_volume_ml, None);
    hands.press("Enter");
    assert_eq!(hands.state.turned.trial.tidal_volume_ml, Some(350.0));
    hands.types("4").press("Esc");
    assert_eq!(hands.state.turned.trial.tidal_volume_ml, Some(350.0));
}

#[test]
fn out_of_range_is_said_and_the_text_stays() {
    let mut hands = Hands::on("injured-lungs");
    hands.types("260").press("Enter");
    assert_eq!(rate(&hands), None);
    assert!(hands.screen(100, 30).contains("set rate of 260/min is above what is plausible, 4 to 60/min"));
    assert!(matches!(&hands.state.mode, Mode::Typing(input) if input.value() == "260"));
    hands.press("Backspace Enter");
    assert_eq!(rate(&hands), Some(26.0));
}

#[test]
fn what_leaves_no_time_to_breathe_out_is_refused_with_the_reason() {
    let mut hands = Hands::on("injured-lungs"); // inspiratory time 0.9 s: 60/(0.9 + 0.1) = 60/min is the end
    hands.types("60").press("Enter");
    assert!(hands.screen(160, 50).contains("leaves no time to breathe out"), "{}", hands.screen(160, 50));
    assert_eq!(rate(&hands), None);
}

#[test]
fn fit_goal_and_gentlest_dial_what_the_plan_says() {
    // The plan of the command line for this case: by rate 26, gentlest 30 × 260.
    let mut hands = Hands::on("injured-lungs");
    hands.press("f");
    assert_eq!(rate(&hands), Some(26.0));
    assert!(
        hands.screen(160, 50).contains("PaCO2 46 mmHg (exactly 26.2); beyond its limit: mechanical power.")
    );
    hands.press("n g");
    assert_eq!((rate(&hands), hands.state.turned.trial.tidal_volume_ml), (Some(30.0), Some(260.0)));
    hands.press("n");
    hands.state.marked = LineId::Goal;
    hands.types("52").press("Enter k k k f"); // resistance: says what can be fitted
    assert_eq!(hands.state.turned.goal, Asked::Paco2(52.0));
    assert!(hands.screen(160, 50).contains("mark one of them first"));
    hands.state.marked = LineId::Rate;
    hands.press("f");
    assert!((hands.paco2() - 52.0).abs() < 1.5, "{}", hands.paco2());
}

#[test]
fn the_goal_is_a_pressure_or_a_ph_and_returns_to_the_profile() {
    let mut hands = Hands::on("injured-lungs");
    hands.state.marked = LineId::Goal;
    hands.types("7.3").press("Enter");
    assert_eq!(hands.state.turned.goal, Asked::Ph(7.3));
    hands.press("Right");
    assert_eq!(hands.state.turned.goal, Asked::Ph(7.31));
    hands.press("Backspace");
    assert_eq!(hands.state.turned.goal, Asked::Profile);
    hands.state.face.unit = PressureUnit::KPa;
    hands.types("7.3").press("Enter");
    assert!(hands.screen(100, 30).contains("could be a pH or a PaCO2 in kPa"));
}

#[test]
fn what_ifs_move_the_forecast_and_cannot_be_charted_as_a_plan() {
    let mut hands = Hands::on("injured-lungs");
    hands.state.marked = LineId::Co2Output;
    hands.types("1").press("Backspace").types("x0.9").press("Enter");
    // PaCO2 is proportional to CO2 output: 60 × 0.9 = 54, by hand.
    assert!((hands.paco2() - 54.0).abs() < 1e-9, "{}", hands.paco2());
    hands.press("c");
    assert!(hands.screen(100, 30).contains("that is no plan"));
    hands.press("Backspace");
    assert!((hands.paco2() - 60.0).abs() < 1e-9);
}

#[test]
fn a_switch_of_control_keeps_the_volume_and_shows_its_own_lines() {
    let mut hands = Hands::on("injured-lungs");
    hands.state.marked = LineId::Control;
    hands.press("Right");
    let screen = hands.screen(100, 30);
    assert!(screen.contains("insp. pressure cmH2O") && !screen.contains("tidal volume mL"), "{screen}");
    assert!((hands.tried(|state| state.tidal_volume_ml) - 296.0).abs() < 0.5); // exhaled 296 mL is charted
    hands.press("Left");
    assert_eq!(hands.state.turned.trial.control, None);
}

#[test]
fn slots_keep_and_bring_back() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("l l s 1 n s 2 l s 1");
    assert_eq!(rate(&hands), Some(22.0));
    hands.state.view = View::Kept;
    let screen = hands.screen(160, 50);
    assert!(screen.contains("22, 300 mL") && screen.contains("20, 300 mL"), "{screen}");
    hands.press("s 1"); // the very same: emptied
    assert!(hands.state.slots[0].is_none());
}

#[test]
fn the_table_is_walked_and_a_pair_taken() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("Tab Enter Right Right Down Enter");
    assert_eq!((rate(&hands), hands.state.turned.trial.tidal_volume_ml), (Some(22.0), Some(310.0)));
    hands.press("Enter Left Esc");
    assert_eq!(rate(&hands), Some(22.0));
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
fn pasted_text_goes_into_a_field_and_is_dropped_elsewhere() {
    let mut hands = Hands::on("injured-lungs");
    hands.act(Action::Paste("lllq".to_owned()));
    assert!(rate(&hands).is_none() && !hands.left && hands.screen(100, 30).contains("was dropped"));
    hands.press("2 Backspace");
    hands.act(Action::Paste("2\u{1b}6\nq".to_owned()));
    hands.press("Enter");
    assert_eq!(rate(&hands), Some(26.0));
}

#[test]
fn a_profile_changes_limits_and_goal_and_is_undone() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("p j Enter");
    let screen = hands.screen(160, 50);
    assert!(
        screen.contains("brain-injury (chosen here)") && screen.contains("PaCO2 35–45 mmHg, profile"),
        "{screen}"
    );
    hands.press("u Down");
    assert!(!hands.screen(160, 50).contains("brain-injury"));
}

#[test]
fn the_mouse_marks_turns_opens_and_takes() {
    let mut hands = Hands::on("injured-lungs");
    let area = Rect::new(0, 0, 100, 30);
    let screen = hands.screen(100, 30);
    let find = |words: &str| {
        let (y, row) = screen.lines().enumerate().find(|(_, row)| row.contains(words)).unwrap();
        let x = row
            .chars()
            .collect::<Vec<_>>()
            .windows(words.chars().count())
            .position(|part| part.iter().collect::<String>() == words);
        Position { x: u16::try_from(x.unwrap()).unwrap() + 1, y: u16::try_from(y).unwrap() }
    };
    let touch = |hands: &mut Hands, at: Position, wheel: i32| {
        let action =
            view::touched(&hands.state, area, at, wheel).unwrap_or_else(|| panic!("nothing at {at}"));
        hands.act(action);
    };
    touch(&mut hands, find("PEEP"), 0);
    assert_eq!(hands.state.marked, LineId::Peep);
    touch(&mut hands, find("rate /min"), 1);
    assert_eq!((hands.state.marked, rate(&hands)), (LineId::Rate, Some(21.0)));
    touch(&mut hands, find(" table "), 0);
    assert_eq!(hands.state.view, View::Table);
    let table = hands.screen(100, 30);
    let row = table.lines().position(|row| row.trim_start().starts_with("300 ")).unwrap();
    touch(&mut hands, Position { x: 10, y: u16::try_from(row).unwrap() }, 0);
    assert_ne!(rate(&hands), Some(21.0));
}

#[test]
fn help_is_searched_and_enter_does_it() {
    let mut hands = Hands::on("injured-lungs");
    hands.press("?").types("gentlest").press("Enter");
    assert_eq!(rate(&hands), Some(30.0));
    hands.press("?").types("apparatus").press("Enter");
    assert_eq!(hands.state.marked, LineId::Apparatus);
}

#[test]
fn under_support_the_panel_says_why_there_is_no_forecast() {
    let mut hands = Hands::on("ready-to-wean");
    let screen = hands.screen(80, 24);
    assert!(screen.contains("every breath is the patient's own") && screen.contains("Press e"), "{screen}");
    hands.press("l f g c n u Tab Tab Tab Tab Tab");
    assert!(hands.screen(80, 24).contains("record"));
}

/// Every press of every row changes the screen, in some state that it can be met in.
#[test]
fn each_key_does_something_visible() {
    let met = |when: When| -> Vec<&'static str> {
        match when {
            When::Look => {
                vec!["", "l l", "j l", "l u", "Tab Tab Tab Tab Tab", "v", "Tab Tab Tab Tab Tab v PageDown"]
            }
            When::Typing => vec!["2 2"],
            When::Walk => vec!["Tab Enter Right Down"],
            When::Slots => vec!["l s"],
            When::Form => vec!["e 8 Enter Down Tab"],
            When::Chart => vec!["l c"],
            When::Naming => vec!["l c Enter"],
            When::Profiles => vec!["p j j"],
            When::Note => vec!["w"],
            When::Help => vec!["? PageDown"],
            When::Leave => vec!["e 8 Esc q"],
            When::Recover => vec![],
        }
    };
    for row in KEYS.iter().filter(|row| !matches!(row.when, When::Recover)) {
        // To a file, to the clipboard, and out: these are effects, tested in a real terminal.
        for (press, action) in row.presses {
            let outside = matches!(
                action,
                Action::NoteToFile
                    | Action::NoteToClipboard
                    | Action::Leave
                    | Action::LeaveAnyway
                    | Action::Suspend
            ) || (row.when == When::Naming && *action == Action::Accept);
            if outside {
                continue;
            }
            let seen = met(row.when).into_iter().any(|keys| {
                let mut hands = Hands::on("injured-lungs");
                hands.press(keys);
                assert_eq!(When::of(&hands.state.mode), row.when, "{keys} does not lead to {:?}", row.when);
                let before = (hands.screen(100, 30), hands.state.marked);
                hands.act(action.clone());
                (hands.screen(100, 30), hands.state.marked) != before
            });
            assert!(seen, "{:?} {} ({press:?}) shows nothing", row.when, row.shown);
        }
    }
}

/// Obstruction under pressure control: six keys show that past the summit a faster rate raises PaCO2.
#[test]
fn six_keys_show_the_summit() {
    let mut hands = Hands::on("obstruction-pressure"); // rate 28, PaCO2 72
    let mut seen = vec![hands.paco2()];
    for _ in 0..3 {
        hands.press("H");
        seen.push(hands.paco2());
    }
    assert!(seen.windows(2).all(|pair| pair[1] < pair[0]), "slower clears more: {seen:?}");
    for _ in 0..3 {
        hands.press("L");
        seen.push(hands.paco2());
    }
    assert!(seen[3..].windows(2).all(|pair| pair[1] > pair[0]), "faster clears less: {seen:?}");
    let screen = hands.screen(100, 30);
    assert!(screen.contains("Past the summit (▲ 12/min") && screen.contains("a faster rate"), "{screen}");
}

/// Injured lungs: 15 × 400 moves the air of 20 × 300, clears more, and costs driving pressure.
#[test]
fn fewer_larger_breaths_clear_more_and_cost_driving_pressure() {
    let mut hands = Hands::on("injured-lungs");
    let before = hands.tried(|state| {
        (state.minute_ventilation_l_min, state.paco2_mmhg, state.driving_pressure_cmh2o.unwrap())
    });
    hands.types("15").press("Enter j").types("400").press("Enter");
    let after = hands.tried(|state| {
        (state.minute_ventilation_l_min, state.paco2_mmhg, state.driving_pressure_cmh2o.unwrap())
    });
    assert!(
        (before.0 - after.0).abs() < 1e-9 && after.1 < before.1 - 3.0 && after.2 > before.2 + 3.0,
        "{before:?} {after:?}"
    );
    let screen = hands.screen(100, 30);
    assert!(screen.contains("fewer, larger breaths pay for their dead space less"), "{screen}");
}
