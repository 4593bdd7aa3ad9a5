# Outside witness of: how a record grows: inheritance of settings, amendments, which gas is the latest.
# Published: nothing; this is the project's own contract for its files, read a second time.

import tomllib
from dataclasses import dataclass, field
from datetime import timezone
from pathlib import Path

from . import Refusal
from .quantity import number, ratio

TIMINGS = ("inspiratory_time", "flow", "ratio")
WORDS = ("control", "flow_pattern")


@dataclass
class Entry:
    number: int
    at: object
    settings: dict = field(default_factory=dict)  # in force, inherited ones too
    measured: dict = field(default_factory=dict)
    gas: dict = field(default_factory=dict)

    @property
    def drawn_at(self):
        return self.gas.get("drawn_at", self.at)


@dataclass
class Case:
    label: str
    profile: str
    steadiness: str
    patient: dict
    entries: list
    folder: Path

    @property
    def gases(self):
        """Entries with a PaCO2, oldest first."""
        found = [e for e in self.entries if "paco2" in e.gas]
        return sorted(found, key=lambda e: (e.drawn_at, e.number))


def moment(value):
    return value if value is None or value.tzinfo else value.replace(tzinfo=timezone.utc)


def converted(table):
    out = {}
    for key, value in table.items():
        if key in WORDS or key in ("sex", "airway"):
            out[key] = value
        elif key == "ratio":
            out[key] = ratio(value)
        elif key == "drawn_at":
            out[key] = moment(value)
        else:
            out[key] = number(key, value)
    return out


def merged(old, new):
    """Settings after `new` ones are dialled: one timing only, and nothing of another control left over."""
    out = dict(old)
    given = [t for t in TIMINGS if t in new]
    if len(given) > 1:
        raise Refusal(f"{' and '.join(given)} are both given: only one can be held")
    if given:
        for timing in TIMINGS:
            out.pop(timing, None)
    if "control" in new and old.get("control", new["control"]) != new["control"]:
        if "flow" in out:
            out["inspiratory_time"] = old["tidal_volume"] / 1000.0 / (out.pop("flow") / 60.0) + old.get("pause", 0.0)
        for gone in ("pause", "flow_pattern", "tidal_volume", "inspiratory_pressure"):
            out.pop(gone, None)
    out.update(new)
    return out


def load(path, text=None):
    raw = tomllib.loads(text if text is not None else Path(path).read_text(encoding="utf-8"))
    rows = raw.get("entry", [])
    parts = [{k: converted(row.get(k, {})) for k in ("settings", "measured", "gas")} for row in rows]
    struck = set()
    for i, row in enumerate(rows):
        amends = row.get("amends", row.get("note", {}).get("amends"))
        if amends is None:
            continue
        if not 1 <= amends <= i:
            raise Refusal(f"entry {i + 1} amends entry {amends}, which is not an earlier one")
        target = parts[amends - 1]
        for kind in ("settings", "measured", "gas"):
            if kind == "settings" and any(t in parts[i][kind] for t in TIMINGS):
                for timing in TIMINGS:
                    target[kind].pop(timing, None)
            target[kind].update(parts[i][kind])
        struck.add(i)
    entries, current = [], {}
    for i, row in enumerate(rows):
        if i in struck:
            continue
        current = merged(current, parts[i]["settings"])
        entries.append(Entry(i + 1, moment(row.get("at")), dict(current), parts[i]["measured"], parts[i]["gas"]))
    if not entries:
        raise Refusal("the case has no entry")
    case = Case(
        raw.get("label", ""),
        raw.get("profile", "lung-protective"),
        raw.get("steadiness", "usual"),
        converted(raw.get("patient", {})),
        entries,
        Path(path).resolve().parent,
    )
    if not case.gases:
        raise Refusal("no gas with a PaCO2 is charted")
    for entry in entries:
        settings = entry.settings
        if settings.get("control") == "pressure" and "flow" in settings:
            raise Refusal("a flow cannot be held in pressure control")
        if "control" not in settings or "rate" not in settings:
            raise Refusal(f"entry {entry.number} has no control or no rate")
    return case
