"""Array types, and the one way to make an array that nobody can change."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]
Codes = NDArray[np.int8]

Real = Floats | float
"""What a formula takes where one figure may hold for all."""

STATIONS = 65
"""Stations of a curve, evenly spaced from its first to its last: they keep a head within 6e-5 of its fall."""


def frozen(values: Any, dtype: Any = np.float64) -> NDArray[Any]:
    """Return `values` as an array of `dtype` that refuses to be written."""
    array = np.array(values, dtype=dtype)
    array.flags.writeable = False
    return array
