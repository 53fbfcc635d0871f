"""Standard nameplate powers of motors.

Status of the values: [V] checked against a publication, [M] from memory.
"""

from __future__ import annotations

from screener.model.arrays import Floats, frozen

_HORSEPOWER = 745.6998715822702  # W, 550 ft lbf/s

# IEC 60072-1, preferred rated outputs [W]
_IEC = (
    *(120, 180, 250, 370, 550, 750, 1_100, 1_500, 2_200, 3_000, 4_000, 5_500, 7_500),  # [V]
    *(11_000, 15_000, 18_500, 22_000, 30_000, 37_000, 45_000, 55_000),  # [V]
    *(75_000, 90_000, 110_000, 132_000, 160_000, 200_000, 250_000),  # [M]
    *(315_000, 355_000, 400_000, 450_000, 500_000),  # [M]
)
# 10 CFR 431.25 [hp]
_NEMA = (
    *(1, 1.5, 2, 3, 5, 7.5, 10, 15, 20, 25, 30, 40, 50, 60, 75, 100, 125, 150, 200),  # [V]
    *(250, 300, 350, 400, 450, 500),  # [M]
)

_SERIES = {
    "IEC": frozen(_IEC),
    "NEMA": frozen([_HORSEPOWER * horsepower for horsepower in _NEMA]),
}
SERIES = tuple(_SERIES)
"""Names of the series."""


def nameplates(series: str) -> Floats:
    """Nameplate powers of a series, rising [W], frozen. ValueError for a series that is not in `SERIES`.

    >>> nameplates("IEC")[-3:]
    array([400000., 450000., 500000.])
    """
    if series not in _SERIES:
        raise ValueError(f"no motor series {series!r}; the series are {', '.join(SERIES)}")
    return _SERIES[series]
