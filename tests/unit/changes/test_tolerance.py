"""Corners of the tolerance on a small header in closed form."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from screener.changes.tolerance import Corner, corners
from screener.criteria import criteria
from screener.model.case import Case
from screener.model.curves import Pumps
from screener.screening.one import Explained

NAMES = [criterion.name for criterion in criteria()]
MINIMUM, START = NAMES.index("minimum-flow"), NAMES.index("start")
NIGHT, LEAST = 0.08, 0.02


@pytest.fixture(scope="module")
def beside(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> Callable[..., Explained]:
    """A pump of 48.5 m beside one of 50 m, both within a tolerance."""

    def make(tolerance: float) -> Explained:
        return explained(case_of(50.0, tolerance=tolerance), 48.5, minimum=LEAST, tolerance=tolerance)

    return make


def at(explained: Explained, pumps: Pumps | None = None) -> tuple[Corner, ...]:
    one = explained.judged
    return corners(explained.bench, pumps or one.run.pumps, one.candidates.findings)


def corner(found: tuple[Corner, ...], odd: int, *, high: bool) -> Corner:
    (one,) = (corner for corner in found if (corner.odd, corner.high) == (odd, high))
    return one


def night_flow(low: float, high: float) -> float:
    """Smaller flow of low (48.5 - 1000 Q2) beside high (50 - 1000 Q2) at 0.08 m3/s in all. [D]"""
    a = 1000 * (high - low)
    b, c = -2000 * high * NIGHT, 1000 * high * NIGHT**2 - (50 * high - 48.5 * low)
    return (-b - np.sqrt(b**2 - 4 * a * c)) / (2 * a)


def test_corners_without_tolerance_change_nothing(beside: Callable[..., Explained]) -> None:
    found = at(beside(0.0))
    assert len(found) == 2 * 2 + 2  # two kinds of pump, and all low, all high
    assert not any(corner.fails.any() or corner.shut.any() for corner in found)


def test_a_low_new_pump_beside_a_high_one_runs_where_the_closed_form_says(
    beside: Callable[..., Explained],
) -> None:
    found = corner(at(beside(0.03)), 0, high=False)
    flow = night_flow(0.97, 1.03)
    assert 0 < flow < LEAST
    assert found.findings.observed[0, MINIMUM] == pytest.approx(flow / LEAST, rel=1e-3)
    assert found.fails[0, MINIMUM]
    assert not found.shut.any()


def test_a_pump_that_its_check_valve_holds_shut_is_named(beside: Callable[..., Explained]) -> None:
    """By hand: 0.94 of 48.5 m are 45.6 m; the other alone holds 1.06 (50 - 6.4) = 46.2 m at night."""
    found = at(beside(0.06))
    low = corner(found, 0, high=False)
    states = low.bench.header.states
    assert [(states[state].duty, column) for _, state, column in np.argwhere(low.shut)] == [(1, 0)]
    assert low.fails[0, [MINIMUM, START]].all()
    assert low.findings.observed[0, MINIMUM] == 0
    assert not corner(found, 0, high=True).shut[..., 0].any()


def test_what_a_trim_law_may_promise_too_much_lowers_the_new_pump_only(
    beside: Callable[..., Explained],
) -> None:
    """1 % tolerance and 2 % of the trim: 0.97 of its head where it is low, 1.01 where it is high."""
    explained = beside(0.01)
    pumps = replace(explained.judged.run.pumps, trim_uncertainty=np.array([0.02]))
    found, without = at(explained, pumps), at(explained)
    low = corner(found, 0, high=False).findings.observed[0, MINIMUM]
    assert low == pytest.approx(night_flow(0.97, 1.01) / LEAST, rel=1e-3)
    for odd, high in ((0, True), (-1, True), (1, False)):  # the new pump is high
        same = corner(without, odd, high=high).findings.observed[0, MINIMUM]
        assert corner(found, odd, high=high).findings.observed[0, MINIMUM] == same
