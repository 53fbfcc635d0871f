"""What an installed pump has lost since its curve was measured: a share of its head, or points to fit."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from screener.case.parts import Node
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.hydraulics.wear import MOST_LOST, PointsAbove, at_speed, fit, leakage
from screener.model.arrays import Floats
from screener.model.case import Tolerance, WearFit
from screener.model.curves import Pumps

READING = Tolerance().reading
"""[-] Standard error that each field head is taken to have. Common practice, no source."""

ROUNDING = 1e-9
"""[-] by which a point at an end of the curve may seem to lie beyond it."""

CHECK = "check the speed, the impeller diameter, the units and the heights of the gauges"


class Condition(NamedTuple):
    """What a case says of one pump, before it is held against the curve; flow is empty without points.

    head_loss : [-];  flow : (n,) [m3/s];  head : (n,) [m];  speed : [rpm], NaN where not stated
    path      : where it stands
    """

    head_loss: float
    flow: Floats
    head: Floats
    speed: float
    path: KeyPath


def condition(q: Quantities, node: Node | None, path: KeyPath) -> Condition:
    """Return what the table `condition` of a pump says; what is bad counts as not stated."""
    nothing = Condition(0.0, np.empty(0), np.empty(0), math.nan, path)
    if node is None:
        return nothing
    if "field_points" not in node:
        if "head_loss" not in node:
            q.bad(path, "condition says nothing", "head_loss or field_points; leave it out for a pump as new")
        return nothing._replace(head_loss=q.percent(node.get("head_loss", 0)))
    if "head_loss" in node:
        what = "head_loss and field_points are both given"
        q.bad((*path, "head_loss"), what, "give one; the points give the loss too")
    points, at = node["field_points"], (*path, "field_points")
    flow = [q.value(value, "flow", (*at, "flow", i)) for i, value in enumerate(points["flow"])]
    head = [q.positive(value, "head", (*at, "head", i)) for i, value in enumerate(points["head"])]
    if len(flow) != len(head):
        q.bad((*at, "head"), f"head has {len(head)} values and flow has {len(flow)}", "one for each flow")
    below = [row for row, value in enumerate(flow) if value < 0]
    for row in below:
        q.bad((*at, "flow", row), f"flow is {points['flow'][row]}", "0 or more")
    if len(flow) != len(head) or below or np.isnan([*flow, *head]).any():
        return nothing
    return Condition(0.0, np.array(flow), np.array(head), float(points.get("speed", math.nan)), at)


def worn(
    q: Quantities, stated: Condition, node: Node, *, pump: Pumps, rated_flow: float
) -> tuple[float, WearFit | None]:
    """Return the share of its head that a pump has lost [-], and how that was found from field points.

    node       : the pump as the case writes it, for messages
    pump       : one, as new, at its speed at load
    rated_flow : [m3/s], NaN where it is not known
    """
    if not len(stated.flow):
        _check_loss(q, pump, stated.head_loss, rated_flow, (*stated.path, "head_loss"))
        return stated.head_loss, None
    to = float(pump.speed[0])
    speed = to if math.isnan(stated.speed) else stated.speed
    flow, head = at_speed(flow=stated.flow, head=stated.head, speed=speed, to=to)
    start, end = float(pump.curves.start[0]), float(pump.curves.end[0])
    outside = np.flatnonzero((flow > end * (1 + ROUNDING)) | (flow < start * (1 - ROUNDING)))
    for row in outside:
        side = "past the last" if flow[row] > end else "below the first"
        written = node["condition"]["field_points"]["flow"][row]
        what = f"flow is {written} at {speed:.4g} rpm, {side} point of the curve at {to:.4g} rpm"
        q.bad((*stated.path, "flow", int(row)), what, "points on the curve as measured, or a re-tested curve")
    if outside.size:
        return 0.0, None
    flow = np.clip(flow, start, end)
    try:
        found = fit(pump, flow=flow, head=head, rated_flow=rated_flow, reading=READING)
    except PointsAbove as above:
        what = f"the field points lie {100 * above.share:.3g} % above the curve: wear cannot lift it"
        q.bad((*stated.path, "head"), what, CHECK)
        return 0.0, None
    if found.loss >= MOST_LOST:
        what = f"the field points lie {100 * MOST_LOST:g} % or more below the curve: too much for wear"
        q.bad((*stated.path, "head"), what, CHECK)
    return found.loss, found


def _check_loss(q: Quantities, pump: Pumps, loss: float, rated_flow: float, path: KeyPath) -> None:
    """A head loss must be one that leakage could explain too, on the curve as measured."""
    if loss and math.isnan(rated_flow):
        q.bad(path, "the flow at which the head was lost is not known", "rated_flow")
    elif loss and np.isnan(leakage(pump, loss=np.array([loss]), flow=np.array([rated_flow]))).any():
        q.bad(path, "the curve ends before leakage could cost that much head", "re-tested points in `curve`")
