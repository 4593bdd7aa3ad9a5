# Outside witness of: carbon dioxide, acid-base, oxygen, body, energy and the two-store course.
# Published: ideal gas law; Enghoff 1938; Henderson-Hasselbalch 6.1/0.0307; base excess of extracellular fluid (CLSI);
# Fenn-Rahn-Otis 1946; ARDS Network predicted weight; Mifflin-St Jeor 1990 with Weir 1949; Farhi & Rahn 1955 stores;
# ISO 2533 barometric formula.

import math

from scipy.optimize import brentq

from . import Refusal

TIGHT = {"xtol": 1e-13, "rtol": 8.9e-16, "maxiter": 500}


def k_mmhg(celsius):
    return 760.0 * (273.15 + celsius) / 273.15


def at_temperature(paco2, celsius):
    return paco2 * 10.0 ** (0.019 * (celsius - 37.0))


def bicarbonate(ph, paco2):
    return 0.0307 * paco2 * 10.0 ** (ph - 6.1)


def base_excess(ph, paco2):
    return bicarbonate(ph, paco2) - 24.8 + 16.2 * (ph - 7.40)


def ph_at(excess, paco2):
    """The pH at which this PaCO2 has this base excess."""
    if excess is None or paco2 is None:
        return None
    return float(brentq(lambda ph: base_excess(ph, paco2) - excess, -30.0, 14.0, **TIGHT))


def paco2_at(excess, ph):
    return (24.8 + excess - 16.2 * (ph - 7.40)) / (0.0307 * 10.0 ** (ph - 6.1))


def barometric(patient):
    if "barometric_pressure" in patient:
        return patient["barometric_pressure"]
    if "altitude" in patient:
        return 760.0 * (1.0 - 2.25577e-5 * patient["altitude"]) ** 5.25588
    return 760.0


def alveolar_po2(fio2, pb, paco2):
    return fio2 * (pb - 47.0) - paco2 * (fio2 + (1.0 - fio2) / 0.8)


def predicted_weight(patient):
    if "predicted_weight" in patient:
        return patient["predicted_weight"]
    if "height" not in patient or "sex" not in patient:
        return None
    height = patient["height"]
    if not 130.0 <= height <= 220.0:
        raise Refusal(f"height {height} cm is outside 130-220 cm: give the predicted weight")
    return (50.0 if patient["sex"] == "male" else 45.5) + 0.91 * (height - 152.4)


def estimated_output(patient):
    """CO2 production, mL/min STPD, when nothing measures it."""
    if all(k in patient for k in ("age", "weight", "height", "sex")):
        ree = 10.0 * patient["weight"] + 6.25 * patient["height"] - 5.0 * patient["age"]
        ree += 5.0 if patient["sex"] == "male" else -161.0
        return ree / (1.44 * (3.941 / 0.8 + 1.106))
    weight = predicted_weight(patient)
    return None if weight is None else 3.0 * weight


class Course:
    """Two stores from `start` to `final`; the sum of two exponentials written with eigenvalues."""

    def __init__(self, weight, output, start, final):
        self.start, self.final = start, final
        fast, slow, between = 0.6 * weight, weight, 0.02 * weight
        wash = output / final
        a, b = -(wash + between) / fast, between / fast
        c, d = between / slow, -between / slow
        middle, spread = (a + d) / 2.0, math.sqrt(((a - d) / 2.0) ** 2 + b * c)
        self.rates = (middle + spread, middle - spread)
        # Deviation (1, 1) of both stores at the start: Pf = sum of parts, slope at 0 = a + b.
        first = (a + b - self.rates[1]) / (self.rates[0] - self.rates[1])
        self.parts = (first, 1.0 - first)

    def paco2(self, minutes):
        shrink = sum(p * math.exp(r * minutes) for p, r in zip(self.parts, self.rates))
        return self.final + (self.start - self.final) * shrink

    def settled(self):
        change = abs(self.start - self.final)
        band = max(2.0, 0.05 * self.final, 0.2 * change)
        if change <= band:
            return 0.0

        def miss(minutes):
            return abs(self.paco2(minutes) - self.final) - band

        high = 10.0
        while miss(high) > 0:
            high *= 2.0
        return float(brentq(miss, 0.0, high, xtol=1e-12, rtol=8.9e-16))

    def next_gas(self):
        return min(60.0, max(10.0, 5.0 * math.ceil(self.settled() / 5.0 - 1e-12)))
