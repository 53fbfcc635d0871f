from __future__ import annotations

import numpy as np
import pytest

from screener.model.tables.motors import SERIES, nameplates


def test_the_series() -> None:
    assert SERIES == ("IEC", "NEMA")


@pytest.mark.parametrize("series", SERIES)
def test_a_series_rises_is_in_watt_and_refuses_to_be_written(series: str) -> None:
    sizes = nameplates(series)
    assert np.all(np.diff(sizes) > 0)
    assert 100 < sizes[0] < 1000 < 300e3 < sizes[-1] <= 500e3
    with pytest.raises(ValueError, match="read-only"):
        sizes[0] = 1.0


def test_an_unknown_series_is_answered_with_those_there_are() -> None:
    with pytest.raises(ValueError, match="no motor series 'iec'; the series are IEC, NEMA"):
        nameplates("iec")
