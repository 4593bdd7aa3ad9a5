# Compares the binary's `plan --json` and `forecast --json` with the outside witness (witness.py: the published formulas,
# written a second time) on random plausible cases and on every shipped one. Every number within 1e-6, every word alike;
# cautions and the wording of units are not compared. Both refusing a case counts as agreement.
# Closes with `N passed, N failed`.
#
#   python compare_plans.py BINARY [--cases 200] [--seed 1] [--keep FOLDER] [--lines 25]

import argparse
import json
import math
import random
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

import random_cases
import witness.profile
from witness_run import run

NEAR = 1e-6
NOT_COMPARED = {"cautions", "unit"}


def by_id(rows):
    return {row["id"]: row for row in rows} if rows and isinstance(rows[0], dict) and "id" in rows[0] else None


def differences(path, theirs, ours):
    """Yields (path, binary's value, witness's value)."""
    if isinstance(theirs, dict) and isinstance(ours, dict):
        for key in [*ours, *(k for k in theirs if k not in ours)]:
            if key in NOT_COMPARED:
                continue
            here = f"{path}.{key}" if path else key
            if key not in theirs or key not in ours:
                yield here, theirs.get(key, "(no such key)"), ours.get(key, "(no such key)")
            else:
                yield from differences(here, theirs[key], ours[key])
    elif isinstance(theirs, list) and isinstance(ours, list):
        named, ours_named = by_id(theirs), by_id(ours)
        if named is not None and ours_named is not None:
            yield from differences(path, named, ours_named)
        elif path.endswith("blocked_by"):
            if sorted(theirs) != sorted(ours):
                yield path, theirs, ours
        elif len(theirs) != len(ours):
            yield path + " (length)", len(theirs), len(ours)
        else:
            for i, (a, b) in enumerate(zip(theirs, ours)):
                name = b.get("aim", i) if isinstance(b, dict) else i
                yield from differences(f"{path}[{name}]", a, b)
    elif number(theirs) and number(ours):
        if not math.isclose(theirs, ours, rel_tol=NEAR, abs_tol=NEAR):
            yield path, theirs, ours
    elif theirs != ours or isinstance(theirs, bool) != isinstance(ours, bool):
        yield path, theirs, ours


def number(value):
    return isinstance(value, (int, float)) and not isinstance(value, bool)


def compare(binary, verb, file, flags, out, most):
    """True when the binary and the witness agree; prints what differs."""
    status, ours, reason = run([verb, str(file), *flags])
    done = subprocess.run([binary, verb, str(file), "--json", *flags], capture_output=True, text=True, timeout=120)
    head = f"{file.name}: {verb} {' '.join(flags)}"
    if status == 2 and done.returncode == 2:
        out["refused"] += 1
        return True
    if status != done.returncode:
        print(f"{head}\n    status: binary {done.returncode}, witness {status}")
        print(f"    binary says: {done.stderr.strip()[:400]}\n    witness says: {reason}")
        if 2 in (status, done.returncode):
            return False
    try:
        theirs = json.loads(done.stdout)
    except json.JSONDecodeError as error:
        print(f"{head}\n    the binary's output is not JSON: {error}: {done.stdout[:200]!r} {done.stderr[:300]!r}")
        return False
    found = list(differences("", theirs, ours))
    if found:
        print(head)
        for path, a, b in found[:most]:
            print(f"    {path}: binary {a!r}, witness {b!r}")
        if len(found) > most:
            print(f"    … and {len(found) - most} more")
    return not found and status == done.returncode


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("binary")
    parser.add_argument("--cases", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--keep", help="where the files of disagreeing cases go")
    parser.add_argument("--lines", type=int, default=25, help="disagreements printed for one call")
    given = parser.parse_args()
    built_in = sorted(p.stem for p in witness.profile.BUILT_IN.glob("*.toml"))
    passed, failed, out = 0, 0, {"refused": 0}
    with tempfile.TemporaryDirectory(prefix="compare-plans-") as folder:
        for n in range(given.cases):
            # One stream a case, so that a case can be drawn again alone.
            dice = random.Random(f"{given.seed}-{n}")
            drawn = f"profile-{n:05}.toml"
            name = dice.choice(built_in) if built_in and dice.random() < 0.4 else drawn
            (Path(folder) / drawn).write_text(random_cases.profile(dice), encoding="utf-8")
            file = Path(folder) / f"case-{given.seed}-{n:05}.toml"
            text, bed = random_cases.case(dice, name)
            file.write_text(text, encoding="utf-8")
            calls = [
                ("plan", random_cases.plan_flags(dice, bed)),
                ("forecast", random_cases.readings_flags(dice) + random_cases.dials(dice, bed)),
            ]
            good = True
            for verb, flags in calls:
                if compare(given.binary, verb, file, flags, out, given.lines):
                    passed += 1
                else:
                    failed, good = failed + 1, False
            if not good and given.keep:
                Path(given.keep).mkdir(parents=True, exist_ok=True)
                shutil.copy(file, given.keep)
                shutil.copy(Path(folder) / drawn, given.keep)
    shipped = sorted((witness.profile.BUILT_IN.parent / "cases").glob("*.toml"))
    for file in shipped:
        for verb in ("plan", "forecast"):
            if compare(given.binary, verb, file, [], out, given.lines):
                passed += 1
            else:
                failed += 1
    print(f"{given.cases} random and {len(shipped)} shipped cases; both refused {out['refused']} calls")
    print(f"{passed} passed, {failed} failed")
    sys.exit(1 if failed or passed == 0 else 0)


if __name__ == "__main__":
    main()
