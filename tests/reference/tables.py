"""Writing, reading and comparing the reference tables of this folder.

Not a witness itself: it holds the number format (10 significant digits) and the
`--check` comparison that every script here shares.
"""

import math
import sys
import tomllib
from pathlib import Path

FOLDER = Path(__file__).resolve().parent
RELATIVE = 1e-9
# Near zero a ten-digit table cannot carry a relative error: below this, absolute.
ABSOLUTE = 1e-10


def digits(value, count=10):
    """The number rounded to `count` significant digits."""
    return float(f"{value:.{count - 1}e}")


def toml_value(value):
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float):
        if not math.isfinite(value):
            raise ValueError(f"a reference table cannot hold {value}")
        text = repr(digits(value))
        return text if any(c in text for c in ".en") else text + ".0"
    if isinstance(value, str):
        return '"' + value.replace("\\", "\\\\").replace('"', '\\"') + '"'
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(toml_value(v) for v in value) + "]"
    raise TypeError(f"no TOML form for {value!r}")


def document(heading, tables):
    """`tables` maps the name of an array of tables to its rows."""
    lines = ["# " + line for line in heading.strip().splitlines()]
    for name, rows in tables.items():
        for row in rows:
            lines += ["", f"[[{name}]]"]
            lines += [f"{key} = {toml_value(v)}" for key, v in row.items()]
    return "\n".join(lines) + "\n"


def differences(path, kept, fresh, loose):
    if isinstance(kept, dict) and isinstance(fresh, dict):
        for key in sorted(kept.keys() | fresh.keys()):
            if key not in kept or key not in fresh:
                yield f"{path}.{key}: only on one side"
            else:
                yield from differences(f"{path}.{key}", kept[key], fresh[key], loose)
    elif isinstance(kept, list) and isinstance(fresh, list):
        if len(kept) != len(fresh):
            yield f"{path}: {len(kept)} rows kept, {len(fresh)} computed"
        for i, (a, b) in enumerate(zip(kept, fresh)):
            yield from differences(f"{path}[{i}]", a, b, loose)
    elif isinstance(kept, (int, float)) and isinstance(fresh, (int, float)):
        relative = loose.get(path.rsplit(".", 1)[-1], RELATIVE)
        # A table row is rounded to ten digits, so allow that rounding too.
        allowed = max(relative * abs(kept), ABSOLUTE)
        if not abs(kept - fresh) <= allowed:
            yield f"{path}: kept {kept!r}, computed {fresh!r}"
    elif kept != fresh:
        yield f"{path}: kept {kept!r}, computed {fresh!r}"


def run(outputs, loose=None):
    """`outputs()` gives {file name: text}; writes them, or with --check compares."""
    check = "--check" in sys.argv[1:]
    unknown = [a for a in sys.argv[1:] if a != "--check"]
    if unknown:
        sys.exit(f"unknown argument {unknown[0]!r}: the only one is --check")
    wrong = 0
    for name, text in outputs().items():
        file = FOLDER / name
        fresh = tomllib.loads(text)
        count = sum(len(rows) for rows in fresh.values() if isinstance(rows, list))
        if count == 0:
            sys.exit(f"{name}: no rows were computed")
        if not check:
            file.write_text(text, encoding="utf-8")
            print(f"{name}: {count} rows written")
            continue
        if not file.exists():
            print(f"{name}: missing; run the script without --check")
            wrong += 1
            continue
        kept = tomllib.loads(file.read_text(encoding="utf-8"))
        found = list(differences(name, kept, fresh, loose or {}))
        for line in found[:20]:
            print(line)
        wrong += len(found)
        print(f"{name}: {count} rows compared, {len(found)} differ")
    sys.exit(1 if wrong else 0)
