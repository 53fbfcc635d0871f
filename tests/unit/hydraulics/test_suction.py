from __future__ import annotations

import math

import numpy as np
import pytest

from screener.hydraulics.suction import atmospheric_pressure, npsh_available


def test_npsh_of_round_numbers() -> None:
    # (98066.5 Pa) / (1000 kg/m3 * 9.80665 m/s2) = 10 m; + 2 - 0.5
    found = npsh_available(
        surface_pressure=np.array(100e3),
        vapour_pressure=np.array(1933.5),
        density=np.array(1000.0),
        suction_head=np.array(2.0),
        loss=np.array(0.5),
    )
    assert found == pytest.approx(11.5, abs=1e-12)


def test_npsh_broadcasts_over_states_and_pumps() -> None:
    found = npsh_available(
        surface_pressure=np.array(98066.5),
        vapour_pressure=np.array([[0.0], [49033.25]]),
        density=np.array(1000.0),
        suction_head=np.array([0.0, 1.0, -9.0]),
        loss=np.array([[1.0], [1.0]]),
    )
    np.testing.assert_allclose(found, [[9, 10, 0], [4, 5, -5]], atol=1e-12)


def test_pressure_falls_with_altitude_and_rises_below_the_sea() -> None:
    pressure = atmospheric_pressure(altitude=np.array([-400.0, 0.0, 40.0, 3000.0]))
    assert np.all(np.diff(pressure) < 0)
    assert pressure[1] == 101325


@pytest.mark.parametrize("altitude", [-1001.0, 11001.0, math.nan])
def test_altitude_out_of_range(altitude: float) -> None:
    with pytest.raises(ValueError, match="within -1000 to 11000 m"):
        atmospheric_pressure(altitude=np.array([0.0, altitude]))
