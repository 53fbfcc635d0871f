"""Published figures of heating. [V] two sources or recomputed here, [D] derived here."""

from __future__ import annotations

import numpy as np
import pytest

from screener.hydraulics.heating import dead_head_heating_rate, temperature_rise, thermal_minimum_flow

FOOT = 0.3048
HORSEPOWER = 745.6999
GALLON_PER_MINUTE = 6.309020e-5
BTU_PER_POUND_FAHRENHEIT = 4186.8


@pytest.mark.parametrize(
    ("head", "efficiency", "fahrenheit", "rounding"),
    # rise through the pump, water: 5000 ft at 80 % 1.6 degF, 92 ft at 70 % 0.05 degF [V]
    [(5000.0, 0.80, 1.6, 0.05), (92.0, 0.70, 0.05, 0.005)],
)
def test_rise_through_the_pump(head: float, efficiency: float, fahrenheit: float, rounding: float) -> None:
    rise = temperature_rise(
        head=np.array(head * FOOT),
        efficiency=np.array(efficiency),
        heat_capacity=np.array(BTU_PER_POUND_FAHRENHEIT),
    )
    assert rise * 1.8 == pytest.approx(fahrenheit, abs=rounding)


@pytest.mark.parametrize(
    ("fahrenheit", "constant"),
    # gpm = bhp / (constant cp SG): 10 degF 1.96, 15 degF 2.95, 20 degF 3.93 [V]; three figures
    [(10.0, 1.96), (15.0, 2.95), (20.0, 3.93)],
)
def test_thermal_minimum_flow_in_us_units(fahrenheit: float, constant: float) -> None:
    flow = thermal_minimum_flow(
        power=np.array(100 * HORSEPOWER),
        density=np.array(999.0),
        heat_capacity=np.array(BTU_PER_POUND_FAHRENHEIT),
        temperature_rise=np.array(fahrenheit / 1.8),
    )
    assert flow / GALLON_PER_MINUTE == pytest.approx(100 / constant, rel=5e-3)


def test_thermal_minimum_flow() -> None:
    # 100 kW, 8 K, 998.2 kg/m3, 4184 J/(kg K): 10.775 m3/h [D]
    flow = thermal_minimum_flow(
        power=np.array(100e3),
        density=np.array(998.2),
        heat_capacity=np.array(4184.0),
        temperature_rise=np.array(8.0),
    )
    assert flow * 3600 == pytest.approx(10.775, abs=5e-4)


def test_dead_headed() -> None:
    # 15 kW into 20 kg of water: 10.755 K/min, 446 s from 20 to 100 degC [D]
    rate = dead_head_heating_rate(power=np.array(15e3), mass=np.array(20.0), heat_capacity=np.array(4184.0))
    assert rate * 60 == pytest.approx(10.755, abs=5e-4)
    assert 80 / rate == pytest.approx(446, abs=0.5)
