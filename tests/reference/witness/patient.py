# Outside witness of: the state of one patient at the bedside now, gathered from the whole record.
# Published: see the modules it calls (dead_space, lung, belief, physics).

import math
from dataclasses import dataclass

from . import Refusal, belief, dead_space
from .breath import Held, effective_rate, tidal_volume
from .lung import own_rate, own_volume, pressure_scale, read_lung, volume_ratio
from .physics import (
    Course,
    alveolar_po2,
    at_temperature,
    barometric,
    base_excess,
    bicarbonate,
    k_mmhg,
    predicted_weight,
)
from .profile import load as load_profile


@dataclass
class Patient:
    case: object
    profile: object
    held: str
    steadiness: object

    def __post_init__(self):
        entries = self.case.entries
        self.last = entries[-1]
        gases = self.case.gases
        self.gas = gases[-1]
        if "support" in (self.last.settings["control"], self.gas.settings["control"]):
            raise Refusal("every breath is the patient's: no forecast and no plan under support")
        self.weight = predicted_weight(self.case.patient)
        self.lung = read_lung(entries)
        for entry in (self.last, self.gas):
            self.check_pressure_control(entry.settings)
        self.keeps = Held(volume_ratio(entries), pressure_scale(entries, self.lung))
        self.own = own_rate(entries)
        self.settings = self.last.settings
        until = entries[: entries.index(self.gas) + 1]
        # Unchanged settings give the measured PaCO2 back, so a gas drawn under them is read with the own rate of now.
        heard = any("total_rate" in e.measured for e in until) and not self.measured_now()
        gas_own = own_rate(until) if heard else self.own

        # The baseline: the latest gas, what was dialled then, and the evidence charted with it.
        s = self.gas.settings
        self.paco2 = self.gas.gas["paco2"]
        self.rate = effective_rate(s, gas_own)
        self.vt = tidal_volume(s, self.lung, self.keeps, gas_own)
        self.apparatus = s.get("apparatus_dead_space", 0.0)
        self.celsius = self.gas.measured.get("temperature", 37.0)
        self.p_t, self.k = at_temperature(self.paco2, self.celsius), k_mmhg(self.celsius)
        self.acid_base()
        self.section1 = dead_space.assess(
            self.case.patient, self.gas.measured, self.paco2, self.rate, self.vt, self.apparatus
        )
        self.believe(gases)
        self.space = self.section1
        if len(self.belief.gases) > 1:
            series = self.belief.posterior_airway() + self.apparatus
            self.space = dead_space.with_series(self.section1, series, self.p_t, self.k, self.rate, self.vt)

    def check_pressure_control(self, settings):
        if settings["control"] != "pressure":
            return
        seen = any(e.settings["control"] == "pressure" and own_volume(e) is not None for e in self.case.entries)
        if self.lung.compliance is None or not (seen or self.lung.ri is not None):
            raise Refusal("pressure control needs exhaled_tidal_volume, or compliance and resistance")

    def acid_base(self):
        gas = self.gas.gas
        self.ph = gas.get("ph")
        if self.ph is None and "bicarbonate" in gas:
            self.ph = 6.1 + math.log10(gas["bicarbonate"] / (0.0307 * self.paco2))
        self.excess = None if self.ph is None else base_excess(self.ph, self.paco2)

    def believe(self, gases):
        found = self.section1
        airway = found.series - self.apparatus
        if found.firm:
            mean, spread = airway, 10.0
        else:
            mean = dead_space.rule_airway(self.case.patient)
            spread = max(25.0, 0.4 * mean)
        heard, before = [], None
        for entry in gases:
            if entry.settings["control"] == "support":
                continue
            one = self.hear(entry, airway)
            if before is not None:
                one.unsettled = self.unsettled(before, entry, heard[-1], one, airway)
            heard.append(one)
            before = entry
        self.belief = belief.Belief(mean, spread, heard, self.steadiness)

    def hear(self, entry, airway):
        s = entry.settings
        apparatus = s.get("apparatus_dead_space", 0.0)
        if entry is self.gas:
            rate, vt = self.rate, self.vt
        else:
            own = own_rate(self.case.entries[: self.case.entries.index(entry) + 1])
            rate = effective_rate(s, own)
            vt = own_volume(entry) if s["control"] == "pressure" else None
            vt = tidal_volume(s, self.lung, self.keeps, own) if vt is None else vt
        hours = (entry.drawn_at - self.gas.drawn_at).total_seconds() / 3600.0
        return belief.Heard(entry.gas["paco2"], rate, vt, apparatus, hours, self.fresh(rate, vt, airway + apparatus))

    @staticmethod
    def fresh(rate, vt, series):
        """Alveolar ventilation but for (1 - f); a volume that hardly passes the airway counts as 5 % of it."""
        return rate * max(vt - series, 0.05 * vt)

    def unsettled(self, before, entry, past, one, airway):
        """Added variance when the ventilation before this gas had been changed too lately."""
        entries = self.case.entries
        first, last = entries.index(before), entries.index(entry)
        changed = None
        for k in range(first + 1, last + 1):
            old, new = entries[k - 1].settings, entries[k].settings
            if old != new and self.moves_ventilation(old, new, airway, own_rate(entries[: k + 1])):
                changed = entries[k]
        if changed is None or changed is entry or self.weight is None or self.section1.output is None:
            return 0.0
        final = past.paco2 * past.fresh / one.fresh
        minutes = max(0.0, (entry.drawn_at - changed.at).total_seconds() / 60.0)
        course = Course(self.weight, self.section1.output, past.paco2, final)
        if minutes >= course.settled():
            return 0.0
        missing = course.paco2(minutes) - final
        return math.log1p(abs(missing) / final) ** 2

    def moves_ventilation(self, old, new, airway, own):
        if "support" in (old["control"], new["control"]):
            return True
        flows = []
        for s in (old, new):
            vt = tidal_volume(s, self.lung, self.keeps, own)
            flows.append(self.fresh(effective_rate(s, own), vt, airway + s.get("apparatus_dead_space", 0.0)))
        return abs(flows[1] / flows[0] - 1.0) > 1e-9

    def measured_now(self):
        """True when no setting has changed since the latest gas."""
        entries = self.case.entries
        start = entries.index(self.gas)
        return all(entries[k].settings == self.gas.settings for k in range(start, len(entries)))

    def reading(self, held):
        """(series volume, alveolar fraction) as `held` reads the dead space; None when it cannot."""
        space = self.space
        if held == "split":
            return space.series, space.fraction
        if space.physiological is None:
            return None
        return (space.physiological, 0.0) if held == "volume" else (0.0, space.physiological / self.vt)

    def baseline_json(self):
        space, gas, s, lung = self.space, self.gas.gas, self.gas.settings, self.lung
        fio2 = s.get("fio2")
        po2 = None if fio2 is None else alveolar_po2(fio2, barometric(self.case.patient), self.paco2)
        pao2 = gas.get("pao2")
        weight = self.weight
        tau = None if lung.re is None or lung.compliance is None else lung.re * lung.compliance / 1000.0
        return {
            "predicted_weight_kg": weight,
            "co2_production_ml_min": space.output,
            "co2_evidence": space.evidence,
            "trapping_evidence": lung.evidence,
            "series_dead_space_ml": space.series,
            "alveolar_dead_space_fraction": space.fraction,
            "dead_space_fraction": None if space.physiological is None else space.physiological / self.vt,
            "compliance_ml_cmh2o": lung.compliance,
            "inspiratory_resistance_cmh2o_s_l": lung.ri,
            "expiratory_resistance_cmh2o_s_l": lung.re,
            "expiratory_time_constant_s": tau,
            "base_excess_mmol_l": self.excess,
            "bicarbonate_mmol_l": None if self.ph is None else bicarbonate(self.ph, self.paco2),
            "ventilatory_ratio": None
            if weight is None
            else self.rate * self.vt * self.paco2 / (weight * 100.0 * 37.5),
            "pao2_fio2_mmhg": None if pao2 is None or fio2 is None else pao2 / fio2,
            "alveolar_po2_mmhg": po2,
            "alveolar_arterial_po2_mmhg": None if pao2 is None or po2 is None else po2 - pao2,
        }


def open_patient(case, profile_name=None, held="split", steadiness=None):
    profile = load_profile(profile_name or case.profile, case.folder)
    named = steadiness or case.steadiness
    if named not in ("usual", "settled"):
        raise Refusal(f"steadiness {named!r} is neither usual nor settled")
    figures = belief.SETTLED if named == "settled" else profile.steadiness or belief.USUAL
    return Patient(case, profile, held, figures)
