"""The levels and the system curve of a case."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from screener import units
from screener.case.parts import Node, head_or_zero, lookup, loss, names
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.hydraulics.constants import GRAVITY
from screener.model.arrays import Floats, frozen
from screener.model.case import Level, Loss, System


def levels(q: Quantities, nodes: Sequence[Node], *, atmosphere: float) -> tuple[Level, ...]:
    """Return the levels of the suction side; `atmosphere` in Pa absolute."""
    names(q, nodes, "name", "level")
    return tuple(
        Level(
            name=node["name"],
            static_head=q.value(node["static_head"], "head", ("level", row, "static_head")),
            suction_head=head_or_zero(q, node, "suction_head", ("level", row)),
            vessel_pressure=_surface(q, node, "vessel_pressure", ("level", row), atmosphere),
        )
        for row, node in enumerate(nodes)
    )


def system(
    q: Quantities, node: Node, *, levels: Sequence[Level], density: float, atmosphere: float
) -> System:
    """Return the system curve: from friction terms, from a table, or fitted to a measurement.

    levels     : one of them stood during the measurement
    density    : [kg/m3] of the liquid during the measurement
    atmosphere : [Pa absolute]
    """
    given = [key for key in ("friction", "table", "measured") if key in node]
    if len(given) != 1:
        what = f"the system has {' and '.join(given)}" if given else "the system has no curve"
        q.bad(("system",), what, "exactly one of friction, table, measured")
    friction = loss(q, node.get("friction"), ("system", "friction"))
    if "friction" in node and sum(friction.coefficient) == 0:
        q.bad(("system", "friction"), "the system has no friction", "at least one term above 0")
    destination = _surface(q, node, "destination_pressure", ("system",), atmosphere)
    flow, head, deviation = frozen([]), frozen([]), math.nan
    if "table" in node:
        flow, head = _table(q, node["table"])
    if "measured" in node:
        friction, deviation = _fitted(q, node["measured"], levels, destination, density)
    return System(
        friction=friction,
        table_flow=flow,
        table_head=head,
        fit_deviation=deviation,
        destination_pressure=destination,
        allowable_pressure=q.pressure(
            node.get("allowable_pressure"), ("system", "allowable_pressure"), positive=True
        ),
    )


def _surface(q: Quantities, node: Node, key: str, path: KeyPath, atmosphere: float) -> float:
    """Return the pressure on a free surface [Pa gauge], 0 where it is not stated."""
    if key not in node:
        return 0.0
    pressure = q.pressure(node[key], (*path, key))
    if pressure <= -atmosphere:
        q.bad((*path, key), f"{key} is {node[key]}", "gauge: above minus the atmospheric pressure")
    return pressure


def _columns(q: Quantities, node: Node, path: KeyPath) -> tuple[Floats, Floats] | None:
    """Return flow [m3/s] and head [m] of equal length; None after a problem."""
    before = len(q.problems)
    flow = q.array(node["flow"], "flow", (*path, "flow"))
    head = q.array(node["head"], "head", (*path, "head"))
    if len(flow) != len(head):
        q.bad((*path, "head"), f"head has {len(head)} values, flow has {len(flow)}", "one for each flow")
    return None if len(q.problems) > before or np.isnan(flow + head).any() else (flow, head)


def _table(q: Quantities, node: Node) -> tuple[Floats, Floats]:
    """Return friction head over flow, both rising from 0."""
    columns = _columns(q, node, ("system", "table"))
    if columns is None:
        return frozen([]), frozen([])
    for key, values in zip(("flow", "head"), columns, strict=True):
        path = ("system", "table", key)
        if values[0] != 0:
            q.bad((*path, 0), f"the first {key} is {node[key][0]}", "0: no friction without flow")
        falls = np.flatnonzero(np.diff(values) <= 0)
        if len(falls):
            row = int(falls[0]) + 1
            what = f"{key} goes from {node[key][row - 1]} to {node[key][row]}"
            q.bad((*path, row), what, "each above the one before: friction rises with flow")
    return frozen(columns[0]), frozen(columns[1])


def _fitted(
    q: Quantities, node: Node, levels: Sequence[Level], destination: float, density: float
) -> tuple[Loss, float]:
    """Fit head - static head = k Q^n by least squares; return the term and the largest deviation [m]."""
    path = ("system", "measured")
    row = lookup(q, node["level"], [level.name for level in levels], (*path, "level"), "level")
    columns = _columns(q, node, path)
    if row < 0 or columns is None:
        return Loss(), math.nan
    exponent = float(node.get("exponent", 2))
    flow, head = columns[0] ** exponent, columns[1]
    static = levels[row].static_head + (destination - levels[row].vessel_pressure) / (density * GRAVITY)
    if not flow.any():
        q.bad((*path, "flow"), "every flow is 0", "at least one above 0")
        return Loss(), math.nan
    coefficient = float(flow @ (head - static) / (flow @ flow))
    order = np.argsort(flow)
    falls = order[1:][np.diff(head[order]) < 0]
    if coefficient <= 0:
        q.bad(
            (*path, "head"),
            f"the measured heads are no higher than the static head of {units.format_value(static, 'm', 2)}",
            "the head at the header, static part included",
        )
    elif falls.size:
        what = f"the measured head {node['head'][falls[0]]} is lower than at the next smaller flow"
        q.bad((*path, "head", int(falls[0])), what, "a system curve rises with flow")
    return Loss((coefficient,), (exponent,)), float(np.abs(head - static - coefficient * flow).max())
