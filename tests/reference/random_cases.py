"""Random but plausible case files and profiles for compare_plans.py.

Not a witness itself. Readings are simulated from a hidden lung and a hidden dead space with the published one-compartment
model and PaCO2 = K*VCO2/VA, then rounded as a bedside shows them, so that most cases can be computed.
"""

import datetime
import math

from witness.breath import Held, Lung, breathe
from witness.physics import at_temperature, k_mmhg, predicted_weight

ZONE = datetime.timezone(datetime.timedelta(hours=1))

LIMITS = {
    "tidal_volume_per_kg": lambda d: {"max": d.choice([6, 8, 9])},
    "plateau": lambda d: {"max": d.choice([26, 28, 30, 32])},
    "driving_pressure": lambda d: {"max": d.choice([13, 14, 15])},
    "rate": lambda d: d.choice([{"max": 30}, {"max": 35}, {"min": 8, "max": 35}]),
    "auto_peep": lambda d: {"max": d.choice([2, 3, 5, 8])},
    "expiratory_time_constants": lambda d: {"min": d.choice([2, 2.5, 3])},
    "mechanical_power": lambda d: {"max": d.choice([12, 17, 22, 27])},
    "load_index": lambda d: {"max": d.choice([70, 80, 95])},
    "ph": lambda d: d.choice([{"min": 7.2}, {"min": 7.25, "max": 7.5}, {"max": 7.45}]),
    "paco2": lambda d: d.choice([{"max": 65}, {"min": 32}, {"min": 30, "max": 70}]),
    "paco2_fall_per_hour": lambda d: {"max": d.choice([10, 15, 20])},
}


def text(value):
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, datetime.datetime):
        return value.isoformat()
    return repr(value)


def table(name, keys):
    return [f"[{name}]"] + [f"{k} = {text(v)}" for k, v in keys.items()] + [""] if keys else []


def profile(dice):
    lines = ["format = 1", 'name = "drawn"', 'summary = "A drawn profile"', "", "[target]"]
    if dice.random() < 0.6:
        lines.append(dice.choice(["ph = [7.30, 7.45]", "ph = [7.25, 7.40]", "ph = [7.35, 7.45]"]))
    else:
        lines.append(dice.choice(["paco2 = [35, 45]", "paco2 = [38, 42]", "paco2 = [45, 60]"]))
    lines.append("")
    for name, draw in LIMITS.items():
        if dice.random() < 0.6:
            lines += table(f"limits.{name}", draw(dice) | {"source": "drawn"})
    if dice.random() < 0.25:
        lines += table("steps", dice.choice([{"rate": 2}, {"tidal_volume": 20, "rate": 1}, {"inspiratory_pressure": 2}]))
    if dice.random() < 0.12:
        lines += table("steadiness", {"gas": 0.09, "wander_per_hour": 0.02, "change": 0.3, "source": "drawn"})
    return "\n".join(lines) + "\n"


class Bed:
    """The hidden truth of one patient."""

    def __init__(self, dice):
        self.dice = dice
        self.patient, self.written = self.draw_patient()
        self.weight = predicted_weight({k: v for k, v in self.patient.items()}) or 62.0
        ri = dice.uniform(5, 22)
        self.lung = Lung(dice.uniform(18, 70), ri, ri * dice.uniform(0.9, 2.2), "given")
        native = self.patient.get("airway") == "native"
        self.series = (2.2 if native else 1.1) * self.weight * dice.uniform(0.8, 1.3)
        self.f = dice.uniform(0.05, 0.5)
        self.output = self.weight * dice.uniform(2.4, 4.4)
        self.leak = dice.choice([1.0, 1.0, round(dice.uniform(0.88, 1.03), 3)])
        self.settings = self.first_settings()

    def draw_patient(self):
        dice = self.dice
        sex = dice.choice(["female", "male"])
        height = dice.randint(150, 195)
        kept, written = {}, {}
        draw = dice.random()
        if draw < 0.10:
            if dice.random() < 0.5:
                written["sex"] = kept["sex"] = sex
        elif draw < 0.18:
            kept["predicted_weight"] = written["predicted_weight"] = dice.randint(40, 85)
        else:
            kept |= {"sex": sex, "height": float(height)}
            written |= {"sex": sex, "height": dice.choice([height, f"{height} cm", f"{height / 100} m"])}
        if dice.random() < 0.4:
            written["weight"] = kept["weight"] = dice.randint(50, 120)
        if dice.random() < 0.5:
            written["age"] = kept["age"] = dice.randint(20, 88)
        airway = dice.choice(["native", "tube", "tube", "tracheostomy", None])
        if airway:
            written["airway"] = kept["airway"] = airway
        draw = dice.random()
        if draw < 0.12:
            written["altitude"] = dice.choice([1600, "1600 m", 600])
        elif draw < 0.25:
            written["barometric_pressure"] = dice.choice([755, "740 mmHg", 690])
        return kept, written

    def timing(self, control):
        dice = self.dice
        draw = dice.random()
        if draw < 0.15:
            return {}
        if draw < 0.5 or control == "pressure" and draw < 0.7:
            return {"inspiratory_time": round(dice.uniform(0.65, 1.15), 2)}
        if draw < 0.75 or control == "pressure":
            return {"ratio": dice.choice(["1:1.5", "1:2", "1:2.5", "1:3", "1:4"])}
        return {"flow": dice.randint(32, 75)}

    def first_settings(self):
        dice = self.dice
        control = dice.choice(["volume", "volume", "pressure"])
        s = {"control": control, "rate": dice.randint(10, 28)}
        s |= self.aim_of(control)
        s |= {"peep": dice.randint(4, 14), "fio2": dice.choice([0.3, 0.4, 0.5, 0.6, 0.8])}
        s |= self.timing(control)
        if control == "volume":
            if dice.random() < 0.4:
                s["pause"] = dice.choice([0.1, 0.2, 0.25])
            if dice.random() < 0.12:
                s["flow_pattern"] = "decelerating"
        if dice.random() < 0.6:
            s["apparatus_dead_space"] = dice.choice([10, 35, 45, 60, 90])
        return s

    def aim_of(self, control):
        dice = self.dice
        if control == "volume":
            return {"tidal_volume": 10 * round(self.weight * dice.uniform(5.5, 9) / 10)}
        return {"inspiratory_pressure": dice.randint(10, 24)}

    def change(self):
        """Keys dialled anew; the settings in force follow."""
        dice, s = self.dice, self.settings
        new = {}
        if dice.random() < 0.10:
            control = "pressure" if s["control"] == "volume" else "volume"
            new = {"control": control} | self.aim_of(control) | {"inspiratory_time": round(dice.uniform(0.7, 1.1), 2)}
        else:
            if dice.random() < 0.6:
                new["rate"] = max(8, min(32, s["rate"] + dice.choice([-6, -4, -2, 2, 4, 6])))
            if dice.random() < 0.4:
                new |= self.aim_of(s["control"])
            if dice.random() < 0.2:
                new["peep"] = dice.randint(4, 14)
            if dice.random() < 0.15:
                new["apparatus_dead_space"] = dice.choice([0, 20, 45])
            if dice.random() < 0.12:
                new |= self.timing(s["control"])
        self.settings = changed(s, new)
        return new

    def breath(self, own=None):
        s = dict(self.settings)
        if isinstance(s.get("ratio"), str):
            i, e = (float(x) for x in s["ratio"].split(":"))
            s["ratio"] = i / (i + e)
        return breathe(s, self.lung, Held(self.leak, self.leak), own)

    def plausible(self):
        try:
            b = self.breath()
        except Exception:
            return False
        dead = self.series + self.settings.get("apparatus_dead_space", 0)
        pause = self.settings.get("pause", 0.0)
        return b.te > 0.6 and b.ti - pause > 0.3 and dead + 60 < b.vt < 1100 and b.plateau < 55

    def measure(self):
        """What is charted with an entry, and the true breath behind it."""
        dice, s = self.dice, self.settings
        m, own = {}, None
        draw = dice.random()
        if draw < 0.18:
            own = s["rate"] + dice.choice([1, 2, 4, 6])
            try:
                if self.breath(own).te < 0.5:
                    own = None
            except Exception:
                own = None
            m["total_rate"] = own or s["rate"]
        elif draw < 0.35:
            m["total_rate"] = s["rate"]
        elif draw < 0.38:
            m["total_rate"] = s["rate"] - 1
        b = self.breath(own)
        volume = s["control"] == "volume"
        circuit = round(dice.uniform(0.8, 2.0), 1) if dice.random() < 0.1 else None
        plateau = dice.random() < 0.65
        if circuit and plateau:
            m["circuit_compliance"] = circuit
        if dice.random() < (0.5 if volume else 0.93):
            m["exhaled_tidal_volume"] = round(b.vt + (circuit * (b.plateau - s["peep"]) if circuit and plateau else 0.0))
        if plateau:
            m["plateau"] = round(b.plateau, 1)
            if dice.random() < 0.35:
                if dice.random() < 0.25 or b.auto_peep < 0.3:
                    m["total_peep"] = s["peep"]
                elif dice.random() < 0.5:
                    m["total_peep"] = round(s["peep"] + b.auto_peep, 1)
                else:
                    m["auto_peep"] = round(b.auto_peep, 1)
        if b.peak is not None and dice.random() < 0.6:
            m["peak"] = round(b.peak, 1)
        if dice.random() < 0.12:
            m["compliance"] = round(self.lung.compliance * dice.uniform(0.95, 1.05), 1)
        if dice.random() < 0.15:
            m["resistance"] = round(self.lung.ri, 1)
        if dice.random() < 0.12:
            m["expiratory_resistance"] = round(self.lung.re, 1)
        if not volume and "exhaled_tidal_volume" not in m and dice.random() < 0.8:
            m |= {"compliance": round(self.lung.compliance, 1), "resistance": round(self.lung.ri, 1)}
        return m, b

    def gas(self, b, m):
        """A gas under the true breath; the evidence of dead space goes into `m`."""
        dice = self.dice
        celsius = 37.0
        if dice.random() < 0.25:
            celsius = m["temperature"] = round(dice.uniform(34.5, 39.8), 1)
        series = self.series + self.settings.get("apparatus_dead_space", 0)
        fresh = b.rate * (b.vt - series) * (1 - self.f)
        p_t = k_mmhg(celsius) * self.output / fresh
        paco2 = p_t / at_temperature(1.0, celsius) * math.exp(dice.gauss(0, 0.06))
        if not 22 < paco2 < 115:
            return None
        p_t = at_temperature(paco2, celsius)
        share = (series + self.f * (b.vt - series)) / b.vt
        kind = dice.choice(["none", "none", "et", "et", "vd", "mixed", "out", "et+vd", "et+out", "out+vd", "et+mixed"])
        if "et" in kind:
            m["end_tidal_co2"] = round(p_t * (1 - self.f) * math.exp(dice.gauss(0, 0.04)), 1)
        if "vd" in kind:
            m["dead_space_fraction"] = round(share * dice.uniform(0.95, 1.05), 2)
        if "mixed" in kind:
            m["mixed_expired_co2"] = round(p_t * (1 - share), 1)
        if "out" in kind:
            m["co2_production"] = round(self.output * dice.uniform(0.95, 1.05))
        gas = {"paco2": round(paco2, 1)}
        bicarbonate = dice.uniform(19, 34)
        ph = round(6.1 + math.log10(bicarbonate / (0.0307 * paco2)), 2)
        if not 7.0 < ph < 7.6:
            return None
        draw = dice.random()
        if draw < 0.86:
            gas["ph"] = ph
        elif draw < 0.94:
            gas["bicarbonate"] = round(bicarbonate, 1)
        if dice.random() < 0.7:
            gas["pao2"] = dice.randint(55, 110)
        return gas


def changed(settings, new):
    out = dict(settings)
    if any(t in new for t in ("inspiratory_time", "flow", "ratio")):
        for t in ("inspiratory_time", "flow", "ratio"):
            out.pop(t, None)
    if new.get("control", out["control"]) != out["control"]:
        for gone in ("tidal_volume", "inspiratory_pressure", "pause", "flow_pattern"):
            out.pop(gone, None)
    return out | new


def spelled(dice, settings):
    """Some quantities with their unit, as people type them."""
    out = dict(settings)
    spell = {"inspiratory_time": "{} s", "flow": "{} L/min", "tidal_volume": "{} mL", "peep": "{} cmH2O", "pause": "{} s"}
    for key, form in spell.items():
        if key in out and dice.random() < 0.1:
            out[key] = form.format(out[key])
    if "fio2" in out and dice.random() < 0.1:
        out["fio2"] = f"{round(out['fio2'] * 100)} %"
    return out


def case(dice, profile_name):
    """The text of one case file."""
    while True:
        bed = Bed(dice)
        if not bed.plausible():
            continue
        lines = ["format = 1", f'label = "Bed {dice.randint(1, 6)}"', f'profile = "{profile_name}"']
        steadiness = dice.choice([None, None, "usual", "settled"])
        if steadiness:
            lines.append(f'steadiness = "{steadiness}"')
        lines += [""] + table("patient", bed.written)
        at = datetime.datetime(2026, 3, dice.randint(1, 28), dice.randint(0, 20), dice.randint(0, 59), tzinfo=ZONE)
        count, gases, broken = dice.choice([1, 1, 1, 2, 2, 3, 4]), [], False
        for i in range(count):
            new = bed.settings
            if i:
                new = bed.change()
                if not bed.plausible():
                    broken = True
                    break
            measured, b = bed.measure()
            gas = bed.gas(b, measured) if i == 0 and count == 1 or dice.random() < 0.75 else None
            if gas and dice.random() < 0.3:
                gas = {"drawn_at": at - datetime.timedelta(minutes=dice.randint(1, 8))} | gas
            lines += ["[[entry]]", f"at = {at.isoformat()}", ""]
            for name, keys in (("settings", spelled(dice, new)), ("measured", measured), ("gas", gas or {})):
                lines += table(f"entry.{name}", keys)
            if gas:
                gases.append(i + 1)
            at += datetime.timedelta(minutes=dice.choice([12, 25, 45, 90, 180, 360]))
        if broken or not gases:
            continue
        if dice.random() < 0.08:
            n = dice.choice(gases)
            lines += ["[[entry]]", f"at = {at.isoformat()}", ""]
            lines += table("entry.gas", {"paco2": dice.randint(38, 70)})
            lines += table("entry.note", {"text": "corrected", "amends": n})
        return "\n".join(lines) + "\n", bed


def dials(dice, bed):
    """Flags of `forecast`: some of what a person would try."""
    s, flags = bed.settings, []
    control = s["control"]
    if dice.random() < 0.08:
        control = "pressure" if control == "volume" else "volume"
        flags += ["--control", control]
    if dice.random() < 0.5:
        flags += ["--rate", str(max(8, s["rate"] + dice.choice([-6, -3, 2, 4, 6, 8])))]
    if control == s["control"] and dice.random() < 0.5:
        if control == "volume":
            flags += ["--tidal-volume", str(s["tidal_volume"] + dice.choice([-60, -40, -20, 20, 40, 60]))]
        else:
            flags += ["--inspiratory-pressure", str(max(6, s["inspiratory_pressure"] + dice.choice([-3, -2, 2, 3, 5])))]
    if dice.random() < 0.2:
        flags += ["--peep", str(dice.randint(4, 14))]
    if dice.random() < 0.1:
        flags += ["--fio2", "0.5"]
    if dice.random() < 0.2:
        flags += dice.choice([["--inspiratory-time", "0.8"], ["--ratio", "1:2"], ["--ratio", "1:3"]])
    elif control == "volume" and control == s["control"] and dice.random() < 0.1:
        flags += ["--flow", "60"]
    if control == "volume" and dice.random() < 0.1:
        flags += ["--pause", dice.choice(["0", "0.1"])]
    if dice.random() < 0.2:
        flags += ["--apparatus-dead-space", dice.choice(["0", "20", "60"])]
    if dice.random() < 0.2:
        flags += ["--co2-production", dice.choice(["x0.9", "x1.15", str(round(bed.output * 0.9))])]
    if dice.random() < 0.08:
        flags += ["--compliance", str(round(bed.lung.compliance * 1.2, 1))]
    if dice.random() < 0.08:
        flags += ["--resistance", str(round(bed.lung.ri * 0.8, 1))]
    return flags


def readings_flags(dice):
    flags = []
    if dice.random() < 0.25:
        flags += ["--held", dice.choice(["volume", "fraction", "split"])]
    if dice.random() < 0.15:
        flags += ["--steadiness", dice.choice(["usual", "settled"])]
    return flags


def plan_flags(dice, bed):
    flags, draw = readings_flags(dice), dice.random()
    if draw < 0.45:
        flags += ["--to-paco2", str(dice.choice([35, 40, 45, 50, 55, 60]))]
    elif draw < 0.6:
        flags += ["--to-ph", str(dice.choice([7.25, 7.3, 7.32, 7.38, 7.42]))]
    if dice.random() < 0.2:
        flags += ["--aim", dice.choice(["rate", "volume", "gentle"])]
    if dice.random() < 0.2:
        flags += ["--least", dice.choice(["power", "load"])]
    if dice.random() < 0.25:
        flags += dials(dice, bed)
    return flags
