"""Draws the plots of docs/validation.md from the program's own review of the open ICU gases.

Usage: python tests/reference/plots.py target/release/tidewright
Writes docs/validation/calibration.svg and docs/validation/forecast_against_measured.svg, and prints the figures of the
passive patients with a large change. Standard library only.
"""

import csv
import io
import math
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
DATA = ROOT / "tests/reference/data"
OUT = ROOT / "docs/validation"
INK, PAPER, ORANGE, BLUE = "#222222", "#ffffff", "#c8640a", "#1f6fb2"


def rows(binary):
    text = subprocess.run(
        [binary, "review", str(DATA / "open_icu_gases.csv"), "--as", "rows"], check=True, capture_output=True, text=True
    ).stdout
    return list(csv.DictReader(io.StringIO(text)))


def svg(name, title, body, width=460, height=460):
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width} {height}" font-family="sans-serif" font-size="12">'
        f'<title>{title}</title><rect width="{width}" height="{height}" fill="{PAPER}"/>'
    )
    OUT.mkdir(parents=True, exist_ok=True)
    (OUT / name).write_text(head + "".join(body) + "</svg>\n")


def text(x, y, words, anchor="middle"):
    return f'<text x="{x:.1f}" y="{y:.1f}" text-anchor="{anchor}" fill="{INK}">{words}</text>'


def frame(left, top, side, low, high, step, across, up):
    def at(value):
        return (value - low) / (high - low) * side

    parts = [f'<rect x="{left}" y="{top}" width="{side}" height="{side}" fill="none" stroke="{INK}"/>']
    value = low
    while value <= high + 1e-9:
        parts.append(text(left + at(value), top + side + 16, f"{value:g}"))
        parts.append(text(left - 6, top + side - at(value) + 4, f"{value:g}", "end"))
        value += step
    parts.append(text(left + side / 2, top + side + 36, across))
    parts.append(
        f'<text transform="translate({left - 38} {top + side / 2}) rotate(-90)" text-anchor="middle" fill="{INK}">{up}</text>'
    )
    return parts, at


def calibration(found):
    left, top, side = 60, 20, 370
    parts, at = frame(left, top, side, 0, 100, 20, "stated: below this share of the forecast, %", "measured gases that fell below, %")
    parts.append(f'<line x1="{left}" y1="{top + side}" x2="{left + side}" y2="{top}" stroke="{INK}" stroke-dasharray="4 4"/>')
    shares = sorted(float(row["share_below"]) for row in found)
    points = []
    for percent in range(0, 101, 5):
        below = sum(share <= percent / 100 for share in shares) / len(shares) * 100
        points.append(f"{left + at(percent):.1f},{top + side - at(below):.1f}")
    parts.append(f'<polyline points="{" ".join(points)}" fill="none" stroke="{BLUE}" stroke-width="2.5"/>')
    svg("calibration.svg", "Share of gases below each stated share of their forecast", parts)


def against(found):
    left, top, side = 60, 20, 370
    parts, at = frame(left, top, side, 15, 75, 10, "expected PaCO2, mmHg", "measured PaCO2, mmHg")
    parts.append(f'<line x1="{left}" y1="{top + side}" x2="{left + side}" y2="{top}" stroke="{INK}" stroke-dasharray="4 4"/>')
    for row in found:
        x, y = float(row["expected_pco2"]), float(row["pco2"])
        if not (15 <= x <= 75 and 15 <= y <= 75):
            continue
        changed = row["after_change"] == "1"
        mark = f'fill="{ORANGE}"' if changed else f'fill="none" stroke="{BLUE}" stroke-width="1.5"'
        parts.append(f'<circle cx="{left + at(x):.1f}" cy="{top + side - at(y):.1f}" r="4" {mark}/>')
    parts.append(text(left + side - 8, top + side - 24, "filled: after a change of settings", "end"))
    parts.append(text(left + side - 8, top + side - 8, "open: settings unchanged", "end"))
    svg("forecast_against_measured.svg", "Expected and measured PaCO2 of open ICU gases", parts)


def passive_and_large():
    """Pairs in which the patient does not trigger after a change of rate x volume by more than 15 %."""
    lines = (line for line in (DATA / "open_icu_pairs.csv").open() if not line.startswith("#"))
    chosen = []
    for row in csv.DictReader(lines):
        if row["passive2"] == "1" and abs(math.log(float(row["set_ratio"]))) > math.log(1.15):
            chosen.append(row)
    if not chosen:
        return
    again = [abs(float(r["pco2_2"]) - float(r["pco2_1"])) for r in chosen]
    scaled = [abs(float(r["pco2_2"]) - float(r["pco2_1"]) / float(r["set_ratio"])) for r in chosen]
    right = sum(
        (float(r["pco2_2"]) - float(r["pco2_1"])) * (1.0 - float(r["set_ratio"])) > 0 for r in chosen
    )
    count = len(chosen)
    print(
        f"passive, minute volume changed by more than 15 %: {count} pairs; mean error {sum(scaled) / count:.1f} mmHg by"
        f" scaling, {sum(again) / count:.1f} mmHg by the same again; direction right in {right}"
    )


def main():
    if len(sys.argv) != 2:
        sys.exit("usage: plots.py BINARY")
    found = rows(sys.argv[1])
    calibration(found)
    against(found)
    print(f"{len(found)} forecasts drawn")
    passive_and_large()


if __name__ == "__main__":
    main()
