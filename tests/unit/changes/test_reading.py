"""Reading error: four runs, worked out by hand on a small header in closed form."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import sqrt

import numpy as np
import pytest

from screener.changes.reading import Misread, Reading, factors, readings
from screener.criteria import criteria
from screener.model.case import Case, Tolerance
from screener.screening.one import Explained

NAMES = [criterion.name for criterion in criteria()]
MINIMUM = NAMES.index("minimum-flow")
NIGHT = 0.08
LEAST = 0.0301
"""At night a pump of 48.5 m stands at 0.0306 m3/s beside one of 50 m: 1.7 % over this."""


def at(explained: Explained) -> tuple[Reading, ...]:
    one = explained.judged
    return readings(explained.bench, one.run.pumps, one.candidates.findings)


def night_flow(shutoff: float) -> float:
    """Of H = shutoff - 1000 Q2 beside 50 - 1000 Q2: x + y = 0.08, x2 - y2 = (50 - shutoff) / 1000. [D]"""
    return (NIGHT - (50 - shutoff) / 1000 / NIGHT) / 2


@pytest.fixture(scope="module")
def marginal(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> Explained:
    return explained(case_of(50.0), 48.5, minimum=LEAST)


def test_a_marginal_pump_flips_where_its_curve_is_lower(marginal: Explained) -> None:
    assert night_flow(48.5) / LEAST > 1 > night_flow(0.99 * 48.5) / LEAST
    found = at(marginal)
    flips = {run.misread: [NAMES[column] for column in np.flatnonzero(run.flips[0])] for run in found}
    assert flips == {
        Misread.HIGHER: [],
        Misread.LOWER: ["minimum-flow"],
        Misread.STEEPER: [],
        Misread.FLATTER: ["minimum-flow"],  # lower at the 0.03 m3/s of the night
    }
    assert [bool(run.turns[0]) for run in found] == [False, True, False, True]


def test_the_flow_of_the_lower_curve_is_that_of_the_closed_form(marginal: Explained) -> None:
    """Lower and with it less steep: H = 0.99 (48.5 - 1000 Q2), the other 50 - 1000 Q2."""
    a, b, c = 10.0, -160.0, 6.4 - (50 - 0.99 * 48.5)
    flow = (-b - sqrt(b**2 - 4 * a * c)) / (2 * a)  # 1000 (0.08 - y)2 - 990 y2 = 50 - 48.015
    (lower,) = (run for run in at(marginal) if run.misread == Misread.LOWER)
    assert lower.findings.observed[0, MINIMUM] == pytest.approx(flow / LEAST, rel=1e-4)


def test_a_safe_pump_does_not_flip(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> None:
    found = at(explained(case_of(50.0), 48.5, minimum=0.02))
    assert not any(run.flips.any() or run.turns.any() for run in found)


def test_the_case_says_how_large_the_error_is(marginal: Explained) -> None:
    """0.1 % of head moves the night's flow by 0.0003 m3/s, less than what is spare."""
    case = replace(marginal.bench.header.case, tolerance=Tolerance(reading=0.001))
    bench = replace(marginal.bench, header=replace(marginal.bench.header, case=case))
    assert not any(run.flips.any() for run in at(replace(marginal, bench=bench)))


def test_a_rejected_pump_may_turn_too(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    found = at(explained(case_of(50.0), 48.5, minimum=0.0308))
    assert night_flow(48.5) < 0.0308 < night_flow(1.003 * 48.5)
    turns = {run.misread for run in found if run.turns[0]}
    assert turns == {Misread.HIGHER, Misread.STEEPER}


@pytest.mark.parametrize(
    ("misread", "first", "middle", "last"),
    [
        (Misread.HIGHER, 1.02, 1.02, 1.02),
        (Misread.LOWER, 0.98, 0.98, 0.98),
        (Misread.STEEPER, 1.02, 1.0, 0.98),
        (Misread.FLATTER, 0.98, 1.0, 1.02),
    ],
)
def test_the_curve_is_moved_or_turned_about_half_its_flow(
    marginal: Explained, misread: Misread, first: float, middle: float, last: float
) -> None:
    factor = factors(marginal.judged.run.pumps, misread, 0.02)[0]
    assert factor[[0, 32, 64]] == pytest.approx([first, middle, last])
