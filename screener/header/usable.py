"""The speeds between which a pump of variable speed is of use on a header."""

from __future__ import annotations

import numpy as np

from screener.header.left import Left
from screener.hydraulics import interpolate
from screener.hydraulics.losses import loss_head
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch
from screener.model.curves import Pumps

_HALVINGS = 50


def usable_speeds(pumps: Pumps, place: Branch, left: Left, *, minimum: Floats) -> tuple[Floats, Floats]:
    """Speeds at which c pumps open their check valve and reach their minimum flow, nothing throttled.

    pumps   : at the speed at load;  place : their branch
    left    : the flow left for them with the system open
    minimum : (c,) [m3/s] smallest flow at load; it goes with speed
    Returns (c,) each [-] over the speed at load; NaN where the others are past their data, where shutoff was
    not measured, or where no speed up to twice that at load is enough.
    """
    if not left.settled:
        nothing = np.full(len(pumps), np.nan)
        return nothing, nothing
    curves = pumps.curves
    shutoff = np.where(curves.start == 0, curves.head[:, 0], np.nan)
    opening = np.sqrt((left.header[0] - place.suction_head) / shutoff)
    station = np.minimum(minimum / curves.span, 1) * (STATIONS - 1)
    head = interpolate.value_once(curves.head, station, np.arange(len(pumps)))
    head = np.where((minimum >= curves.start) & (minimum <= curves.end), head, np.nan)

    def spare(ratio: Floats) -> Floats:
        """Head of the pump at its minimum flow less what its branch and the header take, (c,) [m]."""
        flow = ratio * minimum
        lost = loss_head(place.suction, flow=flow) + loss_head(place.discharge, flow=flow)
        header = np.interp(flow, left.left, left.header, right=np.nan)
        return np.asarray(head * ratio**2 + place.suction_head - lost - header)

    low, high = np.zeros(len(pumps)), np.full(len(pumps), 2.0)
    enough = spare(high) >= 0
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        above = spare(middle) >= 0
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    return opening, np.where(enough, high, np.nan)
