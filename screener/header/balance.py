"""Operating points of a header where every row has pumps and a system curve of its own.

`meet` settles a whole catalog beside one set of installed pumps. Here the installed pumps differ from row to
row as well, as when tolerances are sampled. Newton's method on the whole network, started near the answer,
settles most rows at once; what it is not sure of (a curve that ends, a jump of a drooping pump, a flat
stretch) is left to a slow search over the header head, which cannot miss.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves
from screener.header.root import crossing
from screener.header.system import SystemCurve
from screener.model.arrays import STATIONS, Bools, Floats, Ints

_STEPS = 14
_SLACK = 1e-9


@dataclass(frozen=True, slots=True)
class _Network:
    """k running pumps, column by column, and the users of c rows.

    pumps  : k branch curves, of c rows or of one for all;  number : (k,) how many of each run
    new    : whether the first of them is the new pump
    static, wanted : (c,) [m] header head at no flow, and where the users have all that they ask
    demand : [m3/s] at which the users throttle; inf for wide open
    """

    pumps: tuple[BranchCurves, ...]
    number: Floats
    new: bool
    curve: SystemCurve
    friction: Floats
    wanted: Floats
    demand: float

    def figures(self, name: str, rows: Ints) -> Floats:
        """One figure of every pump in some rows, (k, r)."""
        columns = [np.asarray(getattr(pump, name)) for pump in self.pumps]
        found = [column[rows] if len(column) > 1 else np.repeat(column, len(rows)) for column in columns]
        return np.array(found).reshape(len(columns), len(rows))

    def users(self, head: Floats, rows: Ints) -> Floats:
        """Flow that the users take at a header head, (r,)."""
        friction = np.maximum(head - self.curve.static, 0.0) / self.friction[rows]
        most = self.demand if np.isfinite(self.demand) else self.curve.end
        return np.minimum(most, system.flow(self.curve, self.curve.static + friction))

    def supply(self, head: Floats, rows: Ints, held: Bools) -> Floats:
        """Flow that each pump gives at a header head, (k, r); 0 where it is held shut."""
        flows = [branch.flow_at(pump, _row(pump, rows), head) for pump in self.pumps]
        return np.asarray(np.where(held, 0.0, np.array(flows).reshape(held.shape)))


def balance(
    pumps: Sequence[BranchCurves],
    *,
    number: Sequence[int],
    curve: SystemCurve,
    friction: Floats,
    demand: float,
    start: Floats,
) -> tuple[Floats, Floats]:
    """Find the operating points of c rows in one state.

    pumps    : k columns of branch curves, the new pump first, of c rows or of one for all
    number   : how many of each run; where it is 0 the pump stands still
    friction : (c,) [-] what the friction of the system curve is multiplied with
    demand   : [m3/s] that the users hold where the header can give it; inf where all is wide open
    start    : (c, k) [m3/s] flows near the answer, 0 for a pump held shut; not finite where there are none

    Returns the header head (c,) [m] and the flow of one pump of each column (c, k) [m3/s], as `meet` has
    them: 0 where it is held shut; where a pump is past its data (+inf) or left of them (-inf) the row has no
    other figures, all NaN. A pump that droops is held shut where it has no flow on its falling side.
    Flows agree with those of `meet` to 1e-9 of the curve's end.
    """
    running = [column for column, count in enumerate(number) if count]
    result = np.full((len(number), len(friction)), np.nan)
    if not running:
        return np.full(len(friction), curve.static), result.T
    wanted = system.head(curve, min(demand, curve.end)) if np.isfinite(demand) else np.inf
    network = _Network(
        pumps=tuple(pumps[column] for column in running),
        number=np.array([number[column] for column in running], np.float64),
        new=0 in running,
        curve=curve,
        friction=friction,
        wanted=curve.static + (wanted - curve.static) * friction,
        demand=demand,
    )
    header, flow, sure = _newton(network, start[:, running].T)
    rest = np.flatnonzero(~sure)
    if rest.size:
        header[rest], flow[:, rest] = _searched(network, rest)
    result[running] = flow
    return header, result.T


def _newton(network: _Network, start: Floats) -> tuple[Floats, Floats, Bools]:
    """Newton's method on every row. start : (k, c).

    Returns the header head (c,), the flows (k, c), and where they are sure.
    """
    count = len(network.friction)
    header, result, sure = np.full(count, np.nan), np.full(start.shape, np.nan), np.zeros(count, bool)
    work = np.arange(count)
    low, end, top, bottom = (network.figures(name, work) for name in ("low", "end", "low_head", "end_head"))
    most = min(network.demand, network.curve.end)
    flow = np.where(np.isfinite(start), np.clip(start, 0, end), low + 0.7 * (end - low))
    runs = flow > 0
    users = np.minimum(network.number @ flow, most)
    held = users >= network.demand * (1 - _SLACK)
    users = np.where(held, most, users)
    for _ in range(_STEPS):
        at, stepped, taken = _step(network, work, flow, runs, users, held)
        inside, drawn = np.clip(stepped, np.where(runs, low, 0), end), np.clip(taken, 0, most)
        off = ((np.abs(stepped - inside) > 1e-12 * end) & runs).any(axis=0)
        off |= ~held & (np.abs(taken - drawn) > 1e-12 * taken)
        moved = (np.abs(inside - flow) / end).max(axis=0)
        opens, full = at < top, at >= network.wanted[work]
        same = ~off & (opens == runs).all(axis=0) & (full == held)
        done = same & (moved <= 1e-7)  # each step squares the error
        there = np.flatnonzero(done)
        header[work[there]], result[:, work[there]], sure[work[there]] = at[there], inside[:, there], True
        with np.errstate(invalid="ignore"):
            share = np.sqrt(np.clip((top - at) / (top - bottom), 0, 1))
        flow = np.where(runs & opens, inside, np.where(opens, low + share * (end - low), 0.0))
        users = np.where(full, most, np.where(held, 0.999 * most, drawn))
        rest = np.flatnonzero(~done & np.isfinite(at))
        if not rest.size:
            break
        work, flow, runs = work[rest], flow[:, rest], opens[:, rest]
        users, held = users[rest], full[rest]
        low, end, top, bottom = (values[:, rest] for values in (low, end, top, bottom))
    every = network.figures("closes", np.arange(count)).astype(bool)
    return header, result, sure & (every | (result > 0)).all(axis=0)


def _step(
    network: _Network, rows: Ints, flow: Floats, runs: Bools, users: Floats, held: Bools
) -> tuple[Floats, Floats, Floats]:
    """One step: every curve replaced by its tangent, then the one head at which the flows balance.

    Returns that head (r,), the next flows (k, r) and what the users take then (r,).
    """
    head, gain = np.empty((len(flow) + 1, len(rows))), np.empty((len(flow) + 1, len(rows)))
    for column, pump in enumerate(network.pumps):
        head[column], slope = branch.head_and_slope(pump, _row(pump, rows), flow[column])
        gain[column] = runs[column] / np.minimum(slope, -1e-12)
    friction, static = network.friction[rows], network.curve.static
    free = np.flatnonzero(~held)
    head[-1], gain[-1] = static, 0.0
    if free.size:
        asked, slope = system.head_and_slope(network.curve, users[free])
        head[-1, free] = static + (asked - static) * friction[free]
        gain[-1, free] = 1 / np.maximum(slope * friction[free], 1e-12)
    number, flows = np.append(network.number, -1.0), np.concatenate([flow, users[None]])
    weight = np.abs(gain * number[:, None])
    base = head[weight.argmax(axis=0), np.arange(len(rows))]  # heads are counted from the flattest curve's
    over = head - base
    with np.errstate(divide="ignore", invalid="ignore"):
        at = (number @ (over * gain - flows)) / (number @ gain)
        flows = flows + (at - over) * gain
    return base + at, flows[:-1], flows[-1]


def _row(pump: BranchCurves, rows: Ints) -> Ints:
    return rows if len(pump) > 1 else np.zeros(1, np.int64)


def _searched(network: _Network, rows: Ints) -> tuple[Floats, Floats]:
    """The same for some rows, by search over the header head: (r,) and (k, r).

    Where the head falls on the jump of a drooping pump, that pump is held shut and the row searched again.
    """
    header, flow = np.full(len(rows), np.nan), np.full((len(network.pumps), len(rows)), np.nan)
    held = np.zeros(flow.shape, bool)
    work = np.arange(len(rows))
    for _ in range(len(network.pumps) + 1):
        found = _once(network, rows[work], held[:, work])
        header[work], flow[:, work], jump = found
        again = np.flatnonzero(jump >= 0)
        if not again.size:
            break
        work, jump = work[again], jump[again]
        held[jump, work] = True
    return header, flow


def _once(network: _Network, rows: Ints, held: Bools) -> tuple[Floats, Floats, Ints]:
    """One search. Returns header head (r,), flows (k, r), and which pump jumps there, (r,), -1 for none."""
    count = len(rows)
    header, flow, jump = np.full(count, np.nan), np.full(held.shape, np.nan), np.full(count, -1)
    limits = _limits(network, rows, held, flow)
    work = np.flatnonzero(~np.isnan(limits[0]))
    if not work.size:
        return header, flow, jump
    rows, held = rows[work], held[:, work]
    low, high = limits[0][work], limits[1][work]

    def lacking(at: Floats, some: Ints) -> Floats:
        return np.asarray(
            network.users(at, rows[some]) - network.number @ network.supply(at, rows[some], held[:, some])
        )

    every = np.arange(len(rows))
    ends, noise = (
        (lacking(low, every), lacking(high, every)),
        1e-14 * network.figures("end", rows).max(axis=0),
    )
    low, high = crossing(lacking, low, high, ends=ends, noise=noise)
    first, last = network.supply(low, rows, held), network.supply(high, rows, held)
    above = network.number @ first - network.users(low, rows)
    below = network.number @ last - network.users(high, rows)
    gap = above - below
    share = np.clip(np.where(gap > 0, above / np.where(gap > 0, gap, 1.0), 0.0), 0, 1)
    flows = first + share * (last - first)
    start, closes = network.figures("low", rows), network.figures("closes", rows).astype(bool)
    jumps = (first > 0) & (last == 0) & (start > 0) & closes & (above > 0) & (below < 0)
    head = np.where((flows > 0).any(axis=0), low, np.maximum(low, network.curve.static))
    jumping = np.flatnonzero(jumps.any(axis=0))
    if jumping.size:  # of several at one head the first that the flow needed leaves no room for
        peaks = np.where(jumps, start * network.number[:, None], 0.0)[:, jumping]
        needed = below[jumping] + np.cumsum(peaks[::-1], axis=0)[::-1]
        fits = jumps[:, jumping] & (needed > 0)
        column = np.where(fits.any(axis=0), len(fits) - 1 - fits[::-1].argmax(axis=0), -1)
        if network.new:
            column = np.where(jumps[0, jumping], 0, column)
        jump[work[jumping]] = column
    header[work], flow[:, work] = head, flows
    return header, flow, jump


def _limits(network: _Network, rows: Ints, held: Bools, flow: Floats) -> tuple[Floats, Floats]:
    """Lowest and highest header head at which every pump and the system are known, (r,) each.

    NaN where the header stands outside them; what is missing there is marked in `flow`.
    """
    width, count = held.shape
    top, bottom = network.figures("low_head", rows), network.figures("end_head", rows)
    closes = network.figures("closes", rows).astype(bool) | held
    top, bottom = np.where(held, -np.inf, top), np.where(held, -np.inf, bottom)
    every = np.arange(count)
    static = np.full(count, network.curve.static)

    # The lowest head above which something was not measured.
    ceiling, owner = np.full(count, np.inf), np.full(count, -1)
    if np.isinf(network.demand) and np.isfinite(network.curve.end):
        reach = system.head(network.curve, network.curve.end) - network.curve.static
        ceiling = static + reach * network.friction[rows]
    for column in range(width):
        lower = ~closes[column] & (top[column] < ceiling)
        ceiling, owner = np.where(lower, top[column], ceiling), np.where(lower, column, owner)

    # The highest head below which the data of a pump end.
    others = bottom[int(network.new) :]
    floor = others.max(axis=0, initial=-np.inf)
    ends = np.concatenate([np.where(bottom[:1] > floor, bottom[:1], -np.inf), bottom[1:]]).argmax(axis=0)

    known = ~np.isnan(top).any(axis=0)
    missing = known & np.isfinite(ceiling)
    if missing.any():
        at = np.where(missing, ceiling, static)
        given = network.supply(at, rows, held)
        if network.new:
            beyond = network.figures("end", rows)[0] + (at - bottom[0]) / _tail(network, rows)
            given[0] = np.where((at < bottom[0]) & ~held[0], beyond, given[0])
        with np.errstate(invalid="ignore"):
            over = network.number @ given - network.users(at, rows)
        missing &= over > 0
    unknown = missing & (owner >= 0)
    flow[owner[unknown], every[unknown]] = -np.inf
    flow[np.isnan(top).argmax(axis=0)[~known], every[~known]] = -np.inf

    low = np.maximum(floor, bottom[0]) if network.new else floor
    low = np.where(np.isfinite(low), low, static)
    inside = np.minimum(low, ceiling)
    with np.errstate(invalid="ignore"):
        short = network.number @ network.supply(inside, rows, held) - network.users(inside, rows) < 0
    past = known & ~missing & ((low > ceiling) | short)
    flow[ends[past], every[past]] = np.inf
    high = np.where(np.isfinite(ceiling), ceiling, np.maximum(top.max(axis=0), static) + 1.0)
    settled = known & ~missing & ~past
    return np.where(settled, low, np.nan), np.where(settled, high, np.nan)


def _tail(network: _Network, rows: Ints) -> Floats:
    """Slope with which the new pump is looked at past its end, (r,) [m per m3/s]."""
    tail, span = (network.figures(name, rows)[0] for name in ("tail", "span"))
    return np.asarray(tail * (STATIONS - 1) / span)
