# Outside witness of: quantities with units in case files, profiles and flags.
# Published: SI definitions; torr = 101325/760 Pa; cmH2O = 98.0665 Pa; lb = 0.45359237 kg; inch = 2.54 cm.

import re

from . import Refusal

TORR_KPA = 101.325 / 760.0
CMH2O_KPA = 0.0980665

GAS = {"mmHg": 1.0, "mm[Hg]": 1.0, "torr": 1.0, "kPa": 1.0 / TORR_KPA, "hPa": 0.1 / TORR_KPA, "mbar": 0.1 / TORR_KPA}
AIRWAY = {
    "cmH2O": 1.0,
    "cm[H2O]": 1.0,
    "mbar": 0.1 / CMH2O_KPA,
    "hPa": 0.1 / CMH2O_KPA,
    "kPa": 1.0 / CMH2O_KPA,
    "mmHg": TORR_KPA / CMH2O_KPA,
}
VOLUME = {"mL": 1.0, "ml": 1.0, "L": 1000.0, "l": 1000.0}
FLOW = {"L/min": 1.0, "L/s": 60.0, "mL/min": 1e-3}
OUTPUT = {"mL/min": 1.0, "L/min": 1000.0}
TIME = {"s": 1.0, "ms": 1e-3, "min": 60.0}
RATE = {"1/min": 1.0, "/min": 1.0, "bpm": 1.0}
LENGTH = {"cm": 1.0, "m": 100.0, "in": 2.54, "ft": 30.48}
ALTITUDE = {"m": 1.0, "km": 1000.0, "ft": 0.3048}
MASS = {"kg": 1.0, "lb": 0.45359237, "[lb_av]": 0.45359237}
FRACTION = {"%": 0.01, "": 1.0}
PLAIN = {"": 1.0}

KINDS = {
    "height": LENGTH,
    "weight": MASS,
    "predicted_weight": MASS,
    "age": PLAIN | {"years": 1.0, "a": 1.0},
    "barometric_pressure": GAS,
    "altitude": ALTITUDE,
    "rate": RATE,
    "tidal_volume": VOLUME,
    "inspiratory_pressure": AIRWAY,
    "peep": AIRWAY,
    "fio2": FRACTION,
    "inspiratory_time": TIME,
    "flow": FLOW,
    "pause": TIME,
    "apparatus_dead_space": VOLUME,
    "total_rate": RATE,
    "exhaled_tidal_volume": VOLUME,
    "minute_ventilation": FLOW,
    "plateau": AIRWAY,
    "peak": AIRWAY,
    "total_peep": AIRWAY,
    "auto_peep": AIRWAY,
    "mean_airway_pressure": AIRWAY,
    "compliance": {"mL/cmH2O": 1.0, "mL/cm[H2O]": 1.0, "L/cmH2O": 1000.0},
    "resistance": {"cmH2O·s/L": 1.0, "cmH2O.s/L": 1.0, "cm[H2O].s/L": 1.0},
    "expiratory_resistance": {"cmH2O·s/L": 1.0, "cmH2O.s/L": 1.0, "cm[H2O].s/L": 1.0},
    "circuit_compliance": {"mL/cmH2O": 1.0, "mL/cm[H2O]": 1.0},
    "end_tidal_co2": GAS,
    "mixed_expired_co2": GAS,
    "dead_space_fraction": FRACTION,
    "co2_production": OUTPUT,
    "spo2": FRACTION,
    "ph": PLAIN,
    "paco2": GAS,
    "pao2": GAS,
    "bicarbonate": PLAIN | {"mmol/L": 1.0},
    "tidal_volume_per_kg": PLAIN | {"mL/kg": 1.0},
    "driving_pressure": AIRWAY,
    "expiratory_time_constants": PLAIN,
    "mechanical_power": PLAIN | {"J/min": 1.0},
    "load_index": PLAIN,
    "paco2_fall_per_hour": GAS | {"mmHg/h": 1.0, "kPa/h": 1.0 / TORR_KPA},
}


def number(name, value):
    """`value` in the default unit of the key `name`."""
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        return float(value)
    text = str(value).strip()
    if name == "temperature":
        found = re.fullmatch(r"(-?[\d.]+)\s*(Cel|°C|C|\[degF\]|°F|F)?", text)
        if found:
            degrees = float(found[1])
            return (degrees - 32.0) / 1.8 if found[2] in ("[degF]", "°F", "F") else degrees
    found = re.fullmatch(r"(\d+)\s*ft\s*(\d+)\s*in", text)
    if found and name == "height":
        return int(found[1]) * 30.48 + int(found[2]) * 2.54
    found = re.fullmatch(r"(-?\d+(?:[.,]\d+)?)\s*(.*)", text)
    factors = KINDS.get(name, PLAIN)
    if not found or (found[2] and found[2] not in factors):
        raise Refusal(f"{name} = {text!r} is not understood")
    plain = float(found[1].replace(",", "."))
    return plain if not found[2] else plain * factors[found[2]]


def ratio(value):
    """I:E as the inspiratory share of the cycle."""
    if isinstance(value, (int, float)):
        return 1.0 / (1.0 + float(value)) if value >= 1 else float(value) / (1.0 + float(value))
    found = re.fullmatch(r"\s*([\d.]+)\s*:\s*([\d.]+)\s*", str(value))
    if not found:
        raise Refusal(f"ratio = {value!r} is not understood")
    return float(found[1]) / (float(found[1]) + float(found[2]))
