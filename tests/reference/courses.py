# Outside witness of: how PaCO2 moves with time after a change of ventilation, and when it has settled.
# Published formula: two stores of CO2 in series (Farhi & Rahn 1955), blood and lungs exchanging with slow tissue:
#   Sf dPf/dt = VCO2 - VA*Pf/K - G*(Pf - Ps),   Ss dPs/dt = G*(Pf - Ps),   both starting at the present PaCO2,
# Sf 0.6 and Ss 1.0 mL/mmHg and G 0.02 mL/min/mmHg per kg of predicted weight, VA/K such that Pf ends at the forecast.
# Integrated numerically (scipy DOP853, dense output); settled = the last crossing of the band
# max(2 mmHg, 5 % of the final value, 20 % of the change) around the final value, by brentq.

import random

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

import tables

HEADING = """Course of PaCO2 after a change of ventilation: two stores, integrated numerically. Made by courses.py.
settled_minutes is 0 when the change lies inside its own band."""

CASES = 72
MINUTES = (0.0, 5.0, 10.0, 20.0, 30.0, 60.0)
FAST_PER_KG, SLOW_PER_KG, BETWEEN_PER_KG = 0.6, 1.0, 0.02
HORIZON = 3000.0


def course(row):
    kg, output = row["predicted_weight_kg"], row["co2_production_ml_min"]
    start, final = row["paco2_start_mmhg"], row["paco2_final_mmhg"]
    washout = output / final

    def stores(_t, p):
        across = BETWEEN_PER_KG * kg * (p[0] - p[1])
        return [(output - washout * p[0] - across) / (FAST_PER_KG * kg), across / (SLOW_PER_KG * kg)]

    found = solve_ivp(stores, (0.0, HORIZON), [start, start], method="DOP853", rtol=1e-12, atol=1e-12, dense_output=True)
    if not found.success:
        raise RuntimeError(found.message)
    # Dense output is of lower order than the steps: integrate to each reported minute.
    values, state = [start], [start, start]
    for low, high in zip(MINUTES, MINUTES[1:]):
        leg = solve_ivp(stores, (low, high), state, method="DOP853", rtol=1e-12, atol=1e-12)
        state = leg.y[:, -1]
        values.append(float(state[0]))

    band = max(2.0, 0.05 * final, 0.2 * abs(start - final))

    def outside(t):
        return abs(float(found.sol(t)[0]) - final) - band

    if abs(start - final) <= band:
        return values, 0.0
    grid = np.linspace(0.0, HORIZON, 30001)
    beyond = np.abs(found.sol(grid)[0] - final) > band
    last = int(np.nonzero(beyond)[0][-1])
    rough = float(brentq(outside, grid[last], grid[last + 1], xtol=1e-12, rtol=8.9e-16))

    # Polish on an integration that ends at the crossing itself.
    def ends(t):
        leg = solve_ivp(stores, (0.0, t), [start, start], method="DOP853", rtol=1e-12, atol=1e-12)
        return abs(float(leg.y[0, -1]) - final) - band

    return values, float(brentq(ends, rough * 0.999, rough * 1.001 + 1e-9, xtol=1e-11, rtol=1e-14))


def tables_of_courses():
    dice = random.Random(20260306)
    rows = []
    for _ in range(CASES):
        kg = round(dice.uniform(35, 90), 1)
        start = round(dice.uniform(25, 110), 1)
        row = {
            "predicted_weight_kg": kg,
            "co2_production_ml_min": round(kg * dice.uniform(1.8, 5.0), 1),
            "paco2_start_mmhg": start,
            "paco2_final_mmhg": round(min(150.0, max(15.0, start * dice.uniform(0.5, 1.9))), 1),
        }
        values, settled = course(row)
        rows.append(row | {"minutes": list(MINUTES), "expected_paco2_mmhg": values, "expected_settled_minutes": settled})
    return {"courses.toml": tables.document(HEADING, {"course": rows})}


if __name__ == "__main__":
    tables.run(tables_of_courses, loose={"expected_settled_minutes": 1e-6})
