//! Whole screens, symbols and styles.

use tidewright::case::presets::CASES;
use tidewright::panel::line::LineId;
use tidewright::panel::state::View;
use tidewright::panel::theme::{Depth, Ground, Theme};
use tidewright::quantity::show::PressureUnit;

use crate::hands::{Hands, styles, text};

const SIZES: [(u16, u16); 3] = [(80, 24), (100, 30), (160, 50)];

fn snapshot(name: &str, hands: &Hands, (width, height): (u16, u16)) {
    let buffer = hands.buffer(width, height);
    let mut settings = insta::Settings::clone_current();
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    settings.bind(|| insta::assert_snapshot!(name, format!("{}\n{}", text(&buffer), styles(&buffer))));
}

#[test]
fn each_view_at_each_size() {
    for view in View::ALL {
        for size in SIZES {
            let mut hands = Hands::on("injured-lungs");
            hands.press("l l l l s 1 l l");
            hands.state.message = None;
            hands.state.view = view;
            snapshot(&format!("view-{}-{}x{}", view.name(), size.0, size.1), &hands, size);
        }
    }
}

#[test]
fn each_demonstration_case() {
    for preset in &CASES {
        let mut hands = Hands::on(preset.name);
        hands.press("l l");
        hands.state.message = None;
        snapshot(&format!("case-{}", preset.name), &hands, (100, 30));
    }
}

#[test]
fn each_terminal() {
    let themes = [
        ("dark-true", Depth::True, Ground::Dark),
        ("light-true", Depth::True, Ground::Light),
        ("dark-16", Depth::Sixteen, Ground::Dark),
        ("light-16", Depth::Sixteen, Ground::Light),
        ("no-colour", Depth::None, Ground::Dark),
    ];
    for (name, depth, ground) in themes {
        let mut hands = Hands::on("leak");
        hands.press("l l");
        hands.state.theme = Theme { depth, ground };
        snapshot(&format!("terminal-{name}"), &hands, (100, 30));
    }
    let mut hands = Hands::on("obstruction-pressure");
    hands.state.face.ascii = true;
    hands.state.face.unit = PressureUnit::KPa;
    hands.press("H");
    snapshot("terminal-ascii-kpa", &hands, (100, 30));
    assert!(hands.screen(100, 30).is_ascii());
}

#[test]
fn every_view_and_page_is_ascii_when_asked() {
    for view in View::ALL {
        for case in ["injured-lungs", "three-days", "obstruction-pressure", "triggering"] {
            let mut hands = Hands::on(case);
            hands.state.face.ascii = true;
            hands.press("l s 1 l");
            hands.state.view = view;
            let screen = hands.screen(160, 50);
            assert!(screen.is_ascii(), "{case} {}\n{screen}", view.name());
            assert!(!screen.contains('?') || case == "triggering" || screen.contains("? keys"), "{screen}");
        }
    }
}

#[test]
fn each_page() {
    for (name, keys) in [
        ("form", "e 1 1 : 4 0 Enter 7 . 3 1 Enter"),
        ("chart", "l l c"),
        ("naming", "l l c Enter"),
        ("profiles", "p j"),
        ("help", "? r a t e"),
        ("leave", "e 8 Esc q"),
        ("typing", "2 6"),
        ("slots", "l s"),
        ("large", "l l v"),
    ] {
        let mut hands = Hands::on("injured-lungs");
        hands.press(keys);
        snapshot(&format!("page-{name}"), &hands, (100, 30));
    }
    let hands = Hands::on("injured-lungs");
    snapshot("too-small", &hands, (59, 18));
    let mut hands = Hands::on("triggering");
    hands.state.marked = LineId::Goal;
    snapshot("smallest", &hands, (60, 18));
}

/// At 80×24 nothing essential is lost: PaCO2 with its interval, pH, a verdict for every limit, cautions, keys, safety.
#[test]
fn eighty_by_twenty_four_loses_nothing_essential() {
    for preset in CASES.iter().filter(|preset| preset.name != "ready-to-wean") {
        let mut hands = Hands::on(preset.name);
        hands.press("l");
        hands.state.message = None;
        let screen = hands.screen(80, 24);
        let limits = hands.state.charted.profile().limits.len();
        let verdicts: usize = ["within", "~ near", "! beyond", "? unknown"]
            .iter()
            .map(|word| screen.lines().filter(|row| row.trim_end().ends_with(word)).count())
            .sum();
        assert_eq!(verdicts, limits, "{}\n{screen}", preset.name);
        for words in [
            "PaCO2 mmHg",
            "1 gas in 2 in",
            "9 in 10 in",
            "in 100 land",
            "pH",
            "goal",
            "turn",
            "? keys",
            "Decision support",
        ] {
            assert!(screen.contains(words), "{}: {words}\n{screen}", preset.name);
        }
    }
}
