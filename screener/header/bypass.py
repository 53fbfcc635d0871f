"""Minimum-flow bypasses: what must be taken back at each pump, upstream of its check valve.

Only what a pump delivers passes its check valve and discharge branch; all of its flow passes the suction
branch. A pump needs a bypass where the header stands above its branch curve at the least flow wanted. With
just enough of it open, the pump stays at that flow, and its delivery depends on the header head alone: so one
root in the header head settles all pumps at once. With branches that lose nothing that is the closed form
bypass = lowest safe header flow (`turndown.band`) - flow asked, for the pump that sets that lowest flow, up
to the whole of its minimum; then the pump delivers nothing, and the next pump sets the limit.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves, branch_curves
from screener.header.system import SystemCurve
from screener.hydraulics.losses import loss_head
from screener.model.arrays import Bools, Floats
from screener.model.case import Branch, Loss
from screener.model.curves import Curves

_PLACES, _ROUNDS = 33, 12


@dataclass(frozen=True, slots=True)
class Part:
    """Pumps of one kind in one place: curves of c candidates, or one row for all.

    number : how many of them run, each with a bypass of its own
    """

    curves: Curves
    branch: Branch
    number: int = 1


@dataclass(frozen=True, slots=True)
class Bypassed:
    """A header with just enough bypass at every pump.

    All (c, k) for one pump of each of k parts, but the header; NaN where a pump is past its data, or its
    least flow is.

    bypass    : [m3/s] taken back, 0 where none is needed
    delivered : [m3/s] to the header;  the pump itself passes `delivered` + `bypass`
    idle      : its bypass takes everything, the pump delivers nothing: better not to run it
    kept      : [m3/s] flow that the pump is kept at while its bypass is open: its minimum, or more where its
                curve has no falling side or no data there
    head      : [m] of the pump itself at that flow, which the bypass has to burn
    header    : (c,) [m] header head
    """

    bypass: Floats
    delivered: Floats
    idle: Bools
    kept: Floats
    head: Floats
    header: Floats


def bypass_flows(
    parts: Sequence[Part], *, minimum: Sequence[Floats], asked: float, curve: SystemCurve
) -> Bypassed:
    """Smallest bypass at each pump with which every running pump has its minimum flow.

    parts   : the pumps that run, in c candidates
    minimum : for each part the smallest allowed flow, (c,) or (1,) [m3/s]; 0 where not known
    asked   : [m3/s] that the users hold, inf where nothing is throttled;  curve : the system curve
    Returns c headers. Identical pumps share alike.
    """
    kinds = [_kind(part, least) for part, least in zip(parts, minimum, strict=True)]
    number = np.array([kind.number for kind in kinds])

    def delivered(header: Floats) -> Floats:
        return np.stack(np.broadcast_arrays(*(_delivered(kind, header) for kind in kinds)), axis=-1)

    def over(flows: Floats, header: Floats) -> Floats:
        return np.asarray((flows * number).sum(axis=-1) - np.minimum(asked, system.flow(curve, header)))

    bottom = _columns([kind.branches.end_head for kind in kinds]).max(axis=1)
    low, high = bottom, np.nextafter(_columns([kind.closed for kind in kinds]).max(axis=1), np.inf)
    shares, columns = np.linspace(0, 1, _PLACES)[:, None], np.arange(max(len(low), len(high)))
    for _ in range(_ROUNDS):
        places = low + (high - low) * shares
        places[-1] = high
        first = np.argmax(over(delivered(places), places) <= 0, axis=0)
        low, high = places[np.maximum(first - 1, 0), columns], places[first, columns]
    # Where a branch loses nothing its delivery jumps at one head: what is asked lies between both sides.
    flows, less = delivered(low), delivered(high)
    above, below = over(flows, low), over(less, high)
    with np.errstate(invalid="ignore", divide="ignore"):
        share = np.where(above > below, above / (above - below), 0.0)
    flows = flows + share[:, None] * (less - flows)
    known = over(delivered(bottom), bottom) >= 0
    kept, closed = _columns([kind.least for kind in kinds]), _columns([kind.closed for kind in kinds])
    known &= (kept <= _columns([kind.branches.end for kind in kinds])).all(axis=1)
    bypass = np.maximum(kept - flows, 0.0)
    bypass = np.where(bypass > 1e-12 * kept, bypass, 0.0)
    shown = np.where(known, 1.0, np.nan)
    suction = _columns(
        [loss_head(part.branch.suction, flow=k.least) for part, k in zip(parts, kinds, strict=True)]
    )
    lift = np.array([part.branch.suction_head for part in parts])
    return Bypassed(
        bypass=bypass * shown[:, None],
        delivered=flows * shown[:, None],
        idle=known[:, None] & (bypass > 0) & (bypass >= kept),
        kept=kept * shown[:, None],
        head=(closed + suction - lift) * shown[:, None],
        header=(low + share * (high - low)) * shown,
    )


@dataclass(frozen=True, slots=True)
class _Kind:
    """One part made ready.

    branches : without any bypass;  discharge : what its losses ask for, None where it loses nothing
    least    : (c,) [m3/s] flow that it is kept at
    opened   : (c,) [m] header head up to which it delivers that without a bypass
    closed   : (c,) [m] from which on, kept at that flow, it delivers nothing
    """

    branches: BranchCurves
    discharge: SystemCurve | None
    number: int
    least: Floats
    opened: Floats
    closed: Floats


def _kind(part: Part, minimum: Floats) -> _Kind:
    """Make one part ready. With a bypass open only the suction branch steepens a drooping curve."""
    place, curves = part.branch, part.curves
    branches = branch_curves(curves, [place])
    before_valve = branch_curves(curves, [replace(place, discharge=Loss())])
    least = np.maximum(minimum, np.maximum(branches.low, before_valve.low))
    rows = np.arange(len(branches))
    opened = branch.head_and_slope(branches, rows, np.minimum(least, branches.end))[0]
    nothing = np.empty((1, 0))
    return _Kind(
        branches=branches,
        discharge=SystemCurve(0.0, place.discharge, np.inf, nothing, nothing)
        if place.discharge.coefficient
        else None,
        number=part.number,
        least=least,
        opened=opened,
        closed=opened + loss_head(place.discharge, flow=least),
    )


def _delivered(kind: _Kind, header: Floats) -> Floats:
    """What one pump delivers with just enough bypass, (c,) [m3/s]; inf past its data."""
    rows = np.arange(len(kind.branches))
    alone = np.maximum(branch.flow_at(kind.branches, rows, np.minimum(header, kind.opened)), kind.least)
    if kind.discharge is None:
        rest = np.zeros_like(alone)
    else:
        rest = np.minimum(system.flow(kind.discharge, kind.closed - header), kind.least)
    return np.where(header <= kind.opened, alone, rest)


def _columns(values: Sequence[Floats]) -> Floats:
    return np.stack(np.broadcast_arrays(*values), axis=1)
