"""Water at saturation, from its temperature alone, 0 to 200 degC.

Sources: IAPWS SR1-86(1992), supplementary release on saturation properties of ordinary water (W. Wagner and
A. Pruss, J. Phys. Chem. Ref. Data 22 (1993) 783), for pressure, density and enthalpy; IAPWS R12-08, release
on the viscosity of ordinary water, without its critical enhancement, which matters near 374 degC only.

Within 0 to 200 degC of IAPWS-95 (at most): pressure 0.01 %, density 0.003 %, viscosity 0.003 %, heat
capacity 0.05 %. At 0 degC, 0.01 K below the triple point, the equations are simply carried on.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from screener.model.arrays import Floats
from screener.model.case import Liquid

LOWEST, HIGHEST = 0.0, 200.0
"""[degC] for which this module answers."""

_CRITICAL_TEMPERATURE = 647.096  # K
_CRITICAL_PRESSURE = 22.064e6  # Pa
_CRITICAL_DENSITY = 322.0  # kg/m3

# (coefficient, exponent) of tau = 1 - T/Tc: SR1-86 equations 1 and 2
_PRESSURE = (
    (-7.85951783, 1.0),
    (1.84408259, 1.5),
    (-11.7866497, 3.0),
    (22.6807411, 3.5),
    (-15.9618719, 4.0),
    (1.80122502, 7.5),
)
_DENSITY = (
    (1.0, 0.0),
    (1.99274064, 1 / 3),
    (1.09965342, 2 / 3),
    (-0.510839303, 5 / 3),
    (-1.75493479, 16 / 3),
    (-45.5170352, 43 / 3),
    (-6.74694450e5, 110 / 3),
)
# (coefficient [J/kg], exponent) of theta = T/Tc: SR1-86 equation 4
_ALPHA = (
    (-1135.905627715e3, 0.0),
    (-5.65134998e-5, -19.0),
    (2690.66631e3, 1.0),
    (127.287297e3, 4.5),
    (-135.003439e3, 5.0),
    (0.981825814e3, 54.5),
)
# (coefficient, exponent) of Tc/T: R12-08 table 1
_DILUTE = ((1.67752, 0.0), (2.20462, 1.0), (0.6366564, 2.0), (-0.241605, 3.0))
# (coefficient, exponent of Tc/T - 1, exponent of rho/rhoc - 1): R12-08 table 2
_RESIDUAL = (
    (5.20094e-1, 0, 0),
    (8.50895e-2, 1, 0),
    (-1.08374, 2, 0),
    (-2.89555e-1, 3, 0),
    (2.22531e-1, 0, 1),
    (9.99115e-1, 1, 1),
    (1.88797, 2, 1),
    (1.26613, 3, 1),
    (1.20573e-1, 5, 1),
    (-2.81378e-1, 0, 2),
    (-9.06851e-1, 1, 2),
    (-7.72479e-1, 2, 2),
    (-4.89837e-1, 3, 2),
    (-2.57040e-1, 4, 2),
    (1.61913e-1, 0, 3),
    (2.57399e-1, 1, 3),
    (-3.25372e-2, 0, 4),
    (6.98452e-2, 3, 4),
    (8.72102e-3, 4, 5),
    (-4.35673e-3, 3, 6),
    (-5.93264e-4, 5, 6),
)


_STEP = 0.05  # K, of the differences in `heat_capacity`; 0.1 to 0.01 give the same to 1e-6


def water(*, name: str, temperature: float) -> Liquid:
    """Water at `temperature` [degC], as a liquid called `name`.

    ValueError outside 0 to 200 degC. Source: as the functions below.

    >>> liquid = water(name="condensate", temperature=60.0)
    >>> round(liquid.density, 1), round(liquid.vapour_pressure / 1000, 2)
    (983.2, 19.95)
    """
    at = np.array(temperature)
    return Liquid(
        name=name,
        temperature=temperature,
        density=float(density(temperature=at)),
        viscosity=float(viscosity(temperature=at)),
        vapour_pressure=float(vapour_pressure(temperature=at)),
        heat_capacity=float(heat_capacity(temperature=at)),
    )


def vapour_pressure(*, temperature: Floats) -> Floats:
    """Pressure at which water boils [Pa absolute].

    temperature : any shape [degC], 0 to 200, else ValueError. Source: SR1-86(1992), equation 1.

    >>> vapour_pressure(temperature=np.array([20.0, 80.0])).round(-1)
    array([ 2340., 47420.])
    """
    return _pressure(_kelvin(temperature))


def density(*, temperature: Floats) -> Floats:
    """Density of saturated liquid water [kg/m3].

    temperature : any shape [degC], 0 to 200, else ValueError. Source: SR1-86(1992), equation 2.

    >>> density(temperature=np.array([20.0, 80.0])).round(1)
    array([998.2, 971.8])
    """
    return _density(_kelvin(temperature))


def viscosity(*, temperature: Floats) -> Floats:
    """Kinematic viscosity of saturated liquid water [m2/s].

    temperature : any shape [degC], 0 to 200, else ValueError. Source: R12-08 over SR1-86(1992).

    >>> (viscosity(temperature=np.array([20.0, 80.0])) * 1e6).round(4)
    array([1.0035, 0.3643])
    """
    kelvin = _kelvin(temperature)
    rho = _density(kelvin)
    return _dynamic_viscosity(kelvin, rho) / rho


def heat_capacity(*, temperature: Floats) -> Floats:
    """Heat capacity cp of saturated liquid water [J/(kg K)].

    temperature : any shape [degC], 0 to 200, else ValueError. Source: SR1-86(1992), equations 4 and 6.

    The release gives the enthalpy along the saturation line, h = alpha + T v p', with v = 1/rho and ' for
    the slope along that line. As dh = cp dT + (v - T dv/dT) dp, cp = h' - v p' + T v' p', which is
    alpha' + (T/v) (v^2 p')'. The one approximation is dv/dT along the line for dv/dT at constant pressure:
    at most 0.05 % of cp up to 200 degC. (Stopping at h' - v p' would be 0.6 % low there.)

    >>> heat_capacity(temperature=np.array([20.0])).round(-1)
    array([4180.])
    """
    kelvin = _kelvin(temperature)
    slope = _slope(lambda at: _slope(_pressure, at) / _density(at) ** 2, kelvin)
    return _slope(_alpha, kelvin) + kelvin * _density(kelvin) * slope


def _kelvin(temperature: Floats) -> Floats:
    """Thermodynamic temperature [K] of `temperature` [degC]; ValueError where it is out of range."""
    inside = (temperature >= LOWEST) & (temperature <= HIGHEST)
    if not np.all(inside):
        wrong = np.extract(~inside, temperature)[0]
        raise ValueError(
            f"water at {wrong:g} degC: the temperature must be within {LOWEST:g} to {HIGHEST:g} degC"
        )
    return temperature + 273.15


def _series(terms: tuple[tuple[float, float], ...], x: Floats) -> Floats:
    """Sum of coefficient * x ** exponent."""
    total: Floats = np.sum([coefficient * x**exponent for coefficient, exponent in terms], axis=0)
    return total


def _pressure(kelvin: Floats) -> Floats:
    theta = kelvin / _CRITICAL_TEMPERATURE
    return _CRITICAL_PRESSURE * np.exp(_series(_PRESSURE, 1 - theta) / theta)


def _density(kelvin: Floats) -> Floats:
    return _CRITICAL_DENSITY * _series(_DENSITY, 1 - kelvin / _CRITICAL_TEMPERATURE)


def _alpha(kelvin: Floats) -> Floats:
    return _series(_ALPHA, kelvin / _CRITICAL_TEMPERATURE)


def _dynamic_viscosity(kelvin: Floats, density: Floats) -> Floats:
    """Dynamic viscosity [Pa s]: R12-08, equations 11 and 12."""
    inverse = _CRITICAL_TEMPERATURE / kelvin
    ratio = density / _CRITICAL_DENSITY
    dilute = 1e-4 / np.sqrt(inverse) / _series(_DILUTE, inverse)
    residual: Floats = np.sum([h * (inverse - 1) ** i * (ratio - 1) ** j for h, i, j in _RESIDUAL], axis=0)
    return dilute * np.exp(ratio * residual)


def _slope(function: Callable[[Floats], Floats], at: Floats) -> Floats:
    """Slope of `function`, by a central difference."""
    return (function(at + _STEP) - function(at - _STEP)) / (2 * _STEP)
