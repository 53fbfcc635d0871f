from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.motor import smallest_nameplate

NAN, INF = np.nan, np.inf


def smallest(rated: object, largest: object, series: str = "IEC") -> np.ndarray:
    """Smallest nameplate in kW, from powers in kW."""
    watt = {"rated_power": np.array(rated) * 1000, "largest_power": np.array(largest) * 1000}
    return smallest_nameplate(**watt, series=series) / 1000


@pytest.mark.parametrize(
    ("rated", "largest", "expected"),
    [
        (14.8, 0.0, 18.5),  # 1.25 * 14.8 = 18.5 exactly
        (14.81, 0.0, 22.0),  # then the next, where only 1.15 is asked
        (19.13, 0.0, 22.0),  # 1.15 * 19.13 = 21.9995: 1.25 would have asked 30
        (19.14, 0.0, 30.0),
        (47.83, 0.0, 75.0),  # 1.15 * 47.83 = 55.0045
        (68.18, 0.0, 75.0),  # 1.10 * 68.18 = 74.998
        (100.0, 0.0, 110.0),  # 1.10 * 100 is not 110 to the last bit
        (10.0, 15.0, 15.0),  # the largest power asks for no margin
        (10.0, 15.1, 18.5),
        (454.5, 455.0, 500.0),
        (454.6, 455.0, INF),
        (10.0, 500.1, INF),
        (0.0, 0.0, 0.12),
        (NAN, 10.0, NAN),
        (10.0, NAN, NAN),
    ],
)
def test_iec(rated: float, largest: float, expected: float) -> None:
    np.testing.assert_allclose(smallest(rated, largest), expected, rtol=1e-12)


def test_horsepower() -> None:
    hp = 0.74569987
    # 20.1 * 1.25 > 25, so 30; 65 * 1.15 = 74.75
    found = smallest(np.array([20.0, 20.1, 65.0]) * hp, np.zeros(3), "NEMA")
    np.testing.assert_allclose(found / hp, [25, 30, 75], rtol=1e-7)


def test_every_choice_is_the_least_by_trying_each_size() -> None:
    sizes = [
        0.12,
        0.18,
        0.25,
        0.37,
        0.55,
        0.75,
        1.1,
        1.5,
        2.2,
        3,
        4,
        5.5,
        7.5,
        11,
        15,
        18.5,
        22,
        30,
        37,
        45,
        55,
    ]
    sizes += [75, 90, 110, 132, 160, 200, 250, 315, 355, 400, 450, 500]
    random = np.random.default_rng(7)
    rated = 10 ** random.uniform(-1.5, 2.9, 300)
    largest = rated * random.uniform(0.9, 1.6, 300)

    def tried(rated: float, largest: float) -> float:
        for size in sizes:
            margin = 1.25 if size < 22 else 1.15 if size <= 55 else 1.10
            if size >= margin * rated and size >= largest:
                return size
        return INF

    expected = [tried(*powers) for powers in zip(rated, largest, strict=True)]
    np.testing.assert_allclose(smallest(rated, largest), expected, rtol=1e-12)


def test_powers_broadcast() -> None:
    assert smallest([[1.0], [2.0]], [0.5, 3.5, 600.0]).tolist() == [[1.5, 4.0, INF], [3.0, 4.0, INF]]
