"""Which models can meet the duties at all, and from which diameter on: one look at each, before any state."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.hydraulics.similarity import end_at, head_at, trimmed
from screener.hydraulics.viscosity import Cover, factors, needed
from screener.model.arrays import Bools, Codes, Floats, Ints
from screener.model.case import NewPump
from screener.model.curves import PumpTable

TOO_LARGE = 1.25
"""At its smallest diameter a model gives this much more head than needed: it would burn the rest. Ours."""


class Reason(IntEnum):
    """Why a model cannot reach the duties."""

    REACHES = 0
    HEAD_TOO_LOW = 1
    CURVE_TOO_SHORT = 2
    TOO_LARGE = 3
    WRONG_SPEED = 4
    TOO_VISCOUS = 5


@dataclass(frozen=True, slots=True)
class Need:
    """What one duty asks of the new pump.

    flow : [m3/s];  head : [m];  viscosity : [m2/s] that curves are corrected for, 0 for none
    held : the pump may vary its speed in it
    """

    flow: float
    head: float
    viscosity: float = 0.0
    held: bool = False


@dataclass(frozen=True, slots=True)
class Reach:
    """One row for each of n models.

    reason   : `Reason`
    wanted   : [m] smallest diameter that meets every duty, NaN where none does or diameters are not stated
    at_most  : [m] largest diameter that may be fitted
    speed_ratio : [-] speed at load over the speed of the curves
    head     : [m] at the governing duty, largest diameter; NaN where it has none there
    needed   : [m] what the duty needs;  flow : [m3/s] at which
    end      : [m3/s] end of the curve at the largest diameter
    """

    reason: Codes
    wanted: Floats
    at_most: Floats
    speed_ratio: Floats
    head: Floats
    needed: Floats
    flow: Floats
    end: Floats


def reach(table: PumpTable, needs: Sequence[Need], place: NewPump) -> Reach:
    """Look at every model at its largest diameter, and find the smallest that meets all duties.

    Where the flow asked lies left of a curve's first measured point nothing is said against the model: the
    states will tell. Viscosity is looked at last, for those that would do with water.
    ValueError: the table was not made for the trim law of the case.
    """
    if place.trim_law and place.trim_law != table.trim_law:
        raise ValueError(f"the case trims by {place.trim_law!r}: read the catalog with that trim_law")
    count = len(table)
    model = np.arange(count)
    ratio, runs = speed_ratios(table, place)
    most = table.maximum.astype(np.float64)
    least = smallest_diameters(table)
    duties = [need for need in needs if np.isfinite(need.flow) and need.flow > 0]
    reason = np.where(runs, Reason.REACHES, Reason.WRONG_SPEED).astype(np.int8)
    head, needed_head, flow = np.full(count, np.nan), np.full(count, np.nan), np.full(count, np.nan)
    shortest = np.full(count, np.inf)
    end = end_at(table, model=model, diameter=most, speed_ratio=ratio)
    spare = np.full(count, np.inf if duties else 0.0)
    for need in duties:
        slow, fast = _speeds(table, place, ratio, held=need.held)
        at = np.full(count, need.flow)
        given = head_at(table, model=model, diameter=most, speed_ratio=fast, flow=at)
        ratio_given = np.nan_to_num(given / need.head, nan=-1.0)  # no head there is worst
        worse = ratio_given < shortest
        head, needed_head = np.where(worse, given, head), np.where(worse, need.head, needed_head)
        flow, shortest = np.where(worse, need.flow, flow), np.where(worse, ratio_given, shortest)
        code = np.where(
            need.flow > end * fast / ratio,
            Reason.CURVE_TOO_SHORT,
            np.where(given < need.head * (1 - 1e-9), Reason.HEAD_TOO_LOW, Reason.REACHES),
        )
        reason = np.where(reason == Reason.REACHES, code, reason)
        least_given = head_at(table, model=model, diameter=least, speed_ratio=slow, flow=at)
        spare = np.minimum(spare, np.nan_to_num(least_given) / need.head)
    reason = np.where((reason == Reason.REACHES) & (spare > TOO_LARGE), Reason.TOO_LARGE, reason)
    rows = np.flatnonzero(reason == Reason.REACHES)
    asked = []
    for need in duties:
        fast = _speeds(table, place, ratio, held=need.held)[1][rows]
        at_flow, at_head, given, code = _with_water(table, rows, most[rows], fast, need)
        first = (reason[rows] == Reason.REACHES) & (code != Reason.REACHES)
        reason[rows[first]] = code[first]
        head[rows[first]], needed_head[rows[first]] = given[first], need.head
        flow[rows[first]] = need.flow
        asked.append((at_flow, at_head, fast))
    wanted = np.full(count, np.nan)
    able = (reason[rows] == Reason.REACHES) & ~np.isnan(most[rows])
    rows = rows[able]
    wanted[rows] = _smallest(
        table, rows, least[rows], most[rows], [tuple(part[able] for part in parts) for parts in asked]
    )
    return Reach(reason.astype(np.int8), wanted, most, ratio, head, needed_head, flow, end)


def _speeds(table: PumpTable, place: NewPump, ratio: Floats, *, held: bool) -> tuple[Floats, Floats]:
    """Lowest and highest speed over that of the curves, (n,) each."""
    drive = place.drive
    if not held or not drive.varies:
        return ratio, ratio
    low = np.fmax(drive.lowest * ratio, table.lowest_speed / table.speed)
    high = np.fmin(drive.highest * ratio, table.highest_speed / table.speed)
    return np.minimum(low, ratio), np.maximum(high, ratio)


def _with_water(
    table: PumpTable, rows: Ints, diameter: Floats, speed_ratio: Floats, need: Need
) -> tuple[Floats, Floats, Floats, Codes]:
    """Flow [m3/s] and head [m] that some models must give with water, the head [m] that they give in the
    liquid, and whether that is enough; (r,) each.
    """
    code = np.full(len(rows), Reason.REACHES, np.int8)
    flow, head = np.full(len(rows), need.flow), np.full(len(rows), need.head)
    if not need.viscosity or not rows.size:
        return flow, head, head, code
    factor = factors(
        trimmed(table, model=rows, diameter=diameter, speed_ratio=speed_ratio), viscosity=need.viscosity
    )
    best = table.bep_flow[table.first[rows + 1] - 1] * speed_ratio
    flow, head = needed(flow=flow, head=head, factors=factor, bep_flow=best)
    end = end_at(table, model=rows, diameter=diameter, speed_ratio=speed_ratio)
    at = np.nan_to_num(flow)
    given = head_at(table, model=rows, diameter=diameter, speed_ratio=speed_ratio, flow=at)
    code[given < head] = Reason.HEAD_TOO_LOW
    code[flow > end] = Reason.CURVE_TOO_SHORT
    code[factor.cover != Cover.COVERED] = Reason.TOO_VISCOUS
    return flow, head, given * need.head / head, code


def smallest_diameters(table: PumpTable) -> Floats:
    """Smallest diameter that is looked at, (n,) [m]: as offered, else 75 % of the largest."""
    return np.where(np.isnan(table.minimum), 0.75 * table.maximum, table.minimum)


def speed_ratios(table: PumpTable, place: NewPump) -> tuple[Floats, Bools]:
    """Speed at load over curve speed, (n,), and whether the supply can give that speed, (n,) bool.

    A curve's speed belongs to the synchronous speed next above it, at most 10 % away.
    """
    count = len(table)
    if np.isnan(place.frequency):
        return np.ones(count), np.ones(count, bool)
    synchronous = 120 * place.frequency / np.arange(24, 0, -2)
    next_above = synchronous[
        np.minimum(np.searchsorted(synchronous, table.speed * (1 - 1e-9)), len(synchronous) - 1)
    ]
    slip = 1 - table.speed / next_above
    runs = (slip >= -1e-9) & (slip <= 0.10)
    ratio = np.ones(count) if np.isnan(place.slip) else next_above * (1 - place.slip) / table.speed
    return np.where(runs, ratio, 1.0), runs


def _smallest(
    table: PumpTable, model: Ints, least: Floats, most: Floats, duties: Sequence[tuple[Floats, ...]]
) -> Floats:
    """Bisect the diameter between `least` and `most`; all duties are met at `most`.

    duties : flow, head and speed ratio of each, (r,)
    """
    low, high = least.copy(), most.copy()
    for _ in range(30):
        middle = (low + high) / 2
        meets = np.ones(len(model), bool)
        for flow, head, ratio in duties:
            given = head_at(table, model=model, diameter=middle, speed_ratio=ratio, flow=flow)
            meets &= ~(given < head)
        low, high = np.where(meets, low, middle), np.where(meets, middle, high)
    return high
