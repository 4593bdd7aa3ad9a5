//! The known key that a mistyped one was probably meant to be.

/// What people call things elsewhere, and the key here. The trade's own abbreviations.
const OTHER_NAMES: [(&str, &str); 51] = [
    ("rr", "rate"),
    ("f", "rate"),
    ("frequency", "rate"),
    ("respiratory_rate", "rate"),
    ("set_rate", "rate"),
    ("vt", "tidal_volume"),
    ("tv", "tidal_volume"),
    ("vte", "exhaled_tidal_volume"),
    ("ve", "minute_ventilation"),
    ("mv", "minute_ventilation"),
    ("minute_volume", "minute_ventilation"),
    ("mode", "control"),
    ("pplat", "plateau"),
    ("plateau_pressure", "plateau"),
    ("pip", "peak"),
    ("ppeak", "peak"),
    ("pmean", "mean_airway_pressure"),
    ("intrinsic_peep", "auto_peep"),
    ("ti", "inspiratory_time"),
    ("ie", "ratio"),
    ("i_e", "ratio"),
    ("pinsp", "inspiratory_pressure"),
    ("pco2", "paco2"),
    ("po2", "pao2"),
    ("hco3", "bicarbonate"),
    ("etco2", "end_tidal_co2"),
    ("petco2", "end_tidal_co2"),
    ("vco2", "co2_production"),
    ("vd_vt", "dead_space_fraction"),
    ("dead_space", "apparatus_dead_space"),
    ("temp", "temperature"),
    ("pbw", "predicted_weight"),
    ("ibw", "predicted_weight"),
    ("gender", "sex"),
    ("p01", "occlusion_pressure"),
    ("mip", "inspiratory_pressure_max"),
    ("entries", "entry"),
    ("f", "female"),
    ("w", "female"),
    ("woman", "female"),
    ("m", "male"),
    ("man", "male"),
    ("vc", "volume"),
    ("vcv", "volume"),
    ("pc", "pressure"),
    ("pcv", "pressure"),
    ("ps", "support"),
    ("psv", "support"),
    ("ett", "tube"),
    ("trach", "tracheostomy"),
    ("square", "constant"),
];

/// How alike two spellings must be, from 0 to 1, to be offered; chosen so that one slip in a short word passes.
const ALIKE: f64 = 0.6;

/// The known word nearest to `typed`, when one is near: a slip of the hand, or another name of the trade.
pub fn nearest<'k>(typed: &str, known: &[&'k str]) -> Option<&'k str> {
    let typed = typed.to_lowercase().replace([' ', '-'], "_");
    let other = |key: &str| OTHER_NAMES.iter().any(|(name, meant)| *name == typed && *meant == key);
    if let Some(found) = known.iter().find(|key| **key == typed || other(key)) {
        return Some(found);
    }
    known
        .iter()
        .map(|key| (strsim::normalized_damerau_levenshtein(&typed, key), *key))
        .filter(|(alike, _)| *alike >= ALIKE)
        .max_by(|one, two| one.0.total_cmp(&two.0))
        .map(|(_, key)| key)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_or_another_name_of_the_trade_is_understood() {
        let known = ["rate", "tidal_volume", "peep", "plateau", "paco2", "pao2"];
        assert_eq!(nearest("platau", &known), Some("plateau"));
        assert_eq!(nearest("Tidal Volume", &known), Some("tidal_volume"));
        assert_eq!(nearest("vt", &known), Some("tidal_volume"));
        assert_eq!(nearest("pco2", &known), Some("paco2"));
        assert_eq!(nearest("peeep", &known), Some("peep"));
        assert_eq!(nearest("colour", &known), None);
    }
}
