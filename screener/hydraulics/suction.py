"""Pressure of the atmosphere, and the net positive suction head that a pump is given."""

from __future__ import annotations

import numpy as np

from screener.hydraulics.constants import GRAVITY
from screener.model.arrays import Floats


def atmospheric_pressure(*, altitude: Floats) -> Floats:
    """Pressure of the standard atmosphere [Pa absolute].

    altitude : any shape [m] above sea level, -1000 to 11000, else ValueError.
    Source: ICAO standard atmosphere (ISO 2533:1975), troposphere.

    >>> atmospheric_pressure(altitude=np.array([0.0, 1000.0])).round(-1)
    array([101320.,  89870.])
    """
    if not np.all((altitude >= -1000) & (altitude <= 11000)):
        raise ValueError("every altitude must be within -1000 to 11000 m")
    return 101325 * (1 - 2.25577e-5 * altitude) ** 5.25588


def npsh_available(
    *, surface_pressure: Floats, vapour_pressure: Floats, density: Floats, suction_head: Floats, loss: Floats
) -> Floats:
    """Net positive suction head available at the pump's datum [m of the liquid].

    surface_pressure : [Pa absolute] on the suction surface
    vapour_pressure  : [Pa absolute]
    density          : [kg/m3], > 0
    suction_head     : [m] suction surface above the datum, negative for a suction lift
    loss             : [m] of head from the surface to the pump
    Any shapes that broadcast. May be negative: the liquid then boils before it arrives.
    Source: definition, ISO 17769-1. The value below: Khan, Example 12.5 [V].

    >>> pressure, vapour, density = np.array(98000.0), np.array(1707.0), np.array(1000.0)
    >>> lift, loss = np.array(-4.02), np.array(1.0)
    >>> float(npsh_available(surface_pressure=pressure, vapour_pressure=vapour, density=density,
    ...                      suction_head=lift, loss=loss).round(2))
    4.8
    """
    return (surface_pressure - vapour_pressure) / (density * GRAVITY) + suction_head - loss
