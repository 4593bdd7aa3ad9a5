# Outside witness of: series and alveolar dead space, and CO2 production, from whatever evidence is charted with the gas.
# Published: Enghoff 1938, VD/VT = 1 - PECO2/PaCO2; Radford 1955, 2.2 mL/kg (half behind a tube, Nunn);
# alveolar fraction 1 - PETCO2/PaCO2; PaCO2 = K*VCO2/VA.

from dataclasses import dataclass

from . import Refusal
from .physics import at_temperature, estimated_output, k_mmhg, predicted_weight


@dataclass
class DeadSpace:
    series: float  # mL, apparatus included
    fraction: float | None  # alveolar share
    output: float | None  # CO2 production, mL/min STPD
    evidence: str
    physiological: float | None  # mL
    firm: bool = False  # series volume measured or cut to VDphys: narrow prior


def rule_airway(patient):
    """Airway dead space by the rule, mL."""
    weight, native = predicted_weight(patient), patient.get("airway", "tube") == "native"
    if weight is None:
        return 140.0 if native else 70.0
    return (2.2 if native else 1.1) * weight


def physiological_from(measured, p_t):
    """VD/VT that was measured, or None."""
    if "dead_space_fraction" in measured:
        return measured["dead_space_fraction"]
    if "mixed_expired_co2" in measured:
        return 1.0 - measured["mixed_expired_co2"] / p_t
    return None


def assess(patient, measured, paco2, rate, vt, apparatus):
    celsius = measured.get("temperature", 37.0)
    p_t, k = at_temperature(paco2, celsius), k_mmhg(celsius)
    rule = rule_airway(patient) + apparatus
    alveolar = None
    if "end_tidal_co2" in measured:
        if measured["end_tidal_co2"] > 1.15 * p_t:
            raise Refusal("end_tidal_co2 lies more than 15 % above paco2")
        alveolar = max(0.0, 1.0 - measured["end_tidal_co2"] / p_t)
    share = physiological_from(measured, p_t)
    physiological, evidence, output = None, None, None
    if share is not None:
        physiological, evidence = share * vt, "dead_space"
        if physiological >= vt or physiological < 0:
            raise Refusal("the dead space is as large as the tidal volume")
        output = p_t * rate * (vt - physiological) / k
    elif "co2_production" in measured:
        output, evidence = measured["co2_production"], "co2_production"
        fresh = k * output / p_t
        if fresh >= rate * vt:
            raise Refusal("co2_production needs more ventilation than there is")
        physiological = vt - fresh / rate

    if physiological is not None:
        if alveolar is not None and alveolar < 1.0:
            series = (physiological - alveolar * vt) / (1.0 - alveolar)
            if series >= apparatus:
                return DeadSpace(series, alveolar, output, evidence, physiological, True)
        if rule >= vt or physiological < rule:
            return DeadSpace(physiological, 0.0, output, evidence, physiological, True)
        return DeadSpace(rule, (physiological - rule) / (vt - rule), output, evidence, physiological)

    if rule >= vt:
        raise Refusal("the series dead space is as large as the tidal volume")
    if alveolar is not None:
        output = p_t * rate * (vt - rule) * (1.0 - alveolar) / k
        return DeadSpace(rule, alveolar, output, "end_tidal", rule + alveolar * (vt - rule))
    output = estimated_output(patient)
    if output is None:
        return DeadSpace(rule, None, None, "estimated", None)
    fraction = (vt - k * output / p_t / rate - rule) / (vt - rule)
    if not 0.0 <= fraction <= 0.85:
        fraction = min(0.85, max(0.0, fraction))
        output = p_t * rate * (vt - rule) * (1.0 - fraction) / k
    return DeadSpace(rule, fraction, output, "estimated", rule + fraction * (vt - rule))


def with_series(found, series, p_t, k, rate, vt):
    """The same evidence with the series volume that several gases point to."""
    if found.physiological is None:
        return DeadSpace(series, None, None, found.evidence, None, found.firm)
    fraction = (found.physiological - series) / (vt - series)
    if fraction >= 0.0:
        return DeadSpace(series, fraction, found.output, found.evidence, found.physiological, found.firm)
    return DeadSpace(series, 0.0, p_t * rate * (vt - series) / k, found.evidence, series, found.firm)
