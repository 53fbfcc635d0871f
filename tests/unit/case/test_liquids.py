"""Site and liquids."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from screener.model.case import Case

Read = Callable[..., Case]
Problems = Callable[..., list[str]]
WATER = (
    '{ name = "water", density = "1000 kg/m3", viscosity = "1 cSt", vapour_pressure = "2 kPa", '
    'heat_capacity = "4.18 kJ/(kg K)" }'
)


def test_liquid_by_its_properties(read: Read) -> None:
    (liquid,) = read().liquids
    assert (liquid.name, liquid.density, liquid.heat_capacity) == ("water", 1000.0, 4180.0)
    assert liquid.viscosity == pytest.approx(1e-6)
    assert liquid.vapour_pressure == pytest.approx(2000.0)
    assert math.isnan(liquid.temperature)


def test_water_follows_from_its_temperature(read: Read) -> None:
    (liquid,) = read((WATER, '{ name = "river", kind = "water", temperature = "68 degF" }')).liquids
    assert (liquid.name, liquid.temperature) == ("river", 20.0)
    # IAPWS SR1-86 at 20 degC: 998.2 kg/m3, 2339 Pa [V]
    assert liquid.density == pytest.approx(998.2, abs=0.1)
    assert liquid.vapour_pressure == pytest.approx(2339, abs=2)


def test_water_outside_its_range(problems: Problems) -> None:
    assert problems((WATER, '{ name = "steam", kind = "water", temperature = "230 degC" }')) == [
        "temperature is 230 degC"
    ]


def test_thin_liquids_only(read: Read, problems: Problems) -> None:
    assert read(("1 cSt", "4.3 cSt")).liquids[0].viscosity == pytest.approx(4.3e-6)
    assert problems(("1 cSt", "4.4 cSt")) == ["viscosity is 4.4 cSt"]


def test_vapour_pressure_is_absolute(problems: Problems) -> None:
    assert problems(("2 kPa", "2 kPa gauge")) == ["vapour_pressure is given as gauge pressure"]


def test_altitude(read: Read) -> None:
    # ISO 2533:1975, table, 1000 m: 89875 Pa [M]
    assert read(("site = {}", 'site = { altitude = "1000 m" }')).atmospheric_pressure == pytest.approx(
        89875, abs=5
    )


def test_atmospheric_pressure(read: Read, problems: Problems) -> None:
    given = ("site = {}", 'site = { atmospheric_pressure = "992 mbar" }')
    assert read(given).atmospheric_pressure == pytest.approx(99200.0)
    both = ("site = {}", 'site = { altitude = "10 m", atmospheric_pressure = "992 mbar" }')
    assert problems(both) == ["altitude and atmospheric_pressure are both given"]


def test_a_liquid_that_no_duty_pumps(problems: Problems) -> None:
    spare = '{ name = "hot", kind = "water", temperature = "60 degC" }'
    assert problems((WATER, f"{WATER}, {spare}")) == ["no duty pumps 'hot'"]
