"""Worn pumps of which a head loss or a few points are known, read both ways that wear works.

A uniform loss lowers the whole curve. Leakage through worn rings lets part of the flow go round: the pump
then stands at a larger flow than it delivers. The first says more of shutoff, the second of large flows.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Installed, WearFit
from screener.model.curves import Curves, Pumps

MOST_LOST = 0.6
"""[-] of its head that a pump may have lost; more is an error of measurement. Our figure."""

MOST_LEAK = 0.5
"""[-] of the flow at the end of its curve that may go round. Our figure."""

SHUTOFF = 0.05
"""[-] of the rated flow: a point at or below it counts as measured at shutoff. Our figure."""

NARROW = 0.2
"""[-] of the curve's range of flow: points closer together hardly tell the two readings apart. Our figure."""

_LAST = STATIONS - 1


class PointsAbove(ValueError):
    """Points measured in the field lie above the curve as new; share : [-] by how much of its head."""

    def __init__(self, share: float) -> None:
        self.share = share
        super().__init__(f"the points lie {100 * share:.3g} % above the curve: wear cannot lift it")


def uniform(pumps: Pumps, *, loss: Floats) -> Pumps:
    """Lower the heads of c pumps by a share of them; the power stays, so that the efficiency falls alike.

    loss : (c,) [-], 0 to below 1
    """
    left = (1 - loss)[:, None]
    curves = replace(pumps.curves, head=pumps.curves.head * left, efficiency=pumps.curves.efficiency * left)
    return replace(pumps, curves=curves)


def leakage(pumps: Pumps, *, loss: Floats, flow: Floats) -> Floats:
    """Flow that must go round for c pumps to lose a share of their head at a flow.

    loss : (c,) [-];  flow : (c,) [m3/s] at which the loss was seen, NaN only where nothing was lost
    Returns (c,) [m3/s]; NaN where the curve ends before.
    """
    flow = np.where(loss == 0, 0.0, flow)
    target = (1 - loss) * _head(pumps.curves, flow)
    low, high = np.zeros_like(flow), pumps.curves.end - flow
    enough = _head(pumps.curves, pumps.curves.end) <= target
    for _ in range(60):
        middle = (low + high) / 2
        above = _head(pumps.curves, flow + middle) > target
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    return np.where(loss == 0, 0.0, np.where(enough & (flow <= pumps.curves.end), high, np.nan))


def leaks(pumps: Pumps, *, installed: Sequence[Installed]) -> Floats:
    """Flow that goes round in each of c installed pumps: as fitted, else by the head lost at rated flow.

    pumps : the same c as new
    Returns (c,) [m3/s]; NaN where the curve ends before.
    """
    fitted = np.array([pump.wear.leak if pump.wear and pump.head_loss else 0.0 for pump in installed])
    stated = np.array([0.0 if pump.wear else pump.head_loss for pump in installed])
    flow = np.array([pump.rated_flow for pump in installed])
    return fitted + leakage(pumps, loss=stated, flow=flow)


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


def at_speed(*, flow: Floats, head: Floats, speed: float, to: float) -> tuple[Floats, Floats]:
    """Bring points from one speed of a pump to another, along parabolas: Q ~ n, H ~ n^2.

    flow : (n,) [m3/s];  head : (n,) [m];  speed, to : [rpm], above 0
    Returns flow [m3/s] and head [m].  Source: affinity laws, e.g. US DOE-HDBK-1012/3-92, centrifugal pumps.

    >>> at_speed(flow=np.array([0.2]), head=np.array([30.0]), speed=1400.0, to=1470.0)
    (array([0.21]), array([33.075]))
    """
    return flow * (to / speed), head * (to / speed) ** 2


def fit(pump: Pumps, *, flow: Floats, head: Floats, rated_flow: float, reading: float) -> WearFit:
    """Fit both readings of wear to points measured in the field, each by least squares of the head.

    The share of head lost x makes H(Q)(1 - x), the leakage q makes H(Q + q). The standard uncertainty of
    each is the larger of what the scatter of the points says, with as many degrees of freedom as there are
    points but one, and what independent errors of reading do to the result; one point has no scatter.

    pump       : one, as new, at the speed of the points
    flow       : (n,) [m3/s] that it delivered, on its curve as measured
    head       : (n,) [m] its own total head, above 0
    rated_flow : [m3/s]; where it is NaN only a point at flow 0 counts as shutoff
    reading    : [-] standard error of each head as read, as a share of it
    PointsAbove: x is below 0 by more than twice its standard uncertainty and by more than `reading`; from
    there to 0 it is taken as 0. ValueError: a point lies outside the curve as measured.
    Source: JCGM 100:2008 (GUM), 5.1 and annex H.3, of propagation of uncertainty and of least squares [M].
    """
    curves = pump.curves
    start, end = float(curves.start[0]), float(curves.end[0])
    if not ((flow >= start) & (flow <= end)).all():
        raise ValueError("a point lies outside the curve as measured")
    slopes = interpolate.station_slopes(curves.head)
    per_flow = _LAST / float(curves.span[0])

    def curve(at: Floats) -> tuple[Floats, Floats]:
        """Head as new and its slope over flow."""
        station = np.minimum(at * per_flow, _LAST)
        value, slope = interpolate.value_and_slope(curves.head, slopes, np.zeros(1, np.int64), station)
        return value, slope * per_flow

    new = curve(flow)[0]

    def lowered(share: float) -> tuple[Floats, Floats]:
        return new * (1 - share) - head, -new

    def leaked(share: float) -> tuple[Floats, Floats]:
        value, slope = curve(flow + share * most)
        return value - head, slope * most

    error = reading * head
    loss = _least(lowered, -np.inf, MOST_LOST, 0.0)
    loss_error = _uncertainty(*lowered(loss), error)
    if loss < -max(reading, 2 * loss_error):
        raise PointsAbove(-loss)
    loss = max(loss, 0.0)
    most = min(end - float(flow.max()), MOST_LEAK * end)
    shares = (np.arange(_LAST) + 0.5) / _LAST  # a curve that droops has more than one nearest place
    distance = ((curve(flow + most * shares[:, None])[0] - head) ** 2).sum(axis=1)
    leak = _least(leaked, 0.0, 1.0, float(shares[distance.argmin()])) * most
    value, slope = curve(flow + leak)
    loss_residual, leak_residual = _size(lowered(loss)[0]), _size(value - head)

    Reading, Caution = WearFit.Reading, WearFit.Caution
    prefers = Reading.NEITHER
    alike = np.isclose(loss_residual, leak_residual, rtol=0, atol=1e-9 * float(head.max()))
    if float(np.ptp(flow)) > 1e-9 * end and not alike:
        prefers = Reading.LOSS if loss_residual < leak_residual else Reading.LEAK
    cautions = {
        Caution.FEW_POINTS: len(flow) < 3,
        Caution.SHUTOFF_INFERRED: flow.min() > SHUTOFF * np.nan_to_num(rated_flow),
        Caution.NARROW: np.ptp(flow) < NARROW * (end - start),
        Caution.ABOVE_NEW: (head > new * (1 + reading)).any(),
        Caution.CURVE_ENDS: leak == most and loss > 0,
    }
    return WearFit(
        points=len(flow),
        reading=reading,
        loss=loss,
        loss_error=loss_error,
        loss_residual=loss_residual,
        leak=leak,
        leak_error=_uncertainty(value - head, slope, error),
        leak_residual=leak_residual,
        prefers=prefers,
        cautions=Caution(sum(caution for caution, holds in cautions.items() if holds)),
    )


def _least(model: Callable[[float], tuple[Floats, Floats]], low: float, high: float, start: float) -> float:
    """The value between two bounds whose residuals are least; `model` gives residuals and their slopes."""
    from scipy.optimize import least_squares

    found = least_squares(
        lambda values: model(values[0])[0],
        [start],
        jac=lambda values: model(values[0])[1][:, None],
        bounds=([low], [high]),
        xtol=1e-12,
        ftol=1e-12,
        gtol=1e-12,
    )
    bounds = [bound for bound in (low, high) if np.isfinite(bound)]  # it only comes close to those
    return min([*bounds, float(found.x[0])], key=lambda value: _size(model(value)[0]))


def _uncertainty(residual: Floats, slope: Floats, error: Floats) -> float:
    """Standard uncertainty of a fitted value, by the residuals and at least by the errors of the points."""
    weight = float(slope @ slope)
    if weight == 0:
        return np.inf
    scatter = float(residual @ residual) / (len(residual) - 1) / weight if len(residual) > 1 else 0.0
    read = float(((slope * error) ** 2).sum()) / weight**2
    return float(np.sqrt(max(scatter, read)))


def _size(residual: Floats) -> float:
    return float(np.sqrt((residual**2).mean()))


def _head(curves: Curves, flow: Floats) -> Floats:
    return _read(curves.head, curves.span, flow[:, None])[:, 0]


def _read(values: Floats, span: Floats, flow: Floats) -> Floats:
    """Stations (c, k) that reach to `span` (c,), at flows (c, m)."""
    station = np.clip(flow / span[:, None] * _LAST, 0, _LAST)
    rows = np.arange(len(values))[:, None]
    return interpolate.value(values, interpolate.station_slopes(values), rows, station)
