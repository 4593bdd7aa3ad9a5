//! Benches of the engine: a plan with all three aims, one forecast with and without its interval, the settable grid.
//! What was measured, and on what: docs/performance.md.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    missing_docs,
    reason = "a bench may stop at the first surprise; criterion's macros make items without docs"
)]

use std::fmt::Write as _;
use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use tidewright::case::record::Record;
use tidewright::case::{file, presets, read};
use tidewright::planning::baseline::Baseline;
use tidewright::planning::figures;
use tidewright::planning::forecast::{Forecaster, Held};
use tidewright::planning::plan::{Request, forecast, plan};
use tidewright::planning::solve::{settable_rates, settable_volumes};
use tidewright::planning::target::Asked;
use tidewright::planning::trial::Trial;

fn record(text: &str) -> Record {
    read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap().0
}

fn preset(name: &str) -> Record {
    record(presets::case(name).unwrap().text)
}

/// One patient with a gas an hour, rate and volume turned between them.
fn followed(gases: u32) -> Record {
    let mut text = "format = 1\n[patient]\nsex = \"male\"\nheight = 178\nairway = \"tube\"\n".to_owned();
    for hour in 0..gases {
        let (day, clock, rate, volume, paco2) =
            (2 + hour / 24, hour % 24, 16 + hour % 5, 420 + 10 * (hour % 4), 44 + hour % 9);
        writeln!(
            text,
            "[[entry]]\nat = 2026-03-{day:02}T{clock:02}:15:00Z\n[entry.settings]\ncontrol = \"volume\"\nrate = {rate}\n\
             tidal_volume = {volume}\npeep = 8\ninspiratory_time = 0.9\n[entry.measured]\nplateau = 24\npeak = 32\n\
             total_peep = 8.5\n[entry.gas]\npaco2 = {paco2}\nph = 7.32"
        )
        .unwrap();
    }
    record(&text)
}

fn plans(bench: &mut Criterion) {
    for name in ["injured-lungs", "obstruction-pressure"] {
        let record = preset(name);
        for (word, asked) in [("profile", Asked::Profile), ("typed", Asked::Paco2(50.0))] {
            let request = Request { asked, ..Request::default() };
            bench.bench_function(&format!("plan, three aims, {word} target: {name}"), |bench| {
                bench.iter(|| plan(black_box(&record), black_box(&request)).unwrap());
            });
        }
    }
}

fn forecasts(bench: &mut Criterion) {
    let trial = Trial { rate_per_min: Some(24.0), ..Trial::default() };
    for (name, record) in
        [("volume control", preset("injured-lungs")), ("pressure control", preset("obstruction-pressure"))]
    {
        let baseline = Baseline::read(&record).unwrap();
        let forecaster = Forecaster::new(&baseline, figures(&record), Held::Split).unwrap();
        let dialled = trial.apply(&forecaster).unwrap();
        bench.bench_function(&format!("one forecast, no interval: {name}"), |bench| {
            bench.iter(|| forecaster.state(black_box(&dialled)).unwrap());
        });
    }
    for gases in [1, 20] {
        let record = followed(gases);
        bench.bench_function(
            &format!("one forecast with interval, from the record: {gases} gases"),
            |bench| {
                bench.iter(|| forecast(black_box(&record), black_box(&trial), Held::Split).unwrap());
            },
        );
        let baseline = Baseline::read(&record).unwrap();
        let forecaster = Forecaster::new(&baseline, figures(&record), Held::Split).unwrap();
        let dialled = trial.apply(&forecaster).unwrap();
        bench.bench_function(&format!("one more forecast with interval: {gases} gases"), |bench| {
            bench.iter(|| forecaster.outcome(black_box(&dialled), Some([48.0, 52.0])).unwrap());
        });
    }
}

fn grid(bench: &mut Criterion) {
    for name in ["injured-lungs", "obstruction-pressure"] {
        let record = preset(name);
        let baseline = Baseline::read(&record).unwrap();
        let forecaster = Forecaster::new(&baseline, figures(&record), Held::Split).unwrap();
        let now = forecaster.now();
        let steps = &baseline.profile.steps;
        let pairs = settable_rates(steps).count() * settable_volumes(&now, steps).count();
        bench.bench_function(&format!("the settable grid, {pairs} forecasts: {name}"), |bench| {
            bench.iter(|| {
                let mut found = 0;
                for rate in settable_rates(steps) {
                    for volume in settable_volumes(&now, steps) {
                        let dialled = now.with_rate(rate).with_volume(volume);
                        found += usize::from(black_box(forecaster.state(black_box(&dialled))).is_some());
                    }
                }
                found
            });
        });
    }
}

criterion_group!(engine, plans, forecasts, grid);
criterion_main!(engine);
