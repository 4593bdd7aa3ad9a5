# Outside witness of: one breath under given settings: timing, volumes, pressures, power.
# Published: one-compartment linear model in its periodic steady state (Marini & Crooke 1993); power by Gattinoni 2016
# and, for square pressure, 0.098*rate*VT*(PEEP + dPi) (Becher 2019); load index 4*dP + rate (Costa 2021).

import math
from dataclasses import dataclass

from . import Refusal


@dataclass
class Lung:
    """What is known of a lung; None is not known. `evidence` speaks of expiratory resistance."""

    compliance: float | None = None
    ri: float | None = None
    re: float | None = None
    evidence: str = "unknown"


@dataclass
class Held:
    """What the bedside holds when settings change."""

    volume_ratio: float = 1.0
    pressure_scale: float = 1.0


@dataclass
class Breath:
    rate: float
    ti: float
    te: float
    vt: float | None = None
    auto_peep: float | None = None
    total_peep: float | None = None
    plateau: float | None = None
    peak: float | None = None
    driving: float | None = None
    mean: float | None = None
    trapped: float | None = None
    constants: float | None = None
    power: float | None = None
    load: float | None = None


def effective_rate(settings, own):
    return max(settings["rate"], own or 0.0)


def inspiratory_time(settings):
    if "inspiratory_time" in settings:
        return settings["inspiratory_time"]
    if "flow" in settings:
        return settings["tidal_volume"] / 1000.0 / (settings["flow"] / 60.0) + settings.get("pause", 0.0)
    return 60.0 / settings["rate"] * settings.get("ratio", 1.0 / 3.0)


def timing(settings, own):
    """Total rate, inspiratory and expiratory time."""
    rate, ti = effective_rate(settings, own), inspiratory_time(settings)
    te = 60.0 / rate - ti
    if te <= 0.1:
        raise Refusal(f"{te:.2f} s is left to breathe out at {rate}/min with {ti:.2f} s of inspiration")
    if settings["control"] == "volume" and ti - settings.get("pause", 0.0) <= 0:
        raise Refusal("the pause leaves no time for inspiratory flow")
    return rate, ti, te


def pressure_volumes(lung, drive, ti, te):
    """Tidal and trapped volume (mL) of the unscaled pressure-control model."""
    c = lung.compliance
    if lung.ri is None or lung.re is None:
        return c * drive, None
    a = math.exp(-ti * 1000.0 / (lung.ri * c))
    b = math.exp(-te * 1000.0 / (lung.re * c))
    top = c * drive * (1.0 - a) / (1.0 - a * b)
    return top * (1.0 - b), top * b


def tidal_volume(settings, lung, held, own):
    if settings["control"] == "volume":
        return settings["tidal_volume"] * held.volume_ratio
    _, ti, te = timing(settings, own)
    return held.pressure_scale * pressure_volumes(lung, settings["inspiratory_pressure"], ti, te)[0]


def breathe(settings, lung, held, own):
    rate, ti, te = timing(settings, own)
    out = Breath(rate, ti, te)
    c, peep, period = lung.compliance, settings.get("peep", 0.0), 60.0 / rate
    if settings["control"] == "volume":
        out.vt = settings["tidal_volume"] * held.volume_ratio
        if c is None:
            return out
        if lung.re is not None:
            b = math.exp(-te * 1000.0 / (lung.re * c))
            out.trapped = out.vt * b / (1.0 - b)
    else:
        drive = settings["inspiratory_pressure"]
        vt, trapped = pressure_volumes(lung, drive, ti, te)
        out.vt = held.pressure_scale * vt
        out.trapped = None if trapped is None else held.pressure_scale * trapped
    out.driving = out.vt / c
    if out.trapped is not None:
        out.auto_peep = out.trapped / c
        out.total_peep = peep + out.auto_peep
        out.constants = te * 1000.0 / (lung.re * c)
    base = peep if out.total_peep is None else out.total_peep
    out.plateau = base + out.driving
    out.load = 4.0 * out.driving + rate
    if settings["control"] == "volume":
        if lung.ri is not None and settings.get("flow_pattern", "constant") == "constant":
            pause = settings.get("pause", 0.0)
            resistive = lung.ri * settings["tidal_volume"] / 1000.0 / (ti - pause)
            out.peak = out.plateau + resistive
            rising = (ti - pause) * (base + resistive + out.driving / 2.0)
            out.mean = (rising + pause * out.plateau + te * peep) / period
            work = out.vt / 1000.0 * (out.peak - out.driving / 2.0)
            out.power = 0.098 * rate * work
    else:
        out.peak = peep + drive
        out.mean = (ti * (peep + drive) + te * peep) / period
        out.power = 0.098 * rate * out.vt / 1000.0 * (peep + drive)
    return out
