"""Bore of a sharp-edged orifice plate that burns a head, by ISO 5167-2; needs the extra `orifice`.

ISO 5167-2 is a standard for metering: the difference between its pressure taps is partly recovered
downstream. What an orifice burns is the permanent loss, so that is what is set equal to the head here, by the
relation that the same standard gives. Metering also bounds the pressure difference and the roughness of the
pipe; a plate that only burns head may exceed them, at the price of some accuracy of its flow.

Not checked: whether the liquid flashes or cavitates in the plate, which at high heads it often does. Then the
head is burned in several stages, or in a valve made for it.
"""

from __future__ import annotations

import math

from screener.errors import Problem, UsageError
from screener.hydraulics.constants import GRAVITY

SMALLEST_PIPE, LARGEST_PIPE = 0.05, 1.0
"""[m] inside diameters of pipe for which the standard holds."""

_SMALLEST_BORE = 0.0125  # m
_SMALLEST_RATIO, _LARGEST_RATIO = 0.10, 0.75


class MissingExtra(UsageError):
    """A library that the user has not asked for at installation is needed."""


def bore(*, flow: float, head: float, density: float, viscosity: float, pipe_diameter: float) -> float:
    """Bore [m] of an orifice plate in which a flow burns a head for good.

    flow          : [m3/s]
    head          : [m] of the liquid, the permanent loss of the plate
    density       : [kg/m3];  viscosity : [m2/s] kinematic
    pipe_diameter : [m] inside
    Returns NaN outside what the standard covers: pipe 50 mm to 1 m, bore 12.5 mm or more, bore over pipe
    0.10 to 0.75, Reynolds number of the pipe 5000 or more, and 16000 (bore / pipe)^2 where that is more and
    the ratio is above 0.56.
    MissingExtra where the library `fluids` is not installed.
    Source: ISO 5167-2:2003, clauses 5.3.1, 5.3.2.1 (Reader-Harris/Gallagher, corner taps) and 5.4.

    >>> found = bore(flow=40 / 3600, head=651.0, density=998.2, viscosity=1.0e-6, pipe_diameter=0.0686)
    >>> round(1000 * found, 1)   # mm
    14.3
    """
    try:
        from fluids.flow_meter import C_Reader_Harris_Gallagher, dP_orifice
    except ImportError as error:
        hint = "pip install 'pump-header-screener[orifice]'"
        raise MissingExtra([Problem("", 0, 0, "orifice bores need the library fluids", hint)]) from error
    from scipy.optimize import brentq

    mass = density * flow

    def burned(diameter: float) -> float:
        """Permanent loss less the loss wanted [Pa]."""
        coefficient = C_Reader_Harris_Gallagher(
            D=pipe_diameter, Do=diameter, rho=density, mu=density * viscosity, m=mass, taps="corner"
        )
        area, ratio = math.pi / 4 * diameter**2, diameter / pipe_diameter
        measured = (mass / (coefficient * area)) ** 2 * (1 - ratio**4) / (2 * density)
        lost = dP_orifice(D=pipe_diameter, Do=diameter, P1=measured, P2=0.0, C=coefficient)
        return float(lost - density * GRAVITY * head)

    if not (flow > 0 and head > 0 and SMALLEST_PIPE <= pipe_diameter <= LARGEST_PIPE):
        return math.nan
    least, most = _SMALLEST_RATIO * pipe_diameter, _LARGEST_RATIO * pipe_diameter
    if not burned(least) >= 0 >= burned(most):
        return math.nan
    found = float(brentq(burned, least, most, xtol=1e-12))
    reynolds = flow / (math.pi / 4 * pipe_diameter * viscosity)
    ratio = found / pipe_diameter
    inside = found >= _SMALLEST_BORE and reynolds >= (max(5000, 16000 * ratio**2) if ratio > 0.56 else 5000)
    return found if inside else math.nan
