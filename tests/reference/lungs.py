# Outside witness of: what bedside pressures say about a lung (compliance, inspiratory and expiratory resistance),
# the pH after a change of PaCO2, and the rate at which pressure control clears most CO2.
# Published formulas: the one-compartment equation of motion in its periodic steady state (Marini & Crooke 1993; trapped
# volume VT*b/(1-b), b = exp(-Te/(RE*C))); Henderson-Hasselbalch with 6.1 and 0.0307; base excess of extracellular fluid
# HCO3 - 24.8 + 16.2*(pH - 7.40) (CLSI), held constant; PaCO2 = K*VCO2/VA with VA = rate*(VT - VDs)*(1 - f).
# Every inverse is found by brentq or bounded maximisation, from readings that a known lung would have given,
# rounded to four decimals as readings; the answer is the root for those rounded readings, not the lung they came from.

import math
import random

from scipy.optimize import brentq, minimize_scalar

import tables

HEADING = """Lungs recovered from bedside readings, pH at constant base excess, and the summit of pressure control.
Made by lungs.py: roots by brentq, summits by bounded maximisation and then a root of the slope.
A summit's rate is good to 1e-6, its PaCO2 to 1e-9."""

CASES = 60
ROOT = {"xtol": 1e-13, "rtol": 8.9e-16, "maxiter": 500}


def root(function, low, high):
    return float(brentq(function, low, high, **ROOT))


def reading(value):
    return round(float(value), 4)


def left(seconds, resistance, compliance_ml):
    """The share of a volume still in the lung after `seconds` of passive flow."""
    return math.exp(-seconds / (resistance * compliance_ml / 1000.0))


def timing(dice):
    while True:
        rate, ti = round(dice.uniform(8, 34), 1), round(dice.uniform(0.5, 1.5), 2)
        if 60.0 / rate - ti > 0.5:
            return {"rate_per_min": rate, "inspiratory_time_s": ti, "peep_cmh2o": float(dice.randint(0, 16))}


def te_of(row):
    return 60.0 / row["rate_per_min"] - row["inspiratory_time_s"]


def lung(dice):
    return dice.uniform(15, 90), dice.uniform(4, 30), dice.uniform(5, 40)


def compliance_with_trapping(volume_ml, distension, te, resistance):
    """C of distension = VT/(C*(1 - exp(-Te/(RE*C)))): a compliance that explains trapping as well."""
    return root(lambda c: c * (1.0 - left(te, resistance, c)) - volume_ml / distension, 1e-2, 1e6)


def expiratory_resistance_from_auto(auto, volume_ml, compliance, te):
    """RE whose trapped volume VT*b/(1 - b) holds the lung open by `auto`."""

    def miss(log_re):
        b = left(te, math.exp(log_re), compliance)
        return volume_ml * b - auto * compliance * (1.0 - b)

    return math.exp(root(miss, math.log(1e-3), math.log(1e6)))


def volume_control(dice, evidence):
    """Readings of a volume-control breath with a hold. `evidence` is total_peep, given or assumed."""
    while True:
        c, ri, re = lung(dice)
        if evidence == "assumed":
            re = ri
        row = timing(dice)
        te = te_of(row)
        vt = dice.randint(25, 70) * 10
        pause = round(dice.uniform(0.0, 0.25), 2)
        flow = vt / 1000.0 / (row["inspiratory_time_s"] - pause)
        b = left(te, re, c)
        trapped = vt * b / (1.0 - b)
        plateau = row["peep_cmh2o"] + (trapped + vt) / c
        row |= {"pause_s": pause, "tidal_volume_ml": vt, "plateau_cmh2o": reading(plateau)}
        row["peak_cmh2o"] = reading(plateau + ri * flow)
        distension = row["plateau_cmh2o"] - row["peep_cmh2o"]
        found_ri = root(lambda r: row["plateau_cmh2o"] + r * flow - row["peak_cmh2o"], -1.0, 1e3)
        if evidence == "total_peep":
            if trapped / c < 0.3:
                continue
            row["total_peep_cmh2o"] = reading(row["peep_cmh2o"] + trapped / c)
            span = row["plateau_cmh2o"] - row["total_peep_cmh2o"]
            auto = row["total_peep_cmh2o"] - row["peep_cmh2o"]
            found_c = root(lambda x: row["total_peep_cmh2o"] + vt / x - row["plateau_cmh2o"], 1.0, 1e4)
            found_re = expiratory_resistance_from_auto(auto, vt, found_c, te)
            found_auto, steep = auto, 0.0
            assert abs(found_c * span - vt) < 1e-8
        else:
            found_re = found_ri
            if evidence == "given":
                row["given_expiratory_resistance_cmh2o_s_l"] = found_re = round(re, 1)
            steep = (vt / 1000.0 / distension) / (te / found_re)
            if steep > 0.65:
                continue
            found_c = compliance_with_trapping(vt, distension, te, found_re)
            found_auto = distension - vt / found_c
        if found_c <= 140 and plateau < 60:
            return row | {
                "expected_compliance_ml_cmh2o": found_c,
                "expected_inspiratory_resistance_cmh2o_s_l": found_ri,
                "expected_expiratory_resistance_cmh2o_s_l": found_re,
                "expected_auto_peep_cmh2o": found_auto,
            }


def pressure_breath(drive, c, ri, re, ti, te):
    """Tidal volume and end-inspiratory volume (mL) of a square pressure `drive`, breath after equal breath."""
    a, b = left(ti, ri, c), left(te, re, c)
    top = c * drive * (1.0 - a) / (1.0 - a * b)
    return top * (1.0 - b), top


def inspiratory_resistance_from_hold(drive, distension, auto, c, ti):
    """RI by which filling from `auto` towards `drive` for Ti seconds comes to `distension`."""
    return math.exp(
        root(
            lambda log_r: auto + (drive - auto) * (1.0 - left(ti, math.exp(log_r), c)) - distension,
            math.log(1e-3),
            math.log(1e5),
        )
    )


def pressure_control(dice, evidence):
    """Readings of a pressure-control breath. `evidence`: total_peep, given, hold_only (RE = RI) or resistance_only."""
    while True:
        c, ri, re = lung(dice)
        if evidence == "hold_only":
            re = ri
        row = timing(dice)
        te, ti, peep = te_of(row), row["inspiratory_time_s"], row["peep_cmh2o"]
        drive = float(dice.randint(8, 30))
        model_vt, top = pressure_breath(drive, c, ri, re, ti, te)
        row |= {"inspiratory_pressure_cmh2o": drive, "exhaled_tidal_volume_ml": reading(model_vt)}
        vt = row["exhaled_tidal_volume_ml"]
        if not 150 < vt < 900 or left(ti, ri, c) < 0.05:
            continue
        if evidence == "resistance_only":
            row["given_resistance_cmh2o_s_l"] = ri = round(ri, 1)
            row["given_expiratory_resistance_cmh2o_s_l"] = re = round(re, 1)
            if vt / 1000.0 / drive >= 0.95 / (ri / ti + re / te):
                continue
            found_c = root(lambda x: pressure_breath(drive, x, ri, re, ti, te)[0] - vt, 1e-2, 1e6)
            found_ri, found_re = ri, re
            found_auto = pressure_breath(drive, found_c, ri, re, ti, te)[1] / found_c - vt / found_c
        else:
            row["plateau_cmh2o"] = reading(peep + top / c)
            distension = row["plateau_cmh2o"] - peep
            if evidence == "total_peep":
                auto = (top - model_vt) / c
                if auto < 0.3:
                    continue
                row["total_peep_cmh2o"] = reading(peep + auto)
                found_auto = row["total_peep_cmh2o"] - peep
                found_c = vt / (row["plateau_cmh2o"] - row["total_peep_cmh2o"])
                found_re = expiratory_resistance_from_auto(found_auto, vt, found_c, te)
            elif evidence == "given":
                row["given_expiratory_resistance_cmh2o_s_l"] = found_re = round(re, 1)
                if (vt / 1000.0 / distension) / (te / found_re) > 0.65:
                    continue
                found_c = compliance_with_trapping(vt, distension, te, found_re)
                found_auto = distension - vt / found_c
            else:
                # With RE = RI one exponent serves both ways: filling from x to p in Ti, emptying from p to x in Te.
                crest = drive / (1.0 + te / ti)

                def miss(x):
                    return math.log(x / distension) - te / ti * math.log((drive - distension) / (drive - x))

                if distension <= crest * 1.02:
                    continue
                found_auto = root(miss, 1e-12, crest)
                found_c = vt / (distension - found_auto)
                found_re = None
            found_ri = inspiratory_resistance_from_hold(drive, distension, found_auto, found_c, ti)
            found_re = found_ri if found_re is None else found_re
            if evidence == "hold_only" and (vt / 1000.0 / distension) / (te / found_re) > 0.65:
                continue
        if found_c <= 140:
            return row | {
                "expected_compliance_ml_cmh2o": found_c,
                "expected_inspiratory_resistance_cmh2o_s_l": found_ri,
                "expected_expiratory_resistance_cmh2o_s_l": found_re,
                "expected_auto_peep_cmh2o": found_auto,
            }


def bicarbonate(ph, paco2):
    return 0.0307 * paco2 * 10.0 ** (ph - 6.1)


def base_excess(ph, paco2):
    return bicarbonate(ph, paco2) - 24.8 + 16.2 * (ph - 7.40)


def ventilated_acid_base(dice):
    ph, paco2 = round(dice.uniform(6.95, 7.60), 2), round(dice.uniform(22, 110), 1)
    after = round(dice.uniform(20, 110), 1)
    kept = base_excess(ph, paco2)
    found = root(lambda x: base_excess(x, after) - kept, 5.5, 9.0)
    back = root(lambda p: base_excess(found, p) - kept, 1.0, 400.0)
    assert abs(back - after) < 1e-9
    return {
        "ph": ph,
        "paco2_mmhg": paco2,
        "new_paco2_mmhg": after,
        "expected_base_excess_mmol_l": kept,
        "expected_new_ph": found,
        "expected_new_bicarbonate_mmol_l": bicarbonate(found, after),
    }


def summit(dice):
    """The rate at which a held inspiratory time or I:E ratio under pressure control clears most CO2."""
    while True:
        c, ri, re = (round(x, 1) for x in lung(dice))
        row = {
            "compliance_ml_cmh2o": c,
            "inspiratory_resistance_cmh2o_s_l": ri,
            "expiratory_resistance_cmh2o_s_l": re,
            "inspiratory_pressure_cmh2o": float(dice.randint(8, 30)),
            "series_dead_space_ml": float(dice.randint(40, 190)),
            "rate_per_min": float(dice.randint(8, 30)),
            "paco2_mmhg": float(dice.randint(35, 95)),
        }
        if dice.random() < 0.5:
            row["held_inspiratory_time_s"] = round(dice.uniform(0.5, 1.3), 2)
            ti_of = lambda rate, ti=row["held_inspiratory_time_s"]: ti
            fastest = 60.0 / (row["held_inspiratory_time_s"] + 0.1)
        else:
            row["held_inspiratory_part"] = 1.0
            row["held_expiratory_part"] = round(dice.uniform(1.0, 4.0), 1)
            share = 1.0 / (1.0 + row["held_expiratory_part"])
            ti_of = lambda rate, share=share: 60.0 / rate * share
            fastest = 60.0 * (1.0 - share) / 0.1

        def volume(rate):
            ti = ti_of(rate)
            return pressure_breath(row["inspiratory_pressure_cmh2o"], c, ri, re, ti, 60.0 / rate - ti)[0]

        def fresh(rate):
            return rate * (volume(rate) - row["series_dead_space_ml"])

        if row["rate_per_min"] >= fastest or fresh(row["rate_per_min"]) < 300:
            continue
        rough = minimize_scalar(lambda r: -fresh(r), bounds=(2.0, fastest), method="bounded", options={"xatol": 1e-9})
        # A maximum is flat: refine its place as the root of a five-point slope.
        step = 1e-3 * rough.x

        def slope(r):
            return (fresh(r - 2 * step) - 8 * fresh(r - step) + 8 * fresh(r + step) - fresh(r + 2 * step)) / (12 * step)

        if rough.x > fastest - 0.5 or rough.x < 4.0:
            continue
        best = root(slope, rough.x * 0.99, min(rough.x * 1.01, fastest - 3 * step))
        paco2 = row["paco2_mmhg"] * fresh(row["rate_per_min"]) / fresh(best)
        return row | {
            "expected_summit_rate_per_min": best,
            "expected_summit_paco2_mmhg": paco2,
            "expected_summit_tidal_volume_ml": volume(best),
        }


def tables_of_lungs():
    dice = random.Random(20260305)
    kinds = {f"volume_control_{e}": (volume_control, e) for e in ("total_peep", "given", "assumed")}
    kinds |= {
        f"pressure_control_{e}": (pressure_control, e) for e in ("total_peep", "given", "hold_only", "resistance_only")
    }
    found = {name: [make(dice, e) for _ in range(CASES)] for name, (make, e) in kinds.items()}
    found["ph_at_constant_base_excess"] = [ventilated_acid_base(dice) for _ in range(CASES)]
    found["pressure_control_summit"] = [summit(dice) for _ in range(CASES)]
    return {"lungs.toml": tables.document(HEADING, found)}


if __name__ == "__main__":
    tables.run(
        tables_of_lungs,
        loose={"expected_summit_rate_per_min": 1e-6, "expected_summit_tidal_volume_ml": 1e-6},
    )
