//! One key and the drawing that follows, at 160×50 with 20 gases on file. To be answered within one frame.
#![allow(
    missing_docs,
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    reason = "a bench may stop at the first surprise"
)]

use std::fmt::Write as _;
use std::hint::black_box;
use std::time::Instant;

use criterion::{Criterion, criterion_group, criterion_main};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use tidewright::case::moment::Moment;
use tidewright::case::{file, presets, read};
use tidewright::panel::action::Action;
use tidewright::panel::state::{Origin, State, View};
use tidewright::panel::update::update;
use tidewright::panel::view;

/// Injured lungs with 18 more gases, an hour apart.
fn twenty_gases() -> State {
    let mut text = presets::case("injured-lungs").unwrap().text.to_owned();
    for hour in 0..18 {
        let (day, clock) = (10 + hour / 24, hour % 24);
        let paco2 = 50 + (hour * 7) % 13;
        write!(
            text,
            "\n[[entry]]\nat = 2026-03-{day}T{clock:02}:00:00+01:00\n[entry.gas]\nph = 7.3\npaco2 = {paco2}\n"
        )
        .unwrap();
    }
    let (record, _) = read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap();
    let offset = jiff::tz::offset(1);
    let instant = offset.to_timestamp(jiff::civil::datetime(2026, 3, 20, 12, 0, 0, 0)).unwrap();
    State::new(record, Origin::Text { name: "bench".to_owned(), text }, Moment { instant, offset })
}

fn key_and_drawing(state: &mut State, buffer: &mut Buffer, steps: i32) {
    black_box(update(state, Action::Turn(steps)));
    buffer.reset();
    view::paint(state, buffer.area, buffer);
}

fn frames(criterion: &mut Criterion) {
    for open in View::ALL {
        let mut state = twenty_gases();
        state.view = open;
        let mut buffer = Buffer::empty(Rect::new(0, 0, 160, 50));
        let mut times: Vec<_> = (0..300)
            .map(|n| {
                let from = Instant::now();
                key_and_drawing(&mut state, &mut buffer, if n % 2 == 0 { 1 } else { -1 });
                from.elapsed()
            })
            .collect();
        times.sort();
        println!("{}: median {:?}, p99 {:?}", open.name(), times[150], times[297]);
        let mut up = false;
        criterion.bench_function(&format!("key and drawing, {}", open.name()), |bench| {
            bench.iter(|| {
                up = !up;
                key_and_drawing(&mut state, &mut buffer, if up { 1 } else { -1 });
            });
        });
    }
}

criterion_group! {
    name = benches;
    config = Criterion::default().sample_size(10).measurement_time(std::time::Duration::from_secs(1)).warm_up_time(std::time::Duration::from_millis(300));
    targets = frames
}
criterion_main!(benches);
