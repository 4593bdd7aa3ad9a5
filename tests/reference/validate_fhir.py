# Outside witness of: the FHIR bundle of `note --as fhir`.
# Published: HL7 FHIR R4B (4.3.0), as fhir.resources holds it; UCUM, as Pint computes it; LOINC codes as the table below has
# them. The record is read a second time here, with its corrections, and each exported quantity is turned back into the
# unit of the case file and compared; nothing may be left out and nothing may be there that was not charted.
#
# usage: validate_fhir.py PROGRAM [CASE.toml ...]     without cases: every built-in one

import json
import re
import subprocess
import sys
import tomllib
from datetime import datetime
from pathlib import Path

import pint
from fhir.resources.R4B.bundle import Bundle

ureg = pint.UnitRegistry()
ureg.define("mmHg_ = 101325 / 760 pascal")
ureg.define("cmH2O_ = 98.0665 pascal")

# LOINC to the key of the case file it stands for.
LOINC = {
    "2019-8": "gas.paco2",
    "2744-1": "gas.ph",
    "1960-4": "gas.bicarbonate",
    "2703-7": "gas.pao2",
    "20112-9": "settings.tidal_volume",
    "20077-4": "settings.peep",
    "19994-3": "settings.fio2",
    "76259-1": "measured.plateau",
    "76531-3": "measured.peak",
    "76530-5": "measured.mean_airway_pressure",
    "76334-2": "settings.inspiratory_time",
    "75931-6": "settings.ratio",
    "19840-8": "measured.total_rate",
    "19839-0": "weaning.spontaneous_rate",
    "19891-1": "measured.end_tidal_co2",
    "8302-2": "patient.height",
    "29463-7": "patient.weight",
    "50064-5": "patient.predicted_weight",
    "50984-4": "computed.pao2_fio2",
}
# UCUM to Pint.
UCUM = {
    "mm[Hg]": "mmHg_",
    "cm[H2O]": "cmH2O_",
    "mL": "milliliter",
    "L/min": "liter/minute",
    "mL/min": "milliliter/minute",
    "%": "percent",
    "1": "dimensionless",
    "{ratio}": "dimensionless",
    "[pH]": "dimensionless",
    "s": "second",
    "min": "minute",
    "/min": "1/minute",
    "1/min": "1/minute",
    "/min/L": "1/minute/liter",
    "mmol/L": "millimole/liter",
    "cm": "centimeter",
    "m": "meter",
    "kg": "kilogram",
    "a": "year",
    "Cel": "degC",
    "mL/cm[H2O]": "milliliter/cmH2O_",
    "cm[H2O].s/L": "cmH2O_*second/liter",
}
# The unit of each key in a case file; plain numbers are in it.
UNITS = {
    "height": "centimeter",
    "weight": "kilogram",
    "predicted_weight": "kilogram",
    "age": "year",
    "altitude": "meter",
    "barometric_pressure": "mmHg_",
    "inspiratory_time": "second",
    "pause": "second",
    "flow": "liter/minute",
    "minute_ventilation": "liter/minute",
    "co2_production": "milliliter/minute",
    "temperature": "degC",
    "bicarbonate": "millimole/liter",
    "compliance": "milliliter/cmH2O_",
    "circuit_compliance": "milliliter/cmH2O_",
    "resistance": "cmH2O_*second/liter",
    "expiratory_resistance": "cmH2O_*second/liter",
}
for key in "rate total_rate spontaneous_rate heart_rate".split():
    UNITS[key] = "1/minute"
for key in "tidal_volume exhaled_tidal_volume apparatus_dead_space spontaneous_tidal_volume vital_capacity".split():
    UNITS[key] = "milliliter"
for key in "inspiratory_pressure peep plateau peak total_peep auto_peep mean_airway_pressure inspiratory_pressure_max".split():
    UNITS[key] = "cmH2O_"
UNITS["occlusion_pressure"] = "cmH2O_"
for key in "end_tidal_co2 mixed_expired_co2 paco2 pao2 systolic_pressure".split():
    UNITS[key] = "mmHg_"
for key in "fio2 dead_space_fraction spo2 spo2_fraction_on ph".split():
    UNITS[key] = "dimensionless"
WRITTEN = {"cmH2O": "cmH2O_", "mmHg": "mmHg_", "kPa": "kilopascal", "mL": "milliliter", "L": "liter", "L/min": "liter/minute"}
WRITTEN |= {"s": "second", "cm": "centimeter", "m": "meter", "kg": "kilogram", "%": "percent", "mL/min": "milliliter/minute"}
TIMINGS = ("settings.inspiratory_time", "settings.flow", "settings.ratio")
PEEPS = ("measured.total_peep", "measured.auto_peep")


def quantity(key, value):
    """A value of a case file with its unit."""
    if key == "ratio":
        inspiration, expiration = (float(part) for part in value.split(":"))
        return ureg.Quantity(inspiration / expiration, "dimensionless")
    if isinstance(value, str) and (feet := re.fullmatch(r"(\d+) ft (\d+) in", value)):
        return ureg.Quantity(int(feet[1]) * 12 + int(feet[2]), "inch").to("centimeter")
    if isinstance(value, str):
        number, unit = re.fullmatch(r"\s*(-?[\d.]+)\s*(.*?)\s*", value).groups()
        return ureg.Quantity(float(number), WRITTEN[unit] if unit else UNITS[key])
    return ureg.Quantity(float(value), UNITS[key])


def charted(case):
    """What the record says: standing values and struck ones, by (entry, table.key), and PaO2/FiO2, index and plans."""
    standing, struck, plans, times, roots = {}, {}, {}, {}, {}
    for number, entry in enumerate(case.get("entry", []), 1):
        amends = entry.get("amends", entry.get("note", {}).get("amends"))
        root = roots[amends] if amends else number
        roots[number] = root
        given = {
            f"{table}.{key}": quantity(key, value)
            for table in ("settings", "measured", "gas", "weaning")
            for key, value in entry.get(table, {}).items()
            if key in UNITS or key == "ratio"
        }
        if root == number:
            times[root] = [entry.get("at"), entry.get("gas", {}).get("drawn_at", entry.get("at"))]
        else:
            gone = set(given)
            for group in (TIMINGS, PEEPS):
                if gone & set(group):
                    gone |= set(group)
            for key in gone:
                if (root, key) in standing:
                    struck[root, key] = standing.pop((root, key))
        standing |= {(root, key): value for key, value in given.items()}
        if "plan" in entry:
            plans[root] = entry["plan"]
    for key, value in case.get("patient", {}).items():
        if key in UNITS:
            standing[0, f"patient.{key}"] = quantity(key, value)
    return standing, struck, plans, times


def same(one, other):
    if str(other.units) == "degree_Celsius":
        return abs(one.to("kelvin").magnitude - other.to("kelvin").magnitude) < 1e-5
    return abs(one.to(other.units).magnitude - other.magnitude) <= 1e-6 * max(1.0, abs(other.magnitude))


def read_back(amount):
    assert amount["system"] == "http://unitsofmeasure.org", amount
    return ureg.Quantity(amount["value"], UCUM[amount["code"]])


def compare(case, bundle):
    standing, struck, plans, times = charted(case)
    entries_at = {}
    for number, (at, drawn) in times.items():
        entries_at.setdefault(at, []).append(number)
        entries_at.setdefault(drawn, []).append(number)
    seen, read, forecasts, names = {}, 0, 0, set()
    for item in bundle["entry"]:
        assert item["fullUrl"] not in names, f"two resources are called {item['fullUrl']}"
        names.add(item["fullUrl"])
        resource = item["resource"]
        if resource["resourceType"] != "Observation" or "valueQuantity" not in resource:
            continue
        coding = resource["code"]["coding"][0]
        amount = read_back(resource["valueQuantity"])
        at = resource.get("effectiveDateTime")
        numbers = entries_at.get(datetime.fromisoformat(at), []) if at else list(times)
        if coding["system"] == "urn:tidewright:forecast":
            forecasts += 1
            assert resource["status"] == "preliminary" and "orecast" in resource["code"]["text"], resource
            plan = next(plans[n] for n in numbers if n in plans)
            assert same(amount, quantity("paco2", plan.get("expected_paco2", plan.get("forecast_paco2"))))
            ends = [end for name in ("half_interval", "wide_interval") for end in plan.get(name, [])]
            parts = [read_back(part["valueQuantity"]) for part in resource.get("component", [])]
            assert len(ends) == len(parts) and all(same(p, quantity("paco2", e)) for p, e in zip(parts, ends))
            continue
        if coding["system"] == "http://loinc.org":
            key = LOINC[coding["code"]]
        else:
            assert coding["system"] == "urn:tidewright:quantity", coding
            key = coding["code"].replace("-", ".", 1)
        if key.startswith("patient."):
            numbers = [0]
            if key == "patient.predicted_weight" and (0, key) not in standing:
                body = case["patient"]
                base = 45.5 if body["sex"] == "female" else 50.0
                cm = quantity("height", body["height"]).to("centimeter").magnitude
                assert abs(amount.to("kilogram").magnitude - (base + 0.91 * (cm - 152.4))) < 1e-5
                read += 1
                continue
        if key == "computed.pao2_fio2":
            found = [n for n in numbers if (n, "gas.pao2") in standing]
            pao2 = standing[found[0], "gas.pao2"].to("mmHg_").magnitude
            fio2 = [standing[n, "settings.fio2"].to("dimensionless").magnitude for n in range(1, found[0] + 1) if (n, "settings.fio2") in standing][-1]
            assert abs(amount.to("mmHg_").magnitude - pao2 / fio2) < 1e-5
            read += 1
            continue
        if key == "rapid_shallow_breathing_index":
            found = [n for n in numbers if (n, "weaning.spontaneous_rate") in standing]
            rate = standing[found[0], "weaning.spontaneous_rate"]
            volume = standing[found[0], "weaning.spontaneous_tidal_volume"]
            assert same(amount, (rate / volume).to("1/minute/liter"))
            read += 1
            continue
        values = struck if resource["status"] == "entered-in-error" else standing
        matching = [n for n in numbers if (n, key) in values and (n, key, resource["status"] == "entered-in-error") not in seen]
        assert matching, f"{key} at {at} is exported, and nobody charted it"
        assert same(amount, values[matching[0], key]), f"{key}: {amount} exported, {values[matching[0], key]} charted"
        seen[matching[0], key, resource["status"] == "entered-in-error"] = True
        read += 1
    left = [k for k in standing if (*k, False) not in seen] + [k for k in struck if (*k, True) not in seen]
    assert not left, f"charted and not exported: {left}"
    assert forecasts == len(plans), f"{forecasts} forecasts exported, {len(plans)} plans charted"
    return read, forecasts


def main():
    program, cases = sys.argv[1], sys.argv[2:]
    run = lambda *arguments: subprocess.run([program, *arguments], check=True, capture_output=True, text=True).stdout
    texts = {path: Path(path).read_text(encoding="utf-8") for path in cases}
    if not cases:
        listed = json.loads(run("cases", "--json"))
        texts = {case["name"]: run("cases", "--show", case["name"]) for case in listed}
    total, failed = 0, 0
    for name, text in texts.items():
        bundle = run("note", name, "--as", "fhir")
        try:
            Bundle.model_validate_json(bundle)
            read, forecasts = compare(tomllib.loads(text), json.loads(bundle))
        except Exception as error:  # whatever is wrong, say which case it was and go on
            failed += 1
            print(f"{name}: {type(error).__name__}: {str(error)[:600]} (line {error.__traceback__.tb_next.tb_lineno if error.__traceback__.tb_next else 0})")
            continue
        total += read
        print(f"{name}: valid; {read} quantities and {forecasts} forecasts read back")
    print(f"{len(texts) - failed} bundles valid, {failed} failed, {total} quantities read back")
    sys.exit(1 if failed else 0)


if __name__ == "__main__":
    main()
