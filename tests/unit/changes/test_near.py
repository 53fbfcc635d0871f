"""A closer look at a whole shortlist is the closer look at each of its pumps."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from screener.changes.closer import look_closer
from screener.changes.near import Near, look_nearer
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Verdict
from screener.screening.one import explain
from screener.screening.shortlist import Shortlist, shortlist


@pytest.fixture(scope="module")
def case(case_of: Callable[..., Case]) -> Case:
    return case_of(50.0, tolerance=0.03)


@pytest.fixture(scope="module")
def table(table_of: Callable[..., PumpTable]) -> PumpTable:
    """Two that pass, one of them by little, and one that stands under its minimum flow at night."""
    return table_of(50.0, 49.3, 48.5, tolerance=0.03)


@pytest.fixture(scope="module")
def result(case: Case, table: PumpTable) -> Shortlist:
    return shortlist(case, table)


@pytest.fixture(scope="module")
def near(result: Shortlist) -> Near:
    return look_nearer(result, top=10)


def test_every_pump_shown_is_looked_at(result: Shortlist, near: Near) -> None:
    assert result.best.verdict.tolist() == [0, 0, 2]
    assert near.rows.tolist() == [0, 1, 2]


def test_of_each_group_the_first_alone(result: Shortlist) -> None:
    assert look_nearer(result, top=1).rows.tolist() == [0, 2]


def test_it_says_what_explain_says_of_each(
    case: Case, table: PumpTable, result: Shortlist, near: Near
) -> None:
    for place, row in enumerate(near.rows):
        diameter = float(result.best.diameter[row])
        one = look_closer(explain(case, table, int(result.best.model[row]), diameter))
        change = near.changes[place]
        assert (change is None) == (result.best.verdict[row] != Verdict.REJECTED)
        if change is not None:
            assert (change.kind, change.duty, change.pump) == (
                one.changes[0].kind,
                one.changes[0].duty,
                one.changes[0].pump,
            )
        for alone, beside in zip(one.corners, near.corners, strict=True):
            assert beside.fails[place].tolist() == alone.fails[0].tolist()
            assert beside.shut[place].tolist() == alone.shut[0].tolist()
        for alone, beside in zip(one.readings, near.readings, strict=True):
            assert beside.flips[place].tolist() == alone.flips[0].tolist()
    assert any(np.any(corner.fails) for corner in near.corners)
    assert any(np.any(reading.turns) for reading in near.readings)
