"""Pump catalogs from files: the pumps in SI, or every problem of every file at once."""

from __future__ import annotations

import math
import os
from collections.abc import Iterator, Sequence
from pathlib import Path

from screener.catalog.columns import Columns, Node
from screener.catalog.entry import Entry, TestedCurve
from screener.errors import InputError, Problem
from screener.files import schema
from screener.files.document import Document, load
from screener.files.locate import KeyPath
from screener.files.quantities import Quantities
from screener.model.tables.grades import head_tolerance
from screener.model.tables.trim_laws import AFFINITY, EQUAL_EXPONENTS, ISO_9906, exponents

FORMAT = "pump-catalog/"
DIAMETER_SLACK = 0.001  # a tested diameter may lie this fraction outside the impeller as offered
LEAST_CUT = 0.75  # of the largest impeller, where no smallest one is stated: no smaller one is looked at


def read(paths: Sequence[str | Path]) -> tuple[list[Entry], list[Path]]:
    """Read catalogs: files, or folders of which every *.json file that says it is a catalog is read.

    Returns the pumps, in the order of the files, and the files. InputError carries all problems; the checks
    of the numbers begin where a file's structure is right.
    """
    entries: list[Entry] = []
    files: list[Path] = []
    problems: list[Problem] = []
    seen: dict[str, str] = {}
    for document in _documents(paths, problems):
        files.append(Path(document.path))
        wrong = schema.check(document, "pump-catalog")
        if not wrong:
            quantities = Quantities(document, document.data["units"])
            entries += _entries(document.data["pumps"], quantities)
            _check_ids(document, quantities, seen)
            wrong = quantities.problems
        problems += wrong
    if problems:
        raise InputError(sorted(problems))
    return entries, files


def _documents(paths: Sequence[str | Path], problems: list[Problem]) -> Iterator[Document]:
    """Yield each catalog once; what cannot be loaded becomes a problem."""
    done: set[str] = set()
    for path in map(Path, paths):
        folder = path.is_dir()
        files = sorted(path.glob("*.json")) if folder else [path]
        others = 0
        for file in files:
            place = os.path.abspath(file)
            if place in done:
                continue
            done.add(place)
            try:
                document = load(file)
            except InputError as error:
                problems += error.problems
                continue
            if folder and not str(document.data.get("format", "")).startswith(FORMAT):
                others += 1
            else:
                yield document
        if folder and others == len(files):
            hint = f'a catalog is a .json file whose format is "{FORMAT}1"'
            problems.append(Problem(str(path), 0, 0, "no pump catalog in this folder", hint))


def _check_ids(document: Document, quantities: Quantities, seen: dict[str, str]) -> None:
    for i, pump in enumerate(document.data["pumps"]):
        if pump["id"] in seen:
            hint = f"the first is in {seen[pump['id']]}; an id is used once in all catalogs"
            quantities.bad(("pumps", i, "id"), f"pump {pump['id']!r} is there already", hint)
        seen.setdefault(pump["id"], document.path)


def _entries(pumps: Sequence[Node], quantities: Quantities) -> list[Entry]:
    curves = iter(Columns(pumps, quantities).checked())
    return [
        _entry(pump, ("pumps", i), tuple(next(curves) for _ in pump["curves"]), quantities)
        for i, pump in enumerate(pumps)
    ]


def _entry(pump: Node, at: KeyPath, curves: tuple[TestedCurve, ...], quantities: Quantities) -> Entry:
    impeller, limits = pump.get("impeller", {}), pump.get("limits", {})
    source = pump.get("source", {})
    low, high = _region(limits, at, quantities)
    slowest, fastest = _speeds(pump, at, quantities)
    trim_law, flow_exponent, head_exponent = _trim_law(impeller, (*at, "impeller", "trim_law"), quantities)

    def limit(key: str, quantity: str) -> float:
        return quantities.positive(limits.get(key), quantity, (*at, "limits", key))

    entry = Entry(
        id=pump["id"],
        title=pump.get("title", pump["id"]),
        construction=pump.get("construction", ""),
        source=", ".join(source[key] for key in ("kind", "document", "date") if key in source),
        speed=float(pump["speed"]),
        curves=curves,
        maximum=quantities.positive(impeller.get("maximum"), "length", (*at, "impeller", "maximum")),
        minimum=quantities.positive(impeller.get("minimum"), "length", (*at, "impeller", "minimum")),
        flow_exponent=flow_exponent,
        head_exponent=head_exponent,
        trim_law=trim_law,
        inlet_diameter=quantities.positive(
            impeller.get("inlet_diameter"), "length", (*at, "impeller", "inlet_diameter")
        ),
        efficiency_loss=float(impeller.get("trim_law", {}).get("efficiency_loss", 0)),
        npsh_speed_exponent=float(pump.get("npsh_speed_exponent", 2)),
        stages=int(pump.get("stages", 1)),
        eyes=int(pump.get("eyes", 1)),
        minimum_flow=limit("minimum_flow", "flow"),
        maximum_flow=limit("maximum_flow", "flow"),
        region_low=low,
        region_high=high,
        allowable_pressure=quantities.pressure(
            limits.get("allowable_pressure"), (*at, "limits", "allowable_pressure"), positive=True
        ),
        maximum_power=limit("maximum_power", "power"),
        casing_volume=limit("casing_volume", "volume"),
        lowest_speed=slowest,
        highest_speed=fastest,
        head_tolerance=_tolerance(source, at, quantities),
    )
    _check_diameters(pump, at, entry, quantities)
    _check_inlet(pump, at, entry, quantities)
    return entry


def _trim_law(impeller: Node, at: KeyPath, quantities: Quantities) -> tuple[str, float, float]:
    """Name of the trim law, empty where it is stated by its exponents, and those of flow and head."""
    law = impeller.get("trim_law", {})
    own = [key for key in ("flow_exponent", "head_exponent") if key in law]
    name = law.get("name", "" if own else AFFINITY)
    for key in own if name else ():
        what = f"the trim law has a name and {key} as well"
        quantities.bad((*at, key), what, "give a name, or exponents of its own")
    if "exponent" in law and name != EQUAL_EXPONENTS:
        what = f"exponent is given without the trim law {EQUAL_EXPONENTS!r}"
        quantities.bad((*at, "exponent"), what, f'name = "{EQUAL_EXPONENTS}", or leave it out')
    if name == ISO_9906 and "inlet_diameter" not in impeller:
        what = f"the trim law {name!r} needs the inlet diameter"
        quantities.bad((*at, "name"), what, "impeller.inlet_diameter")
    flow, head = exponents(name or AFFINITY)
    if name == EQUAL_EXPONENTS:
        flow = head = law.get("exponent", flow)
    return name, float(law.get("flow_exponent", flow)), float(law.get("head_exponent", head))


def _region(limits: Node, at: KeyPath, quantities: Quantities) -> tuple[float, float]:
    if "allowable_region" not in limits:
        return math.nan, math.nan
    low, high = limits["allowable_region"]
    if low >= high:
        what = f"allowable_region runs from {low} to {high} %"
        quantities.bad((*at, "limits", "allowable_region"), what, "lowest first, then highest")
    return quantities.percent(low), quantities.percent(high)


def _speeds(pump: Node, at: KeyPath, quantities: Quantities) -> tuple[float, float]:
    """Speeds that variable speed may take [rpm]; the curve's own must be one of them."""
    if "speed_range" not in pump:
        return math.nan, math.nan
    low, high = map(float, pump["speed_range"])
    if not low <= pump["speed"] <= high:
        what = f"speed_range runs from {low:g} to {high:g} rpm and the curves hold at {pump['speed']:g}"
        quantities.bad((*at, "speed_range"), what, "lowest first, and the speed of the curves within")
    return low, high


def _tolerance(source: Node, at: KeyPath, quantities: Quantities) -> float:
    """Plus or minus: of a grade that is not the same both ways, the larger."""
    if "acceptance_grade" not in source:
        return quantities.percent(source.get("head_uncertainty"))
    if "head_uncertainty" in source:
        what = "acceptance_grade and head_uncertainty are both given"
        quantities.bad((*at, "source", "head_uncertainty"), what, "give one of them")
    low, high = head_tolerance(source["acceptance_grade"])
    return max(-low, high)


def _check_diameters(pump: Node, at: KeyPath, entry: Entry, quantities: Quantities) -> None:
    if entry.maximum < entry.minimum:
        impeller = pump["impeller"]
        what = f"largest impeller {impeller['maximum']} is below the smallest, {impeller['minimum']}"
        quantities.bad((*at, "impeller", "maximum"), what)
    smaller = -math.inf
    for j, (curve, node) in enumerate(zip(entry.curves, pump["curves"], strict=True)):
        place = (*at, "curves", j, "diameter")
        stated = node.get("diameter")
        if stated is None and len(entry.curves) > 1:
            quantities.bad(place, "curve without diameter", "say it for each curve where there are several")
        if curve.diameter <= smaller:
            before = pump["curves"][j - 1]["diameter"]
            quantities.bad(
                place, f"diameter {stated} comes after {before}", "one curve each, in rising diameter"
            )
        if curve.diameter > entry.maximum * (1 + DIAMETER_SLACK):
            most = pump["impeller"]["maximum"]
            quantities.bad(place, f"diameter {stated} is above the largest impeller, {most}")
        if curve.diameter < entry.minimum * (1 - DIAMETER_SLACK):
            least = pump["impeller"]["minimum"]
            quantities.bad(place, f"diameter {stated} is below the smallest impeller, {least}")
        smaller = curve.diameter


def _check_inlet(pump: Node, at: KeyPath, entry: Entry, quantities: Quantities) -> None:
    """No impeller can be cut to its inlet, whatever the trim law."""
    if math.isnan(entry.inlet_diameter):
        return
    largest = entry.curves[-1].diameter if math.isnan(entry.maximum) else entry.maximum
    least = LEAST_CUT * largest if math.isnan(entry.minimum) else entry.minimum
    smallest = min(entry.curves[0].diameter, least)
    if entry.inlet_diameter >= smallest * (1 - DIAMETER_SLACK):
        impeller = pump["impeller"]
        what = f"inlet_diameter {impeller['inlet_diameter']} is not below the smallest impeller"
        hint = "the smallest one offered or tested"
        if "minimum" not in impeller:
            hint += f"; {100 * LEAST_CUT:g} % of the largest where no minimum is stated"
        quantities.bad((*at, "impeller", "inlet_diameter"), what, hint)
