"""Which models can meet the duties at all, and from which diameter on: one look at each, before any state."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.header.requirement import Requirement
from screener.hydraulics.similarity import end_at, head_at
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


def reach(table: PumpTable, needs: Sequence[Requirement], place: NewPump) -> Reach:
    """Look at every model at its largest diameter, and find the smallest that meets all duties.

    Where the flow asked lies left of a curve's first measured point nothing is said against the model: the
    states will tell.
    """
    count = len(table)
    model = np.arange(count)
    ratio, runs = speed_ratios(table, place)
    most = table.maximum.astype(np.float64)
    least = smallest_diameters(table)
    duties = [(need.flow, need.head) for need in needs if np.isfinite(need.flow) and need.flow > 0]
    reason = np.where(runs, Reason.REACHES, Reason.WRONG_SPEED).astype(np.int8)
    head, needed, flow = np.full(count, np.nan), np.full(count, np.nan), np.full(count, np.nan)
    shortest = np.full(count, np.inf)
    end = end_at(table, model=model, diameter=most, speed_ratio=ratio)
    spare = np.full(count, np.inf if duties else 0.0)
    for duty_flow, duty_head in duties:
        given = head_at(table, model=model, diameter=most, speed_ratio=ratio, flow=np.full(count, duty_flow))
        ratio_given = given / duty_head
        worse = ~(ratio_given >= shortest)
        head, needed = np.where(worse, given, head), np.where(worse, duty_head, needed)
        flow, shortest = np.where(worse, duty_flow, flow), np.where(worse, ratio_given, shortest)
        code = np.where(
            duty_flow > end,
            Reason.CURVE_TOO_SHORT,
            np.where(given < duty_head * (1 - 1e-9), Reason.HEAD_TOO_LOW, Reason.REACHES),
        )
        reason = np.where(reason == Reason.REACHES, code, reason)
        least_given = head_at(
            table, model=model, diameter=least, speed_ratio=ratio, flow=np.full(count, duty_flow)
        )
        spare = np.fmin(spare, least_given / duty_head)
    reason = np.where((reason == Reason.REACHES) & (spare > TOO_LARGE), Reason.TOO_LARGE, reason)
    wanted = np.full(count, np.nan)
    rows = np.flatnonzero((reason == Reason.REACHES) & ~np.isnan(most))
    wanted[rows] = _smallest(table, rows, least[rows], most[rows], ratio[rows], duties)
    return Reach(reason.astype(np.int8), wanted, most, ratio, head, needed, flow, end)


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
    table: PumpTable,
    model: Ints,
    least: Floats,
    most: Floats,
    ratio: Floats,
    duties: Sequence[tuple[float, float]],
) -> Floats:
    """Bisect the diameter between `least` and `most`; all duties are met at `most`."""
    low, high = least.copy(), most.copy()
    for _ in range(30):
        middle = (low + high) / 2
        meets = np.ones(len(model), bool)
        for flow, head in duties:
            given = head_at(
                table, model=model, diameter=middle, speed_ratio=ratio, flow=np.full(len(model), flow)
            )
            meets &= ~(given < head)
        low, high = np.where(meets, low, middle), np.where(meets, middle, high)
    return high
