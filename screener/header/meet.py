"""Operating points: where the branch curves of a whole catalog meet the flow left for them."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves
from screener.header.left import Left
from screener.hydraulics import interpolate
from screener.model.arrays import STATIONS, Bools, Codes, Floats, Ints

_LAST = STATIONS - 1
_STEEP = 10.0


class Mark(IntEnum):
    """What became of a state. Only `RUNS` and `SHUT` have figures."""

    RUNS = 0
    SHUT = 1
    NEW_PAST_END = 2
    INSTALLED_PAST_END = 3
    NEW_NOT_MEASURED = 4
    INSTALLED_NOT_MEASURED = 5
    SYSTEM_NOT_KNOWN = 6


@dataclass(frozen=True, slots=True)
class Meeting:
    """c candidates in one state; NaN where there are no figures.

    flow      : (c,) [m3/s] of each new pump, 0 where held shut
    header    : (c,) [m]
    installed : (c, p) [m3/s] by row of the installed pumps, 0 where held shut; NaN for those not running
    mark      : (c,) `Mark`
    culprit   : (c,) row of the installed pump whose data end, for the two marks that speak of one
    """

    flow: Floats
    header: Floats
    installed: Floats
    mark: Codes
    culprit: Ints


def meet(new: BranchCurves, left: Left, installed: BranchCurves) -> Meeting:
    """Find the operating points of c new pumps in one state.

    The cell between two nodes is found by bisection, the point in it by Newton's method on the whole
    network, held within the cell; flows agree with a scalar root finder to 1e-9 of the curve's end.
    """
    count, nodes = len(new), len(left.header)
    result = Meeting(
        flow=np.full(count, np.nan),
        header=np.full(count, np.nan),
        installed=np.full((count, len(installed)), np.nan),
        mark=np.full(count, Mark.SHUT, np.int8),
        culprit=np.full(count, -1),
    )
    # Which cell between two nodes each branch curve meets the flow left in.
    reader = _reader(new)
    cell, above_low, above_high = _cells(reader, left)
    below = np.minimum(cell + (above_low > 0) + (above_high > 0), nodes)  # nodes below each branch curve
    jumping = np.isin(below - 1, list(left.parked)) if left.parked else np.zeros(count, bool)
    beyond = (below == nodes) & (left.ceiling is not None)

    # Most candidates: the point in the cell.
    plain = np.flatnonzero((below > 0) & ~jumping & ~beyond)
    if plain.size:
        share = above_low.take(plain) / (above_low.take(plain) - above_high.take(plain))
        _solve(reader.take(plain), left, installed, plain, cell.take(plain), share, result)
    _mark_ceiling(left, np.flatnonzero(beyond), result)

    # Those that give nothing: below the first node, or left of their falling side. `short` are sure to run,
    # as an installed pump is past its data even without them, but the head there is not known.
    nothing = np.flatnonzero((below == 0) | (result.flow < new.low))
    bottom = left.header[0]
    short = (below == 0) & (new.low_head > bottom) & (not left.settled and left.floor >= 0)
    unknown = (~new.closes & ~short)[nothing]
    _blank(nothing[unknown], Mark.NEW_NOT_MEASURED, result)
    shut = nothing[~unknown]
    if not left.settled:
        if left.floor >= 0:
            _blank(shut, Mark.INSTALLED_PAST_END, result)
            result.culprit[shut] = left.floor
        else:
            _mark_ceiling(left, shut, result)
    elif 0 in left.parked:
        jumping[shut], below[shut] = True, 1
    else:
        result.mark[shut], result.flow[shut], result.header[shut] = Mark.SHUT, 0.0, left.header[0]
        result.installed[np.ix_(shut, np.array(left.running, np.int64))] = left.installed[0]

    # Those past their own data, and those in the jump of a drooping installed pump, solved with it shut.
    past = np.flatnonzero((result.flow > new.end) | short & (new.end_head > bottom))
    _blank(past, Mark.NEW_PAST_END, result)
    _blank(np.flatnonzero(np.isnan(new.low_head)), Mark.NEW_NOT_MEASURED, result)
    for node, parked in left.parked.items():
        rows = np.flatnonzero(jumping & (below - 1 == node))
        if rows.size:
            _copy(meet(branch.take(new, rows), parked, installed), rows, left, parked, result)
    return result


def _blank(rows: Ints, mark: Mark, result: Meeting) -> None:
    result.mark[rows] = mark
    result.flow[rows] = result.header[rows] = np.nan
    result.installed[rows] = np.nan


def _mark_ceiling(left: Left, rows: Ints, result: Meeting) -> None:
    known = left.ceiling is None or left.ceiling < 0
    _blank(rows, Mark.SYSTEM_NOT_KNOWN if known else Mark.INSTALLED_NOT_MEASURED, result)
    result.culprit[rows] = -1 if left.ceiling is None else left.ceiling


def _copy(part: Meeting, rows: Ints, left: Left, parked: Left, result: Meeting) -> None:
    """Take over candidates that were solved with a drooping installed pump held shut."""
    result.flow[rows], result.header[rows] = part.flow, part.header
    result.mark[rows], result.culprit[rows] = part.mark, part.culprit
    result.installed[rows] = part.installed
    held = next(row for row in left.running if row not in parked.running)
    result.installed[rows, held] = np.where(np.isnan(part.header), np.nan, 0.0)


@dataclass(frozen=True, slots=True)
class _Reader:
    """Branch curves made ready for reading again and again.

    head, slope : all stations, one curve behind the other;  base : (c,) where the stations of a curve begin
    per_flow    : (c,) [stations per m3/s];  first, last : (c,) [stations] of the falling side
    tail        : (c,) as in `BranchCurves`
    """

    head: Floats
    slope: Floats
    base: Ints
    per_flow: Floats
    first: Floats
    last: Floats
    tail: Floats

    def take(self, rows: Ints) -> _Reader:
        """Some of the curves."""
        return _Reader(
            self.head,
            self.slope,
            base=self.base.take(rows),
            per_flow=self.per_flow.take(rows),
            first=self.first.take(rows),
            last=self.last.take(rows),
            tail=self.tail.take(rows),
        )

    def roughly(self, flow: Floats) -> Floats:
        """As `heads`, by straight lines from station to station."""
        past, cell, t = self._cells(flow)
        head = self.head.take(cell)
        return head + (self.head.take(cell + 1) - head) * t + self.tail * np.maximum(past, 0)

    def heads(self, flow: Floats) -> Floats:
        """Branch head [m], level before the falling side and straight on after it, where no root counts."""
        past, cell, t = self._cells(flow)
        return interpolate.value_in(self.head, self.slope, cell, t) + self.tail * np.maximum(past, 0)

    def heads_and_slopes(self, flow: Floats) -> tuple[Floats, Floats]:
        """As `heads`, with the slope [m per m3/s]."""
        past, cell, t = self._cells(flow)
        head, slope = interpolate.value_and_slope_in(self.head, self.slope, cell, t)
        slope = np.where(past == 0, np.minimum(slope, -1e-12), np.where(past > 0, self.tail, -1e-12))
        return head + self.tail * np.maximum(past, 0), slope * self.per_flow

    def _cells(self, flow: Floats) -> tuple[Floats, Ints, Floats]:
        """How far outside the falling side, the station left of it, and how far after that [stations]."""
        station = flow * self.per_flow
        inside = np.minimum(np.maximum(station, self.first), self.last)
        cell = np.minimum(inside.astype(np.int64), _LAST - 1)
        return station - inside, self.base + cell, inside - cell


def _reader(new: BranchCurves) -> _Reader:
    per_flow = _LAST / new.span
    return _Reader(
        head=new.head.ravel(),
        slope=new.slope.ravel(),
        base=np.arange(len(new)) * STATIONS,
        per_flow=per_flow,
        first=new.low * per_flow,
        last=new.end * per_flow,
        tail=new.tail,
    )


def _cells(reader: _Reader, left: Left) -> tuple[Ints, Floats, Floats]:
    """The cell in which each branch curve meets the flow left, or the one nearest to that.

    Returns (c,) the node at its lower end, and the branch head less that of the node there and at the next.
    """
    last = max(len(left.header) - 2, 0)
    steps = last.bit_length()
    padding = 2**steps - 1 - last
    header = np.pad(left.header[: last + 1], (0, padding), constant_values=np.inf)
    flow = np.pad(left.left[: last + 1], (0, padding))
    low = np.zeros(len(reader.base), np.int64)
    for step in reversed(range(steps)):  # with straight lines, which may end in the cell beside it
        probe = low + 2**step
        low = np.where(reader.roughly(flow.take(probe)) > header.take(probe), probe, low)
    above_low, above_high = _above(reader, left, low)
    while True:
        shift = ((above_high > 0) & (low < last)).astype(np.int64) - ((above_low <= 0) & (low > 0))
        rows = np.flatnonzero(shift)
        if not rows.size:
            return low, above_low, above_high
        low[rows] += shift[rows]
        above_low[rows], above_high[rows] = _above(reader.take(rows), left, low[rows])


def _above(reader: _Reader, left: Left, low: Ints) -> tuple[Floats, Floats]:
    """Branch head less that of the node, at both nodes of a cell."""
    high = np.minimum(low + 1, len(left.header) - 1)
    return (
        reader.heads(left.left.take(low)) - left.header.take(low),
        reader.heads(left.left.take(high)) - left.header.take(high),
    )


def _solve(
    new: _Reader, left: Left, installed: BranchCurves, rows: Ints, cell: Ints, share: Floats, result: Meeting
) -> None:
    """Newton's method on the network within one cell for each candidate, started by a straight line in it.

    The unknown flows are the rows of matrices: of the new pump, the users, each kind of installed pump.
    """
    kinds = _kinds(left, installed)
    nodes = [left.left, left.total, *(left.installed[:, places[0]] for places in kinds)]
    number = np.array([left.count, -1.0, *map(len, kinds)])
    pumps = [left.running[places[0]] for places in kinds]
    low = np.stack([column.take(cell) for column in nodes])
    high = np.stack([column.take(cell + 1) for column in nodes])
    flow = low + share * (high - low)
    opening = (high[2:] == 0) & (low[2:] > 0)  # towards shut the flow of a pump falls as a square root
    if opening.any():
        flow[2:] = np.where(opening, low[2:] * np.sqrt(1 - share), flow[2:])
    least, most = np.minimum(low, high), np.maximum(low, high)
    scale = np.array([1.0, 1.0, *installed.end[pumps]])[:, None]
    final, everyone = flow.copy(), new
    work: Ints | slice = slice(None)
    before = np.zeros(len(rows))
    for _ in range(60):
        free = most > least * (1 + 1e-12)
        stepped = _newton(new, left, installed, pumps, number, flow, free)
        stepped = np.minimum(np.maximum(stepped, least), most)
        moved = (np.abs(stepped - flow) / scale).max(axis=0)
        final[:, work] = stepped
        # each step squares the error: what is left after this one is about moved * (moved / before) ** 2
        rest = np.flatnonzero((moved > 1e-6) | (moved**3 > 1e-12 * before**2))
        if not rest.size:
            break
        flow, before = stepped, moved
        if rest.size < len(moved):
            work = np.arange(len(rows))[work][rest]
            flow, before, new = flow[:, rest], before[rest], new.take(rest)
            least, most = least[:, rest], most[:, rest]
    result.flow[rows], result.header[rows], result.mark[rows] = final[0], everyone.heads(final[0]), Mark.RUNS
    for places, supply in zip(kinds, final[2:], strict=True):
        for place in places:
            result.installed[rows, left.running[place]] = supply


def _kinds(left: Left, installed: BranchCurves) -> list[list[int]]:
    """The running installed pumps, those together that are the same pump at the same flows."""
    kinds: dict[bytes, list[int]] = {}
    for place, row in enumerate(left.running):
        figures = (left.installed[:, place], installed.head[row], installed.span[row])
        kinds.setdefault(b"".join(figure.tobytes() for figure in figures), []).append(place)
    return list(kinds.values())


def _newton(
    new: _Reader,
    left: Left,
    installed: BranchCurves,
    pumps: list[int],
    number: Floats,
    flow: Floats,
    free: Bools,
) -> Floats:
    """One step: every curve replaced by its tangent, then the one head at which the flows balance.

    flow : (2 + k, c) of the new pump, the users, the installed pumps;  free : where a flow is not fixed
    pumps : rows of the k kinds of installed pump;  number : how many of each there are, users -1
    Returns the next flows.
    """
    head, gain = np.empty_like(flow), np.empty_like(flow)  # gain: flow for each metre of header head
    head[0], slope = new.heads_and_slopes(flow[0])
    gain[0] = 1 / slope
    if free[1].any():
        head[1], slope = system.head_and_slope(left.curve, flow[1])
        gain[1] = free[1] / np.maximum(slope, 1e-12)
    else:
        head[1] = gain[1] = 0
    for place, row in enumerate(pumps, 2):
        head[place], slope = branch.head_and_slope(installed, np.full(1, row), flow[place])
        gain[place] = free[place] / np.minimum(slope, -1e-12)
    over = head - head[0]  # from here on heads are counted from that of the new pump, which may be flat
    at = (number @ (over * gain - flow) - left.taken) / (number @ gain)
    return np.asarray(flow + (at - over) * gain)
