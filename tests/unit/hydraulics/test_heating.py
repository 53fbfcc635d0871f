from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.heating import (
    boiling_temperature,
    dead_head_heating_rate,
    temperature_rise,
    thermal_minimum_flow,
    time_to_boil,
)


def test_rise_of_round_numbers() -> None:
    # 9.80665 * 100 / 980.665 = 1 K of head; twice that goes in at 50 %
    rise = temperature_rise(
        head=np.array(100.0), efficiency=np.array([0.5, 0.25, 1.0]), heat_capacity=np.array(980.665)
    )
    np.testing.assert_allclose(rise, [1, 3, 0], atol=1e-12)


def test_no_efficiency_warms_without_end() -> None:
    rise = temperature_rise(
        head=np.array([50.0]), efficiency=np.array([0.0]), heat_capacity=np.array([4184.0])
    )
    assert rise[0] == np.inf


def test_unknown_efficiency_stays_unknown() -> None:
    rise = temperature_rise(
        head=np.array([50.0]), efficiency=np.array([np.nan]), heat_capacity=np.array([4184.0])
    )
    assert np.isnan(rise[0])


def test_minimum_flow_goes_with_power_and_against_the_rise() -> None:
    flow = thermal_minimum_flow(
        power=np.array([8e6, 16e6, np.nan]),
        density=np.array(1000.0),
        heat_capacity=np.array(4000.0),
        temperature_rise=np.array([[2.0], [4.0]]),
    )
    np.testing.assert_allclose(flow, [[1.0, 2.0, np.nan], [0.5, 1.0, np.nan]])


def test_a_heavier_filling_warms_slower() -> None:
    rate = dead_head_heating_rate(
        power=np.array(8000.0), mass=np.array([1.0, 4.0]), heat_capacity=np.array(4000.0)
    )
    assert rate == pytest.approx([2.0, 0.5])


def test_time_to_boil_is_heat_over_power() -> None:
    # 2 kg at 4000 J/(kg K) from 20 to 120 degC take 800 kJ: 100 s at 8 kW; a hotter filling boils at once
    seconds = time_to_boil(
        power=np.array([8000.0, 8000.0, 0.0, np.nan]),
        mass=np.array(2.0),
        heat_capacity=np.array(4000.0),
        start=np.array([20.0, 130.0, 20.0, 20.0]),
        boiling=np.array(120.0),
    )
    np.testing.assert_allclose(seconds, [100, 0, np.inf, np.nan])


def test_boiling_temperature_against_another_implementation() -> None:
    from iapws.iapws97 import _TSat_P

    pressure = np.array([800.0, 2339.2, 101325.0, 1e6, 1.5e6])
    found = boiling_temperature(pressure=pressure)
    np.testing.assert_allclose(found, [_TSat_P(p / 1e6) - 273.15 for p in pressure], atol=0.02)


def test_no_boiling_temperature_outside_0_to_200() -> None:
    assert np.isnan(boiling_temperature(pressure=np.array([600.0, 1.56e6, np.nan, -1.0]))).all()
