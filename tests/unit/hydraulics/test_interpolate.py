"""Reading curves: exact on quadratics, monotone between monotone points, silent where nothing is known."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.hydraulics.interpolate import (
    slopes,
    station_slopes,
    through_points,
    value,
    value_and_slope,
    vertex,
)

NAN = np.nan
UNEVEN = np.array([0.0, 0.03, 0.05, 0.12, 0.13, 0.21, 0.3])


def falling(x: np.ndarray) -> np.ndarray:
    """A pump head as a parabola with its top at zero flow."""
    return 50 - 300 * x**2


def arched(x: np.ndarray) -> np.ndarray:
    """An efficiency as a parabola that peaks inside the points."""
    return 0.8 - 20 * (x - 0.12) ** 2


def stations(values: np.ndarray, position: np.ndarray) -> np.ndarray:
    """Read one row of stations."""
    rows = np.zeros(len(position), np.int64)
    return value(values[None], station_slopes(values[None]), rows, position)


@pytest.mark.parametrize("curve", [falling, arched])
@pytest.mark.parametrize("points", [UNEVEN, np.linspace(0, 0.3, 9), UNEVEN[:3]])
def test_quadratics_are_read_exactly_inside_and_at_both_ends(curve, points) -> None:
    at = np.linspace(0, points[-1], 301)
    found = through_points(x=points[None], y=curve(points)[None], at=at[None])[0]
    np.testing.assert_allclose(found, curve(at), rtol=1e-12, atol=1e-12)


def test_slopes_of_a_quadratic_are_its_derivative() -> None:
    found = slopes(x=UNEVEN[None], y=falling(UNEVEN)[None])[0]
    np.testing.assert_allclose(found, -600 * UNEVEN, rtol=1e-12, atol=1e-12)


def resampled_and_read_back(curve, at: np.ndarray) -> np.ndarray:
    """Read a curve of few points through 65 stations."""
    grid = np.linspace(0, 0.3, 65)
    resampled = through_points(x=UNEVEN[None], y=curve(UNEVEN)[None], at=grid[None])[0]
    return stations(resampled, at / 0.3 * 64)


def test_resampled_to_65_stations_and_read_back() -> None:
    at = np.linspace(0, 0.3, 997)
    np.testing.assert_allclose(resampled_and_read_back(falling, at), falling(at), rtol=1e-12)


def test_resampled_with_a_top_between_two_stations() -> None:
    # the points beside the top may be monotone: the curve then keeps their side, and flattens the top.
    # Worst when the top is 0.4 of a step s away: slope 0.6 a s instead of 1.2, off by 0.6 * 4/27 a s^2. [D]
    at, step = np.linspace(0, 0.3, 997), 0.3 / 64
    off = np.abs(resampled_and_read_back(arched, at) - arched(at))
    assert off.max() <= 0.6 * 4 / 27 * 20 * step**2
    assert off[np.abs(at - 0.12) > 2 * step].max() <= 1e-12


def test_value_and_slope_give_the_value_and_the_derivative_per_station() -> None:
    grid = np.arange(9.0)
    values = np.stack([50 - 0.5 * grid**2, 3 + 2 * grid])
    rows, position = np.array([0, 1, 0]), np.array([2.5, 2.5, 8.0])
    found, slope = value_and_slope(values, station_slopes(values), rows, position)
    np.testing.assert_allclose(found, [50 - 0.5 * 6.25, 8.0, 18.0], rtol=1e-13)
    np.testing.assert_allclose(slope, [-2.5, 2.0, -8.0], rtol=1e-12)


def test_two_points_are_a_straight_line_inside_and_beyond() -> None:
    x, y = np.array([[1.0, 3.0]]), np.array([[10.0, 4.0]])
    found = through_points(x=x, y=y, at=np.array([[0.0, 1.0, 1.5, 3.0, 4.0]]))
    np.testing.assert_allclose(found, [[13.0, 10.0, 8.5, 4.0, 1.0]], rtol=1e-13)
    np.testing.assert_allclose(stations(np.array([10.0, 4.0]), np.array([0.0, 0.25, 1.0])), [10, 8.5, 4])


def test_beyond_its_points_a_curve_goes_on_as_its_last_piece() -> None:
    found = through_points(x=UNEVEN[None], y=falling(UNEVEN)[None], at=np.array([[-0.02, 0.33]]))
    np.testing.assert_allclose(found, [[50 - 300 * 0.0004, 50 - 300 * 0.1089]], rtol=1e-12)


def test_every_point_is_met_and_rows_do_not_mix() -> None:
    x = np.array([[0.0, 1.0, 2.0, 5.0], [0.0, 2.0, 7.0, 8.0]])
    y = np.array([[9.0, -3.0, 4.0, 4.0], [1.0, 5.0, 5.0, -2.0]])
    np.testing.assert_allclose(through_points(x=x, y=y, at=x), y, atol=1e-12)
    alone = through_points(x=x[1:], y=y[1:], at=np.array([[1.0, 7.5]]))
    both = through_points(x=x, y=y, at=np.array([[3.0, 3.0], [1.0, 7.5]]))
    assert both[1].tolist() == alone[0].tolist()


NASTY = [
    [50.0, 50.0, 50.0, 10.0, 10.0],  # flats with a cliff between
    [50.0, 49.999, 20.0, 19.999, 0.0],
    [1e-9, 1e-6, 1e-3, 1.0, 1e3],  # three decades a step
    [0.0, 0.0, 0.0, 0.0, 1.0],
    [7.0, 7.0, 7.0, 7.0, 7.0],
]


@pytest.mark.parametrize("y", NASTY)
@pytest.mark.parametrize("x", [[0.0, 1.0, 2.0, 3.0, 4.0], [0.0, 0.001, 2.0, 2.001, 90.0]])
def test_nasty_monotone_points_stay_monotone(x: list[float], y: list[float]) -> None:
    at = np.linspace(x[0], x[-1], 5001)
    read = through_points(x=np.array([x]), y=np.array([y]), at=at[None])[0]
    way = np.sign(y[-1] - y[0])
    assert np.all(np.diff(read) * way >= -1e-12 * np.ptp(y))
    assert read.min() >= min(y) - 1e-12
    assert read.max() <= max(y) + 1e-12
    assert np.all(np.diff(stations(np.array(y), np.linspace(0, 4, 801))) * way >= -1e-12 * np.ptp(y))


steps = st.lists(st.floats(0, 1e4), min_size=1, max_size=12)
gaps = st.lists(st.floats(1e-3, 1e3), min_size=12, max_size=12)


@settings(max_examples=150, deadline=None)
@given(steps, gaps)
def test_monotone_points_give_a_monotone_curve(falls: list[float], widths: list[float]) -> None:
    y = 100 - np.concatenate([[0.0], np.cumsum(falls)])
    x = np.concatenate([[0.0], np.cumsum(widths[: len(falls)])])
    share = np.linspace(0, 1, 17)
    at = np.unique(x[:-1, None] + np.diff(x)[:, None] * share)
    read = through_points(x=x[None], y=y[None], at=at[None])[0]
    assert np.all(np.diff(read) <= 1e-9 * (1 + np.ptp(y)))
    even = stations(y, np.linspace(0, len(falls), 16 * len(falls) + 1))
    assert np.all(np.diff(even) <= 1e-9 * (1 + np.ptp(y)))


@settings(max_examples=150, deadline=None)
@given(st.floats(-1e3, 1e3), st.floats(-5, 5), st.floats(0.01, 100), gaps)
def test_any_parabola_beside_its_top_is_exact(level: float, tilt: float, bend: float, widths: list) -> None:
    x = np.concatenate([[0.0], np.cumsum(widths)])

    def parabola(at: np.ndarray) -> np.ndarray:
        return level - abs(tilt) * at - bend * at**2

    at = np.linspace(0, x[-1], 200)
    found = through_points(x=x[None], y=parabola(x)[None], at=at[None])[0]
    np.testing.assert_allclose(found, parabola(at), rtol=1e-9, atol=1e-9 * np.ptp(parabola(x)))


@settings(max_examples=100, deadline=None)
@given(steps, gaps, st.floats(-100, 100), st.floats(0.01, 100))
def test_reading_follows_a_change_of_units(falls: list, widths: list, shift: float, scale: float) -> None:
    y = np.concatenate([[0.0], np.cumsum(falls)])
    x = np.concatenate([[0.0], np.cumsum(widths[: len(falls)])])
    at = np.linspace(0, x[-1], 50)
    plain = through_points(x=x[None], y=y[None], at=at[None])
    changed = through_points(x=x[None] * 3600, y=(y * scale + shift)[None], at=at[None] * 3600)
    np.testing.assert_allclose(changed, plain * scale + shift, rtol=1e-9, atol=1e-9 * (1 + scale * y[-1]))


def test_station_slopes_treat_a_missing_neighbour_as_the_end_of_the_data() -> None:
    grid = np.arange(9.0)
    values = 50 - 0.5 * grid**2
    values[[0, 1, 7, 8]] = NAN
    expected = np.where(np.isnan(values), NAN, -grid)
    np.testing.assert_allclose(station_slopes(values[None])[0], expected, rtol=1e-13)


def test_a_gap_of_one_station_splits_the_data() -> None:
    # 1, 3 is a straight piece; 7 lacks both neighbours; 4, 9, 16 lies on a square
    values = np.array([[1.0, 3.0, NAN, 7.0, NAN, 4.0, 9.0, 16.0]])
    np.testing.assert_allclose(station_slopes(values)[0], [2, 2, NAN, NAN, NAN, 4, 6, 8], rtol=1e-13)


def test_between_a_known_and_a_missing_station_nothing_is_read() -> None:
    values = np.array([NAN, 4.0, 3.0, 2.0, NAN])
    np.testing.assert_array_equal(
        stations(values, np.array([0.5, 1.0, 2.5, 3.5])), np.array([NAN, 4.0, 2.5, NAN])
    )


def test_rows_with_and_without_gaps_do_not_disturb_each_other() -> None:
    whole, holed = np.arange(6.0) ** 2, np.array([NAN, 1.0, 4.0, 9.0, NAN, NAN])
    both = station_slopes(np.stack([whole, holed]))
    assert both[0].tolist() == station_slopes(whole[None])[0].tolist()
    np.testing.assert_allclose(both[1], [NAN, 2, 4, 6, NAN, NAN])


@pytest.mark.parametrize(
    ("x", "y", "best", "place", "inside"),
    [
        ([0.0, 1.0, 3.0, 4.0], lambda x: 5 - (x - 2.2) ** 2, 2, 2.2, True),
        ([0.0, 2.0, 2.5, 9.0], lambda x: 0.8 - 0.01 * (x - 2.4) ** 2, 2, 2.4, True),
        ([0.0, 1.0, 2.0], lambda x: 5 - (x + 1) ** 2, 0, None, False),
        ([0.0, 1.0, 2.0], lambda x: 5 - (x - 9) ** 2, 2, None, False),
        ([0.0, 1.0, 2.0, 3.0], lambda x: np.minimum(x, 1), 2, None, True),
    ],
    ids=["uneven", "very uneven", "first is best", "last is best", "a corner"],
)
def test_vertex(x, y, best: int, place: float | None, inside: bool) -> None:
    points = np.array([x])
    found, known = vertex(x=points, y=y(points), best=np.array([best]))
    assert known.tolist() == [inside]
    if place is not None:
        assert found[0] == pytest.approx(place, rel=1e-12)
    low, high = points[0, max(best - 1, 0)], points[0, min(best + 1, len(x) - 1)]
    assert not inside or low <= found[0] <= high


def test_a_level_top_has_its_vertex_on_the_middle_point() -> None:
    found, known = vertex(x=np.array([[0.0, 1.0, 3.0]]), y=np.full((1, 3), 0.7), best=np.array([1]))
    assert (found[0], known[0]) == (1.0, True)
