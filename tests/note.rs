//! `tidewright note`, whole: each format, what is struck, what is neutralised, what reads back.

#![allow(
    clippy::unwrap_used,
    clippy::indexing_slicing,
    clippy::panic,
    reason = "a test may stop at the first surprise"
)]

mod common;

use common::{Bed, Ran};
use serde_json::{Value, json};

fn snapshot(name: &str, text: &str) {
    let mut settings = insta::Settings::clone_current();
    settings.set_snapshot_path("snapshots");
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    settings.bind(|| insta::assert_snapshot!(name, text));
}

fn said(line: &str) -> Ran {
    let ran = Bed::with("").run(line);
    assert_eq!((ran.code, ran.err.as_str()), (Some(0), ""), "{line}");
    ran
}

#[test]
fn whole_notes_as_a_clinician_reads_them() {
    for case in ["three-days", "ready-to-wean"] {
        snapshot(&format!("note-{case}.txt"), &said(&format!("note {case}")).out);
        snapshot(&format!("note-{case}.md"), &said(&format!("note {case} --as markdown")).out);
        snapshot(&format!("note-{case}-brief.txt"), &said(&format!("note {case} --brief")).out);
    }
    snapshot("note-three-days.csv", &said("note three-days --as csv").out.replace("\r\n", "\n"));
}

#[test]
fn every_note_in_text_fits_eighty_columns_and_ends_with_the_caution() {
    for preset in &tidewright::case::presets::CASES {
        for ascii in ["", " --ascii"] {
            let text = said(&format!("note {}{ascii}", preset.name)).out;
            let widest = text.lines().map(|line| line.chars().count()).max().unwrap();
            assert!(widest <= 80, "{}: {widest} columns", preset.name);
            assert!(text.contains("Confirm with a repeat gas."), "{}", preset.name);
            assert!(ascii.is_empty() || text.is_ascii(), "{}", preset.name);
        }
        assert_eq!(said(&format!("note {} --brief", preset.name)).out.lines().count(), 2, "{}", preset.name);
    }
}

#[test]
fn a_struck_value_stays_with_its_correction_in_every_format() {
    let text = said("note three-days").out.replace("\n        ", " ");
    assert!(text.contains("[STRUCK: PaCO2 59 mmHg; entry 5 corrects it]"), "{text}");
    let markdown = said("note three-days --as markdown").out;
    assert!(markdown.contains("~~PaCO2 59 mmHg~~ (struck: entry 5 corrects it)"));
    let json: Value = serde_json::from_str(&said("note three-days --as json").out).unwrap();
    assert_eq!(json["entries"][3]["gas"]["paco2_mmhg"], json!(59.0));
    assert_eq!(
        json["entries"][3]["struck"],
        json!([{ "table": "gas", "key": "paco2", "corrected_by_entry": 5 }])
    );
    // What is computed on stands in the CSV alone.
    let csv = said("note three-days --as csv").out;
    assert!(csv.contains(",49,7.3,4,") && !csv.contains(",59,"), "{csv}");
    let bundle: Value = serde_json::from_str(&said("note three-days --as fhir").out).unwrap();
    let paco2: Vec<(f64, &str)> = observations(&bundle, "2019-8")
        .map(|it| (it["valueQuantity"]["value"].as_f64().unwrap(), it["status"].as_str().unwrap()))
        .collect();
    assert!(paco2.contains(&(59.0, "entered-in-error")) && paco2.contains(&(49.0, "corrected")), "{paco2:?}");
    assert_eq!(paco2.len(), 6);
}

fn observations<'b>(bundle: &'b Value, loinc: &'b str) -> impl Iterator<Item = &'b Value> {
    let entries = bundle["entry"].as_array().unwrap().iter();
    entries.map(|it| &it["resource"]).filter(move |it| it["code"]["coding"][0]["code"] == loinc)
}

#[test]
fn the_bundle_reads_back_to_the_same_physical_values() {
    // Built-in case "three-days", entry 1, read off the file by hand: FiO2 0.8 is 80 %, PEEP 8 cmH2O, 380 mL, 0.9 s.
    let bundle: Value = serde_json::from_str(&said("note three-days --as fhir").out).unwrap();
    let first = |loinc: &str| {
        let it = observations(&bundle, loinc).next().unwrap_or_else(|| panic!("no {loinc}"));
        let amount = &it["valueQuantity"];
        assert_eq!(amount["system"], "http://unitsofmeasure.org");
        (amount["value"].as_f64().unwrap(), amount["code"].as_str().unwrap().to_owned())
    };
    let unit = |value: f64, code: &str| (value, code.to_owned());
    assert_eq!(first("19994-3"), unit(80.0, "%"));
    assert_eq!(first("20077-4"), unit(8.0, "cm[H2O]"));
    assert_eq!(first("20112-9"), unit(380.0, "mL"));
    assert_eq!(first("76334-2"), unit(0.9, "s"));
    assert_eq!(first("2744-1"), unit(7.25, "[pH]"));
    assert_eq!(first("2703-7"), unit(71.0, "mm[Hg]"));
    // 71/0.8.
    assert_eq!(first("50984-4"), unit(88.75, "mm[Hg]"));
    assert_eq!(first("8302-2"), unit(171.0, "cm"));
    // 45.5 + 0.91·(171 − 152.4).
    assert_eq!(first("50064-5"), unit(62.426, "kg"));
}

#[test]
fn a_forecast_is_never_exported_as_a_measurement() {
    let bundle: Value = serde_json::from_str(&said("note three-days --as fhir").out).unwrap();
    let entries = bundle["entry"].as_array().unwrap();
    let forecasts: Vec<&Value> = entries
        .iter()
        .map(|it| &it["resource"])
        .filter(|it| it["code"]["coding"][0]["system"] == "urn:tidewright:forecast")
        .collect();
    assert_eq!(forecasts.len(), 3);
    for forecast in &forecasts {
        assert_eq!(forecast["status"], "preliminary");
        assert!(forecast["code"]["text"].as_str().unwrap().contains("Forecast"));
        assert!(forecast["note"][0]["text"].as_str().unwrap().starts_with("Forecast, not a measurement"));
        assert!(
            forecast["code"]["coding"]
                .as_array()
                .unwrap()
                .iter()
                .all(|it| it["system"] != "http://loinc.org")
        );
    }
    let expected: Vec<f64> =
        forecasts.iter().map(|it| it["valueQuantity"]["value"].as_f64().unwrap()).collect();
    assert_eq!(expected, [49.7, 48.8, 46.9]);
}

#[test]
fn the_csv_goes_back_into_review() {
    let bed = Bed::with("");
    let csv = said("note three-days --as csv").out;
    std::fs::write(bed.folder.path().join("gases.csv"), csv).unwrap();
    let ran = bed.run("review gases.csv --json");
    let json: Value = serde_json::from_str(&ran.out).unwrap();
    // Five gases; of the four gaps between them only the last one (22 h 45 min by the file) is beyond 12 h.
    assert_eq!(
        (&json["rows"], &json["forecasts"], &json["bad_rows"]),
        (&json!(5), &json!(3), &json!([])),
        "{}",
        ran.out
    );
}

const NASTY: &str = "format = 1\nlabel = \"=HYPERLINK(1) <b> | *x* \\\"q\\\"\"\n[[entry]]\nat = 2026-03-04T08:10:00Z\nby = \"@RT\"\n\
    [entry.settings]\nrate = 20\ntidal_volume = 400\n[entry.gas]\nph = 7.3\npaco2 = 50\n[entry.note]\ntext = \"=1+1\\n# head\\n-- <script>\"\n";

#[test]
fn what_was_typed_is_harmless_in_every_format() {
    let bed = Bed::with(NASTY);
    let of = |kind: &str| bed.run(&format!("note bed.toml {kind}")).out;
    for kind in ["", "--brief", "--as markdown", "--as csv", "--as json", "--as fhir"] {
        let text = of(kind);
        assert!(!text.chars().any(|it| it.is_control() && !matches!(it, '\n' | '\r')), "{kind}");
        for line in text.lines() {
            assert!(!line.starts_with(['=', '+', '@']), "{kind}: {line}");
        }
    }
    assert!(of("--as csv").contains("\"'=HYPERLINK(1) <b> | *x* \"\"q\"\"\""), "{}", of("--as csv"));
    let markdown = of("--as markdown");
    assert!(markdown.contains("=HYPERLINK(1) \\<b\\> \\| \\*x\\* \"q\""), "{markdown}");
    assert!(markdown.contains("\"=1+1 \\# head -- \\<script\\>\""), "{markdown}");
    // In JSON a text is a text: it comes back as it was typed.
    let json: Value = serde_json::from_str(&of("--as json")).unwrap();
    assert_eq!(json["entries"][0]["text"], json!("=1+1\n# head\n-- <script>"));
    assert!(bed.run("plan bed.toml").out.starts_with("'=HYPERLINK"));
}

#[test]
fn since_shows_fewer_entries_and_computes_from_all() {
    let whole = said("note three-days").out;
    let late = said("note three-days --since 2026-03-18T00:00+01:00").out;
    assert!(late.contains("Entries (3 of 12)") && !late.contains("  1 · "));
    let tally = "This patient's forecasts so far: 2 of 2";
    assert!(whole.contains(tally) && late.contains(tally));
    let last = said("note three-days --since last").out;
    assert!(last.contains("Entries (1 of 12)") && last.contains("  12 · "));
}

#[test]
fn a_gas_outside_the_wide_interval_names_what_explains_it_and_what_to_do() {
    let bed = Bed::preset("three-days");
    let ran = bed.run(
        "chart bed.toml --at 2026-03-18T07:50+01:00 --paco2 70 --ph 7.2 --temperature 39.4 --total-rate 24 --exhaled-tidal-volume 327",
    );
    assert_eq!(ran.err, "");
    // Charting says at once how the forecast did.
    assert!(ran.out.contains("ABOVE the outer range"), "{}", ran.out);
    let text = bed.run("note bed.toml").out.replace("\n    ", " ").replace("    ", "");
    // Expected 46.9 (charted), came 70: 70/46.9 = 1.4925; the volume read as before, so up 49 %.
    assert!(text.contains("the CO2 made per perfused lung were up 49 %"), "{text}");
    let place = |words: &str| text.find(words).unwrap_or_else(|| panic!("{words} is not in\n{text}"));
    assert!(place("temperature went from 37.4 to 39.4") < place("1. more CO2 made: fever"));
    assert!(place("1. more CO2 made") < place("2. more of each breath wasted"));
    assert!(place("3. less air") < place("4. the sample"));
    assert!(text.contains("2 of 3 inside the outer range"), "{text}");
    assert!(bed.run("plan bed.toml").out.contains("ABOVE the outer range"));
}

#[test]
fn notes_speak_kilopascal_when_asked() {
    // 49 mmHg is 6.5 kPa, 46.9 is 6.3.
    let text = said("note three-days --units kPa").out;
    assert!(
        text.contains("PaCO2 6.5 kPa") && text.contains("PaCO2 6.3 kPa, 1 gas in 2 within 5.7–6.8"),
        "{text}"
    );
    let (shown, _) = text.split_once("Cautions").unwrap();
    assert!(!shown.contains("mmHg"), "{shown}");
}
