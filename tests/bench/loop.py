"""The same work pump by pump with scipy: frozen, so that ratios can be compared over time.

Not made slow on purpose: one interpolant for each curve, built once; the flows of the installed pumps
and of the users against header head are built once for all; one `brentq` for each state.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicHermiteSpline, PchipInterpolator
from scipy.optimize import brentq

from screener.header.branch import BranchCurves
from screener.header.left import Left
from screener.hydraulics.interpolate import station_slopes
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps
from screener.screening.header import Header

_DENSE = 4001
_SHARE = np.linspace(0, 1, STATIONS)


def curve(values: Floats, slope: Floats, span: float) -> CubicHermiteSpline:
    """One interpolant through stations with the slopes given, so that both sides read the same curve."""
    return CubicHermiteSpline(_SHARE * span, values, slope * ((STATIONS - 1) / span))


@dataclass(frozen=True)
class Supply:
    """Flow [m3/s] of one kind of installed pump against header head, and which of it run."""

    flow: CubicHermiteSpline
    lowest: float
    highest: float
    rows: tuple[int, ...]

    def __call__(self, head: float) -> float:
        if head >= self.highest:
            return 0.0
        return float(self.flow(max(head, self.lowest)))


def supply(installed: BranchCurves, rows: Sequence[int]) -> Supply:
    """The falling side of one installed branch, turned round on dense stations with exact slopes."""
    row = rows[0]
    branch = curve(installed.head[row], installed.slope[row], installed.span[row])
    # dense towards the peak, where the inverse is steep
    flow = installed.low[row] + (installed.end[row] - installed.low[row]) * np.linspace(1, 0, _DENSE) ** 2
    head, slope = branch(flow), np.minimum(branch(flow, 1), -1e-6)
    rising = np.concatenate([[True], np.diff(head) > 0])
    turned = CubicHermiteSpline(head[rising], flow[rising], 1 / slope[rising])
    return Supply(turned, float(head[0]), float(head[-1]), tuple(rows))


@dataclass(frozen=True)
class Network:
    """One state: what the installed pumps and the users do at a header head."""

    supplies: tuple[Supply, ...]
    static: float
    coefficient: float
    exponent: float
    demand: float
    count: int

    def left(self, head: float) -> float:
        """Flow left for each new pump [m3/s] at a header head."""
        given = sum(len(pump.rows) * pump(head) for pump in self.supplies)
        open_ = max((head - self.static) / self.coefficient, 0.0) ** (1 / self.exponent)
        return (min(open_, self.demand) - given) / self.count

    def supply_of(self, row: int) -> Supply:
        """The supply to which an installed pump belongs."""
        return next(pump for pump in self.supplies if row in pump.rows)


def network(installed: BranchCurves, left: Left) -> Network:
    """Make a state ready. Installed pumps with the same curve are looked at once."""
    kinds: dict[bytes, list[int]] = {}
    for row in left.running:
        kinds.setdefault(installed.head[row].tobytes(), []).append(row)
    terms = left.curve.terms
    return Network(
        supplies=tuple(supply(installed, rows) for rows in kinds.values()),
        static=left.curve.static,
        coefficient=terms.coefficient[0],
        exponent=terms.exponent[0],
        demand=left.demand,
        count=left.count,
    )


def meeting(branch: CubicHermiteSpline, low: float, end: float, state: Network) -> tuple[float, float]:
    """Flow of the new pump and header head in one state; NaN where they do not meet on the falling side."""

    def above(flow: float) -> float:
        return state.left(float(branch(flow))) - flow

    if above(low) <= 0 or above(end) >= 0:
        return np.nan, np.nan
    flow = brentq(above, low, end, xtol=1e-9 * end)
    return flow, float(branch(flow))


def meetings(new: BranchCurves, rows: Sequence[int], state: Network) -> Floats:
    """Flows [m3/s] of some curves in one state, pump by pump."""
    flows = []
    for row in rows:
        branch = curve(new.head[row], new.slope[row], new.span[row])
        flows.append(meeting(branch, new.low[row], new.end[row], state)[0])
    return np.array(flows)


@dataclass(frozen=True)
class Reader:
    """What is read of one pump at its flow, and the limits that it is held against."""

    efficiency: CubicHermiteSpline
    power: CubicHermiteSpline
    npsh_required: CubicHermiteSpline
    end: float
    bep_flow: float
    minimum_flow: float


def reader(pumps: Pumps, row: int) -> Reader:
    """The interpolants of one pump. Slopes come from scipy's own rule: nothing here is compared."""
    curves = pumps.curves

    def read(values: Floats, span: float) -> PchipInterpolator:
        return PchipInterpolator(_SHARE * span, np.nan_to_num(values[row]), extrapolate=False)

    return Reader(
        efficiency=read(curves.efficiency, curves.span[row]),
        power=read(curves.power, curves.span[row]),
        npsh_required=read(curves.npsh_required, curves.npsh_span[row]),
        end=float(curves.end[row]),
        bep_flow=float(pumps.bep_flow[row]),
        minimum_flow=float(np.nan_to_num(pumps.minimum_flow[row])),
    )


@dataclass(frozen=True)
class Like:
    """What pumps are like in some states: the new ones and their branch curves, the installed ones."""

    pumps: Pumps
    new: BranchCurves
    installed: Pumps


@dataclass(frozen=True)
class Turned:
    """One installed pump that holds the flow of a state by its speed."""

    row: int
    curve: CubicHermiteSpline
    lowest: float
    asked: float
    head: float


def turned(header: Header, state: int, like: Like) -> Turned | None:
    """The installed pump whose speed holds the flow of a state, if it is so held."""
    if not header.conditions.held[state]:
        return None
    row = next(row for row, pump in enumerate(header.case.installed) if pump.drive.varies)
    curves = like.installed.curves
    slope = station_slopes(curves.head[row : row + 1])[0]
    drive = header.case.installed[row].drive
    wanted, asked = header.conditions.wanted_head[state], header.conditions.asked[state]
    return Turned(row, curve(curves.head[row], slope, curves.span[row]), drive.lowest, asked, wanted)


def held(branch: CubicHermiteSpline, low: float, end: float, state: Network, by: Turned, place: Branch):
    """Flow of the new pump, of the pump that turns, and its speed; NaN where its range does not do it."""

    def above(flow: float) -> float:
        return float(branch(flow)) - by.head

    if above(low) <= 0 or above(end) >= 0:
        return np.nan, np.nan, np.nan
    flow = brentq(above, low, end, xtol=1e-9 * end)
    others = sum(len(pump.rows) * pump(by.head) for pump in state.supplies if by.row not in pump.rows)
    rest = by.asked - flow - others
    head = by.head - place.suction_head + _lost(place.suction, rest) + _lost(place.discharge, rest)

    def over(ratio: float) -> float:
        return ratio**2 * float(by.curve(rest / ratio)) - head

    if rest <= 0 or over(1.0) <= 0 or over(by.lowest) >= 0:
        return np.nan, np.nan, np.nan
    return flow, rest, brentq(over, by.lowest, 1.0, xtol=1e-10)


def screen(header: Header, likes: Sequence[Like], networks: Sequence[Network]) -> Floats:
    """Run pumps through every state, one by one, and hold them against six criteria.

    likes : for each state what the pumps are like in it, the same object where they are alike
    Criteria for every running pump: end of curve, minimum flow, allowable region, motor, NPSH margin; and
    the flow that the duty asks for. Returns the largest shortfall of each pump, (c,).
    """
    case, conditions = header.case, header.conditions
    kinds = {id(like): like for like in likes}
    beside = {
        kind: [reader(like.installed, row) for row in range(len(case.pumps))] for kind, like in kinds.items()
    }
    turning = [turned(header, number, like) for number, like in enumerate(likes)]
    worst = np.zeros(len(likes[0].pumps))
    for row in range(len(worst)):
        own = {kind: reader(like.pumps, row) for kind, like in kinds.items()}
        branches = {
            kind: curve(like.new.head[row], like.new.slope[row], like.new.span[row])
            for kind, like in kinds.items()
        }
        for number, (state, network) in enumerate(zip(header.states, networks, strict=True)):
            kind, new, by = id(likes[number]), likes[number].new, turning[number]
            ratio, rest = 1.0, 0.0
            if by is None:
                flow, head = meeting(branches[kind], new.low[row], new.end[row], network)
            else:
                place = case.installed[by.row].branch
                flow, rest, ratio = held(branches[kind], new.low[row], new.end[row], network, by, place)
                head = by.head
            if np.isnan(flow):
                worst[row] = 1.0
                continue
            running = [(own[kind], flow, case.new_pump.branch, np.inf)]
            for place in state.running:
                pump = case.installed[place]
                if by is not None and place == by.row:
                    running.append((beside[kind][place], rest / ratio, pump.branch, pump.motor / ratio**3))
                    continue
                running.append((beside[kind][place], network.supply_of(place)(head), pump.branch, pump.motor))
            total = sum(flow for _, flow, _, _ in running)
            liquid, level = case.liquids[case.duties[state.duty].liquid], case.levels[state.level]
            common = _lost(case.suction_friction, total)
            surface = case.atmospheric_pressure + level.vessel_pressure - liquid.vapour_pressure
            shortfalls = [1 - total / conditions.asked[number] if state.throttled else 0.0]
            for pump, flow, place, motor in running:
                suction, discharge = _lost(place.suction, flow), _lost(place.discharge, flow)
                pump_head = head - place.suction_head + suction + discharge
                efficiency, power = float(pump.efficiency(flow)), float(pump.power(flow))
                if efficiency > 0:
                    power = 9.80665 * liquid.density * flow * pump_head / efficiency
                available = surface / (9.80665 * liquid.density) + level.suction_head - common - suction
                required = float(pump.npsh_required(flow))
                shortfalls += [
                    flow / pump.end - 1,
                    1 - flow / pump.minimum_flow if pump.minimum_flow else 0.0,
                    flow / pump.bep_flow - 1.2,
                    power / motor - 1,
                    1.1 - available / required if required else 0.0,
                ]
            worst[row] = max(worst[row], *shortfalls)
    return worst


def _lost(loss: Loss, flow: float) -> float:
    return sum(c * flow**e for c, e in zip(loss.coefficient, loss.exponent, strict=True))
