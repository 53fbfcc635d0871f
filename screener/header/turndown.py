"""Turndown: the header flows between which every running pump keeps within its own limits.

Throttled, the header head rises as demand falls, whatever the system; so the limit is the header head
at which the first pump comes to its minimum flow (or to the peak of a drooping curve).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.header import branch
from screener.header.branch import BranchCurves
from screener.model.arrays import Floats, Ints


@dataclass(frozen=True, slots=True)
class Band:
    """Permitted header flows of a combination, (c,) each.

    lowest, highest : [m3/s];  lowest_head, highest_head : [m] header heads there
    lowest_by, highest_by : which pump of the combination sets each limit
    """

    lowest: Floats
    lowest_head: Floats
    lowest_by: Ints
    highest: Floats
    highest_head: Floats
    highest_by: Ints


def band(
    parts: Sequence[tuple[BranchCurves, int]], *, minimum: Sequence[Floats], maximum: Sequence[Floats]
) -> Band:
    """Permitted band of combinations, in closed form.

    parts   : the pumps of the combination, each as its branch curves (c or 1 rows) and how many of it run
    minimum : for each part, smallest allowed flow (c,) or (1,) [m3/s]; 0 where not known
    maximum : for each part, largest allowed flow; NaN or beyond the data counts as the end of the data
    """
    lowest_heads = np.stack(
        np.broadcast_arrays(
            *(_head(b, np.maximum(m, b.low)) for (b, _), m in zip(parts, minimum, strict=True))
        )
    )
    highest_heads = np.stack(
        np.broadcast_arrays(*(_head(b, np.fmin(m, b.end)) for (b, _), m in zip(parts, maximum, strict=True)))
    )
    low, high = lowest_heads.min(axis=0), highest_heads.max(axis=0)
    return Band(
        lowest=_supply(parts, low),
        lowest_head=low,
        lowest_by=lowest_heads.argmin(axis=0),
        highest=_supply(parts, high),
        highest_head=high,
        highest_by=highest_heads.argmax(axis=0),
    )


def _head(branches: BranchCurves, flow: Floats) -> Floats:
    return branch.head_and_slope(branches, np.arange(len(branches)), np.minimum(flow, branches.end))[0]


def _supply(parts: Sequence[tuple[BranchCurves, int]], head: Floats) -> Floats:
    return np.asarray(sum(number * _flow(b, head) for b, number in parts))


def _flow(branches: BranchCurves, head: Floats) -> Floats:
    """As `branch.flow_at`; a head a hair below the last point, or above the peak, counts as that point."""
    rows = np.arange(len(branches))
    nearest = np.clip(head, branches.end_head, np.nextafter(branches.low_head, -np.inf))
    flow = branch.flow_at(branches, rows, nearest)
    flow = np.where(head < branches.end_head - 1e-12 * np.abs(branches.end_head), np.inf, flow)
    return np.where(head > branches.low_head * (1 + 1e-12), branch.flow_at(branches, rows, head), flow)
