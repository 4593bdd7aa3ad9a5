//! What commonly moves the CO2 made per perfused lung, in the order to look for it: common practice. And what the record
//! itself says about it.

use super::Landing;
use crate::case::record::Occasion;

/// A usual cause, and where to look.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Cause {
    /// What may have happened.
    pub what: &'static str,
    /// Where to look.
    pub look: &'static str,
}

const fn cause(what: &'static str, look: &'static str) -> Cause {
    Cause { what, look }
}

const UP: [Cause; 4] = [
    cause(
        "more CO2 made: fever, shivering, agitation or pain, a seizure, overfeeding",
        "temperature, comfort and sedation, what is fed",
    ),
    cause(
        "more of each breath wasted: low cardiac output, overdistension, an embolism, an exchanger or mount added",
        "blood pressure, plateau, end-tidal against arterial CO2, what stands between wye and airway",
    ),
    cause("less air than is set: a leak or a circuit that gives", "cuff, exhaled volume, circuit"),
    cause("the sample: venous blood, or a sample that waited", "draw again"),
];

const DOWN: [Cause; 4] = [
    cause(
        "less CO2 made: fever gone or cooling, deeper sedation or paralysis, less fed",
        "temperature, sedation, what is fed",
    ),
    cause(
        "less of each breath wasted: circulation recovered, lung opened, an exchanger or mount taken away",
        "blood pressure, plateau, end-tidal against arterial CO2, what stands between wye and airway",
    ),
    cause(
        "more air than is set: breaths of the patient's own that were not counted",
        "total rate, exhaled volume",
    ),
    cause("the sample: an air bubble in it", "draw again"),
];

/// The usual causes of a gas that came to lie there, the likeliest first; none inside the wide interval.
pub const fn causes(landing: Landing) -> &'static [Cause] {
    match landing {
        Landing::Above => &UP,
        Landing::Below => &DOWN,
        Landing::Half | Landing::Wide => &[],
    }
}

/// A change of temperature that is worth a word, °C: common practice.
const WARMER_C: f64 = 0.5;
/// A change of exhaled volume that is worth a word: as the caution on leaks.
const LEAK_SHARE: f64 = 0.10;

/// What was charted between the plan and the gas that bears on its forecast.
pub(super) fn signs(occasions: &[Occasion], plan: usize, gas: usize) -> Vec<String> {
    let before = occasions.get(..=plan).unwrap_or_default();
    let Some(came) = occasions.get(gas) else { return Vec::new() };
    let latest = |value: fn(&Occasion) -> Option<f64>| before.iter().rev().find_map(value);
    let mut signs = Vec::new();
    let temperature = |it: &Occasion| it.entry.measured.temperature_c;
    if let (Some(then), Some(now)) = (latest(temperature), temperature(came))
        && (now - then).abs() >= WARMER_C
    {
        // +13 %/°C in fever, −6 to −8 %/°C in cooling: Du Bois 1921 and clinical cooling, see the published tables.
        let share = if now > then { (now - then) * 13.0 } else { (now - then) * 7.0 };
        signs.push(format!(
            "temperature went from {then:.1} to {now:.1} °C, commonly about {share:+.0} % of CO2 made"
        ));
    }
    let exhaled_share = |it: &Occasion| {
        let set = it.in_force.mandatory()?.tidal_volume_ml()?;
        Some(it.entry.measured.exhaled_tidal_volume_ml? / set)
    };
    if let (Some(then), Some(now)) = (latest(exhaled_share), exhaled_share(came))
        && (now - then).abs() >= LEAK_SHARE
    {
        signs.push(format!(
            "the exhaled volume went from {:.0} to {:.0} % of the set one (already counted in the figure)",
            then * 100.0,
            now * 100.0
        ));
    }
    signs
}
