from __future__ import annotations

import math

import numpy as np
import pytest

from screener.hydraulics.liquids import water
from screener.model.case import Liquid

FUNCTIONS = [water.vapour_pressure, water.density, water.viscosity, water.heat_capacity]


def test_a_liquid_carries_its_name_its_temperature_and_plain_numbers() -> None:
    liquid = water.water(name="condensate", temperature=95.0)
    assert isinstance(liquid, Liquid)
    assert (liquid.name, liquid.temperature) == ("condensate", 95.0)
    figures = (liquid.density, liquid.viscosity, liquid.vapour_pressure, liquid.heat_capacity)
    assert all(type(figure) is float for figure in figures)


def test_each_figure_is_in_its_own_place() -> None:
    liquid = water.water(name="", temperature=20.0)
    assert 990 < liquid.density < 1000
    assert 0.9e-6 < liquid.viscosity < 1.1e-6
    assert 2e3 < liquid.vapour_pressure < 3e3
    assert 4100 < liquid.heat_capacity < 4300


@pytest.mark.parametrize("temperature", [-0.001, 200.001, math.nan, math.inf])
def test_outside_its_range_it_says_what_is_allowed(temperature: float) -> None:
    with pytest.raises(ValueError, match=f"water at {temperature:g} degC.*within 0 to 200 degC"):
        water.water(name="x", temperature=temperature)


@pytest.mark.parametrize("function", FUNCTIONS)
def test_one_bad_temperature_among_good_ones_is_named(function) -> None:
    with pytest.raises(ValueError, match="water at 250 degC"):
        function(temperature=np.array([20.0, 250.0]))


@pytest.mark.parametrize("temperature", [0.0, 200.0])
def test_the_ends_of_the_range_belong_to_it(temperature: float) -> None:
    assert water.water(name="x", temperature=temperature).density > 800


@pytest.mark.parametrize("function", FUNCTIONS)
def test_shape_is_kept_and_the_input_is_left_alone(function) -> None:
    temperature = np.array([[10.0, 20.0, 30.0], [40.0, 50.0, 60.0]])
    temperature.flags.writeable = False
    values = function(temperature=temperature)
    assert values.shape == (2, 3)
    assert values[1, 2] == pytest.approx(function(temperature=np.array(60.0)), rel=1e-12)


def test_hotter_water_boils_sooner_flows_easier_and_is_lighter() -> None:
    temperature = np.linspace(5, 200, 100)
    assert np.all(np.diff(water.vapour_pressure(temperature=temperature)) > 0)
    assert np.all(np.diff(water.density(temperature=temperature)) < 0)
    assert np.all(np.diff(water.viscosity(temperature=temperature)) < 0)
