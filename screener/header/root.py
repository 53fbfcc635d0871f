"""Roots of many functions at once, each row of one vectorised function."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from screener.model.arrays import Floats, Ints

_TIMES = 120
_NEAR = 1e-14


def crossing(
    rising: Callable[[Floats, Ints], Floats],
    low: Floats,
    high: Floats,
    *,
    ends: tuple[Floats, Floats],
    noise: Floats,
) -> tuple[Floats, Floats]:
    """Where a rising function (of place and row) crosses zero, from below and from above, (c,) each.

    ends  : (c,) values of the function at `low` and at `high`
    noise : (c,) values no larger than this are zero. Rows without zero between `low` and `high` come back as
    they were; where the function jumps over zero the two places stay apart by the last bits.

    Source: T. R. Chandrupatla, Advances in Engineering Software 28(3), 1997: inverse quadratic interpolation
    where it can be trusted, else bisection.
    """
    below, above = np.array(low), np.array(high)
    at_low, at_high = ends
    rows = np.flatnonzero((at_low < 0) & (at_high > 0))
    x1, x2, f1, f2 = below[rows], above[rows], at_low[rows], at_high[rows]
    share = np.full(len(rows), 0.5)
    for _ in range(_TIMES):
        if not rows.size:
            break
        place = x1 + share * (x2 - x1)
        value = rising(place, rows)
        same = (value > 0) == (f1 > 0)
        x3, f3 = np.where(same, x1, x2), np.where(same, f1, f2)
        x2, f2 = np.where(same, x2, x1), np.where(same, f2, f1)
        x1, f1 = place, value
        up = value > 0
        below[rows], above[rows] = np.where(up, x2, x1), np.where(up, x1, x2)
        there = np.abs(value) <= noise[rows]
        below[rows[there]] = above[rows[there]] = place[there]
        with np.errstate(invalid="ignore", divide="ignore"):
            xi, phi = (x1 - x2) / (x3 - x2), (f1 - f2) / (f3 - f2)
            trusted = (phi**2 < xi) & ((1 - phi) ** 2 < 1 - xi)
            guess = f1 / (f2 - f1) * f3 / (f2 - f3) + (x3 - x1) / (x2 - x1) * f1 / (f3 - f1) * f2 / (f3 - f2)
        near = _NEAR * np.maximum(np.abs(x2), 1.0)
        least = near / np.maximum(np.abs(x2 - x1), near)
        share = np.clip(np.where(trusted, guess, 0.5), np.minimum(least, 0.5), np.maximum(1 - least, 0.5))
        work = np.flatnonzero(~there & (np.abs(x2 - x1) > 2 * near))
        rows, share = rows[work], share[work]
        x1, x2, f1, f2 = x1[work], x2[work], f1[work], f2[work]
    return below, above
