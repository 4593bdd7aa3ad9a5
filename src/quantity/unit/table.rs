//! Every unit, dimension by dimension, with where its factor comes from.

use super::{Dimension, Unit};

const DEFAULT: &str = "the default unit";
const PREFIX: &str = "SI prefix";
const TORR: &str = "definition: 760 mmHg in 101325 Pa";
const WATER: &str = "definition: the conventional centimetre of water is 98.0665 Pa; 760 mmHg in 101325 Pa";
const INCH: &str = "definition: the international inch is 2.54 cm, the foot 12 inches";
const POUND: &str = "definition: the international pound is 0.45359237 kg";

const fn plain(word: &'static str, ucum: &'static str, also: &'static [&'static str]) -> Unit {
    scaled(word, ucum, also, [1.0, 1.0], DEFAULT).offered()
}

const fn scaled(
    word: &'static str,
    ucum: &'static str,
    also: &'static [&'static str],
    [numerator, denominator]: [f64; 2],
    source: &'static str,
) -> Unit {
    Unit { word, ucum, also, shift: 0.0, numerator, denominator, offered: false, source }
}

impl Unit {
    /// An error may offer it as what was meant.
    const fn offered(self) -> Self {
        Self { offered: true, ..self }
    }

    const fn shifted(self, shift: f64) -> Self {
        Self { shift, ..self }
    }
}

/// The units of a dimension, the default one first.
pub(super) const fn units(dimension: Dimension) -> &'static [Unit] {
    match dimension {
        Dimension::Rate => RATE,
        Dimension::Volume => VOLUME,
        Dimension::GasPressure => GAS_PRESSURE,
        Dimension::AirwayPressure => AIRWAY_PRESSURE,
        Dimension::BloodPressure => BLOOD_PRESSURE,
        Dimension::Length => LENGTH,
        Dimension::Altitude => ALTITUDE,
        Dimension::Mass => MASS,
        Dimension::Age => AGE,
        Dimension::Fraction => FRACTION,
        Dimension::Time => TIME,
        Dimension::Minutes => MINUTES,
        Dimension::Flow => FLOW,
        Dimension::Compliance => COMPLIANCE,
        Dimension::Resistance => RESISTANCE,
        Dimension::GasOutput => GAS_OUTPUT,
        Dimension::Temperature => TEMPERATURE,
        Dimension::Ratio => RATIO,
        Dimension::Ph => PH,
        Dimension::Concentration => CONCENTRATION,
        Dimension::VolumePerMass => VOLUME_PER_MASS,
        Dimension::Power => POWER,
        Dimension::PressurePerHour => PRESSURE_PER_HOUR,
        Dimension::Number => NUMBER,
    }
}

const RATE: &[Unit] = &[
    plain(
        "1/min",
        "/min",
        &[
            "min-1",
            "min^-1",
            "bpm",
            "breaths/min",
            "breath/min",
            "beats/min",
            "breathspermin",
            "perminute",
            "permin",
            "/minute",
        ],
    ),
    scaled("1/s", "/s", &["s-1", "persecond"], [60.0, 1.0], "60 s in a minute"),
];

const VOLUME: &[Unit] = &[
    plain("mL", "mL", &["millilitre", "millilitres", "milliliter", "milliliters", "cc", "cm3"]),
    scaled("L", "L", &["litre", "litres", "liter", "liters"], [1000.0, 1.0], PREFIX).offered(),
    scaled("dL", "dL", &[], [100.0, 1.0], PREFIX),
];

const GAS_PRESSURE: &[Unit] = &[
    plain("mmHg", "mm[Hg]", &["torr"]),
    scaled("kPa", "kPa", &[], [760_000.0, 101_325.0], TORR).offered(),
    scaled("hPa", "hPa", &[], [76_000.0, 101_325.0], TORR),
    scaled("mbar", "mbar", &["millibar"], [76_000.0, 101_325.0], TORR),
    scaled("Pa", "Pa", &[], [760.0, 101_325.0], TORR),
    scaled("cmH2O", "cm[H2O]", &[], [98.0665 * 760.0, 101_325.0], WATER),
    scaled("inHg", "[in_i'Hg]", &[], [25.4, 1.0], INCH),
    scaled("atm", "atm", &[], [760.0, 1.0], TORR),
];

const AIRWAY_PRESSURE: &[Unit] = &[
    plain("cmH2O", "cm[H2O]", &["cmwater"]),
    scaled("mbar", "mbar", &["millibar"], [100.0, 98.0665], WATER),
    scaled("hPa", "hPa", &[], [100.0, 98.0665], WATER),
    scaled("kPa", "kPa", &[], [1000.0, 98.0665], WATER).offered(),
    scaled("Pa", "Pa", &[], [1.0, 98.0665], WATER),
    scaled("mmHg", "mm[Hg]", &["torr"], [101_325.0, 98.0665 * 760.0], WATER),
];

const BLOOD_PRESSURE: &[Unit] =
    &[plain("mmHg", "mm[Hg]", &["torr"]), scaled("kPa", "kPa", &[], [760_000.0, 101_325.0], TORR).offered()];

const LENGTH: &[Unit] = &[
    plain("cm", "cm", &["centimetre", "centimetres", "centimeter", "centimeters"]),
    scaled("m", "m", &["metre", "metres", "meter", "meters"], [100.0, 1.0], PREFIX).offered(),
    scaled("mm", "mm", &[], [1.0, 10.0], PREFIX).offered(),
    scaled("inches", "[in_i]", &["in", "inch", "\""], [2.54, 1.0], INCH).offered(),
    scaled("ft", "[ft_i]", &["foot", "feet", "'"], [30.48, 1.0], INCH),
];

const ALTITUDE: &[Unit] = &[
    plain("m", "m", &["metre", "metres", "meter", "meters"]),
    scaled("ft", "[ft_i]", &["foot", "feet", "'"], [0.3048, 1.0], INCH).offered(),
    scaled("km", "km", &[], [1000.0, 1.0], PREFIX).offered(),
];

const MASS: &[Unit] = &[
    plain("kg", "kg", &["kilo", "kilos", "kilogram", "kilograms"]),
    scaled("lb", "[lb_av]", &["lbs", "pound", "pounds"], [0.453_592_37, 1.0], POUND).offered(),
    scaled("g", "g", &["gram", "grams"], [1.0, 1000.0], PREFIX).offered(),
];

const AGE: &[Unit] = &[
    plain("years", "a", &["year", "y", "yr", "yrs"]),
    scaled("months", "mo", &["month"], [1.0, 12.0], "12 months in a year").offered(),
];

const FRACTION: &[Unit] =
    &[plain("", "1", &[]), scaled("%", "%", &["percent", "pct"], [1.0, 100.0], "a hundredth").offered()];

const TIME: &[Unit] = &[
    plain("s", "s", &["sec", "secs", "second", "seconds"]),
    scaled("ms", "ms", &["msec", "millisecond", "milliseconds"], [1.0, 1000.0], PREFIX).offered(),
];

const MINUTES: &[Unit] = &[
    plain("min", "min", &["mins", "minute", "minutes"]),
    scaled("h", "h", &["hr", "hrs", "hour", "hours"], [60.0, 1.0], "60 min in an hour").offered(),
    scaled("s", "s", &["sec", "secs", "second", "seconds"], [1.0, 60.0], "60 s in a minute"),
];

const FLOW: &[Unit] = &[
    plain("L/min", "L/min", &["lpm", "litres/min", "liters/min", "litre/min", "liter/min"]),
    scaled("L/s", "L/s", &["lps"], [60.0, 1.0], "60 s in a minute").offered(),
    scaled("mL/min", "mL/min", &[], [1.0, 1000.0], PREFIX).offered(),
    scaled("mL/s", "mL/s", &[], [60.0, 1000.0], "60 s in a minute"),
];

const COMPLIANCE: &[Unit] = &[
    plain("mL/cmH2O", "mL/cm[H2O]", &[]),
    scaled("L/cmH2O", "L/cm[H2O]", &[], [1000.0, 1.0], PREFIX).offered(),
    scaled("mL/mbar", "mL/mbar", &[], [98.0665, 100.0], WATER),
    scaled("mL/hPa", "mL/hPa", &[], [98.0665, 100.0], WATER),
    scaled("L/kPa", "L/kPa", &[], [98.0665, 1.0], WATER),
];

const RESISTANCE: &[Unit] = &[
    plain(
        "cmH2O·s/L",
        "cm[H2O].s/L",
        &["cmH2O/L/s", "cmH2O/(L/s)", "cm[H2O]/(L/s)", "cmH2O.s.L-1", "cmH2O/L.s", "cmH2O/l/sec"],
    ),
    scaled("mbar·s/L", "mbar.s/L", &["mbar/L/s", "mbar/(L/s)"], [100.0, 98.0665], WATER),
    scaled("hPa·s/L", "hPa.s/L", &["hPa/L/s", "hPa/(L/s)"], [100.0, 98.0665], WATER),
    scaled("kPa·s/L", "kPa.s/L", &["kPa/L/s", "kPa/(L/s)"], [1000.0, 98.0665], WATER).offered(),
];

const GAS_OUTPUT: &[Unit] = &[
    plain("mL/min", "mL/min", &["ccm", "cc/min"]),
    scaled("L/min", "L/min", &["lpm"], [1000.0, 1.0], PREFIX).offered(),
];

const TEMPERATURE: &[Unit] = &[
    plain("°C", "Cel", &["C", "degC", "celsius"]),
    scaled(
        "°F",
        "[degF]",
        &["F", "degF", "fahrenheit"],
        [5.0, 9.0],
        "definition of the scale: 32 °F at 0 °C, 9 °F in 5 °C",
    )
    .shifted(32.0)
    .offered(),
    scaled("K", "K", &["kelvin"], [1.0, 1.0], "definition of the scale: 273.15 K at 0 °C").shifted(273.15),
];

const RATIO: &[Unit] = &[];

const PH: &[Unit] = &[plain("", "[pH]", &["pH"])];

const CONCENTRATION: &[Unit] = &[
    plain("mmol/L", "mmol/L", &["mM"]),
    scaled("mEq/L", "meq/L", &["mval/L"], [1.0, 1.0], "one charge: bicarbonate, base excess"),
];

const VOLUME_PER_MASS: &[Unit] =
    &[plain("mL/kg", "mL/kg", &["cc/kg"]), scaled("L/kg", "L/kg", &[], [1000.0, 1.0], PREFIX).offered()];

const POWER: &[Unit] = &[
    plain("J/min", "J/min", &["joule/min", "joules/min"]),
    scaled("W", "W", &["J/s", "watt", "watts"], [60.0, 1.0], "60 s in a minute"),
];

const PRESSURE_PER_HOUR: &[Unit] = &[
    plain("mmHg/h", "mm[Hg]/h", &["torr/h", "mmHg/hr", "mmHg/hour"]),
    scaled("kPa/h", "kPa/h", &["kPa/hr", "kPa/hour"], [760_000.0, 101_325.0], TORR).offered(),
];

const NUMBER: &[Unit] = &[plain("", "1", &[])];
