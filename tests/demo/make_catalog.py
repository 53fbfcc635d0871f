"""Writes the invented pumps of the demo plant: python tests/demo/make_catalog.py catalogs/osier-bank/pumps.

It reads no case: every pump is a row picked by hand in `PUMPS`, plus scatter from one seed. Curves come from
these relations; a statement without source is common practice.
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
from collections.abc import Iterator
from pathlib import Path
from random import Random
from typing import Any, NamedTuple

SEED = 1954
GRAVITY = 9.80665
NAMEPLATES = (7.5, 11, 15, 22, 30, 37, 45, 55, 75, 90, 110, 132, 160, 200, 250, 315, 400, 500, 630)  # kW


class Series(NamedTuple):
    """What all pumps of one letter share."""

    construction: str
    eyes: int
    four_poles: int  # rpm at load
    pressure: int  # bar gauge
    region: tuple[int, int] | None  # percent of best flow
    kind: str
    grade: str | int  # acceptance grade, or head uncertainty in percent, or ""


class Units(NamedTuple):
    """Units a file is printed in: names, one of each in m3/h, m, kW and mm, decimals of a length."""

    names: dict[str, str]
    flow: float = 1.0
    head: float = 1.0
    power: float = 1.0
    length: float = 1.0
    decimals: int | None = None


SERIES = {
    "P": Series("axially split", 2, 1480, 16, (45, 130), "shop test", "1B"),
    "K": Series("axially split", 2, 1480, 16, (40, 125), "catalogue", "1B"),
    "D": Series("axially split", 2, 1485, 16, (45, 125), "catalogue", "2B"),
    "F": Series("axially split", 2, 1480, 10, (50, 125), "catalogue", "2B"),
    "M": Series("end suction", 1, 1480, 10, (40, 130), "catalogue", "2B"),
    "G": Series("end suction", 1, 1485, 16, (40, 125), "shop test", "1B"),
    "S": Series("end suction", 1, 1480, 10, (45, 125), "catalogue", "3B"),
    "B": Series("end suction", 1, 1470, 10, (45, 120), "field test", 4),
    "H": Series("end suction", 1, 1485, 16, None, "catalogue", "2B"),
    "L": Series("in line", 1, 1480, 10, (40, 125), "catalogue", "2B"),
    "R": Series("multistage", 1, 1485, 25, (45, 120), "catalogue", "2U"),
    "T": Series("vertical turbine", 1, 1480, 16, (60, 120), "assumed", ""),
}
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
FILES = {
    "axially-split.json": ("Invented axially split pumps", "PKDF", METRIC),
    "end-suction.json": ("Invented end suction pumps", "MGSBH", METRIC),
    "in-line-and-multistage.json": ("Invented in-line and multistage pumps", "LR", METRIC),
    "vertical-turbine.json": ("Invented vertical turbine pumps, in US units", "T", US),
}

# Best flow [m3/h], head [m] and rise to shutoff [%] at the largest diameter (r:p droops: its peak is p %
# above shutoff); points over the efficiency relation; suction specific speed; largest and smallest diameter
# [mm]; tested diameters [mm]; last flow and stable minimum flow [% of best flow]; remarks.
PUMPS = """
200-400-4 P  1196 35.95 33    1.5 195  405 330 405,370      150 26.6 volume best
250-400-4 P  1500 38.0  30    1.0 190  406 335 406,375      140 28  volume
150-315-4 P   620 26.0  27    1.0 190  328 265 328,300,275  135 30
150-400-4 P   690 40.0  25    0.8 185  405 330 405          138 30  best
250-500-4 P  1350 58.0  25    1.6 200  510 410 510,470      135 30  volume
300-400-4 P  1900 36.0  33    1.2 195  408 335 408          130 32
200-500-4 P   900 60.0  21    0.5 190  508 420 508          140 28  power
250-315-4 P  1300 24.0  36    0.9 200  330 270 330,300      132 34
300-500-6 P  1550 27.0  26    1.3 190  520 420 520          135 30
300-560-6 P  1400 36.0  23    1.5 185  580 470 580,540      136 30  volume
350-500-6 P  2300 26.0  29    1.6 200  525 430 525          128 33
250-500-6 P  1020 29.0  23    0.9 190  515 420 515          140 28
200-400-4 K   960 37.6  7.5   5.2 205  405 340 405,380      148 33  volume best
250-400-4 K  1120 37.5  9     3.4 210  406 340 406          140 33  best
150-400-4 K   640 41.0  8     4.0 200  404 335 404          138 32
250-500-4 K  1300 55.0  10    4.1 205  512 425 512,475      135 32
200-315-4 K   700 25.0  9     3.8 205  326 275 326          138 34
300-400-4 K  1700 37.0  9     4.0 215  408 345 408,380      132 35  best
250-500-6 K   960 37.0  12.5  3.9 195  530 440 530,500      140 30  best
300-500-6 K  1350 33.0  8     4.1 200  528 440 528          136 33
200-400-4 D   850 37.0  26    2.2 200  406 335 406,375      140 30  power volume
200-315-4 D   760 27.0  26    2.0 205  330 270 330          138 30
250-400-4 D  1230 42.0  30    2.1 210  412 355 412          135 32
250-315-4 D  1100 30.5  34    1.8 215  345 285 345          136 36
150-400-4 D   560 46.0  21    1.6 195  408 335 408          140 28
300-400-4 D  1650 43.0  31    2.0 210  414 340 414,385      130 33  volume
200-500-4 D  1000 64.0  22    1.8 200  515 430 515          138 28  power
250-500-6 D   890 34.5  23    2.3 195  530 435 530,495      142 28
300-500-6 D  1240 36.0  24    2.1 200  540 440 540          135 30
250-400-4 F   960 36.0  27    2.0 205  405 344 405          140 30  volume best
200-400-4 F   800 38.5  34    1.2 200  405 340 405          140 33
300-400-4 F  1400 40.0  28    1.4 205  408 345 408,380      134 33
150-315-4 F   540 28.0  24    0.8 195  328 270 328          138 30  no-minimum-flow
250-400-6 F  1000 20.0  28    1.0 200  415 345 415          136 34
350-500-6 F  1900 34.0  25    1.5 205  535 445 535          130 34
300-315-4 F  1750 22.0  38    0.9 225  335 285 335          126 40
200-400-4 M   905 35.6  29    1.9 205  408 330 408,378      140 31  volume best
250-400-4 M  1100 38.0  28    1.7 200  410 335 410,375      136 32  best
200-315-4 M   640 27.0  32    1.5 195  330 265 330,300,270  138 32 npsh-each
150-315-4 M   430 29.0  26    1.2 190  326 262 326          140 28
250-315-4 M   900 26.0  38    1.4 205  332 275 332          134 36
125-315-4 M   290 30.0  21    1.0 185  325 260 325,295      142 27 npsh-each
125-400-4 M   330 44.0  18    0.8 185  404 320 404          140 25
150-250-4 M   380 17.0  35    1.1 195  262 215 262,245,230,215  138 32
300-400-4 M  1350 33.0  39    1.3 205  405 340 405          132 37
250-500-6 M   880 36.0  25    2.4 190  525 425 525,490      140 29  volume
200-500-6 M   560 33.0  20    1.2 185  518 420 518          140 28
150-200-2 M   470 42.0  36    1.0 220  220 180 220          136 35
100-200-2 M   210 48.0  25    0.9 200  218 170 218,200,185  140 30
100-250-2 M   230 78.0  19    0.7 200  262 205 262          138 27  best
125-250-2 M   330 80.0  23    0.8 210  265 210 265,240      138 30
200-400-4 G   880 37.5  30    2.3 210  410 335 410,380      142 30  power volume npsh-each
200-315-4 G   720 30.0  33    1.9 205  334 270 334          138 32
250-400-4 G  1200 40.0  31    1.8 215  412 345 412,385      136 33 npsh-each
250-315-4 G  1000 28.0  38    1.6 215  338 285 338          134 37
150-400-4 G   560 42.0  23    1.8 200  408 325 408          140 28  power
150-315-4 G   400 31.0  24    1.5 195  330 265 330,300      140 28  volume npsh-each
125-400-4 G   300 48.0  16    1.2 190  410 325 410          140 25
300-315-4 G  1450 25.0  44    1.2 225  345 295 345          128 42
250-500-6 G  1000 38.0  25    2.5 200  532 430 532,500      138 29  power npsh-each
300-500-6 G  1500 32.0  29    1.9 205  530 440 530          134 32
125-250-4 G   240 19.0  27    1.4 190  265 210 265          140 30
150-250-2 G   520 72.0  28    1.3 225  262 215 262          134 35
100-160-2 G   190 33.0  30    1.1 215  178 145 178,165,150  138 32
80-200-2  G   120 52.0  20    0.9 200  215 170 215          142 27
150-400-4 S   800 38.0  28    0.9 150  406 335 406          142 34  volume
200-400-4 S   800 40.0  50    0.6 195  415 340 415          140 32  bar=6
250-400-4 S  1150 34.0  31    1.0 205  404 330 404          140 45  best
200-315-4 S   900 33.5  34    0.8 200  342 290 342          136 38
125-315-4 S   260 33.0  20   -0.5 165  328 255 328          138 28  no-efficiency
150-315-4 S   480 27.0  30    0.0 160  326 260 326          136 32  no-document
100-315-4 S   150 33.0  13   -0.8 160  325 250 325          140 25
100-400-4 S   170 52.0  11:2  -1.0 155 406 310 406          138 26
125-500-4 S   340 76.0  15:3  -0.4 165 506 400 506          134 28
150-500-4 S   520 70.0  18   -0.2 170  505 405 505,465      134 28
80-250-2  S   110 85.0  13:1  -0.6 170 260 200 260          136 26
200-400-4 B   920 37.0  31   -1.0 185  410 345 395          132 36  from=20 volume
250-400-4 B  1020 36.5  32    0.4 190  410 350 410          134 35  no-npsh best
250-315-4 B  1150 33.0  33   -0.3 195  345 295 345          130 42
150-400-4 B   620 39.0  26   -0.6 180  405 -   405          130 33  from=15
300-400-4 B  1500 34.0  37   -0.2 190  405 350 405          128 40  no-document
200-315-4 B   680 25.0  32   -0.7 185  330 275 330,305      130 34  no-npsh
150-315-4 B   450 25.0  30   -0.9 180  325 270 325          130 33
125-400-4 B   320 41.0  17:1 -1.2 175  402 330 402          130 28
250-500-6 B   940 34.5  27   -0.4 185  530 450 530          132 34  no-minimum-flow
200-500-4 B   800 62.0  22   -0.8 185  508 425 508          128 31  power
200-250-4 B   520 16.0  40   -0.6 190  265 -   265          128 40  from=25
200-400-4 H   900 44.0  28    1.2 200  410 395 410          138 32  best
250-400-4 H   950 37.0  28    1.5 205  406 340 406          140 31  kW=90
200-500-4 H   760 66.0  19:1.5 0.8 195 512 430 512,475      136 28
200-500-6 H   620 30.0  15:2  1.0 190  510 425 510          138 27
150-500-4 H   480 63.0  16    0.6 190  506 420 506          140 25  no-minimum-flow
250-500-6 H   940 39.0  13:2  1.6 195  535 445 535          138 28
300-560-6 H  1250 44.0  23    1.7 200  592 490 592          134 30  no-efficiency
200-400-4 L   820 36.5  28    4.2 200  406 340 406,380      140 33
150-315-4 L   390 30.0  25    3.6 190  328 265 328,300      138 29
100-250-4 L   150 20.0  17    3.2 185  262 205 262          142 26
125-315-4 L   260 31.0  20    3.3 185  326 260 326          140 27
200-315-4 L   600 28.0  30    3.8 195  332 270 332          136 33
150-400-4 L   520 40.0  23    3.5 190  406 330 406          138 28  best
250-400-4 L   970 34.0  34    3.9 205  404 345 404          136 36  no-minimum
100-200-2 L   190 45.0  25    2.9 205  216 170 216,195      138 29
125-250-2 L   300 76.0  22    2.8 210  262 210 262          136 29
100-315-4 L   160 30.0  14:2  2.5 180  322 255 322          138 26
80-160-2  L    95 32.0  21    2.6 200  174 138 174          142 27  no-document
200-250-4 L   480 17.0  36    3.4 200  264 220 264          134 37
100-250-4 R   140 80.0  16    2.2 180  258 215 258          134 27  stages=4
125-315-4 R   270 90.0  18    2.4 185  322 265 322          134 28  stages=3
150-315-4 R   420 58.0  24    2.8 190  326 270 326,300      132 30  stages=2
200-400-4 R   640 78.0  24    3.0 195  404 345 404          132 30  stages=2
80-200-2  R    60 215.0 15    1.8 190  212 180 212          132 30  stages=5
300-250-4 T   830 39.0  48    0.8 205  268 -   268          126 42  stages=2 rpm=1770 no-document
300-315-4 T   920 36.0  42    1.0 210  318 280 318          130 40  stages=2 law no-document
300-400-4 T  1150 30.0  46    0.9 215  400 345 400          126 44  no-efficiency law no-document
250-250-4 T   700 45.0  41    0.6 205  262 230 262          128 40  stages=3 no-npsh
200-250-4 T   420 24.0  37    0.5 200  262 225 262          128 38  stages=2 no-minimum-flow
350-400-6 T  1500 32.0  45    1.0 215  422 370 422          126 43  stages=2 law
"""


class Pump:
    """One row of `PUMPS` with its scatter, at the largest diameter: m3/h, m, mm, rpm, shares as fractions."""

    def __init__(self, row: str) -> None:
        size, letter, flow, head, rise, points, suction, largest, smallest, tested, last, stable, *words = (
            row.split()
        )
        self.id = f"{size} {letter}"
        self.random = random = Random(f"{SEED} {self.id}")  # so no pump depends on the rows around it
        self.series = SERIES[letter]
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
        "impeller": impeller,
        "curves": [printed_curve(pump, diameter, units) for diameter in pump.tested],
        "limits": printed_limits(pump, units),
        "source": printed_source(pump, sheet),
    }


def catalogs() -> Iterator[tuple[str, str]]:
    """Name and text of every file; a column of a curve takes one line."""
    rows = [Pump(row) for row in PUMPS.strip().splitlines()]
    for name, (title, letters, units) in FILES.items():
        pumps = [pump for pump in rows if pump.id.split()[1] in letters]
        catalog = {
            "format": "pump-catalog/1",
            "title": title,
            "revision": "1",
            "licence": "MIT",
            "notes": "Invented: no maker offers these pumps. Written by tests/demo/make_catalog.py.",
            "units": units.names,
            "pumps": [printed_pump(pump, sheet, units) for sheet, pump in enumerate(pumps, start=1)],
        }
        yield name, re.sub(r"\[[^][{}]*\]", _on_one_line, json.dumps(catalog, indent=1)) + "\n"


def _on_one_line(array: re.Match[str]) -> str:
    return re.sub(r"\s+", "", array[0]).replace(",", ", ")


def main(folder: str) -> None:
    """Write every file into the folder."""
    for name, text in catalogs():
        (Path(folder) / name).write_text(text, encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main(sys.argv[1])
