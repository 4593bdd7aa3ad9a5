# Outside witness of: the quantiles of a forecast. The program's own figures are held against (a) a grid eleven times as
# dense and (b) random draws that use neither the grid nor the Kalman filter (joint normal density of all gases).
# Published: Bayes' rule; Kalman 1960 for the filter that (b) does without.
#
#   python check_belief.py BINARY [--draws 200000]
#
# Prints the worst disagreement and `N passed, N failed`; exit status 1 when any failed.

import argparse
import json
import math
import subprocess
import sys
from pathlib import Path

import numpy as np

from witness.casefile import load
from witness.forecast import build_trial, plain, spread
from witness.patient import open_patient

CASES = Path(__file__).resolve().parents[2] / "presets" / "cases"
NAMES = ("paco2_low_mmhg", "paco2_half_low_mmhg", "paco2_expected_mmhg", "paco2_half_high_mmhg", "paco2_high_mmhg")
SHARES = (0.05, 0.25, 0.5, 0.75, 0.95)
# One gas and several, rate and volume changed, apparatus taken out.
TRIALS = (
    ("injured-lungs", {"rate": "26"}),
    ("injured-lungs", {"tidal_volume": "400", "rate": "15"}),
    ("injured-lungs-exchanger", {"apparatus_dead_space": "0"}),
    ("three-days", {"rate": "20", "tidal_volume": "330"}),
    ("chronic-retainer", {"rate": "12"}),
    ("fever", {"tidal_volume": "440"}),
    ("obstruction-pressure", {"rate": "20"}),
)
DENSE_CELLS = 2211  # eleven cells for each of the 201
DENSE = 5e-6  # relative; what a midpoint rule of 201 cells may cost
STANDARD_ERRORS = 5.0


def program(binary, name, flags):
    words = [f"--{key.replace('_', '-')}={value}" for key, value in flags.items()]
    out = subprocess.run([binary, "forecast", str(CASES / f"{name}.toml"), "--json", *words], capture_output=True, check=True)
    return [json.loads(out.stdout)["trial"][key] for key in NAMES]


def rebuilt(found, cells):
    """The same belief on another grid."""
    return type(found)(found.mean, found.spread, found.gases, found.steadiness, cells)


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("binary")
    parser.add_argument("--draws", type=int, default=200_000)
    chosen = parser.parse_args()
    passed = failed = 0
    worst_dense = worst_drawn = 0.0
    for name, flags in TRIALS:
        said = program(chosen.binary, name, flags)
        patient = open_patient(load(str(CASES / f"{name}.toml")), None, "split", None)
        every = dict.fromkeys(("control", "peep", "fio2", "inspiratory_time", "flow", "ratio", "pause", "co2_production",
                               "compliance", "resistance", "rate", "tidal_volume", "inspiratory_pressure",
                               "apparatus_dead_space"))
        trial = build_trial(patient, {**every, **flags})
        step, found = spread(patient, trial, plain(patient, trial))
        dense = rebuilt(patient.belief, DENSE_CELLS).spread_of(step)
        drawn = np.sort(np.exp(patient.belief.draws(step, chosen.draws)))
        for share, value in zip(SHARES, said):
            off = abs(value / dense.quantile(share) - 1.0)
            worst_dense = max(worst_dense, off)
            # The standard error of a drawn quantile: sqrt(p(1 - p)/n) over the density there, here by the spread of ranks.
            half = STANDARD_ERRORS * math.sqrt(share * (1.0 - share) / chosen.draws)
            low = drawn[max(0, int((share - half) * chosen.draws))]
            high = drawn[min(chosen.draws - 1, int((share + half) * chosen.draws))]
            worst_drawn = max(worst_drawn, abs(value / drawn[int(share * chosen.draws)] - 1.0))
            good = off <= DENSE and low <= value <= high
            passed, failed = passed + good, failed + (not good)
            if not good:
                print(f"{name} {flags} {share}: program {value:.5f}, dense {dense.quantile(share):.5f}, drawn {low:.5f} to {high:.5f}")
    print(f"worst against the dense grid {worst_dense:.1e}, against the draws {worst_drawn:.1e} (relative)")
    print(f"{passed} passed, {failed} failed")
    sys.exit(1 if failed else 0)


if __name__ == "__main__":
    main()
