"""Trim laws by name: how flow and head follow the diameter to which an impeller is cut.

Q ~ x^a and H ~ x^b with x = sqrt(D^2 - D1^2). D1 is the inlet diameter of the impeller in the law that uses
it, and 0 in the others, where x is the diameter itself.
Status of the values: [V] two sources, [1] one source, [M] from memory.
"""

from __future__ import annotations

AFFINITY = "affinity"
EQUAL_EXPONENTS = "equal exponents"
ISO_9906 = "ISO 9906 inlet diameter"

_EXPONENTS = {
    # Q ~ D, H ~ D^2 [V], as Lobanoff and Ross, Centrifugal Pumps, 2nd ed., p. 19, who correct it: the real
    # impeller gives less
    AFFINITY: (1.0, 2.0),
    # Q ~ D^m, H ~ D^m with m from 2 to 3 [M: J. F. Guelich, Centrifugal Pumps, edition not at hand]; the
    # middle where no exponent is stated is ours
    EQUAL_EXPONENTS: (2.5, 2.5),
    # Q ~ R, H ~ R^2 with R = sqrt((Dr^2 - D1^2) / (Dt^2 - D1^2)) [M: ISO 9906:2012, trim rule]; meant for
    # cuts up to 5 % and type numbers up to 1.5 [1]
    ISO_9906: (1.0, 2.0),
}
NAMES = tuple(_EXPONENTS)
"""Names of the laws."""


def exponents(name: str) -> tuple[float, float]:
    """Exponents of flow and head of a law. ValueError for a law that is not in `NAMES`.

    >>> exponents("affinity")
    (1.0, 2.0)
    """
    if name not in _EXPONENTS:
        raise ValueError(f"no trim law {name!r}; the laws are {', '.join(NAMES)}")
    return _EXPONENTS[name]
