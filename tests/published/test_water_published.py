"""Published figures of water.

[V] two sources or recomputed here, [1] one source, [M] from memory.
"""

from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.liquids import water

# IAPWS-IF97 saturated liquid (IAPWS-95 agrees to the tolerances), as in printed steam tables [V]
# degC, Pa, kg/m3, mm2/s
SATURATED = [
    (20.0, 2339.2, 998.16, 1.0035),
    (60.0, 19946.0, 983.18, 0.4740),
    (80.0, 47415.0, 971.78, 0.3643),
]

# Boiling point at one atmosphere: SR1-86(1992), table 1 of check values, 373.1243 K [M], recomputed with the
# iapws package
BOILING = 373.1243 - 273.15


@pytest.mark.parametrize(("celsius", "pressure", "density", "viscosity"), SATURATED)
def test_saturated_liquid(celsius: float, pressure: float, density: float, viscosity: float) -> None:
    liquid = water.water(name="water", temperature=celsius)
    assert liquid.vapour_pressure == pytest.approx(pressure, rel=1e-4)
    assert liquid.density == pytest.approx(density, rel=4e-5)
    assert liquid.viscosity * 1e6 == pytest.approx(viscosity, abs=6e-5)


def test_saturation_pressure_of_if97_at_300_kelvin() -> None:
    # IAPWS-IF97 (R7-97), table 35 [V]; another equation than ours, hence the tolerance
    at = np.array(300.0 - 273.15)
    assert water.vapour_pressure(temperature=at) == pytest.approx(0.00353658941e6, rel=1e-4)


def test_saturation_pressure_of_if97_at_500_kelvin() -> None:
    # IAPWS-IF97 (R7-97), table 35 [V]; above 200 degC, so the equation itself is asked
    assert water._pressure(np.array(500.0)) == pytest.approx(2.63889776e6, rel=2e-4)


def test_boils_at_one_atmosphere() -> None:
    at = np.array(BOILING)
    assert water.vapour_pressure(temperature=at) == pytest.approx(101325, rel=1e-5)
    assert water.density(temperature=at) == pytest.approx(958.365, abs=1e-3)


def test_triple_point() -> None:
    # SR1-86(1992), check values at 273.16 K [M], recomputed with the iapws package
    at = np.array(0.01)
    assert water.vapour_pressure(temperature=at) == pytest.approx(611.657, abs=2e-3)
    assert water.density(temperature=at) == pytest.approx(999.789, abs=1e-3)
    assert water._alpha(np.array(273.16)) == pytest.approx(-11.529101, abs=1e-5)


@pytest.mark.parametrize(
    ("kelvin", "density", "micropascal_seconds"),
    # R12-08, table 4, without critical enhancement [M], recomputed with the iapws package
    [(298.15, 998.0, 889.735100), (298.15, 1200.0, 1437.649467), (373.15, 1000.0, 307.883622)],
)
def test_dynamic_viscosity(kelvin: float, density: float, micropascal_seconds: float) -> None:
    mu = water._dynamic_viscosity(np.array(kelvin), np.array(density))
    assert mu * 1e6 == pytest.approx(micropascal_seconds, rel=1e-8)


def test_alpha_at_the_critical_point() -> None:
    # SR1-86(1992), check values at 647.096 K [M], recomputed with the iapws package: 1548 kJ/kg;
    # the one place where every term counts
    assert water._alpha(np.array(647.096)) == pytest.approx(1548e3, abs=500)
