from __future__ import annotations

import pytest

from screener.model.tables.grades import GRADES, head_tolerance


@pytest.mark.parametrize("grade", GRADES)
def test_a_tolerance_is_a_fraction_around_the_guarantee(grade: str) -> None:
    low, high = head_tolerance(grade)
    assert -0.1 < low <= 0 < high <= 0.1


def test_an_unknown_grade_is_answered_with_those_there_are() -> None:
    with pytest.raises(ValueError, match=r"no acceptance grade '2b'; the grades are 1U, 1E, .*"):
        head_tolerance("2b")
