"""A case from its file, in SI: every problem of the file at once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np

from screener import criteria, units
from screener.case import duties, liquids, pumps, system
from screener.case.parts import loss
from screener.errors import InputError
from screener.files import schema
from screener.files.document import Document
from screener.files.quantities import Quantities, dimension
from screener.hydraulics.similarity import stack
from screener.hydraulics.wear import uniform
from screener.model.case import Case
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
    pumped = liquids.liquids(q, data["liquid"])
    levels = system.levels(q, data["level"], atmosphere=air)
    curve = system.system(q, data["system"], levels=levels, density=pumped[0].density, atmosphere=air)
    friction = loss(q, data.get("suction", {}).get("friction"), ("suction", "friction"))
    tags = pumps.tags(q, data["installed"])
    installed = pumps.installed(q, data["installed"], table=table, length=shown["length"])
    new_pump = pumps.new_pump(q, data["new_pump"])
    asked = duties.duties(
        q,
        data["duty"],
        levels=[level.name for level in levels],
        liquids=[liquid.name for liquid in pumped],
        tags=tags,
    )
    limits, wrong = criteria.read_limits(data.get("limits", {}))
    for path, what, hint in wrong:
        q.bad(("limits", *path), what, hint)
    weights = WEIGHTS | data.get("score", {})
    if not any(weights.values()):
        q.bad(("score",), "every weight is 0", "at least one above 0")
    if q.problems:
        raise InputError(sorted(q.problems))
    as_new = _frozen(stack([row for _, row in installed]))
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
    )


def _check(document: Document) -> None:
    problems = schema.check(document, SCHEMA)
    if problems:
        raise InputError(sorted(problems))


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
