"""The speeds between which a pump of variable speed is of use on a header."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from screener.header.left import Left
from screener.hydraulics import interpolate
from screener.hydraulics.losses import loss_head
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch
from screener.model.curves import Pumps

_HALVINGS = 50


def usable_speeds(
    pumps: Pumps, place: Branch, left: Left, *, minimum: Floats, bypass: float = 0.0
) -> tuple[Floats, Floats]:
    """Speeds at which c pumps open their check valve and reach their minimum flow, nothing throttled.

    pumps   : at the speed at load;  place : their branch
    left    : the flow left for them with the system open
    minimum : (c,) [m3/s] smallest flow through a pump at load; it goes with speed
    bypass  : [m3/s] taken back at each pump ahead of its check valve
    Returns (c,) each [-] over the speed at load; NaN where the others are past their data, where a pump has
    none there, or where no speed up to twice that at load is enough. The second is never below the first.
    """
    if not left.settled:
        nothing = np.full(len(pumps), np.nan)
        return nothing, nothing
    curves, rows = pumps.curves, np.arange(len(pumps))

    def spare(ratio: Floats, through: Floats) -> Floats:
        """Head of the pump with a flow through it less what its branch and the header take, (c,) [m]."""
        own, given = through / ratio, np.maximum(through - bypass, 0.0)
        known = (own >= curves.start) & (own <= curves.end)
        station = np.where(known, own, 0.0) / curves.span * (STATIONS - 1)
        head = np.where(known, interpolate.value_once(curves.head, station, rows), -np.inf) * ratio**2
        lost = loss_head(place.suction, flow=through) + loss_head(place.discharge, flow=given)
        return np.asarray(head + place.suction_head - lost - np.interp(given, left.left, left.header))

    def least(through: Callable[[Floats], Floats]) -> Floats:
        """The lowest speed at which a flow through the pump leaves head to spare."""
        low, high = np.full(len(pumps), 1e-6), np.full(len(pumps), 2.0)
        enough = spare(high, through(high)) >= 0
        for _ in range(_HALVINGS):
            middle = (low + high) / 2
            above = spare(middle, through(middle)) >= 0
            low, high = np.where(above, low, middle), np.where(above, middle, high)
        return np.where(enough, high, np.nan)

    opening = least(lambda ratio: np.full(len(pumps), bypass))
    return opening, np.fmax(opening, least(lambda ratio: ratio * minimum))
