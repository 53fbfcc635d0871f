"""Reading curves: a cubic through the points with three-point slopes, exact on quadratics.

A slope is limited, to three times the smaller neighbouring secant, only where the curve would
otherwise stop being monotone between monotone points (the bound is that of F. N. Fritsch and
R. E. Carlson, SIAM J. Numer. Anal. 17(2), 1980, section 3). The usual monotone cubic bends every
quadratic; this one does not.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from screener.model.arrays import Bools, Floats, Ints


def slopes(*, x: Floats, y: Floats) -> Floats:
    """Slopes of the cubic at its points.

    x, y : (c, n) rising x, n >= 2, without NaN.  Returns (c, n) [unit of y per unit of x].

    >>> x = np.array([[0.0, 1.0, 3.0, 4.0]])
    >>> slopes(x=x, y=9.0 - x**2)
    array([[ 0., -2., -6., -8.]])
    """
    step = np.diff(x, axis=1)
    secant = np.diff(y, axis=1) / step
    if x.shape[1] == 2:
        return np.repeat(secant, 2, axis=1)
    before = np.concatenate([secant[:, :1], secant], axis=1)
    after = np.concatenate([secant, secant[:, -1:]], axis=1)
    step_before = np.concatenate([step[:, :1], step], axis=1)
    step_after = np.concatenate([step, step[:, -1:]], axis=1)
    slope = (before * step_after + after * step_before) / (step_before + step_after)
    slope[:, 0] = secant[:, 0] + (secant[:, 0] - secant[:, 1]) * step[:, 0] / (step[:, 0] + step[:, 1])
    slope[:, -1] = secant[:, -1] + (secant[:, -1] - secant[:, -2]) * step[:, -1] / (step[:, -1] + step[:, -2])
    return _limited(slope, before, after)


def blocks(count: int) -> Iterator[slice]:
    """Slices of few enough rows that whole curves of all of them stay in the processor's cache."""
    return (slice(start, start + 1024) for start in range(0, count, 1024))


def station_slopes(values: Floats) -> Floats:
    """Slopes of evenly spaced stations, per station; a NaN neighbour counts as the end of the data.

    values : (c, k).  Returns (c, k), NaN where the value itself or both neighbours are NaN.
    """
    if values.shape[1] == 2:
        return np.repeat(np.diff(values, axis=1), 2, axis=1)
    slope = np.empty_like(values)
    for rows in blocks(len(values)):
        _fill_slopes(values[rows], slope[rows])
    return slope


def _fill_slopes(values: Floats, slope: Floats) -> None:
    secant = values[:, 1:] - values[:, :-1]
    size = np.abs(secant)
    before, after = secant[:, :-1], secant[:, 1:]
    twice = before + after
    np.multiply(twice, 0.5, out=slope[:, 1:-1])
    steep = np.flatnonzero(np.abs(twice) > 6 * np.minimum(size[:, :-1], size[:, 1:]))
    if steep.size:
        rows, columns = np.divmod(steep, twice.shape[1])
        unlimited = slope[rows, columns + 1]
        slope[rows, columns + 1] = _limited(unlimited, before[rows, columns], after[rows, columns])
    for end, beside in ((0, 1), (-1, -2)):
        outer = secant[:, end]
        slope[:, end] = _limited(1.5 * outer - 0.5 * secant[:, beside], outer, outer)
    gaps = np.flatnonzero(np.isnan(slope.sum(axis=1)))
    gaps = gaps[~np.isnan(values[gaps]).all(axis=1)]
    if gaps.size:
        slope[gaps] = _slopes_with_gaps(values[gaps])


def _slopes_with_gaps(values: Floats) -> Floats:
    missing = np.full((len(values), 1), np.nan)
    secant = np.diff(values, axis=1)
    before = np.concatenate([missing, secant], axis=1)
    after = np.concatenate([secant, missing], axis=1)
    next_after = np.concatenate([secant[:, 1:], missing, missing], axis=1)
    next_before = np.concatenate([missing, missing, secant[:, :-1]], axis=1)
    next_after = np.where(np.isnan(next_after), after, next_after)
    next_before = np.where(np.isnan(next_before), before, next_before)
    first, last = np.isnan(before), np.isnan(after)
    slope = np.where(first, 1.5 * after - 0.5 * next_after, (before + after) / 2)
    slope = np.where(last, 1.5 * before - 0.5 * next_before, slope)
    return _limited(slope, np.where(first, after, before), np.where(last, before, after))


def _limited(slope: Floats, before: Floats, after: Floats) -> Floats:
    bound = 3 * np.minimum(np.abs(before), np.abs(after))
    same_way = before * after >= 0
    low = np.where(after + before < 0, -bound, 0.0)
    high = np.where(after + before > 0, bound, 0.0)
    return np.where(same_way, np.minimum(np.maximum(slope, low), high), slope)


def through_points(*, x: Floats, y: Floats, at: Floats) -> Floats:
    """The cubic through points, at other places; outside the points it continues its first or last piece.

    x, y : (c, n) rising x, n >= 2, without NaN;  at : (c, k).  Returns (c, k).

    >>> x = np.array([[0.0, 1.0, 3.0]])
    >>> through_points(x=x, y=9.0 - x**2, at=np.array([[0.5, 2.0]]))
    array([[8.75, 5.  ]])
    """
    slope = slopes(x=x, y=y)
    cell = np.zeros(at.shape, np.int64)
    for column in range(1, x.shape[1] - 1):
        cell += at >= x[:, column, None]
    rows = np.arange(len(x))[:, None]
    width = x[rows, cell + 1] - x[rows, cell]
    t = (at - x[rows, cell]) / width
    return _cubic(
        y[rows, cell], y[rows, cell + 1], slope[rows, cell] * width, slope[rows, cell + 1] * width, t
    )


def _cubic(y0: Floats, y1: Floats, m0: Floats, m1: Floats, t: Floats) -> Floats:
    rise = y1 - y0
    return (((m0 + m1 - 2 * rise) * t + (3 * rise - 2 * m0 - m1)) * t + m0) * t + y0


def value(values: Floats, slope: Floats, rows: Ints, position: Floats) -> Floats:
    """Read curves at positions counted in stations.

    values, slope : (c, k);  rows : int, broadcast with position;  position : 0 to k - 1.
    Returns the shape of `position`.
    """
    return value_in(values.ravel(), slope.ravel(), *_cells(values.shape[1], rows, position))


def value_and_slope(values: Floats, slope: Floats, rows: Ints, position: Floats) -> tuple[Floats, Floats]:
    """As `value`, with the derivative per station."""
    return value_and_slope_in(values.ravel(), slope.ravel(), *_cells(values.shape[1], rows, position))


def _cells(stations: int, rows: Ints, position: Floats) -> tuple[Ints, Floats]:
    cell = np.minimum(position.astype(np.int64), stations - 2)
    return rows * stations + cell, position - cell


def value_once(values: Floats, position: Floats, rows: Ints) -> Floats:
    """As `value` with the slopes of `station_slopes`, which are worked out just where they are needed.

    values : (n, k), k >= 4;  position, rows : (c,)
    """
    first, last = rows * values.shape[1], values.shape[1] - 1
    cell = np.minimum(position.astype(np.int64), last - 1)
    inner = np.minimum(np.maximum(cell, 1), last - 2)
    y = [values.ravel().take(first + (inner + offset)) for offset in (-1, 0, 1, 2)]
    before, within, after = y[1] - y[0], y[2] - y[1], y[3] - y[2]
    m0 = _limited((before + within) / 2, before, within)
    m1 = _limited((within + after) / 2, within, after)
    result = _cubic(y[1], y[2], m0, m1, position - inner)
    ends = np.flatnonzero((inner != cell) | np.isnan(result))  # there the slopes need more neighbours
    if ends.size:
        around = cell[ends, None] + np.arange(-2, 4)
        known = (around >= 0) & (around <= last)
        near = np.where(known, values[rows[ends, None], np.where(known, around, 0)], np.nan)
        at = np.arange(len(ends)) * 6 + 2
        result[ends] = value_in(near.ravel(), station_slopes(near).ravel(), at, position[ends] - cell[ends])
    return result


def value_in(values: Floats, slope: Floats, cell: Ints, t: Floats) -> Floats:
    """As `value`, in curves one behind the other.

    cell : int, station left of each place;  t : 0 to 1, how far after it
    """
    y0, c1, c2, c3 = polynomial(values, slope, cell)
    return ((c3 * t + c2) * t + c1) * t + y0


def value_and_slope_in(values: Floats, slope: Floats, cell: Ints, t: Floats) -> tuple[Floats, Floats]:
    """As `value_in`, with the derivative per station."""
    y0, c1, c2, c3 = polynomial(values, slope, cell)
    return ((c3 * t + c2) * t + c1) * t + y0, (3 * c3 * t + 2 * c2) * t + c1


def polynomial(values: Floats, slope: Floats, cell: Ints) -> tuple[Floats, Floats, Floats, Floats]:
    """Coefficients of t^0 to t^3 between two stations; arguments as for `value_in`."""
    after = cell + 1
    y0, c1 = values.take(cell), slope.take(cell)
    rise = values.take(after) - y0
    c3 = c1 + slope.take(after) - 2 * rise
    return y0, c1, rise - c1 - c3, c3


def vertex(*, x: Floats, y: Floats, best: Ints) -> tuple[Floats, Bools]:
    """Place of the maximum, by the parabola through the three points around the highest one.

    x, y : (c, n);  best : (c,) int, column of the highest point.
    Returns (c,) place and (c,) whether it lies inside; at the first or last point it is not known.

    >>> x = np.array([[1.0, 2.0, 4.0]])
    >>> vertex(x=x, y=5 - (x - 2.4) ** 2, best=np.array([1]))
    (array([2.4]), array([ True]))
    """
    inside = (best > 0) & (best < x.shape[1] - 1)
    middle = np.clip(best, 1, x.shape[1] - 2)
    rows = np.arange(len(x))
    x0, x1, x2 = (x[rows, middle + offset] for offset in (-1, 0, 1))
    y0, y1, y2 = (y[rows, middle + offset] for offset in (-1, 0, 1))
    left, right = (y1 - y0) / (x1 - x0), (y2 - y1) / (x2 - x1)
    bend = np.where(left > right, left - right, 1.0)
    place = (x0 + x1) / 2 + left * (x2 - x0) / (2 * bend)
    return np.clip(np.where(left > right, place, x1), x0, x2), inside
