"""Worn pumps of which only a head loss is known, read both ways that wear works.

A uniform loss lowers the whole curve. Leakage through worn rings lets part of the flow go round: the pump
then stands at a larger flow than it delivers. The first says more of shutoff, the second of large flows.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.model.arrays import STATIONS, Floats
from screener.model.curves import Curves, Pumps

_LAST = STATIONS - 1


def uniform(pumps: Pumps, *, loss: Floats) -> Pumps:
    """Lower the heads of c pumps by a share of them; the power stays, so that the efficiency falls alike.

    loss : (c,) [-], 0 to below 1
    """
    left = (1 - loss)[:, None]
    curves = replace(pumps.curves, head=pumps.curves.head * left, efficiency=pumps.curves.efficiency * left)
    return replace(pumps, curves=curves)


def leakage(pumps: Pumps, *, loss: Floats, flow: Floats) -> Floats:
    """Flow that must go round for c pumps to lose a share of their head at a flow.

    loss : (c,) [-];  flow : (c,) [m3/s] at which the loss was seen
    Returns (c,) [m3/s]; NaN where the curve ends before.
    """
    target = (1 - loss) * _head(pumps.curves, flow)
    low, high = np.zeros_like(flow), pumps.curves.end - flow
    enough = _head(pumps.curves, pumps.curves.end) <= target
    for _ in range(60):
        middle = (low + high) / 2
        above = _head(pumps.curves, flow + middle) > target
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    return np.where(loss == 0, 0.0, np.where(enough & (flow <= pumps.curves.end), high, np.nan))


def leaking(pumps: Pumps, *, leak: Floats) -> Pumps:
    """Let a flow go round in each of c pumps: H(Q + q), P(Q + q), NPSHr(Q + q), and data to the end less q.

    leak : (c,) [m3/s], below the end of each curve
    """
    curves = pumps.curves
    span, npsh_span = curves.span - leak, curves.npsh_span - leak
    delivered = np.linspace(0, 1, STATIONS) * span[:, None]
    through = delivered + leak[:, None]
    head = _read(curves.head, curves.span, through)
    efficiency = _read(curves.efficiency, curves.span, through)
    power = _read(curves.power, curves.span, through)
    with np.errstate(divide="ignore", invalid="ignore"):
        worked_out = REFERENCE_DENSITY * GRAVITY * through * head / efficiency
        power = np.where(np.isnan(power) & (efficiency > 0), worked_out, power)
        useful = REFERENCE_DENSITY * GRAVITY * delivered * head / power
    npsh = np.linspace(0, 1, STATIONS) * npsh_span[:, None] + leak[:, None]
    worn = Curves(
        start=np.maximum(curves.start - leak, 0.0),
        end=curves.end - leak,
        span=span,
        head=head,
        efficiency=useful,
        power=power,
        npsh_required=_read(curves.npsh_required, curves.npsh_span, npsh),
        npsh_span=npsh_span,
    )
    return replace(pumps, curves=worn, bep_flow=pumps.bep_flow - leak)


def _head(curves: Curves, flow: Floats) -> Floats:
    return _read(curves.head, curves.span, flow[:, None])[:, 0]


def _read(values: Floats, span: Floats, flow: Floats) -> Floats:
    """Stations (c, k) that reach to `span` (c,), at flows (c, m)."""
    station = np.clip(flow / span[:, None] * _LAST, 0, _LAST)
    rows = np.arange(len(values))[:, None]
    return interpolate.value(values, interpolate.station_slopes(values), rows, station)
