"""Water against the `iapws` package, which solves the full equations of state."""

from __future__ import annotations

from functools import cache
from typing import Any

import iapws
import numpy as np
import pytest

from screener.hydraulics.liquids import water

CELSIUS = np.array([0.1, 5, 10, 20, 30, 40, 60, 80, 100, 120, 140, 160, 180, 190, 200])


@cache
def states(equation: str) -> list[Any]:
    """Saturated liquid at `CELSIUS`."""
    return [getattr(iapws, equation)(T=celsius + 273.15, x=0) for celsius in CELSIUS]


@pytest.mark.parametrize(
    ("equation", "pressure", "density", "viscosity", "heat_capacity"),
    # largest relative difference allowed; the two equations differ by as much between themselves
    [("IAPWS95", 1e-4, 3e-5, 3e-5, 5e-4), ("IAPWS97", 2e-4, 3e-5, 3e-5, 1.2e-3)],
)
def test_0_to_200_degrees(
    equation: str, pressure: float, density: float, viscosity: float, heat_capacity: float
) -> None:
    expected = states(equation)
    np.testing.assert_allclose(
        water.vapour_pressure(temperature=CELSIUS), [1e6 * state.P for state in expected], rtol=pressure
    )
    np.testing.assert_allclose(
        water.density(temperature=CELSIUS), [state.rho for state in expected], rtol=density
    )
    np.testing.assert_allclose(
        water.viscosity(temperature=CELSIUS), [state.nu for state in expected], rtol=viscosity
    )
    np.testing.assert_allclose(
        water.heat_capacity(temperature=CELSIUS), [1e3 * state.cp for state in expected], rtol=heat_capacity
    )
