"""The flow left for the new pump: one curve for each state, the same for every candidate.

At header head h the users take demand(h) and the running installed pumps supply S(h); what is left,
r(h) = demand(h) - S(h), never falls with h. It is kept as nodes in rising h, with a node wherever the
network changes: a check valve opens, a curve peaks or ends, the system curve starts, the users
throttle. Between two nodes one and the same set of pumps delivers.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves
from screener.header.system import SystemCurve
from screener.model.arrays import Floats, Ints, frozen

CELLS = 24
_FAR_HEAD = 1e5
_FAR_FLOW = 100.0
_AROUND = 4.0 ** -np.arange(1, 26, 2)


@dataclass(frozen=True, slots=True)
class Left:
    """The flow left for each of `count` new pumps in one state, as g nodes in rising header head.

    header    : (g,) [m]
    left      : (g,) [m3/s] for one new pump, rising
    installed : (g, p) [m3/s] flows of the running installed pumps, 0 where held shut
    total     : (g,) [m3/s] taken by the users
    running   : rows of the installed pumps, length p
    curve     : the system curve
    demand    : [m3/s] at which users throttle; inf for wide open
    count     : new pumps running
    taken     : [m3/s] supplied by something else
    settled   : the first node is the state in which the new pump gives nothing
    floor     : row of the installed pump whose data end at the first node, where that is not `settled`
    ceiling   : None where the curve goes on above the last node; else the row of the installed pump that
                was not measured there, or -1 for the system curve
    parked    : for a cell in which a drooping installed pump has no flow on its falling side, keyed by
                the cell's first node: the same state with that pump held shut
    """

    header: Floats
    left: Floats
    installed: Floats
    total: Floats
    running: tuple[int, ...]
    curve: SystemCurve
    demand: float
    count: int
    taken: float
    settled: bool
    floor: int
    ceiling: int | None
    parked: Mapping[int, Left]


def flow_left(
    pumps: BranchCurves,
    *,
    running: Sequence[int],
    curve: SystemCurve,
    asked: float,
    throttled: bool,
    count: int,
    taken: float = 0.0,
    cells: int = CELLS,
) -> Left:
    """Work out the flow left for the new pump.

    pumps     : branch curves of all installed pumps;  running : the rows that run
    asked     : [m3/s] flow of the duty;  throttled : the users hold it, else everything is wide open
    count     : identical new pumps that share what is left, >= 1
    taken     : [m3/s] supplied by something else, such as a pump held at its minimum flow
    cells     : nodes between two places where the network changes
    """
    rows = np.array(running, np.int64)
    demand = asked if throttled else np.inf

    def supply(heads: Floats) -> Floats:
        return branch.flow_at(pumps, rows[None, :], heads[:, None])

    def users(heads: Floats) -> Floats:
        return np.minimum(demand, system.flow(curve, heads))

    def remains(heads: Floats) -> Floats:
        return np.asarray(users(heads) - taken - supply(heads).sum(axis=1))

    floor = int(rows[pumps.end_head[rows].argmax()]) if rows.size else -1
    heads, ceiling = _heads(pumps, rows, curve, asked, demand, floor, cells)
    nodes, jumping = _with_jumps(pumps, rows, heads)
    installed, total = supply(nodes), users(nodes)
    for node, places in jumping.items():
        installed[node, places] = pumps.low[rows[places]]
    left = total - taken - installed.sum(axis=1)
    first = int(np.argmax(left > 0)) if (left > 0).any() else len(left)
    settled = 0 < first < len(left)
    start = max(first - 1, 0)
    if settled and start in jumping:
        left[start] = 0.0
    elif settled:
        nodes[start] = _zero(remains, nodes[start], nodes[first])
        installed[start], total[start] = supply(nodes[start:first])[0], users(nodes[start:first])[0]
        left[start] = 0.0
    parked = {
        node - start: flow_left(
            pumps,
            running=[row for row in running if row != rows[places[0]]],
            curve=curve,
            asked=asked,
            throttled=throttled,
            count=count,
            taken=taken,
            cells=cells,
        )
        for node, places in jumping.items()
        if node >= start
    }
    return Left(
        header=frozen(nodes[start:]),
        left=frozen(np.maximum(left[start:], 0.0) / count),
        installed=frozen(installed[start:]),
        total=frozen(total[start:]),
        running=tuple(int(row) for row in rows),
        curve=curve,
        demand=demand,
        count=count,
        taken=taken,
        settled=settled,
        floor=floor if first == 0 else -1,
        ceiling=-1 if first == len(left) and ceiling is None else ceiling,
        parked=parked,
    )


def _heads(
    pumps: BranchCurves, rows: Ints, curve: SystemCurve, asked: float, demand: float, floor: int, cells: int
) -> tuple[Floats, int | None]:
    """Header heads at which to tabulate, rising, and whose data end at the last one (see `Left.ceiling`)."""
    bottom = float(pumps.end_head[floor]) if floor >= 0 else curve.static
    ceiling: int | None = None
    top = np.inf
    if np.isinf(demand) and np.isfinite(curve.end):
        ceiling, top = -1, system.head(curve, curve.end)
    for row in rows:
        if not pumps.closes[row] and pumps.low_head[row] < top:
            ceiling, top = int(row), float(pumps.low_head[row])
    special = [bottom, curve.static, *map(float, pumps.low_head[rows])]
    if np.isfinite(demand):
        special.append(system.head(curve, demand))
    inside = sorted(
        {head for head in special if bottom <= head <= top} | ({top} if np.isfinite(top) else set())
    )
    spread = 1 - (1 - np.arange(cells) / cells) ** 2  # closer and closer towards the upper end
    pieces = [low + (high - low) * spread for low, high in pairwise(inside)]
    last = inside[-1]
    if ceiling is None and np.isfinite(demand):
        pieces.append(np.array([last, last + _FAR_HEAD]))
    elif ceiling is None:
        reached = float(system.flow(curve, np.array([last]))[0])
        most = _FAR_FLOW * max(asked, reached, float(pumps.end[rows].sum()))
        flows = reached + most * np.linspace(0, 1, 2 * cells) ** 3
        beyond = system.head_and_slope(curve, flows)[0]
        pieces.append(np.concatenate([[last], beyond[beyond > last]]))
    else:
        pieces.append(np.array([last]))
    return np.concatenate(pieces), ceiling


def _with_jumps(pumps: BranchCurves, rows: Ints, heads: Floats) -> tuple[Floats, dict[int, list[int]]]:
    """Repeat the nodes at which drooping pumps jump from their peak to shut, one at a time.

    Returns the nodes, and for each node that starts a jump the places in `rows` of the pumps which are
    still on their falling side there, the one that jumps next first.
    """
    drooping = [place for place, row in enumerate(rows) if pumps.closes[row] and pumps.low[row] > 0]
    repeats = np.ones(len(heads), np.int64)
    at: dict[int, list[int]] = {}
    for place in drooping:
        for node in np.flatnonzero(heads == pumps.low_head[rows[place]]):
            at.setdefault(int(node), []).append(place)
            repeats[node] += 1
    first = np.concatenate([[0], np.cumsum(repeats)])
    jumping = {
        int(first[node]) + step: places[step:] for node, places in at.items() for step in range(len(places))
    }
    return np.repeat(heads, repeats), jumping


def _zero(rising: Callable[[Floats], Floats], low: float, high: float) -> float:
    """The largest place in [low, high] at which a rising function is not above zero.

    Many places are looked at in each round: even ones first, then closer and closer to where a straight line
    between the two nearest would cross zero.
    """
    places = np.linspace(low, high, 25)
    for _ in range(40):
        values = rising(places)
        above = np.flatnonzero(values > 0)
        step = int(above[0]) if above.size else len(places) - 1
        before = max(step - 1, 0)
        low, high = float(places[before]), float(places[step])
        if high - low <= 1e-15 * abs(high):
            break
        under, over = float(values[before]), float(values[step])
        guess = low + (high - low) * (under / (under - over) if under < 0 < over else 0.5)
        near = (high - low) * _AROUND
        inside = np.concatenate([guess - near, guess + near, [guess]])
        places = np.unique(np.concatenate([[low, high], np.clip(inside, low, high)]))
    return low


def without_new(left: Left, pumps: int) -> tuple[float, Floats]:
    """Header head [m] and flows [m3/s], (pumps,), of the installed pumps while the new one gives nothing.

    Where a pump runs past its data, the head is NaN and that pump's flow +inf (-inf left of its first
    measured point); pumps that do not run are NaN.
    """
    flows = np.full(pumps, np.nan)
    if not left.settled:
        if left.floor >= 0:
            flows[left.floor] = np.inf
        elif left.ceiling is not None and left.ceiling >= 0:
            flows[left.ceiling] = -np.inf
        return np.nan, flows
    if 0 in left.parked:
        parked = left.parked[0]
        head, flows = without_new(parked, pumps)
        held = next(row for row in left.running if row not in parked.running)
        flows[held] = np.nan if np.isnan(head) else 0.0
        return head, flows
    flows[list(left.running)] = left.installed[0]
    return float(left.header[0]), flows
