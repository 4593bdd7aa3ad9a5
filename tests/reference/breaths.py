# Outside witness of: tidal and trapped volume, auto-PEEP, plateau, peak, mean airway pressure, work per breath and
# mechanical power of one compartment under volume control (constant flow) and pressure control (square pressure).
# Published formula: the equation of motion of the respiratory system, Paw = PEEP + V/C + R*dV/dt (V above the
# volume at PEEP), with passive expiration against PEEP, 0 = V/C + RE*dV/dt (Marini & Crooke's one-compartment model).
# It is integrated breath by breath until it repeats (scipy DOP853); no closed form is used.
# Work = integral of Paw*flow over inflation, counted from zero pressure, so PEEP and auto-PEEP are in it.
# Power = 0.098 * rate * work (1 cmH2O*L = 0.098 J, Gattinoni 2016).

import random

from scipy.integrate import solve_ivp

import tables

HEADING = """One-compartment breaths at their periodic steady state, integrated numerically. Made by breaths.py.
Work is from zero pressure: the integral of airway pressure times flow during inflation.
Compare small volumes and pressures with an absolute floor of 1e-8 (mL, cmH2O)."""

CASES = 240
TIGHT = {"method": "DOP853", "rtol": 1e-12, "atol": 1e-16}


def leg(derivative, state, seconds):
    """Integrates one part of the breath; the state is V (L), the integral of Paw (cmH2O*s) and of Paw*flow (cmH2O*L)."""
    if seconds <= 0:
        return state
    found = solve_ivp(derivative, (0.0, seconds), state, **TIGHT)
    if not found.success:
        raise RuntimeError(found.message)
    return found.y[:, -1]


def breath(case, start_l):
    """One breath from `start_l` above the volume at PEEP: what it reads, and the volume at its end."""
    c = case["compliance_ml_cmh2o"] / 1000.0
    ri = case["inspiratory_resistance_cmh2o_s_l"]
    re = case["expiratory_resistance_cmh2o_s_l"]
    peep = case["peep_cmh2o"]
    period = 60.0 / case["rate_per_min"]
    ti = case["inspiratory_time_s"]
    pause = case.get("pause_s", 0.0)

    if "tidal_volume_ml" in case:
        flow = case["tidal_volume_ml"] / 1000.0 / (ti - pause)

        def inflate(_t, y):
            paw = peep + y[0] / c + ri * flow
            return [flow, paw, paw * flow]

        top = leg(inflate, [start_l, 0.0, 0.0], ti - pause)
        peak = peep + top[0] / c + ri * flow
    else:
        paw = peep + case["inspiratory_pressure_cmh2o"]

        def inflate(_t, y):
            flow = (paw - peep - y[0] / c) / ri
            return [flow, paw, paw * flow]

        top = leg(inflate, [start_l, 0.0, 0.0], ti)
        peak = paw
    held = leg(lambda _t, y: [0.0, peep + y[0] / c, 0.0], top, pause)
    end = leg(lambda _t, y: [-y[0] / (c * re), peep, 0.0], held, period - ti)
    return {
        "start_l": start_l,
        "top_l": top[0],
        "end_l": end[0],
        "peak": peak,
        "plateau": peep + top[0] / c,
        "mean": end[1] / period,
        "work": end[2],
    }


def steady(case):
    """The breath that ends where it began: secant steps on (end - start), each step a whole integrated breath."""
    low = breath(case, 0.0)
    high = breath(case, low["end_l"] + 0.01)
    for _ in range(20):
        miss_low = low["end_l"] - low["start_l"]
        miss_high = high["end_l"] - high["start_l"]
        if abs(miss_high) <= 1e-13 or miss_high == miss_low:
            return high
        step = miss_high * (high["start_l"] - low["start_l"]) / (miss_high - miss_low)
        low, high = high, breath(case, max(0.0, high["start_l"] - step))
    if abs(high["end_l"] - high["start_l"]) > 1e-11:
        raise RuntimeError(f"no steady breath for {case}")
    return high


def expected(case):
    b = steady(case)
    return {
        "expected_tidal_volume_ml": float((b["top_l"] - b["start_l"]) * 1000.0),
        "expected_trapped_volume_ml": float(b["end_l"] * 1000.0),
        "expected_auto_peep_cmh2o": float(b["end_l"] * 1000.0 / case["compliance_ml_cmh2o"]),
        "expected_plateau_cmh2o": float(b["plateau"]),
        "expected_peak_cmh2o": float(b["peak"]),
        "expected_mean_airway_pressure_cmh2o": float(b["mean"]),
        "expected_work_per_breath_cmh2o_l": float(b["work"]),
        "expected_mechanical_power_j_min": float(0.098 * case["rate_per_min"] * b["work"]),
    }


def lung(dice):
    """A lung and a timing that leaves more than 0.15 s to breathe out."""
    while True:
        rate = round(dice.uniform(6, 40), 1)
        ti = round(dice.uniform(0.3, 2.0), 2)
        if 60.0 / rate - ti > 0.15:
            break
    return {
        "compliance_ml_cmh2o": round(dice.uniform(10, 100), 1),
        "inspiratory_resistance_cmh2o_s_l": round(dice.uniform(3, 40), 1),
        "expiratory_resistance_cmh2o_s_l": round(dice.uniform(3, 60), 1),
        "rate_per_min": rate,
        "inspiratory_time_s": ti,
        "peep_cmh2o": round(dice.uniform(0, 20), 1),
    }


def tables_of_breaths():
    dice = random.Random(20260304)
    volume, pressure = [], []
    while len(volume) < CASES:
        case = lung(dice)
        pause = round(dice.choice([0.0, dice.uniform(0.0, 0.3)]), 2)
        case["pause_s"] = min(pause, round(case["inspiratory_time_s"] - 0.2, 2))
        case["tidal_volume_ml"] = round(dice.uniform(150, 900))
        volume.append(case | expected(case))
    while len(pressure) < CASES:
        case = lung(dice)
        case["inspiratory_pressure_cmh2o"] = round(dice.uniform(4, 35), 1)
        pressure.append(case | expected(case))
    return {"breaths.toml": tables.document(HEADING, {"volume_control": volume, "pressure_control": pressure})}


if __name__ == "__main__":
    tables.run(tables_of_breaths)
