"""Published figures of suction. [V] two sources or recomputed here, [M] from memory, [D] derived here."""

from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.suction import atmospheric_pressure, npsh_available

G = 9.80665
FOOT = 0.3048
PSI = 6894.757
POUND_PER_CUBIC_FOOT = 16.018463


def npsh(pressure: float, vapour: float, density: float, height: float, loss: float) -> float:
    return float(
        npsh_available(
            surface_pressure=np.array(pressure),
            vapour_pressure=np.array(vapour),
            density=np.array(density),
            suction_head=np.array(height),
            loss=np.array(loss),
        )
    )


def test_heads_in_feet() -> None:
    # 33.9 + 6.0 - 0.839 - 2 - 2 = 35.061 ft [V]: atmosphere, flooded suction, vapour, two losses
    to_pressure = FOOT * 998.0 * G
    found = npsh(33.9 * to_pressure, 0.839 * to_pressure, 998.0, 6.0 * FOOT, 4.0 * FOOT)
    assert found / FOOT == pytest.approx(35.061, abs=1e-9)


def test_munson_example_12_3() -> None:
    # Munson, Example 12.3 [V]: 0.5 ft3/s, 4 in, K 20, 14.7 psia, vapour
    # 0.5069 psi, 62.22 lb/ft3, NPSHr 15 ft: the pump may stand 7.65 ft above the surface
    velocity = 0.5 / (np.pi / 4 * (4 / 12) ** 2)
    loss = 20 * velocity**2 / (2 * 32.174)
    density = 62.22 * POUND_PER_CUBIC_FOOT
    found = npsh(14.7 * PSI, 0.5069 * PSI, density, -7.65 * FOOT, loss * FOOT)
    assert found / FOOT == pytest.approx(15.0, abs=0.02)


def test_khan_example_12_5() -> None:
    # Khan, Example 12.5 [V]: head 60 m and Thoma number 0.08 ask 4.8 m;
    # 98 kPa, vapour 1707 Pa, loss 1 m: lift 4.02 m
    assert npsh(98e3, 1707.0, 1000.0, -4.02, 1.0) == pytest.approx(0.08 * 60, abs=0.005)


@pytest.mark.parametrize(
    ("altitude", "pressure"),
    # ICAO standard atmosphere (Doc 7488), table of pressure by geopotential altitude [M]; [D] from the
    # lapse rate: 101325 (1 - 0.0065 h / 288.15) ** (9.80665 / (287.05287 * 0.0065))
    [(0.0, 101325.0), (1000.0, 89874.6), (2000.0, 79495.2), (5000.0, 54019.9), (11000.0, 22632.0)],
)
def test_standard_atmosphere(altitude: float, pressure: float) -> None:
    assert atmospheric_pressure(altitude=np.array(altitude)) == pytest.approx(pressure, rel=1e-5)
