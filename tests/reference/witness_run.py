# Outside witness: reads the arguments of witness.py and answers (see there).

import argparse

from witness import Refusal
from witness.casefile import load
from witness.forecast import SETTING_FLAGS, build_trial, forecast_json, plain, spread
from witness.patient import open_patient
from witness.plan import plan_json


def arguments(argv):
    parser = argparse.ArgumentParser(prog="witness.py")
    parser.add_argument("verb", choices=("plan", "forecast"))
    parser.add_argument("case")
    parser.add_argument("--json", action="store_true")
    parser.add_argument("--to-paco2", type=float)
    parser.add_argument("--to-ph", type=float)
    parser.add_argument("--aim", choices=("rate", "volume", "gentle"))
    parser.add_argument("--least", choices=("load", "power"), default="load")
    parser.add_argument("--profile")
    parser.add_argument("--held", choices=("split", "volume", "fraction"), default="split")
    parser.add_argument("--steadiness", choices=("usual", "settled"))
    parser.add_argument("--control", choices=("volume", "pressure"))
    parser.add_argument("--monte-carlo", type=int, metavar="N", help="draw N next gases and set their quantiles beside")
    for flag in (*SETTING_FLAGS, "co2_production", "compliance", "resistance"):
        parser.add_argument("--" + flag.replace("_", "-"))
    return parser.parse_args(argv)


def quantiles_by_chance(patient, flags, count):
    import numpy as np

    trial = build_trial(patient, flags)
    step, found = spread(patient, trial, plain(patient, trial))
    drawn = np.sort(np.exp(patient.belief.draws(step, count)))
    rows = []
    for share in (0.05, 0.25, 0.5, 0.75, 0.95):
        rows.append({"share": share, "closed": found.quantile(share), "drawn": float(drawn[int(share * count)])})
    return rows


def run(argv):
    """(status, document or None, reason or None)"""
    flags = vars(arguments(argv))
    try:
        patient = open_patient(load(flags["case"]), flags["profile"], flags["held"], flags["steadiness"])
        if flags["monte_carlo"]:
            return 0, quantiles_by_chance(patient, flags, flags["monte_carlo"]), None
        if flags["verb"] == "forecast":
            return 0, forecast_json(patient, flags), None
        document, on_target = plan_json(patient, flags)
        return (0 if on_target else 1), document, None
    except Refusal as reason:
        return 2, None, str(reason)
