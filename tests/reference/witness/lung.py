# Outside witness of: compliance, inspiratory and expiratory resistance from bedside pressures, entry after entry.
# Published: the one-compartment model in its periodic steady state, inverted by brentq: plateau - PEEP =
# VT/(C*(1 - exp(-Te/(RE*C)))); constant-flow interruption RI = (peak - plateau)/flow; a measured auto-PEEP gives
# exp(-Te/tau) = auto/(auto + dP).

import math

from scipy.optimize import brentq

from . import Refusal
from .breath import Lung, inspiratory_time, pressure_volumes, timing

TIGHT = {"xtol": 1e-13, "rtol": 8.9e-16, "maxiter": 500}
STEEPEST, STIFFEST_ROOT = 0.7, 150.0


def own_rate(entries):
    """The patient's own rate, when the last total rate charted lies above the rate then set; else None."""
    for entry in reversed(entries):
        total = entry.measured.get("total_rate")
        if total is None:
            continue
        if total < entry.settings["rate"] - 1.0:
            raise Refusal(f"total_rate {total} is below the set rate {entry.settings['rate']}")
        return total if total > entry.settings["rate"] else None
    return None


def has_own_volume(entry):
    m = entry.measured
    return "exhaled_tidal_volume" in m or (
        entry.settings["control"] == "volume" and "circuit_compliance" in m and "plateau" in m
    )


def own_volume(entry):
    """The tidal volume this entry itself shows, mL; None in pressure control without a reading."""
    m, s = entry.measured, entry.settings
    volume = m.get("exhaled_tidal_volume", s.get("tidal_volume") if s["control"] == "volume" else None)
    if volume is None:
        return None
    if "circuit_compliance" in m and "plateau" in m:
        volume -= m["circuit_compliance"] * (m["plateau"] - s.get("peep", 0.0))
    if volume <= 0:
        raise Refusal("circuit compliance leaves no tidal volume")
    return volume


def measured_auto(entry):
    m, peep = entry.measured, entry.settings.get("peep", 0.0)
    auto = None
    if "total_peep" in m:
        auto = m["total_peep"] - peep
        if "auto_peep" in m and abs(auto - m["auto_peep"]) > 1.0:
            raise Refusal("total_peep and auto_peep disagree by more than 1 cmH2O")
    elif "auto_peep" in m:
        auto = m["auto_peep"]
    if auto is not None and auto < 0:
        raise Refusal("total PEEP is below PEEP")
    return auto


def constant_flow_l_s(settings):
    if settings["control"] != "volume" or settings.get("flow_pattern", "constant") != "constant":
        return None
    return settings["tidal_volume"] / 1000.0 / (inspiratory_time(settings) - settings.get("pause", 0.0))


def trapping_compliance(volume, distension, te, re, given):
    """C that explains distension by tidal and trapped volume; None where the readings cannot tell the two apart."""
    steep = volume / 1000.0 / distension / (te / re)
    if steep >= 1.0 and given:
        raise Refusal("plateau, expiratory resistance and timing cannot all be right")
    if steep > STEEPEST:
        return None

    def miss(c):
        return c * -math.expm1(-te * 1000.0 / (re * c)) - volume / distension

    c = float(brentq(miss, 1e-3, 1e7, **TIGHT))
    return c if c <= STIFFEST_ROOT else None


class Reader:
    """Goes through the entries in order and keeps, of each property, the latest that an entry yields."""

    def __init__(self):
        self.c = self.ri = self.re = None
        self.re_kind = None  # given | measured; an assumption is made at the end
        self.trapping_known = True
        self.crude = False  # C is VT/dPi, nothing else known
        self.again = None  # how to work out C once more when a later entry has changed RE
        self.per_set = 1.0  # VT/set in volume control so far: a leak stays a leak

    def assumed_re(self):
        return self.re if self.re is not None else self.ri

    def hear(self, entry, own):
        m, s = entry.measured, entry.settings
        if s["control"] == "support":
            return
        keys = ("plateau", "compliance", "resistance", "expiratory_resistance", "total_peep", "auto_peep")
        if s["control"] == "volume" and not any(k in m for k in keys):
            return
        if s["control"] == "pressure" and not any(k in m for k in (*keys, "exhaled_tidal_volume")):
            return
        _, ti, te = timing(s, own)
        volume, auto = own_volume(entry), measured_auto(entry)
        if s["control"] == "volume":
            if has_own_volume(entry):
                self.per_set = volume / s["tidal_volume"]
            else:
                volume *= self.per_set
        distension = m["plateau"] - s.get("peep", 0.0) if "plateau" in m else None
        if distension is not None and distension - (auto or 0.0) <= 0:
            raise Refusal("the plateau is not above the total PEEP")
        if "resistance" in m:
            self.ri = m["resistance"]
        if "expiratory_resistance" in m:
            self.re, self.re_kind = m["expiratory_resistance"], "given"
        if s["control"] == "volume":
            self.volume_control(m, s, te, volume, auto, distension)
        else:
            self.pressure_control(m, s, ti, te, volume, auto, distension)

    def set_compliance(self, c, known=True):
        self.c, self.trapping_known, self.again, self.crude = c, known, None, False

    def volume_control(self, m, s, te, volume, auto, distension):
        flow = constant_flow_l_s(s)
        if "resistance" not in m and "peak" in m and distension is not None and flow is not None:
            ri = (m["peak"] - m["plateau"]) / flow
            if ri <= 0:
                raise Refusal("the peak is not above the plateau")
            self.ri = ri
        if "compliance" in m:
            self.set_compliance(m["compliance"])
        elif distension is not None and auto is not None:
            self.set_compliance(volume / (distension - auto))
        elif distension is not None:

            def solve():
                re = self.assumed_re()
                if re is None:
                    self.c, self.trapping_known = volume / distension, True
                    return
                c = trapping_compliance(volume, distension, te, re, self.re_kind == "given")
                self.c, self.trapping_known = (volume / distension, False) if c is None else (c, True)

            solve()
            self.again = solve
        self.measured_expiration(m, te, volume, auto)

    def measured_expiration(self, m, te, volume, auto):
        if auto is None or self.c is None or volume is None or "expiratory_resistance" in m:
            return
        driving = volume / self.c
        if auto > 0:
            self.re = te / (math.log((auto + driving) / auto) * self.c / 1000.0)
            self.re_kind = "measured"
        elif self.re_kind != "given":
            cap = te / (math.log1p(driving / 0.5) * self.c / 1000.0)
            self.re = cap if self.ri is None else min(self.ri, cap)
            self.re_kind = "measured"

    def pressure_control(self, m, s, ti, te, volume, auto, distension):
        drive = s["inspiratory_pressure"]
        if distension is not None and distension > drive + 1.0:
            raise Refusal("the plateau is more than 1 cmH2O above PEEP plus the inspiratory pressure")
        if distension is not None and (volume is not None or "compliance" in m):
            self.hold(m, ti, te, volume, auto, distension, drive)
        elif "compliance" in m:
            self.set_compliance(m["compliance"])
            self.measured_expiration(m, te, volume, auto)
        elif volume is not None and self.ri is not None and ("resistance" in m or self.c is None):
            self.from_resistance(m, ti, te, volume, auto, drive)
        elif volume is not None and (self.c is None or self.crude):
            self.set_compliance(volume / drive, known=False)
            self.crude = True

    def hold(self, m, ti, te, volume, auto, distension, drive):
        given = m.get("compliance")
        x = auto
        if auto is not None:
            c = given or volume / (distension - auto)
        elif self.re is not None or "resistance" in m:
            re = self.assumed_re()
            c = given or trapping_compliance(volume, distension, te, re, self.re_kind == "given")
            if c is not None:
                b = math.exp(-te * 1000.0 / (re * c))
                x = distension * b if given is None else (volume or c * distension) / c * b / (1.0 - b)
        else:
            x = hold_auto(drive, distension, te / ti)
            c = given or volume / (distension - x)
        if c is None:
            self.unread_hold(m, ti, volume, distension, drive)
            return
        ri = self.ri
        if "resistance" not in m:
            a = (drive - distension) / (drive - x)
            ri = ti * 1000.0 / (4.0 * c) if a <= 0.02 else -ti * 1000.0 / (c * math.log(a))
        if auto is None and self.re is None and "resistance" not in m and given is None:
            if volume / 1000.0 / distension / (te / ri) > STEEPEST or c > STIFFEST_ROOT:
                self.unread_hold(m, ti, volume, distension, drive)
                return
        self.ri = ri
        self.set_compliance(c)
        self.measured_expiration(m, te, volume if volume is not None else c * (distension - x), auto)

    def unread_hold(self, m, ti, volume, distension, drive):
        """The hold does not tell compliance from trapping: both stand as if nothing were trapped."""
        self.set_compliance(volume / distension, known=False)
        if "resistance" not in m:
            a = (drive - distension) / drive
            self.ri = ti * 1000.0 / (4.0 * self.c) if a <= 0.02 else -ti * 1000.0 / (self.c * math.log(a))

    def from_resistance(self, m, ti, te, volume, auto, drive):
        if auto is not None:
            # Filling from the measured auto-PEEP: VT = C*(1 - a)*(dPi - auto).
            if volume / 1000.0 / (drive - auto) >= ti / self.ri:
                raise Refusal("no compliance gives this tidal volume with this resistance")

            def miss(c):
                return c * -math.expm1(-ti * 1000.0 / (self.ri * c)) * (drive - auto) - volume
        else:
            re = self.assumed_re()
            if volume / 1000.0 / drive >= 1.0 / (self.ri / ti + re / te):
                raise Refusal("no compliance gives this tidal volume with these resistances")

            def miss(c):
                return pressure_volumes(Lung(c, self.ri, re), drive, ti, te)[0] - volume

        self.set_compliance(float(brentq(miss, 1e-3, 1e7, **TIGHT)))
        self.measured_expiration(m, te, volume, auto)

    def lung(self):
        if self.again is not None:
            self.again()
        if self.c is None:
            return Lung(None, self.ri, self.re, "unknown")
        if not self.trapping_known:
            return Lung(self.c, self.ri, None, "unknown")
        if self.re is not None:
            return Lung(self.c, self.ri, self.re, self.re_kind)
        if self.ri is not None:
            return Lung(self.c, self.ri, self.ri, "assumed")
        return Lung(self.c, None, None, "unknown")


def hold_auto(drive, distension, exponent):
    """Auto-PEEP behind a pressure-control hold when one resistance serves both ways; 0 without an interior root."""
    if distension >= drive:
        return 0.0
    crest = drive / (1.0 + exponent)
    if distension <= crest:
        return 0.0

    def miss(x):
        return x / distension - ((drive - distension) / (drive - x)) ** exponent

    if miss(crest) <= 0:
        return 0.0
    return float(brentq(miss, 0.0, crest, xtol=1e-15, rtol=8.9e-16, maxiter=500))


def read_lung(entries):
    reader = Reader()
    for i, entry in enumerate(entries):
        reader.hear(entry, own_rate(entries[: i + 1]))
    return reader.lung()


def volume_ratio(entries):
    for entry in reversed(entries):
        if entry.settings["control"] == "volume" and has_own_volume(entry):
            return own_volume(entry) / entry.settings["tidal_volume"]
    return 1.0


def pressure_scale(entries, lung):
    for i in range(len(entries) - 1, -1, -1):
        entry = entries[i]
        if entry.settings["control"] == "pressure" and has_own_volume(entry) and lung.compliance is not None:
            _, ti, te = timing(entry.settings, own_rate(entries[: i + 1]))
            model = pressure_volumes(lung, entry.settings["inspiratory_pressure"], ti, te)[0]
            return own_volume(entry) / model
    return 1.0
