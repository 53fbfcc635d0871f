"""A case from its file, in SI: every problem of the file at once."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np

from screener import criteria, units
from screener.case import duties, liquids, pumps, system
from screener.case.parts import Node, lookup, loss, not_negative
from screener.errors import InputError
from screener.files import schema
from screener.files.document import Document
from screener.files.quantities import Quantities, dimension
from screener.hydraulics.similarity import stack
from screener.hydraulics.wear import uniform
from screener.model.case import Case, Tolerance
from screener.model.curves import Pumps, PumpTable

SCHEMA = "case"

SHOWN = {
    "flow": "m3/h",
    "head": "m",
    "power": "kW",
    "length": "mm",
    "pressure": "bar",
    "temperature": "degC",
}
"""Units that figures are shown in where the case declares none."""

WEIGHTS = {"efficiency": 1.0, "shutoff_match": 0.1, "load_share": 0.1}
"""Weights of the score where the case states none: points for each percent or point."""


def catalog_paths(document: Document) -> list[Path]:
    """Return the catalogs that a case names, found from the folder of the case.

    InputError: the document is no case, or a catalog does not exist.
    """
    _check(document)
    folder = Path(document.path).parent
    given = [folder / entry for entry in document.data.get("catalog", [])]
    problems = [
        document.problem(
            ("catalog", row), f"there is no file or folder {str(path)!r}", "relative to this file"
        )
        for row, path in enumerate(given)
        if not path.exists()
    ]
    if problems:
        raise InputError(problems)
    return given


def read_case(document: Document, table: PumpTable) -> Case:
    """Read a case; `table` holds the pumps of its catalogs.

    InputError carries all problems; the checks of the numbers begin where the file's structure is right.
    """
    _check(document)
    data = document.data
    q, shown = _units(document)
    air = liquids.atmosphere(q, data.get("site", {}))
    levels = system.levels(q, data["level"], atmosphere=air)
    surface = air + float(np.max([level.vessel_pressure for level in levels]))
    pumped = liquids.liquids(q, data["liquid"], surface=surface, pressure=shown["pressure"])
    names = [liquid.name for liquid in pumped]
    measured = _measured_with(q, data["system"], names)
    curve = system.system(
        q, data["system"], levels=levels, density=pumped[max(measured, 0)].density, atmosphere=air
    )
    friction = loss(q, data.get("suction", {}).get("friction"), ("suction", "friction"))
    tolerance = _tolerance(q, data.get("tolerance", {}))
    tags = pumps.tags(q, data["installed"])
    installed = pumps.installed(q, data["installed"], table=table, length=shown["length"])
    new_pump = pumps.new_pump(q, data["new_pump"], tags)
    end = {pump.tag: float(row.curves.end[0]) for pump, row in installed}
    asked = duties.duties(
        q,
        data["duty"],
        levels=[level.name for level in levels],
        liquids=names,
        fleet=duties.Fleet(
            tags=tags,
            replaced=new_pump.replaces,
            varies=["speed_range" in node for node in (data["new_pump"], *data["installed"])],
            end=[math.nan, *(end.get(tag, math.nan) for tag in tags)],
            flow=shown["flow"],
        ),
    )
    used = {duty.liquid for duty in asked} | ({measured} if "measured" in data["system"] else set())
    liquids.check_pumped(q, pumped, used)
    if len(installed) == len(tags):
        as_new = stack([row for _, row in installed])
        liquids.check_viscous(q, pumped, asked, tags, as_new)
    limits, wrong = criteria.read_limits(data.get("limits", {}))
    for path, what, hint in wrong:
        q.bad(("limits", *path), what, hint)
    weights = WEIGHTS | data.get("score", {})
    if not any(weights.values()):
        q.bad(("score",), "every weight is 0", "at least one above 0")
    if q.problems:
        raise InputError(sorted(q.problems))
    as_new = _frozen(as_new)
    losses = np.array([pump.head_loss for pump, _ in installed])
    return Case(
        title=data["title"],
        date=data.get("date", ""),
        liquids=pumped,
        atmospheric_pressure=air,
        system=curve,
        levels=levels,
        suction_friction=friction,
        installed=tuple(pump for pump, _ in installed),
        pumps=_frozen(uniform(as_new, loss=losses)) if losses.any() else as_new,
        new_pump=new_pump,
        duties=asked,
        limits=limits,
        weights={name: float(weight) for name, weight in weights.items()},
        display=shown,
        as_new=as_new if losses.any() else None,
        tolerance=tolerance,
    )


def _check(document: Document) -> None:
    problems = schema.check(document, SCHEMA)
    if problems:
        raise InputError(sorted(problems))


def _measured_with(q: Quantities, node: Node, names: Sequence[str]) -> int:
    """Return the row of the liquid with which the system was measured: the first where nothing is stated."""
    path = ("system", "measured", "liquid")
    return lookup(q, node.get("measured", {}).get("liquid", names[0]), names, path, "liquid")


def _tolerance(q: Quantities, node: Node) -> Tolerance:
    given = {key: q.percent(node[key]) for key in ("system_curve", "reading") if key in node}
    if "trim" in node:
        given["trim"] = not_negative(q, node["trim"], "length", ("tolerance", "trim"))
    return Tolerance(**given)


def _frozen(joined: Pumps) -> Pumps:
    """Make the columns of freshly joined pumps refuse to be written."""
    for columns in (joined, joined.curves):
        for column in fields(columns):
            if column.name != "curves":
                getattr(columns, column.name).flags.writeable = False
    return joined


def _units(document: Document) -> tuple[Quantities, dict[str, str]]:
    """Return the reader of quantities, and the units that figures are shown in; NPSH goes with head."""
    declared: Mapping[str, Any] = document.data.get("units", {})
    q = Quantities(document, declared)
    if q.problems:
        return q, SHOWN
    if "head" in declared:
        q = Quantities(document, {"npsh": declared["head"], **declared})
    shown = SHOWN | {name: units.check_unit(unit, dimension(name)) for name, unit in declared.items()}
    return q, {"npsh": shown["head"], **shown}
