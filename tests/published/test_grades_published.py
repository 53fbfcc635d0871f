"""Head tolerances of ISO 9906, percent of the guarantee. [1] one source, [M] from memory."""

from __future__ import annotations

import pytest

from screener.model.tables.grades import GRADES, head_tolerance

PERCENT = {
    # ISO 9906:2012, pump test acceptance grades [M]
    "1U": (0, 6),
    "1E": (-3, 3),
    "1B": (-3, 3),
    "2B": (-5, 5),
    "2U": (0, 10),
    "3B": (-7, 7),
    # ISO 9906:1999, classes 1 and 2 [1]
    "1": (-3, 3),
    "2": (-5, 5),
}


@pytest.mark.parametrize("grade", PERCENT)
def test_head(grade: str) -> None:
    low, high = head_tolerance(grade)
    assert (100 * low, 100 * high) == pytest.approx(PERCENT[grade], abs=1e-12)


def test_no_grade_without_a_published_value() -> None:
    assert set(GRADES) == set(PERCENT)
