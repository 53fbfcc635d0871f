"""Acceptance grades of pump tests: how far the head may lie from the guarantee.

Status of the values: [1] one source, [M] from memory.
"""

from __future__ import annotations

# (low, high) as fractions of the guaranteed head
_HEAD = {
    # ISO 9906:2012, acceptance grades [M]
    "1U": (0.00, 0.06),
    "1E": (-0.03, 0.03),
    "1B": (-0.03, 0.03),
    "2B": (-0.05, 0.05),
    "2U": (0.00, 0.10),
    "3B": (-0.07, 0.07),
    # ISO 9906:1999, classes [1]; its wider +-8 % for driver inputs up to 10 kW is not in this table
    "1": (-0.03, 0.03),
    "2": (-0.05, 0.05),
}
GRADES = tuple(_HEAD)
"""Names of the grades (2012) and classes (1999)."""


def head_tolerance(grade: str) -> tuple[float, float]:
    """Lowest and highest deviation of the head, as fractions of its guarantee.

    A grade holds at the guarantee point only. ValueError for a grade that is not in `GRADES`.

    >>> head_tolerance("2B")
    (-0.05, 0.05)
    """
    if grade not in _HEAD:
        raise ValueError(f"no acceptance grade {grade!r}; the grades are {', '.join(GRADES)}")
    return _HEAD[grade]
