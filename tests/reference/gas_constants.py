# Outside witness of: the constant K(T) that ties CO2 output to alveolar ventilation, the factor between gas volumes
# at body conditions (BTPS) and standard dry ones (STPD), water vapour pressure, and the conversion of units.
# Published formulas: the ideal gas law, K = 760 mmHg * (273.15 + T)/273.15; water vapour by IAPWS-IF97 (iapws);
# units by the pint registry (SI definitions; 1 lb = 0.45359237 kg, 1 in = 2.54 cm, g = 9.80665 m/s2, torr = atm/760).

import pint
from iapws import IAPWS97

import tables

HEADING = """Gas constants by pint (ideal gas) and iapws (water vapour). Made by gas_constants.py.
The engine's BTPS-STPD factor takes 47 mmHg of vapour at 37 C; the *_if97 columns take the vapour of the temperature itself."""

UNITS_HEADING = """Unit conversions by pint. Made by gas_constants.py.
One mmHg has three lives: atm/760 (torr), the conventional column of mercury (pint's mmHg) and UCUM's rounded 133.322 Pa.
They differ by less than 3e-6; each row says within what relative tolerance a right conversion may fall, and why."""

units = pint.UnitRegistry()
Q = units.Quantity


def kelvin(celsius):
    return Q(celsius, units.degC).to(units.kelvin)


def vapour_mmhg(celsius):
    megapascal = IAPWS97(T=float(kelvin(celsius).magnitude), x=0).P
    return float(Q(megapascal, units.megapascal).to(units.torr).magnitude)


def k_mmhg(celsius):
    """Pressure that one volume STPD of CO2 makes in one volume BTPS of alveolar gas, from n*R*T on both sides."""
    moles = Q(1, units.atm) * Q(1, units.litre) / (units.molar_gas_constant * kelvin(0))
    pressure = moles * units.molar_gas_constant * kelvin(celsius) / Q(1, units.litre)
    return float(pressure.to(units.torr).magnitude)


def stpd_from_btps(barometric_mmhg, vapour, celsius):
    dry = Q(barometric_mmhg - vapour, units.torr)
    return float(((dry * kelvin(0)) / (Q(1, units.atm) * kelvin(celsius))).to(units.dimensionless).magnitude)


def gas_tables():
    constants = [
        {
            "temperature_c": celsius,
            "expected_k_mmhg": k_mmhg(celsius),
            "expected_water_vapour_if97_mmhg": vapour_mmhg(celsius),
        }
        for celsius in [20.0 + 0.5 * i for i in range(45)]
    ]
    volumes = []
    for barometric in (500.0, 560.0, 600.0, 626.0, 640.0, 700.0, 740.0, 755.0, 760.0, 780.0):
        for celsius in (33.0, 35.0, 36.5, 37.0, 38.1, 39.0, 41.0):
            row = {
                "barometric_pressure_mmhg": barometric,
                "temperature_c": celsius,
                "expected_stpd_from_btps_if97": stpd_from_btps(barometric, vapour_mmhg(celsius), celsius),
            }
            if celsius == 37.0:
                row["expected_stpd_from_btps_47"] = stpd_from_btps(barometric, 47.0, celsius)
            volumes.append(row)
    return tables.document(HEADING, {"constant": constants, "volume_factor": volumes})


EXACT = (1e-9, "exact by definition; this table carries ten digits")
MERCURY = (3e-6, "three definitions of the millimetre of mercury")
PAIRS = [
    (units.kilopascal, "kPa", units.torr, "mmHg", MERCURY, (0.7, 5.3, 8.4, 13.3)),
    (units.torr, "mmHg", units.kilopascal, "kPa", MERCURY, (5.0, 40.0, 63.0, 760.0)),
    (units.millibar, "mbar", units.cmH2O, "cmH2O", (3e-5, "density of water at 4 C or 1000 kg/m3"), (1.0, 12.0, 30.0)),
    (units.cmH2O, "cmH2O", units.millibar, "mbar", (3e-5, "density of water at 4 C or 1000 kg/m3"), (1.0, 12.0, 30.0)),
    (units.kilopascal, "kPa", units.cmH2O, "cmH2O", (3e-5, "density of water at 4 C or 1000 kg/m3"), (0.5, 2.0)),
    (units.hectopascal, "hPa", units.millibar, "mbar", EXACT, (1.0, 25.0)),
    (units.hectopascal, "hPa", units.torr, "mmHg", MERCURY, (840.0, 1013.25)),
    (units.pound, "lb", units.kilogram, "kg", EXACT, (1.0, 119.0, 180.0)),
    (units.inch, "in", units.centimeter, "cm", EXACT, (1.0, 64.0, 70.5)),
    (units.foot, "ft", units.centimeter, "cm", EXACT, (1.0, 5.0, 6.0)),
    (units.foot, "ft", units.meter, "m", EXACT, (1000.0, 5249.0)),
    (units.degF, "degF", units.degC, "Cel", (1e-9, "exact by definition, offset 32; this table carries ten digits"), (95.0, 98.6, 100.4, 104.0)),
    (units.litre, "L", units.milliliter, "mL", EXACT, (0.38, 0.45)),
    (units.litre / units.second, "L/s", units.litre / units.minute, "L/min", EXACT, (0.5, 0.9)),
    (units.millisecond, "ms", units.second, "s", EXACT, (850.0, 1000.0)),
]


def unit_tables():
    rows = []
    for start, start_name, end, end_name, (tolerance, why), values in PAIRS:
        for value in values:
            rows.append(
                {
                    "value": value,
                    "from": start_name,
                    "to": end_name,
                    "expected": float(Q(value, start).to(end).magnitude),
                    "relative_tolerance": tolerance,
                    "why": why,
                }
            )
    return tables.document(UNITS_HEADING, {"conversion": rows})


if __name__ == "__main__":
    tables.run(lambda: {"gas_constants.toml": gas_tables(), "units.toml": unit_tables()})
