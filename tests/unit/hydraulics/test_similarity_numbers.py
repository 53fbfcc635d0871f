from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.similarity_numbers import specific_speed, suction_specific_speed


@pytest.mark.parametrize(
    ("function", "head"), [(specific_speed, "head"), (suction_specific_speed, "npsh_required")]
)
def test_round_numbers_row_by_row(function, head: str) -> None:
    # 16 ** 0.75 = 8, 81 ** 0.75 = 27
    figures = {
        "speed": np.array([800.0, 2700.0, np.nan, 800.0]),
        "flow": np.array([0.25, 0.01, 0.25, np.nan]),
        head: np.array([16.0, 81.0, 16.0, 16.0]),
    }
    np.testing.assert_allclose(function(**figures), [50.0, 10.0, np.nan, np.nan])


def test_it_does_not_change_along_the_affinity_laws() -> None:
    slow = specific_speed(speed=np.array(1000.0), flow=np.array(0.1), head=np.array(20.0))
    fast = specific_speed(speed=np.array(3000.0), flow=np.array(0.3), head=np.array(180.0))
    assert fast == pytest.approx(slow, rel=1e-14)
