"""Writes the invented pumps of a demo plant: make_catalog.py osier-bank catalogs/osier-bank/pumps.

It reads no case: every pump is a row picked by hand in `plants/osier-bank.toml`, plus scatter from the seed
there. Columns of a row: best flow [m3/h], head [m] and rise to shutoff [%] at the largest diameter (r:p
droops: its peak is p % above shutoff); points over the efficiency relation; suction specific speed; largest
and smallest diameter [mm]; tested diameters [mm]; last flow and stable minimum flow [% of best flow];
remarks. Curves come from these relations; a statement without source is common practice.
  best efficiency   EU Regulation 547/2012, Annex III: the polynomial in specific speed and flow with its
                    constants C for MEI 0.40, raised or lowered by the points in the row. It covers neither
                    double suction, six poles nor vertical turbines: there the nearest C is taken, our choice.
  head over flow    1 + rise (1 - q^m) around the best point, m 1.9 to 2.2; rise grows with specific speed,
                    about 12 to 20 % at n_q 20 and 30 to 40 % at 60 (common practice, no source)
  efficiency        a parabola through zero flow, leaning to the right (common practice, no source)
  NPSH required     at the best point from the suction specific speed of the row (m3/s, m, rpm, per eye), with
                    the square of flow above a floor (common practice, no source)
  trims             head with the diameter to the power 2.1 to 2.4, flow 1.0 to 1.1: near the affinity laws,
                    not on them; 0.12 to 0.28 points of efficiency lost for each percent of cut
"""

from __future__ import annotations

import json
import math
import re
import sys
import tomllib
from collections.abc import Iterator
from pathlib import Path
from random import Random
from typing import Any, NamedTuple

GRAVITY = 9.80665
NAMEPLATES = (7.5, 11, 15, 22, 30, 37, 45, 55, 75, 90, 110, 132, 160, 200, 250, 315, 400, 500, 630)  # kW


class Series(NamedTuple):
    """What all pumps of one letter share."""

    construction: str
    eyes: int
    four_poles: int  # rpm at load
    pressure: int  # bar gauge
    kind: str
    region: tuple[int, int] | None = None  # percent of best flow
    grade: str | int = ""  # acceptance grade, or head uncertainty in percent
    turns: tuple[int, int] | None = None  # speeds allowed, percent of the speed at load


class Units(NamedTuple):
    """Units a file is printed in: names, one of each in m3/h, m, kW and mm, decimals of a length."""

    names: dict[str, str]
    flow: float = 1.0
    head: float = 1.0
    power: float = 1.0
    length: float = 1.0
    decimals: int | None = None


CONSTANT_C = {"in line": (132.30, 133.69), "multistage": (133.95, 133.95)}  # four or six poles, two poles
END_SUCTION_C = (128.07, 130.27)
METRIC = Units({"flow": "m3/h", "head": "m", "npsh": "m", "power": "kW", "length": "mm", "volume": "L"})
US = Units(
    {"flow": "US gpm", "head": "ft", "npsh": "ft", "power": "hp", "length": "in", "volume": "US gal"},
    flow=0.2271247,
    head=0.3048,
    power=0.7456999,
    length=25.4,
    decimals=2,
)
PRINTED = {"metric": METRIC, "US": US}


class Pump:
    """One row with its scatter, at the largest diameter: m3/h, m, mm, rpm, shares as fractions."""

    def __init__(self, row: str, plant: dict[str, Any]) -> None:
        size, letter, flow, head, rise, points, suction, largest, smallest, tested, last, stable, *words = (
            row.split()
        )
        self.id = f"{size} {letter}"
        self.random = random = Random(
            f"{plant['seed']} {self.id}"
        )  # so no pump depends on the rows around it
        self.series = Series(**plant["series"][letter])
        self.outlet, poles = int(size.split("-")[0]), size.split("-")[2]
        self.remarks = {word.partition("=")[0]: word.partition("=")[2] for word in words}
        self.stages = int(self.remarks.get("stages", 1))
        self.speed = int(self.remarks.get("rpm", {"2": 2960, "4": self.series.four_poles, "6": 985}[poles]))
        self.largest, self.smallest = float(largest), None if smallest == "-" else float(smallest)
        self.tested = sorted(float(diameter) for diameter in tested.split(","))
        self.last, self.stable = float(last) / 100, float(stable) / 100

        self.flow = float(flow) * random.uniform(0.99, 1.01)
        self.head = float(head) * random.uniform(0.992, 1.008)
        shutoff, _, peak = rise.partition(":")
        self.rise = float(shutoff) / 100 * random.uniform(0.97, 1.03)
        self.exponent = 2.0 if peak else random.uniform(1.9, 2.2)
        over = float(peak or 0) / 100 * (1 + self.rise)  # slope at shutoff that makes the parabola peak there
        self.slope = 2 * over + 2 * math.sqrt(over * (over + self.rise))
        eye = self.flow / 3600 / self.series.eyes
        specific = self.speed * math.sqrt(eye) / (self.head / self.stages) ** 0.75
        published = published_efficiency(specific, self.flow, self.series.construction, poles == "2")
        self.efficiency = (published + float(points) + random.uniform(-0.4, 0.4)) / 100
        self.lean = random.uniform(0.1, 0.3)
        self.npsh = (self.speed * math.sqrt(eye) / float(suction) / random.uniform(0.97, 1.03)) ** (4 / 3)
        self.floor = random.uniform(0.35, 0.5)
        self.flow_law, self.head_law = random.uniform(1.0, 1.1), random.uniform(2.1, 2.4)
        self.loss = random.uniform(0.12, 0.28)


def published_efficiency(specific_speed: float, flow: float, construction: str, two_poles: bool) -> float:
    """Least efficiency [percent] for MEI 0.40: EU Regulation 547/2012, Annex III; flow in m3/h."""
    x, y = math.log(specific_speed), math.log(flow)
    constant = CONSTANT_C.get(construction, END_SUCTION_C)[two_poles]
    return 88.59 * x + 13.46 * y - 11.48 * x**2 - 0.85 * y**2 - 0.38 * x * y - constant


def printed_curve(pump: Pump, diameter: float, units: Units) -> dict[str, Any]:
    """One tested diameter as a catalogue prints it: head, efficiency, power and NPSH at the printed flows."""
    cut = diameter / pump.largest
    best_flow, best_head = pump.flow * cut**pump.flow_law, pump.head * cut**pump.head_law
    best_efficiency = pump.efficiency - pump.loss * (1 - cut)
    first = float(pump.remarks.get("from", 0)) / 100
    count = pump.random.randint(9, 15)
    flow, head, efficiency, power, npsh = [], [], [], [], []
    for point in range(count):
        printed = round(best_flow * (first + (pump.last - first) * point / (count - 1)) / units.flow)
        actual = printed * units.flow
        q = actual / best_flow
        metres = best_head * (1 + pump.rise + pump.slope * q - (pump.rise + pump.slope) * q**pump.exponent)
        leaning = q + pump.lean * q * (1 - q)
        flow.append(printed)
        head.append(round(metres / units.head, 2 if pump.series.kind == "shop test" else 1))
        efficiency.append(round(100 * best_efficiency * leaning * (2 - leaning), 1))
        if printed:
            per_flow = head[-1] * units.head / (efficiency[-1] / 100) * actual
        else:  # what flow over efficiency tends to
            per_flow = metres / best_efficiency / (2 + 2 * pump.lean) * best_flow
        power.append(round(GRAVITY / 3600 * per_flow / units.power, 1))
        through_eye = actual / pump.flow  # a trim leaves the inlet alone
        npsh.append(round(pump.npsh * (pump.floor + (1 - pump.floor) * through_eye**2) / units.head, 2))
    if not first and pump.random.random() < 0.4:  # many a sheet leaves these out at shutoff
        efficiency[0] = npsh[0] = None
    columns = {"flow": flow, "head": head}
    if "no-efficiency" not in pump.remarks:
        columns["efficiency"] = efficiency
    if {"power", "no-efficiency"} & pump.remarks.keys():
        columns["power"] = power
    with_npsh = diameter == pump.tested[-1] or "npsh-each" in pump.remarks
    if with_npsh and "no-npsh" not in pump.remarks:
        columns["npsh_required"] = npsh
    best = {"bep_flow": round(best_flow / units.flow)} if "best" in pump.remarks else {}
    return {"diameter": length(diameter, units), **best, **columns}


def length(millimetres: float, units: Units) -> float:
    """A length as it is printed."""
    return round(millimetres / units.length, units.decimals)


def printed_limits(pump: Pump, units: Units) -> dict[str, Any]:
    """What the maker allows."""
    limits: dict[str, Any] = {}
    if "no-minimum-flow" not in pump.remarks:
        limits["minimum_flow"] = 5 * round(pump.stable * pump.flow / units.flow / 5)
    if pump.series.region:
        limits["allowable_region"] = pump.series.region
    else:
        limits["maximum_flow"] = 5 * math.floor(pump.last * pump.flow / units.flow / 5)
    limits["allowable_pressure"] = f"{pump.remarks.get('bar', pump.series.pressure)} bar gauge"
    if pump.series.kind != "assumed":
        load = GRAVITY / 3600 * pump.flow * pump.head / pump.efficiency
        fitting = next(rating for rating in NAMEPLATES if rating >= 1.25 * load)
        limits["maximum_power"] = int(pump.remarks.get("kW", fitting))
    if "volume" in pump.remarks:
        limits["casing_volume"] = 5 * round(0.007 * pump.outlet * (pump.largest / 100) ** 2)  # invented
    return limits


def printed_source(pump: Pump, sheet: int) -> dict[str, Any]:
    """Where the curves are said to come from."""
    source: dict[str, Any] = {"kind": pump.series.kind}
    if "no-document" not in pump.remarks:
        source["document"] = f"Invented sheet {sheet}"
        year, month, day = (pump.random.randint(*ends) for ends in ((2011, 2024), (1, 12), (1, 28)))
        source["date"] = f"{year}-{month:02}-{day:02}"
    if isinstance(pump.series.grade, int):
        source["head_uncertainty"] = pump.series.grade
    elif pump.series.grade:
        source["acceptance_grade"] = pump.series.grade
    return source


def printed_pump(pump: Pump, sheet: int, units: Units) -> dict[str, Any]:
    """One pump in the catalog format."""
    several = {"stages": pump.stages} if pump.stages > 1 else {}
    varies = (
        {"speed_range": [round(pump.speed * part / 100) for part in pump.series.turns]}
        if pump.series.turns
        else {}
    )
    impeller: dict[str, Any] = {"maximum": length(pump.largest, units)}
    if pump.smallest is not None:
        impeller["minimum"] = length(pump.smallest, units)
    if "law" in pump.remarks:
        impeller["trim_law"] = {"head_exponent": 2.2, "efficiency_loss": 0.2}
    return {
        "id": pump.id,
        "construction": pump.series.construction,
        **several,
        "eyes": pump.series.eyes,
        "speed": pump.speed,
        **varies,
        "impeller": impeller,
        "curves": [printed_curve(pump, diameter, units) for diameter in pump.tested],
        "limits": printed_limits(pump, units),
        "source": printed_source(pump, sheet),
    }


def catalogs(plant: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Name and text of every file; a column of a curve takes one line."""
    rows = [Pump(row, plant) for row in plant["pumps"].strip().splitlines()]
    for file in plant["file"]:
        units = PRINTED[file.get("units", "metric")]
        pumps = [pump for pump in rows if pump.id.split()[1] in file["letters"]]
        catalog = {
            "format": "pump-catalog/1",
            "title": file["title"],
            "revision": "1",
            "licence": "MIT",
            "notes": "Invented: no maker offers these pumps. Written by tests/demo/make_catalog.py.",
            "units": units.names,
            "pumps": [printed_pump(pump, sheet, units) for sheet, pump in enumerate(pumps, start=1)],
        }
        yield file["name"], re.sub(r"\[[^][{}]*\]", _on_one_line, json.dumps(catalog, indent=1)) + "\n"


def _on_one_line(array: re.Match[str]) -> str:
    return re.sub(r"\s+", "", array[0]).replace(",", ", ")


def main(plant: str, folder: str) -> None:
    """Write every file of a plant into the folder."""
    rows = Path(__file__).parent / "plants" / f"{plant}.toml"
    for name, text in catalogs(tomllib.loads(rows.read_text(encoding="utf-8"))):
        (Path(folder) / name).write_text(text, encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main(*sys.argv[1:])
