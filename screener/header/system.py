"""The system curve: the header head that a total flow asks for."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY
from screener.hydraulics.losses import loss_head, loss_slope
from screener.model.arrays import Floats, Ints, frozen
from screener.model.case import Level, Liquid, Loss, System

_STATIONS = 257


@dataclass(frozen=True, slots=True)
class SystemCurve:
    """Static head and friction of one level and liquid.

    static : [m]
    terms  : friction as terms, used where `stations` is empty
    end    : [m3/s] last flow with data, inf for terms
    stations, slopes : (1, k) friction [m] on even stations from 0 to `end`, or empty
    """

    static: float
    terms: Loss
    end: float
    stations: Floats
    slopes: Floats


def system_curve(system: System, level: Level, liquid: Liquid) -> SystemCurve:
    """The system curve at one level, pressures turned into metres of the liquid pumped."""
    pressure = system.destination_pressure - level.vessel_pressure
    static = level.static_head + pressure / (liquid.density * GRAVITY)
    if not system.table_flow.size:
        return SystemCurve(
            static, system.friction, np.inf, frozen(np.empty((1, 0))), frozen(np.empty((1, 0)))
        )
    x, y = system.table_flow[None], system.table_head[None]
    stations = interpolate.through_points(x=x, y=y, at=np.linspace(0, x[0, -1], _STATIONS)[None])
    return SystemCurve(
        static, Loss(), float(x[0, -1]), frozen(stations), frozen(interpolate.station_slopes(stations))
    )


def head_and_slope(curve: SystemCurve, flow: Floats) -> tuple[Floats, Floats]:
    """Header head [m] at a total flow and its slope [m per m3/s]; `flow` of any shape, 0 to `curve.end`."""
    if not curve.stations.size:
        return curve.static + loss_head(curve.terms, flow=flow), loss_slope(curve.terms, flow=flow)
    per_flow = (curve.stations.shape[1] - 1) / curve.end
    rows: Ints = np.zeros(1, np.int64)
    head, slope = interpolate.value_and_slope(curve.stations, curve.slopes, rows, flow * per_flow)
    return curve.static + head, slope * per_flow


def head(curve: SystemCurve, flow: float) -> float:
    """Header head [m] at one total flow."""
    return float(head_and_slope(curve, np.array([flow]))[0][0])


def flow(curve: SystemCurve, at_head: Floats) -> Floats:
    """Total flow at which the system curve reaches a head: 0 at or below static, inf past its last point.

    at_head : (g,) [m].  Returns (g,) [m3/s].
    """
    friction = np.maximum(at_head - curve.static, 0.0)
    return _through_table(curve, friction) if curve.stations.size else _through_terms(curve.terms, friction)


def _through_terms(terms: Loss, friction: Floats) -> Floats:
    """Newton's method, from the least flow that any one term alone would allow; the sum is convex."""
    with np.errstate(over="ignore"):  # a term too small to matter allows any flow
        alone = [
            (friction / coefficient) ** (1 / exponent)
            for coefficient, exponent in zip(terms.coefficient, terms.exponent, strict=True)
        ]
    reached = np.min(alone, axis=0)
    for _ in range(50 if len(alone) > 1 else 0):
        over = loss_head(terms, flow=reached) - friction
        step = over / np.maximum(loss_slope(terms, flow=reached), 1e-300)
        reached = np.maximum(reached - step, 0.0)
        if (np.abs(step) <= 1e-15 * reached).all():
            break
    return np.asarray(reached)


def _through_table(curve: SystemCurve, friction: Floats) -> Floats:
    """Bisection over the table; inf past its last point."""
    low, high = np.zeros_like(friction), np.full_like(friction, curve.end)
    for _ in range(60):
        middle = (low + high) / 2
        below = head_and_slope(curve, middle)[0] < curve.static + friction
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    reached = np.where(friction <= 0, 0.0, (low + high) / 2)
    return np.where(curve.static + friction > head(curve, curve.end), np.inf, reached)
