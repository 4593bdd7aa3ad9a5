//! Ventilator settings.

use super::{Input, Key};
use crate::quantity::unit::Dimension;

pub(super) const SETTINGS: [Input; 10] = [
    Input::new(
        Key::Rate,
        ["settings", "rate", "set rate"],
        Dimension::Rate,
        [4.0, 60.0],
        "22",
        "what ventilators for adults can be set to: common practice",
    ),
    Input::new(
        Key::TidalVolume,
        ["settings", "tidal_volume", "set tidal volume"],
        Dimension::Volume,
        [50.0, 1500.0],
        "380",
        "what ventilators for adults can be set to: common practice",
    ),
    Input::new(
        Key::InspiratoryPressure,
        ["settings", "inspiratory_pressure", "inspiratory pressure above PEEP"],
        Dimension::AirwayPressure,
        [1.0, 60.0],
        "14",
        "what ventilators for adults can be set to: common practice",
    ),
    Input::new(
        Key::Peep,
        ["settings", "peep", "set PEEP"],
        Dimension::AirwayPressure,
        [0.0, 30.0],
        "10",
        "the lower PEEP/FiO2 table of the ARDS Network ends at 24; above: common practice",
    ),
    Input::new(
        Key::Fio2,
        ["settings", "fio2", "FiO2"],
        Dimension::Fraction,
        [0.21, 1.0],
        "0.6",
        "from air to pure oxygen",
    )
    .step(0.05, 2),
    Input::new(
        Key::InspiratoryTime,
        ["settings", "inspiratory_time", "inspiratory time"],
        Dimension::Time,
        [0.2, 6.0],
        "\"0.9 s\"",
        "what ventilators for adults can be set to: common practice",
    )
    .step(0.05, 2),
    Input::new(
        Key::Flow,
        ["settings", "flow", "inspiratory flow"],
        Dimension::Flow,
        [5.0, 150.0],
        "\"50 L/min\"",
        "what ventilators for adults can be set to: common practice",
    ),
    Input::new(
        Key::Ratio,
        ["settings", "ratio", "I:E"],
        Dimension::Ratio,
        [0.2, 10.0],
        "\"1:2\"",
        "5:1 to 1:10; 1:2 when nothing times inspiration: common practice",
    )
    .default(2.0),
    Input::new(
        Key::Pause,
        ["settings", "pause", "end-inspiratory pause"],
        Dimension::Time,
        [0.0, 3.0],
        "\"0.2 s\"",
        "what ventilators for adults can be set to; none unless set: common practice",
    )
    .default(0.0),
    Input::new(
        Key::ApparatusDeadSpace,
        ["settings", "apparatus_dead_space", "apparatus dead space"],
        Dimension::Volume,
        [0.0, 300.0],
        "45",
        "exchangers of 20 to 100 mL, with a mount and a mask: common practice",
    )
    .step(5.0, 0)
    .default(0.0),
];
