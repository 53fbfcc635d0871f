"""What the header asks of the new pump, beside what is commonly taken for it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves
from screener.header.system import SystemCurve
from screener.hydraulics.losses import loss_head
from screener.model.arrays import Ints
from screener.model.case import Branch


@dataclass(frozen=True, slots=True)
class Requirement:
    """One duty, level and combination.

    header   : [m] header head at which the system takes the whole duty
    supplied : [m3/s] what the installed pumps give there; NaN where one of them is past its data
    flow     : [m3/s] delivered by each new pump: 0 where the others suffice, NaN where it is not known
    head     : [m] of the new pump itself: the header, and its own branch at that flow
    past     : row of the installed pump that is past its data, -1 where none is
    bypass   : [m3/s] that goes through the new pump beside `flow`, and is taken back
    """

    header: float
    supplied: float
    flow: float
    head: float
    past: int
    bypass: float = 0.0


def requirement(
    installed: BranchCurves,
    *,
    running: tuple[int, ...],
    curve: SystemCurve,
    asked: float,
    count: int,
    place: Branch,
    bypass: float = 0.0,
) -> Requirement:
    """The true duty of each of `count` new pumps: the rest of the flow, at the head that takes."""
    header = system.head(curve, asked)
    rows = np.array(running, np.int64)
    flows = branch.flow_at(installed, rows, np.full(len(rows), header))
    past = int(rows[np.isinf(flows)][0]) if np.isinf(flows).any() else -1
    supplied = float(flows.sum()) if np.isfinite(flows).all() else np.nan
    flow = max((asked - supplied) / count, 0.0)
    if past >= 0 and _at_least(installed, rows) >= asked:
        flow = 0.0
    lost = loss_head(place.suction, flow=np.array(flow + bypass))
    lost += loss_head(place.discharge, flow=np.array(flow))
    return Requirement(header, supplied, flow, header + float(lost) - place.suction_head, past, bypass)


def _at_least(installed: BranchCurves, rows: Ints) -> float:
    """Flow that the installed pumps give at the least where the header stands below the end of a curve."""
    lowest = float(installed.end_head[rows].max())
    return float(branch.flow_at(installed, rows, np.full(len(rows), lowest)).sum())
