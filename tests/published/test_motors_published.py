"""Published motor sizes and driver margins. [V] two sources or recomputed here, [M] from memory."""

from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.motor import band
from screener.model.tables.motors import nameplates

HORSEPOWER = 745.69987

# 10 CFR 431.25, tables of full-load efficiencies: hp and the kW printed beside it [V]
US_PRINTED = {
    1: 0.75, 1.5: 1.1, 2: 1.5, 3: 2.2, 5: 3.7, 7.5: 5.5, 10: 7.5, 15: 11, 20: 15, 25: 18.5, 30: 22, 40: 30,
    50: 37, 60: 45, 75: 55, 100: 75, 125: 90, 150: 110, 200: 150,
}  # fmt: skip
US_LARGE = {250: 186, 300: 224, 350: 261, 400: 298, 450: 336, 500: 373}  # [M]

# IEC 60072-1 preferred outputs, kW; [V] up to 55, [M] above
IEC = """
    .12 .18 .25 .37 .55 .75 1.1 1.5 2.2 3 4 5.5 7.5 11 15 18.5 22 30 37 45 55
    75 90 110 132 160 200 250 315 355 400 450 500
"""


def test_us_sizes() -> None:
    printed = US_PRINTED | US_LARGE
    np.testing.assert_allclose(nameplates("NEMA") / HORSEPOWER, list(printed), rtol=1e-7)
    # the printed kW are rounded to a size in use
    np.testing.assert_allclose(nameplates("NEMA") / 1000, list(printed.values()), rtol=0.036)


def test_iec_sizes() -> None:
    np.testing.assert_allclose(nameplates("IEC") / 1000, [float(size) for size in IEC.split()], rtol=1e-12)


@pytest.mark.parametrize(
    ("horsepower", "margin"),
    # ISO 13709 (API 610), driver margins: up to 25 hp, 30 to 75 hp, from 100 hp [V]
    [(1, 1.25), (25, 1.25), (30, 1.15), (75, 1.15), (100, 1.10), (500, 1.10)],
)
def test_margin_in_horsepower(horsepower: float, margin: float) -> None:
    assert band(nameplate=np.array(horsepower * HORSEPOWER)) == margin


@pytest.mark.parametrize(
    ("kilowatt", "margin"),
    # the same in kW: below 22, 22 to 55, above 55 [M]
    [(0.12, 1.25), (18.5, 1.25), (22, 1.15), (55, 1.15), (75, 1.10)],
)
def test_margin_in_kilowatt(kilowatt: float, margin: float) -> None:
    assert band(nameplate=np.array(kilowatt * 1000)) == margin
