# Outside witness of: target bands, limits and their verdicts.
# Published: the limits' values come from profile files, which name their own sources.

import tomllib
from dataclasses import dataclass
from pathlib import Path

from . import Refusal
from .belief import Steadiness
from .quantity import number

BUILT_IN = Path(__file__).resolve().parents[3] / "presets" / "profiles"
CHEAP = ("rate", "tidal_volume", "inspiratory_pressure")
FROM_TARGET = ("ph", "paco2", "paco2_fall_per_hour")


@dataclass
class Limit:
    id: str
    low: float | None
    high: float | None


@dataclass
class Profile:
    name: str
    target_kind: str
    target: tuple
    limits: list
    steps: dict
    steadiness: Steadiness | None


def load(name, folder):
    """A built-in profile by its name, or a file relative to the case."""
    path = BUILT_IN / f"{name}.toml"
    if not path.exists() or name.endswith(".toml"):
        path = Path(folder) / name
    if not path.exists():
        raise Refusal(f"profile {name!r} is neither built in nor a file")
    raw = tomllib.loads(path.read_text(encoding="utf-8"))
    kind, band = next(iter(raw["target"].items()))
    limits = []
    for key, row in raw.get("limits", {}).items():
        low, high = (None if side not in row else number(key, row[side]) for side in ("min", "max"))
        limits.append(Limit(key, low, high))
    steps = {"rate": 1.0, "tidal_volume": 10.0, "inspiratory_pressure": 1.0}
    steps |= {key: number(key, value) for key, value in raw.get("steps", {}).items()}
    own = raw.get("steadiness")
    steadiness = Steadiness(own["gas"], own["wander_per_hour"], own["change"]) if own else None
    band = tuple(number(kind, edge) for edge in band)
    return Profile(raw.get("name", name), kind, band, limits, steps, steadiness)


def excess(limit, value):
    """How far beyond (below the minimum, above the maximum), mmHg or whatever the limit's unit is."""
    under = limit.low - value if limit.low is not None else 0.0
    over = value - limit.high if limit.high is not None else 0.0
    return under, over


def verdict(limit, value, lower_bound):
    """`lower_bound` is true where modelled trapping can only be worse than shown."""
    if value is None:
        return "unknown"
    if max(excess(limit, value)) > 1e-9:
        return "beyond"
    if lower_bound and limit.id in ("auto_peep", "expiratory_time_constants"):
        return "unknown"
    for bound in (limit.low, limit.high):
        if bound is None:
            continue
        margin = abs(value - bound)
        if margin <= 1e-9 or margin < (0.02 if limit.id == "ph" else 0.1 * abs(bound)):
            return "near"
    return "within"
