"""How fast a pump warms the liquid that passes through it, or that is shut in it."""

from __future__ import annotations

import numpy as np

from screener.hydraulics.constants import GRAVITY
from screener.hydraulics.liquids import water
from screener.model.arrays import Floats, Real


def temperature_rise(*, head: Real, efficiency: Real, heat_capacity: Real) -> Floats:
    """Temperature rise of the liquid through the pump [K]: (g H / cp) (1 / efficiency - 1).

    head : [m].  efficiency : [-], 0 gives +inf.  heat_capacity : [J/(kg K)].  Any shapes that broadcast.
    Source: heat balance; heat of compression and heat lost by the casing are left out.

    >>> kelvin = temperature_rise(head=np.array(1524.0), efficiency=np.array(0.80),
    ...                           heat_capacity=np.array(4187.0))   # 5000 ft at 80 %: 1.6 degF
    >>> float((kelvin * 1.8).round(1))
    1.6
    """
    with np.errstate(divide="ignore"):
        return np.asarray(GRAVITY * head / heat_capacity * (1 / np.asarray(efficiency) - 1))


def thermal_minimum_flow(
    *, power: Real, density: Real, heat_capacity: Real, temperature_rise: Real
) -> Floats:
    """Flow [m3/s] that carries away the whole shaft power with the rise allowed: P / (rho cp dT).

    power : [W] at the shaft.  density : [kg/m3].  heat_capacity : [J/(kg K)].  temperature_rise : [K], > 0.
    Any shapes that broadcast. Safe: the share of the power that leaves as head is not credited.
    Source: the US form gpm = bhp / (2.95 cp SG) for 15 degF.

    >>> flow = thermal_minimum_flow(power=np.array(100e3), density=np.array(998.2),
    ...                             heat_capacity=np.array(4184.0), temperature_rise=np.array(8.0))
    >>> float((flow * 3600).round(3))   # m3/h
    10.775
    """
    return np.asarray(power / (density * heat_capacity * temperature_rise))


def dead_head_heating_rate(*, power: Real, mass: Real, heat_capacity: Real) -> Floats:
    """Heating rate [K/s] of a pump running against a closed valve: P / (m cp).

    power : [W] at zero flow.  mass : [kg] of liquid in the casing.  heat_capacity : [J/(kg K)].
    Any shapes that broadcast. Safe: the casing's own heat capacity is not credited.
    Source: heat balance.

    >>> rate = dead_head_heating_rate(power=np.array(15e3), mass=np.array(20.0),
    ...                               heat_capacity=np.array(4184.0))
    >>> float((rate * 60).round(3))   # K/min
    10.755
    """
    return np.asarray(power / (mass * heat_capacity))


def time_to_boil(*, power: Real, mass: Real, heat_capacity: Real, start: Real, boiling: Real) -> Floats:
    """Time [s] in which a pump running against a closed valve brings its liquid to the boil.

    power : [W] at zero flow.  mass : [kg] of liquid in the casing.  heat_capacity : [J/(kg K)].
    start, boiling : [degC] of the liquid, and at which it boils; 0 s where it is as hot already.
    Any shapes that broadcast. Safe: only the liquid in the casing is warmed, nothing is credited to the
    metal or lost to the surroundings.
    Source: heat balance.

    >>> seconds = time_to_boil(power=np.array(15e3), mass=np.array(20.0), heat_capacity=np.array(4184.0),
    ...                        start=np.array(20.0), boiling=np.array(100.0))
    >>> float(seconds.round(0))
    446.0
    """
    rate = dead_head_heating_rate(power=power, mass=mass, heat_capacity=heat_capacity)
    with np.errstate(divide="ignore"):
        return np.asarray(np.maximum(np.subtract(boiling, start), 0.0) / rate)


def boiling_temperature(*, pressure: Floats) -> Floats:
    """Temperature at which water boils [degC], the inverse of `liquids.water.vapour_pressure`.

    pressure : [Pa absolute], any shape; NaN where water would boil outside 0 to 200 degC.
    Source: as that function.

    >>> boiling_temperature(pressure=np.array([2339.2, 101325.0, 2e6])).round(2)
    array([20.  , 99.97,   nan])
    """
    low, high = np.full_like(pressure, water.LOWEST), np.full_like(pressure, water.HIGHEST)
    outside = (pressure < water.vapour_pressure(temperature=low)) | (
        pressure > water.vapour_pressure(temperature=high)
    )
    for _ in range(60):
        middle = (low + high) / 2
        colder = water.vapour_pressure(temperature=middle) < pressure
        low, high = np.where(colder, middle, low), np.where(colder, high, middle)
    return np.where(outside | np.isnan(pressure), np.nan, (low + high) / 2)
