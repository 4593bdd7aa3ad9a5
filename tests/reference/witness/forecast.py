# Outside witness of: what new settings do: PaCO2, pH, pressures, limits, the spread of the forecast and its course.
# Published: PaCO2 = K*VCO2/VA with the dead space held as a volume, a fraction, or split (published.md's readings);
# constant base excess for the pH; the rest in the modules this one calls.

import math
from dataclasses import dataclass, field, replace

from . import Refusal, belief
from .breath import breathe, inspiratory_time, tidal_volume
from .casefile import merged
from .physics import Course, bicarbonate, paco2_at, ph_at
from .profile import verdict
from .quantity import number, ratio


@dataclass
class Trial:
    settings: dict
    factor: float = 1.0
    lung: object = None


@dataclass
class Target:
    """`low`..`high` is the band that counts for the chance; `paco2` None when only a band is meant."""

    asked: str
    paco2: float | None
    ph: float | None
    low: float | None
    high: float | None
    typed: bool = False


@dataclass
class Point:
    """A plain forecast without its spread."""

    settings: dict
    breath: object
    series: float
    fraction: float | None
    paco2: float
    values: dict = field(default_factory=dict)


SETTING_FLAGS = (
    "rate",
    "tidal_volume",
    "inspiratory_pressure",
    "peep",
    "fio2",
    "inspiratory_time",
    "flow",
    "ratio",
    "pause",
    "apparatus_dead_space",
)


def build_trial(patient, flags):
    """Settings in force, with the flags dialled over them."""
    now = patient.settings
    new = {k: ratio(flags[k]) if k == "ratio" else number(k, flags[k]) for k in SETTING_FLAGS if flags.get(k) is not None}
    if flags.get("control"):
        new["control"] = flags["control"]
    settings = merged(now, new)
    lung = patient.lung
    if flags.get("compliance") is not None or flags.get("resistance") is not None:
        lung = replace(lung)
        if flags.get("compliance") is not None:
            lung.compliance = number("compliance", flags["compliance"])
        if flags.get("resistance") is not None:
            lung.ri = number("resistance", flags["resistance"])
            if lung.evidence in ("assumed", "unknown"):
                lung.re, lung.evidence = lung.ri, "assumed"
    factor = 1.0
    if flags.get("co2_production") is not None:
        typed = str(flags["co2_production"])
        if typed.startswith("x"):
            factor = float(typed[1:])
        elif patient.space.output is None:
            raise Refusal("the CO2 production now is unknown: give a factor such as x0.9")
        else:
            factor = number("co2_production", typed) / patient.space.output
    if settings["control"] == "pressure" and "flow" in settings:
        raise Refusal("a flow cannot be held in pressure control")
    if settings["control"] != now["control"]:
        switch(patient, settings, lung)
    key = "tidal_volume" if settings["control"] == "volume" else "inspiratory_pressure"
    if key not in settings:
        raise Refusal(f"{settings['control']} control needs {key}")
    return Trial(settings, factor, lung)


def switch(patient, settings, lung):
    """The other control at the same effective volume."""
    now = tidal_volume(patient.settings, patient.lung, patient.keeps, patient.own)
    if settings["control"] == "volume":
        settings.setdefault("tidal_volume", now / patient.keeps.volume_ratio)
        return
    if lung.compliance is None or lung.ri is None or lung.re is None:
        raise Refusal("pressure control needs compliance and resistance")
    if "inspiratory_pressure" not in settings:
        one = tidal_volume(settings | {"inspiratory_pressure": 1.0}, lung, patient.keeps, patient.own)
        settings["inspiratory_pressure"] = now / one


def plain(patient, trial, held=None):
    """PaCO2 of a trial by arithmetic from the latest gas; refused when nothing passes the dead space."""
    reading = patient.reading(held or patient.held)
    if reading is None:
        raise Refusal("this reading of the dead space is not known")
    lung = trial.lung or patient.lung
    breath = breathe(trial.settings, lung, patient.keeps, patient.own)
    shift = trial.settings.get("apparatus_dead_space", 0.0) - patient.apparatus
    series = reading[0] + shift
    if breath.vt <= series:
        raise Refusal(f"{breath.vt:.0f} mL does not pass {series:.0f} mL of dead space")
    before = patient.rate * (patient.vt - reading[0])
    after = breath.rate * (breath.vt - series)
    return Point(trial.settings, breath, series, reading[1], patient.paco2 * trial.factor * before / after)


def now_trial(patient):
    return Trial(patient.settings)


def now_point(patient):
    point = plain(patient, now_trial(patient))
    if patient.measured_now():
        point.paco2 = patient.paco2
    return point


def readings(patient, trial):
    """PaCO2 under the three readings of the dead space."""
    out = {}
    for held in ("split", "volume", "fraction"):
        try:
            out[held] = plain(patient, trial, held).paco2
        except Refusal:
            out[held] = None
    return out


def course_to(patient, start, final, factor):
    if patient.weight is None or patient.space.output is None:
        return None
    return Course(patient.weight, patient.space.output * factor, start, final)


def course_json(patient, course):
    if course is None:
        return None
    points = []
    for minutes in (0, 5, 10, 20, 30, 60):
        paco2 = course.paco2(minutes)
        points.append({"minutes": minutes, "paco2_mmhg": paco2, "ph": ph_at(patient.excess, paco2)})
    return {"points": points, "settled_minutes": course.settled(), "next_gas_minutes": course.next_gas()}


def limit_values(patient, point, now_paco2, factor, is_now=False):
    """The value that each limit looks at."""
    b = point.breath
    if is_now:
        fall = 0.0
    else:
        course = course_to(patient, now_paco2, point.paco2, factor)
        fall = None if course is None else max(0.0, now_paco2 - course.paco2(60.0))
    return {
        "tidal_volume_per_kg": None if patient.weight is None else b.vt / patient.weight,
        "plateau": b.plateau,
        "driving_pressure": b.driving,
        "rate": b.rate,
        "auto_peep": b.auto_peep,
        "expiratory_time_constants": b.constants,
        "mechanical_power": b.power,
        "load_index": b.load,
        "ph": ph_at(patient.excess, point.paco2),
        "paco2": point.paco2,
        "paco2_fall_per_hour": fall,
    }


def verdicts(patient, values, lung=None):
    assumed = (lung or patient.lung).evidence == "assumed"
    return {limit.id: verdict(limit, values[limit.id], assumed) for limit in patient.profile.limits}


def profile_band(patient):
    """The profile's band as PaCO2, or None when it is a pH band and no pH is known."""
    low, high = patient.profile.target
    if patient.profile.target_kind == "paco2":
        return low, high
    if patient.excess is None:
        return None
    return paco2_at(patient.excess, high), paco2_at(patient.excess, low)


def spread(patient, trial, point):
    """The distribution of the next PaCO2 under a trial."""
    three = readings(patient, trial)
    if three["volume"] is None or three["fraction"] is None:
        disagreement = 1.0
    else:
        disagreement = math.log(three["volume"] / three["fraction"])
    airway = patient.section1.series - patient.apparatus
    apparatus = trial.settings.get("apparatus_dead_space", 0.0)
    b = point.breath
    shift = math.log(trial.factor)
    if patient.held != "split" and three["split"] is not None:
        shift += math.log(point.paco2 / three["split"])
    step = belief.Next(
        b.rate, b.vt, apparatus, patient.fresh(b.rate, b.vt, airway + apparatus), disagreement, shift
    )
    return step, patient.belief.spread_of(step)


def outcome_json(patient, trial, point, target, now_paco2, is_now=False):
    b, f = point.breath, point.fraction
    values = limit_values(patient, point, now_paco2, trial.factor, is_now)
    ph = patient.ph if is_now and patient.measured_now() else values["ph"]
    values["ph"] = ph
    measured = is_now and patient.measured_now()
    five = dict.fromkeys(("expected", "half_low", "half_high", "low", "high"))
    chance = None
    if not measured:
        _, next_gas = spread(patient, trial, point)
        five = {
            "expected": next_gas.quantile(0.5),
            "half_low": next_gas.quantile(0.25),
            "half_high": next_gas.quantile(0.75),
            "low": next_gas.quantile(0.05),
            "high": next_gas.quantile(0.95),
        }
        if target is not None and target.low is not None:
            chance = next_gas.chance(target.low, target.high)
    alveolar = None if f is None else f * (b.vt - point.series)
    physiological = None if f is None else point.series + alveolar
    judged = verdicts(patient, values, trial.lung)
    p_t = point.paco2 * 10.0 ** (0.019 * (patient.celsius - 37.0))
    tidal = "end_tidal_co2" in patient.gas.measured and f is not None
    out = {
        "rate_per_min": b.rate,
        "tidal_volume_ml": b.vt,
        "tidal_volume_ml_kg": values["tidal_volume_per_kg"],
        "inspiratory_time_s": b.ti,
        "expiratory_time_s": b.te,
        "minute_ventilation_l_min": b.rate * b.vt / 1000.0,
        "alveolar_ventilation_l_min": None if f is None else b.rate * (b.vt - point.series) * (1.0 - f) / 1000.0,
        "apparatus_dead_space_ml": trial.settings.get("apparatus_dead_space", 0.0),
        "series_dead_space_ml": point.series,
        "alveolar_dead_space_ml": alveolar,
        "dead_space_fraction": None if f is None else physiological / b.vt,
        "dead_space_loss_l_min": None if f is None else b.rate * physiological / 1000.0,
        "paco2_mmhg": point.paco2,
        "paco2_expected_mmhg": five["expected"],
        "paco2_half_low_mmhg": five["half_low"],
        "paco2_half_high_mmhg": five["half_high"],
        "paco2_low_mmhg": five["low"],
        "paco2_high_mmhg": five["high"],
        "chance_on_target": chance,
        "ph": ph,
        "bicarbonate_mmol_l": None if ph is None else bicarbonate(ph, point.paco2),
        "end_tidal_co2_mmhg": number("end_tidal_co2", patient.gas.measured["end_tidal_co2"])
        if measured and "end_tidal_co2" in patient.gas.measured
        else p_t * (1.0 - f)
        if tidal
        else None,
        "auto_peep_cmh2o": b.auto_peep,
        "total_peep_cmh2o": b.total_peep,
        "plateau_cmh2o": b.plateau,
        "peak_cmh2o": b.peak,
        "driving_pressure_cmh2o": b.driving,
        "mean_airway_pressure_cmh2o": b.mean,
        "trapped_volume_ml": b.trapped,
        "expiratory_time_constants": b.constants,
        "mechanical_power_j_min": b.power,
        "load_index": b.load,
        "limits": [
            {"id": x.id, "value": values[x.id], "min": x.low, "max": x.high, "verdict": judged[x.id]}
            for x in patient.profile.limits
        ],
    }
    if is_now:
        out["paco2_is"] = "measured" if measured else "forecast"
    return out


def settings_json(settings):
    volume = settings["control"] == "volume"
    return {
        "control": settings["control"],
        "rate_per_min": settings["rate"],
        "tidal_volume_ml": settings["tidal_volume"] if volume else None,
        "inspiratory_pressure_cmh2o": None if volume else settings["inspiratory_pressure"],
        "peep_cmh2o": settings.get("peep", 0.0),
        "fio2": settings.get("fio2"),
        "inspiratory_time_s": inspiratory_time(settings),
        "apparatus_dead_space_ml": settings.get("apparatus_dead_space", 0.0),
    }


def band_target(patient):
    """What the chance of a forecast without a typed target means."""
    band = profile_band(patient)
    low, high = band if band else (None, None)
    return Target("profile", None, None, low, high)


def forecast_json(patient, flags):
    trial = build_trial(patient, flags)
    target = band_target(patient)
    now = now_point(patient)
    point = plain(patient, trial)
    return {
        "format": 1,
        "label": patient.case.label,
        "baseline": patient.baseline_json(),
        "now": outcome_json(patient, now_trial(patient), now, target, now.paco2, True),
        "trial": outcome_json(patient, trial, point, target, now.paco2),
        "settings": settings_json(trial.settings),
        "held": readings(patient, trial),
        "course": course_json(patient, course_to(patient, now.paco2, point.paco2, trial.factor)),
    }
