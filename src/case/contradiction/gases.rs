//! Carbon dioxide along its way out, and when the gas was drawn.

use crate::case::amend::Corrected;
use crate::case::fault::{Fault, Place};
use crate::quantity::input::Key;

/// End-tidal over arterial PCO2 that no lung passes. Up to it a late-emptying lung may; beyond it the two readings do
/// not belong together. The engine's own bound, common practice.
const END_TIDAL_OVER_ARTERIAL: f64 = 1.15;
/// A gas charted ahead of its own drawing by more than this, h, carries a wrong day.
const DAY_H: f64 = 24.0;

pub(super) fn contradictions(held: &Corrected) -> Vec<Fault> {
    let mut faults = Vec::new();
    faults.extend(end_tidal_above_arterial(held));
    faults.extend(expired_above_arterial(held));
    faults.extend(drawn_tomorrow(held));
    faults
}

/// PaCO2 at the temperature of the lungs, mmHg: the analyser reports at 37 °C. 0.019 per °C: the blood-gas standard
/// (CLSI C46), from memory.
fn at_body_temperature(held: &Corrected) -> Option<(f64, Vec<Place>, String)> {
    let paco2_mmhg = held.entry.gas.paco2_mmhg?;
    let mut places = vec![held.place("gas", "paco2")];
    let temperature_c = held.entry.measured.temperature_c;
    let paco2 = Key::Paco2.input().shown(paco2_mmhg);
    let Some(temperature_c) = temperature_c else {
        return Some((paco2_mmhg, places, paco2));
    };
    places.push(held.place("measured", "temperature"));
    let in_lungs = paco2_mmhg * libm::pow(10.0, 0.019 * (temperature_c - 37.0));
    let words = format!("{paco2} ({in_lungs:.0} mmHg at {})", Key::Temperature.input().shown(temperature_c));
    Some((in_lungs, places, words))
}

fn end_tidal_above_arterial(held: &Corrected) -> Option<Fault> {
    let end_tidal = held.entry.measured.end_tidal_co2_mmhg?;
    let (arterial, mut places, words) = at_body_temperature(held)?;
    places.insert(0, held.place("measured", "end_tidal_co2"));
    (end_tidal > END_TIDAL_OVER_ARTERIAL * arterial).then(|| {
        Fault::new(
            places,
            format!(
                "the end-tidal PCO2, {}, is more than 15 % above the PaCO2, {words}",
                Key::EndTidalCo2.input().shown(end_tidal)
            ),
            "expired gas cannot hold that much more than the blood it left: were both taken at the same time, in the same unit? leave end_tidal_co2 out if not",
        )
    })
}

fn expired_above_arterial(held: &Corrected) -> Option<Fault> {
    let expired = held.entry.measured.mixed_expired_co2_mmhg?;
    let (arterial, mut places, words) = at_body_temperature(held)?;
    places.insert(0, held.place("measured", "mixed_expired_co2"));
    (expired >= arterial).then(|| {
        Fault::new(
            places,
            format!(
                "the mixed expired PCO2, {}, is not below the PaCO2, {words}: there would be no dead space at all",
                Key::MixedExpiredCo2.input().shown(expired)
            ),
            "mixed expired is the whole breath mixed, airway gas included; an end-tidal reading goes under end_tidal_co2",
        )
    })
}

fn drawn_tomorrow(held: &Corrected) -> Option<Fault> {
    let (drawn_at, at) = (held.entry.gas.drawn_at?, held.entry.at?);
    let hours = drawn_at.hours_since(at);
    (hours > DAY_H).then(|| {
        Fault::new(
            [held.place("gas", "drawn_at"), Place::in_entry(held.number, "", "at")],
            format!("the gas is said to be drawn {hours:.0} h after the entry that carries it"),
            "look again at the day in drawn_at and in at; drawn_at may be left out when it is the same",
        )
    })
}
