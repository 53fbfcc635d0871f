"""Which standard motor a pump needs."""

from __future__ import annotations

import numpy as np

from screener.model.arrays import Floats
from screener.model.tables.motors import nameplates

_ROUNDING = 1e-9  # relative: 1.1 * 100 kW is 110 kW, though not to the last bit


def band(*, nameplate: Floats) -> Floats:
    """Nameplate power over rated power that a driver of this size must have at least [-].

    nameplate : any shape [W]. 1.25 below 22 kW (up to 25 hp), 1.15 from there to 55 kW (30 to 75 hp), 1.10
    above. The upper bound is 56 kW, so that 75 hp (55.9 kW) stays in its band.
    Source: ISO 13709 (API 610), table of driver power margins: bands in hp [V], in kW [M].

    >>> band(nameplate=np.array([18.5e3, 22e3, 55e3, 75e3]))
    array([1.25, 1.15, 1.15, 1.1 ])
    """
    return np.where(nameplate < 22e3, 1.25, np.where(nameplate < 56e3, 1.15, 1.10))


def smallest_nameplate(*, rated_power: Floats, largest_power: Floats, series: str) -> Floats:
    """Smallest standard nameplate [W] that covers both powers; +inf where none does.

    rated_power   : [W] at the rated duty: the nameplate covers it times `band` of that nameplate
    largest_power : [W] in any state: the nameplate covers it as it is
    series        : name in `tables.motors`, else ValueError
    Any shapes that broadcast. NaN where a power is NaN.

    >>> rated, largest = np.array([12e3, 16e3]), np.array([13e3, 31e3])
    >>> smallest_nameplate(rated_power=rated, largest_power=largest, series="IEC")
    array([15000., 37000.])
    """
    sizes = nameplates(series)
    covered = sizes / band(nameplate=sizes)  # rises along both series, so the first that covers is the least
    first = np.maximum(
        np.searchsorted(covered, rated_power * (1 - _ROUNDING)),
        np.searchsorted(sizes, largest_power * (1 - _ROUNDING)),
    )
    unknown = np.isnan(rated_power) | np.isnan(largest_power)
    return np.where(unknown, np.nan, np.append(sizes, np.inf)[first])
