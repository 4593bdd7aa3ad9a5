# Outside witness of: which settings reach a target: exact answers, settable plans, what blocks them, levers, summit.
# Published: nothing but the models of the other modules; exact answers by brentq, the summit by bounded maximisation.

from dataclasses import dataclass, replace

from scipy.optimize import brentq, minimize_scalar

from . import Refusal, forecast
from .breath import effective_rate, pressure_volumes, timing
from .forecast import Target, Trial, plain
from .physics import paco2_at, ph_at
from .profile import FROM_TARGET, excess

RATES, VOLUMES, PRESSURES = (4.0, 60.0), (50.0, 1500.0), (1.0, 60.0)
TIE = 1e-9


def find_target(patient, flags, now_paco2):
    if flags.get("to_paco2") is not None:
        paco2 = flags["to_paco2"]
        return Target("paco2", paco2, ph_at(patient.excess, paco2), paco2 - 2.0, paco2 + 2.0, True)
    if flags.get("to_ph") is not None:
        if patient.excess is None:
            raise Refusal("a pH target needs a pH or a bicarbonate")
        paco2 = paco2_at(patient.excess, flags["to_ph"])
        if not 10.0 <= paco2 <= 150.0:
            raise Refusal(f"pH {flags['to_ph']} would need a PaCO2 of {paco2:.0f} mmHg")
        return Target("ph", paco2, flags["to_ph"], paco2 - 2.0, paco2 + 2.0, True)
    band = forecast.profile_band(patient)
    if band is None:
        raise Refusal("the profile's pH target needs a pH or a bicarbonate")
    low, high = band
    inward = min(3.0, (high - low) / 2.0)
    paco2 = low + inward if now_paco2 < low else high - inward if now_paco2 > high else now_paco2
    return Target("profile", paco2, ph_at(patient.excess, paco2), low, high)


def off_by(target, paco2):
    """How far from the target; 0 when on it."""
    if target.typed:
        miss = abs(paco2 - target.paco2)
        return 0.0 if miss <= 2.0 + TIE else miss
    return 0.0 if target.low - TIE <= paco2 <= target.high + TIE else abs(paco2 - target.paco2)


@dataclass
class Candidate:
    trial: Trial
    point: object
    values: dict
    verdicts: dict

    def miss(self, target):
        return abs(self.point.paco2 - target.paco2)


class Planner:
    def __init__(self, patient, base, target, now_point):
        self.patient, self.base, self.target, self.now_paco2 = patient, base, target, now_point.paco2
        self.lung = base.lung or patient.lung
        self.volume_control = base.settings["control"] == "volume"
        self.moved = "tidal_volume" if self.volume_control else "inspiratory_pressure"
        self.steps = patient.profile.steps
        self.now_values = forecast.limit_values(patient, now_point, now_point.paco2, 1.0, True)
        if patient.measured_now():
            self.now_values["ph"] = patient.ph

    # What a change of one dial does.

    def trial(self, **dials):
        return replace(self.base, settings=self.base.settings | dials)

    def attempt(self, trial):
        """The candidate, or None when it cannot be set."""
        try:
            point = plain(self.patient, trial)
        except Refusal:
            return None
        values = forecast.limit_values(self.patient, point, self.now_paco2, trial.factor)
        return Candidate(trial, point, values, forecast.verdicts(self.patient, values, trial.lung))

    # Exact answers.

    def series(self):
        shift = self.base.settings.get("apparatus_dead_space", 0.0) - self.patient.apparatus
        return self.patient.reading(self.patient.held)[0] + shift

    def needed(self):
        """rate*(VT - VDs) that brings the target, mL/min."""
        p = self.patient
        before = p.rate * (p.vt - p.reading(p.held)[0])
        return p.paco2 * self.base.factor * before / self.target.paco2

    def model_volume(self, rate, drive=None):
        """Pressure-control volume (scaled, mL) at a total rate that is also the set one."""
        s = self.base.settings | {"rate": rate}
        _, ti, te = timing(s, None)
        drive = s["inspiratory_pressure"] if drive is None else drive
        return self.patient.keeps.pressure_scale * pressure_volumes(self.lung, drive, ti, te)[0]

    def fresh(self, rate):
        return rate * (self.model_volume(rate) - self.series())

    def fastest(self):
        """The rate at which 0.1 s is left to breathe out."""
        s = self.base.settings
        if "inspiratory_time" in s:
            return 60.0 / (s["inspiratory_time"] + 0.1)
        return 60.0 * (1.0 - s.get("ratio", 1.0 / 3.0)) / 0.1

    def summit(self):
        """(rate, PaCO2) past which a faster rate clears less CO2."""
        if self.volume_control or self.lung.ri is None or self.lung.re is None:
            return None
        top = self.fastest() * (1.0 - 1e-9)
        # A coarse look first, since a bounded search alone may settle on a slope.
        grid = [1.0 + (top - 1.0) * i / 400.0 for i in range(401)]
        best = max(range(401), key=lambda i: self.fresh(grid[i]))
        if best == 400 or best == 0 and self.fresh(grid[0]) <= 0:
            return None
        low, high = grid[max(0, best - 1)], grid[best + 1]
        rough = minimize_scalar(lambda r: -self.fresh(r), bounds=(low, high), method="bounded", options={"xatol": 1e-10}).x
        step = min(2e-3 * rough, (top - rough) / 3.0)

        def slope(r):
            return self.fresh(r - 2 * step) - 8 * self.fresh(r - step) + 8 * self.fresh(r + step) - self.fresh(r + 2 * step)

        try:
            rate = float(brentq(slope, rough * 0.995, min(rough * 1.005, top - 2.1 * step), xtol=1e-12, rtol=8.9e-16))
        except ValueError:
            rate = float(rough)
        if self.fresh(rate) <= 0:
            return None
        return rate, self.target.paco2 * self.needed() / self.fresh(rate)

    def exact_rate(self):
        if self.volume_control or self.lung.ri is None or self.lung.re is None:
            volume = (
                self.base.settings["tidal_volume"] * self.patient.keeps.volume_ratio
                if self.volume_control
                else self.model_volume(4.0 if self.fastest() > 4.0 else self.fastest() / 2)
            )
            if volume <= self.series():
                return None
            rate = self.needed() / (volume - self.series())
        else:
            summit = self.summit()
            top = summit[0] if summit else self.fastest() * (1.0 - 1e-9)
            if self.fresh(top) < self.needed():
                return None
            rate = float(brentq(lambda r: self.fresh(r) - self.needed(), 1e-3, top, xtol=1e-12, rtol=8.9e-16))
        if rate < (self.patient.own or 0.0):
            return None
        try:
            timing(self.base.settings | {"rate": rate}, None)
        except Refusal:
            return None
        return rate

    def exact_volume(self):
        """Set tidal volume, or inspiratory pressure."""
        p, s = self.patient, self.base.settings
        rate = effective_rate(s, p.own)
        volume = self.series() + self.needed() / rate
        if volume <= 0:
            return None
        if self.volume_control:
            exact = volume / p.keeps.volume_ratio
        else:
            _, ti, te = timing(s, p.own)
            exact = volume / (p.keeps.pressure_scale * pressure_volumes(self.lung, 1.0, ti, te)[0])
        try:
            timing(s | {self.moved: exact}, p.own)
        except Refusal:
            return None
        return exact

    # Settable values.

    def settable(self, dial):
        low, high = {"rate": RATES, "tidal_volume": VOLUMES, "inspiratory_pressure": PRESSURES}[dial]
        step = self.steps[dial]
        first = int(-(-low / step // 1))
        values = []
        while first * step <= high + TIE:
            if first * step >= low - TIE:
                values.append(first * step)
            first += 1
        return values

    def change(self, candidate):
        total = 0.0
        for dial in ("rate", self.moved):
            total += abs(candidate.trial.settings[dial] - self.base.settings[dial]) / self.steps[dial]
        return total

    def nearest(self, dial):
        best = None
        for value in self.settable(dial):
            c = self.attempt(self.trial(**{dial: value}))
            if c is None:
                continue
            rank = (c.miss(self.target), self.change(c))
            if best is None or rank[0] < best[0][0] - TIE or abs(rank[0] - best[0][0]) <= TIE and rank[1] < best[0][1]:
                best = (rank, c)
        return best[1] if best else None

    # The gentle pair.

    def counted(self, removed=None):
        skip = FROM_TARGET if self.target.typed else ()
        return [x for x in self.patient.profile.limits if x.id not in skip and x.id != removed]

    def strict(self, c, limits):
        return all(c.verdicts[x.id] != "beyond" for x in limits)

    def allowed(self, c, limits):
        for limit in limits:
            if c.verdicts[limit.id] != "beyond":
                continue
            now = self.now_values[limit.id]
            if now is None:
                return False
            for here, before in zip(excess(limit, c.values[limit.id]), excess(limit, now)):
                if here > TIE and (before <= TIE or here > before + TIE):
                    return False
        return True

    def pick(self, pairs, key):
        if not pairs:
            return None
        least = min(c.values[key] for c in pairs)
        pairs = [c for c in pairs if c.values[key] <= least + TIE]
        fewest = min(self.change(c) for c in pairs)
        pairs = [c for c in pairs if self.change(c) <= fewest + TIE]
        return min(pairs, key=lambda c: c.miss(self.target))

    def windows(self, pairs):
        if not self.target.typed:
            yield [c for c in pairs if off_by(self.target, c.point.paco2) == 0.0]
            return
        for window in (0.5, 1.0, 2.0):
            yield [c for c in pairs if c.miss(self.target) <= window + TIE]

    def gentle_from(self, pairs, limits, key):
        allowed = [c for c in pairs if self.allowed(c, limits)]
        strict = [c for c in allowed if self.strict(c, limits)]
        for group in (strict, allowed):
            for near in self.windows(group):
                found = self.pick(near, key)
                if found:
                    return found
        if not allowed:
            return None
        nearest = min(c.miss(self.target) for c in allowed)
        close = [c for c in allowed if c.miss(self.target) <= nearest + TIE]
        return min(close, key=lambda c: (c.values[key], self.change(c)))

    def gentle(self, key):
        """(the pair, what blocks it) or None."""
        pairs = []
        for volume in self.settable(self.moved):
            for rate in self.settable("rate"):
                c = self.attempt(self.trial(**{self.moved: volume, "rate": rate}))
                if c is not None:
                    pairs.append(c)
        pairs = [c for c in pairs if c.values[key] is not None]
        found = self.gentle_from(pairs, self.counted(), key)
        if found is None:
            return None
        blocks, miss = [], off_by(self.target, found.point.paco2)
        if miss > 0:
            for limit in self.counted():
                other = self.gentle_from(pairs, self.counted(limit.id), key)
                if other is not None and off_by(self.target, other.point.paco2) < miss - TIE:
                    blocks.append(limit.id)
        return found, blocks

    def beyond_at_exact(self):
        for dial, exact in (("rate", self.exact_rate()), (self.moved, self.exact_volume())):
            if exact is None:
                continue
            c = self.attempt(self.trial(**{dial: exact}))
            if c is not None:
                return [name for name, v in c.verdicts.items() if v == "beyond"]
        return []

    def plan_json(self, aim, key):
        exact, blocks = None, None
        if aim == "gentle":
            found = self.gentle(key)
            if found is None:
                return None
            candidate, blocks = found
            on_target = off_by(self.target, candidate.point.paco2) == 0.0
        else:
            dial = "rate" if aim == "rate" else self.moved
            exact = self.exact_rate() if aim == "rate" else self.exact_volume()
            candidate = self.nearest(dial)
            if candidate is None:
                return None
            on_target = off_by(self.target, candidate.point.paco2) == 0.0
            low, high = {"rate": RATES, "tidal_volume": VOLUMES, "inspiratory_pressure": PRESSURES}[dial]
            if exact is not None and low <= exact <= high:
                on_target = True
        if on_target:
            blocks = []
        elif not blocks:
            blocks = self.beyond_at_exact()
        verdicts = candidate.verdicts.values()
        within = False if "beyond" in verdicts else None if "unknown" in verdicts else True
        return {
            "aim": aim,
            "exact": exact,
            "settings": forecast.settings_json(candidate.trial.settings),
            "forecast": forecast.outcome_json(
                self.patient, candidate.trial, candidate.point, self.target, self.now_paco2
            ),
            "on_target": on_target,
            "within_limits": within,
            "blocked_by": blocks,
        }, candidate


def levers_json(patient, now):
    settings = patient.settings
    moved = ("tidal_volume", 20.0, "mL") if settings["control"] == "volume" else ("inspiratory_pressure", 1.0, "cmH2O")
    apparatus = settings.get("apparatus_dead_space", 0.0)
    rows = [("rate", 2.0, "1/min"), moved]
    if apparatus > 0:
        rows.append(("apparatus_dead_space", -min(10.0, apparatus), "mL"))
    rows.append(("co2_production", -10.0, "%"))
    out = []
    for name, step, unit in rows:
        if name == "co2_production":
            trial = Trial(settings, 0.9)
        else:
            trial = Trial(settings | {name: settings.get(name, 0.0) + step})
        lever = {"id": name, "step": step, "unit": unit}
        try:
            point = plain(patient, trial)
        except Refusal:
            point = None
        before, after = now.breath, point.breath if point else None

        def change(old, new):
            return None if old is None or new is None else new - old

        ph_now = patient.ph if patient.measured_now() else ph_at(patient.excess, now.paco2)
        lever["paco2_change_mmhg"] = change(now.paco2, point.paco2 if point else None)
        lever["ph_change"] = change(ph_now, ph_at(patient.excess, point.paco2) if point else None)
        lever["driving_pressure_change_cmh2o"] = change(before.driving, after.driving if after else None)
        lever["mechanical_power_change_j_min"] = change(before.power, after.power if after else None)
        out.append(lever)
    return out


def plan_json(patient, flags):
    """(the document, whether any plan is on target)."""
    base = forecast.build_trial(patient, flags)
    now = forecast.now_point(patient)
    target = find_target(patient, flags, now.paco2)
    planner = Planner(patient, base, target, now)
    key = "mechanical_power" if flags.get("least") == "power" else "load_index"
    plans, first = [], None
    for aim in [flags["aim"]] if flags.get("aim") else ["rate", "volume", "gentle"]:
        made = planner.plan_json(aim, key)
        if made is not None:
            plans.append(made[0])
            first = first or made[1]
    course = None
    if first is not None:
        course = forecast.course_to(patient, now.paco2, first.point.paco2, first.trial.factor)
    summit = planner.summit()
    return {
        "format": 1,
        "label": patient.case.label,
        "baseline": patient.baseline_json(),
        "now": forecast.outcome_json(patient, forecast.now_trial(patient), now, target, now.paco2, True),
        "target": {"paco2_mmhg": target.paco2, "ph": target.ph, "asked": target.asked},
        "plans": plans,
        "summit": None if summit is None else {"rate_per_min": summit[0], "paco2_mmhg": summit[1]},
        "levers": levers_json(patient, now),
        "course": forecast.course_json(patient, course),
    }, any(p["on_target"] for p in plans)
