"""What drives a pump: the speeds that it may take, and the efficiencies between shaft and supply."""

from __future__ import annotations

from screener.case.parts import Node
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.model.case import Drive
from screener.model.curves import Pumps

SPEED_SLACK = 0.001
"""A speed may be this fraction outside the range of the catalog, as speeds are rounded figures."""


def drive(q: Quantities, node: Node, path: KeyPath) -> Drive:
    """Return the drive of a pump: at fixed speed where the case states no range."""
    low, high = node.get("speed_range", (100, 100))
    if "speed_range" in node:
        what = f"speed_range runs from {low:g} to {high:g} %"
        if low >= high:
            q.bad((*path, "speed_range"), what, "lowest first, then highest; leave it out at fixed speed")
        elif not low <= 100 <= high:
            what += ": the range leaves out the speed of the curve, 100 %"
            q.bad((*path, "speed_range"), what, "percent of the speed at load, such as [60, 100]")
    return Drive(
        lowest=q.percent(low),
        highest=q.percent(high),
        motor_efficiency=q.percent(node.get("motor_efficiency", 100)),
        drive_efficiency=q.percent(node.get("drive_efficiency", 100)),
    )


def check_range(q: Quantities, driven: Drive, pump: Pumps, path: KeyPath) -> None:
    """A speed range that reaches outside what the catalog allows is a problem.

    pump : the one that is driven, at its speed at load
    """
    speed, slowest, fastest = (
        float(column[0]) for column in (pump.speed, pump.lowest_speed, pump.highest_speed)
    )
    low, high = driven.lowest * speed, driven.highest * speed
    if driven.varies and (low < slowest * (1 - SPEED_SLACK) or high > fastest * (1 + SPEED_SLACK)):
        q.bad(
            (*path, "speed_range"),
            f"speed_range runs from {low:.0f} to {high:.0f} rpm",
            f"the catalog allows {slowest:.0f} to {fastest:.0f} rpm",
        )
