"""The installed pumps of a case, each with its curve, and the free place for the new one."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from screener import units
from screener.case.condition import condition, worn
from screener.case.drives import check_range, drive
from screener.case.parts import NEW, Node, branch, lookup, names
from screener.catalog.columns import Columns
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import frozen
from screener.model.case import Installed, NewPump
from screener.model.curves import Pumps, PumpTable
from screener.model.tables.grades import head_tolerance

DIAMETER_SLACK = 0.001
"""An impeller may be this fraction outside the range on offer, as diameters are rounded figures."""

NO_MODEL = -1
"""`Pumps.model` of an installed pump whose curve is written in the case."""

TRIM_STEP = 0.001
"""[m] where the case does not state it."""


def tags(q: Quantities, nodes: Sequence[Node]) -> list[str]:
    """Return the tags of the installed pumps, in order."""
    found = names(q, nodes, "tag", "installed")
    for row, tag in enumerate(found):
        if tag == NEW:
            q.bad(
                ("installed", row, "tag"),
                f"an installed pump is called {NEW!r}",
                "duties mean the new pump by it",
            )
    return found


def installed(
    q: Quantities, nodes: Sequence[Node], *, table: PumpTable, length: str
) -> list[tuple[Installed, Pumps]]:
    """Return each installed pump with its curve, one row; one whose curve has a problem is left out.

    table  : the catalog that the case names pumps of
    length : unit of the diameter in a title
    """
    found = []
    for row, node in enumerate(nodes):
        path = ("installed", row)
        rated_flow = q.positive(node.get("rated_flow"), "flow", (*path, "rated_flow"))
        motor = q.positive(node.get("motor"), "power", (*path, "motor"))
        way, stated = branch(q, node, path), _stated(q, node, path)
        driven = drive(q, node, path)
        lost = condition(q, node.get("condition"), (*path, "condition"))
        if "pump" in node["curve"]:
            curve = _of_catalog(q, node["curve"], (*path, "curve"), table, length)
        else:
            curve = _own(q, node["curve"], (*path, "curve"))
        if curve is None:
            continue
        source, model, diameter = curve
        pump = trimmed(
            source,
            model=np.array([model]),
            diameter=np.array([diameter]),
            speed_ratio=np.array([node.get("speed", source.speed[model]) / source.speed[model]]),
        )
        if source is not table:
            stated["model"] = frozen([NO_MODEL], np.int64)
        title = source.titles[model]
        if not math.isnan(diameter):
            title += f", {_shown(diameter, length)}"
        best = float(pump.bep_flow[0])
        rated_flow = best if math.isnan(rated_flow) else rated_flow
        pump = replace(pump, **stated)
        check_range(q, driven, pump, path)
        loss, fitted = worn(q, lost, node, pump=pump, rated_flow=rated_flow)
        found.append((Installed(node["tag"], title, way, rated_flow, motor, loss, driven, fitted), pump))
    return found


def new_pump(q: Quantities, node: Node, tags: Sequence[str]) -> NewPump:
    """Return the free place on the header; `tags` of the installed pumps."""
    path = ("new_pump",)
    if "slip" in node and "frequency" not in node:
        q.bad((*path, "slip"), "slip is given without frequency", "frequency = 50 or 60")
    step = q.positive(node.get("trim_step"), "length", (*path, "trim_step"))
    return NewPump(
        count=int(node.get("count", 1)),
        frequency=float(node.get("frequency", math.nan)),
        slip=q.percent(node.get("slip")),
        branch=branch(q, node, path),
        trim_step=TRIM_STEP if math.isnan(step) else step,
        motor_series=node.get("motor_series", "IEC"),
        trim_law=node.get("trim_law", ""),
        drive=drive(q, node, path),
        replaces=lookup(q, node["replaces"], tags, (*path, "replaces"), "pump") if "replaces" in node else -1,
    )


def _of_catalog(
    q: Quantities, node: Node, path: KeyPath, table: PumpTable, length: str
) -> tuple[PumpTable, int, float] | None:
    """Return table, row and diameter [m] of a pump of the catalog; None after a problem."""
    model = lookup(q, node["pump"], table.ids, (*path, "pump"), "pump in the catalog")
    diameter = q.positive(node.get("diameter"), "length", (*path, "diameter"))
    if model < 0 or (math.isnan(diameter) and "diameter" in node):
        return None
    highest, lowest = float(table.maximum[model]), float(table.minimum[model])
    if math.isnan(highest) and math.isnan(diameter):
        return table, model, math.nan
    if math.isnan(highest):
        q.bad(
            (*path, "diameter"), f"the catalog states no diameters of {node['pump']!r}", "leave diameter out"
        )
        return None
    offered = f"up to {_shown(highest, length)}"
    if not math.isnan(lowest):
        offered = f"{_shown(lowest, length)} to {_shown(highest, length)}"
    if math.isnan(diameter):
        q.bad(path, f"{node['pump']!r} has no diameter", f"diameter = the impeller as installed, {offered}")
        return None
    if diameter > highest * (1 + DIAMETER_SLACK) or diameter < lowest * (1 - DIAMETER_SLACK):
        q.bad(
            (*path, "diameter"), f"diameter is {node['diameter']}", f"{node['pump']!r} is offered {offered}"
        )
        return None
    if diameter <= table.law_inlet[model]:
        inlet = _shown(float(table.law_inlet[model]), length)
        q.bad((*path, "diameter"), f"diameter is {node['diameter']}", f"above that of its inlet, {inlet}")
        return None
    return table, model, diameter


def _own(q: Quantities, node: Node, path: KeyPath) -> tuple[PumpTable, int, float] | None:
    """Return the table of a curve written in the case, its row and diameter [m]; None after a problem."""
    before = len(q.problems)
    (curve,) = _OwnColumns(node, q, path).checked()
    unread = np.isnan(curve.flow).any() or np.isnan(curve.head).any()  # a missing unit is told once only
    if len(q.problems) > before or unread:
        return None
    entry = Entry(
        id="",
        title="own curve",
        construction="",
        source="the case",
        speed=float(node["speed"]),
        curves=(curve,),
    )
    return compile_table([entry]), 0, curve.diameter


class _OwnColumns(Columns):
    """A curve written in the case: checked as those of a catalog are, with places in the case."""

    def __init__(self, node: Node, q: Quantities, path: KeyPath) -> None:
        measured = {
            key: [None if item == "-" else item for item in value] if isinstance(value, list) else value
            for key, value in node.items()
        }
        super().__init__([{"curves": [measured]}], q)
        self._at = path

    def _path(self, curve: int, *keys: str | int) -> KeyPath:
        return (*self._at, *keys)


def _shown(diameter: float, length: str) -> str:
    return f"{units.from_si(diameter, length):.4g} {length}"


def _stated(q: Quantities, node: Node, path: KeyPath) -> dict[str, Any]:
    """Return the columns of `Pumps`, of one row each, that the case states in place of the catalog."""
    values = {
        key: q.positive(node[key], "flow", (*path, key))
        for key in ("minimum_flow", "maximum_flow")
        if key in node
    }
    if values.get("minimum_flow", math.nan) >= values.get("maximum_flow", math.nan):
        q.bad((*path, "maximum_flow"), f"maximum_flow is {node['maximum_flow']}", "above minimum_flow")
    if "allowable_pressure" in node:
        pressure_path = (*path, "allowable_pressure")
        values["allowable_pressure"] = q.pressure(node["allowable_pressure"], pressure_path, positive=True)
    if "allowable_region" in node:
        low, high = node["allowable_region"]
        if low >= high:
            what = f"allowable_region runs from {low} to {high} %"
            q.bad((*path, "allowable_region"), what, "lowest first, then highest")
        values["region_low"], values["region_high"] = q.percent(low), q.percent(high)
    if "head_uncertainty" in node:
        values["head_tolerance"] = q.percent(node["head_uncertainty"])
    if "acceptance_grade" in node:
        below, above = head_tolerance(node["acceptance_grade"])
        values["head_tolerance"] = max(-below, above)
        if "head_uncertainty" in node:
            what = "acceptance_grade and head_uncertainty are both given"
            q.bad((*path, "head_uncertainty"), what, "keep one")
    return {key: frozen([value]) for key, value in values.items()}
