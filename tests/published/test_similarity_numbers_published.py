"""Published specific speeds. [V] two sources or recomputed here, [D] derived here."""

from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.similarity_numbers import specific_speed, suction_specific_speed

FOOT = 0.3048
GALLON_PER_MINUTE = 6.309020e-5
US = 51.645  # US number over n_q [V]
DIMENSIONLESS = 52.919  # n_q over 2 pi n sqrt(Q) / (g H) ** 0.75 [V]


@pytest.mark.parametrize(
    ("rpm", "gpm", "feet", "us"),
    [
        (1170.0, 300.0, 21.9, 2001.8),  # Fox and McDonald, Example 10.7 [V]
        (1170.0, 320.0, 23.5, 1960.9),  # [V]
        (600.0, 2000.0, 150.0, 626.0),  # [V]
    ],
)
def test_specific_speed(rpm: float, gpm: float, feet: float, us: float) -> None:
    n_q = specific_speed(
        speed=np.array(rpm), flow=np.array(gpm * GALLON_PER_MINUTE), head=np.array(feet * FOOT)
    )
    assert n_q * US == pytest.approx(us, rel=1e-4)


def test_the_number_free_of_units() -> None:
    # 1170 rpm, 300 gpm, 21.9 ft: 0.7324 [V]
    n_q = specific_speed(
        speed=np.array(1170.0), flow=np.array(300 * GALLON_PER_MINUTE), head=np.array(21.9 * FOOT)
    )
    assert n_q / DIMENSIONLESS == pytest.approx(0.7324, abs=5e-5)


def test_suction_specific_speed() -> None:
    # 11,000 in US units is 212.99 [V]; the NPSH that gives 11,000 at 3550 rpm and 1000 gpm, in feet [D]
    feet = (3550 * 1000**0.5 / 11000) ** (4 / 3)
    n_ss = suction_specific_speed(
        speed=np.array(3550.0), flow=np.array(1000 * GALLON_PER_MINUTE), npsh_required=np.array(feet * FOOT)
    )
    assert n_ss == pytest.approx(212.99, abs=0.01)
