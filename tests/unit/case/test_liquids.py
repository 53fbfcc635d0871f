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


@pytest.mark.parametrize(
    ("viscosity", "viscous"), [("1 cSt", False), ("0.0000010 m2/s", False), ("1.1 cSt", True)]
)
def test_above_1_cst_curves_are_corrected(read: Read, viscosity: str, viscous: bool) -> None:
    assert read(("1 cSt", viscosity)).liquids[0].viscous == viscous


def test_water_is_never_corrected(read: Read) -> None:
    # at 5 degC water has about 1.5 cSt [M]; curves are measured with water at whatever temperature it has
    (liquid,) = read((WATER, '{ name = "river", kind = "water", temperature = "5 degC" }')).liquids
    assert liquid.viscosity > 1.4e-6
    assert not liquid.viscous


def test_a_temperature_is_for_readers_only(read: Read) -> None:
    (liquid,) = read(("1 cSt", '100 cSt", temperature = "104 degF')).liquids
    assert (liquid.temperature, liquid.viscous) == (40.0, True)
    assert (liquid.density, liquid.vapour_pressure) == (1000.0, 2000.0)


def test_viscosity_up_to_what_the_method_covers(problems: Problems) -> None:
    big = "{ speed = 1450, flow = [0, 500, 1000], head = [60, 50, 30], bep_flow = 700 }"
    pumps = ('{ pump = "with trims", diameter = 200 }', big), ('{ pump = "plain" }', big)
    # ANSI/HI 9.6.7: 1 to 4000 cSt [V]
    assert problems(*pumps, ("1 cSt", "4000 cSt"), ('"peak"', '"day"')) == ["name 'day' is there twice"]
    assert problems(*pumps, ("1 cSt", "4001 cSt")) == ["viscosity is 4001 cSt"]


def test_only_pumps_that_pump_it_must_be_correctable(read: Read, problems: Problems) -> None:
    blank = ('{ pump = "plain" }', "{ speed = 1450, flow = [0, 90, 180], head = [50, 45, 30] }")
    oil = WATER.replace('"water"', '"oil"').replace("1 cSt", "100 cSt")
    two = (WATER, f"{WATER}, {oil}")
    first = ('running = ["P-1", "P-2", "new"]', 'running = ["P-1", "new"], liquid = "oil"')
    assert read(blank, two, first).liquids[1].viscous
    turns = ("running = { any = 1, new = true }", 'running = { any = 1, new = true }, liquid = "oil"')
    assert problems(blank, two, turns) == [
        "the curve of 'P-2' cannot be corrected for 100 cSt: its flow of best efficiency is not known"
    ]


@pytest.mark.parametrize(
    ("old", "new", "what"),
    [
        ("1000 kg/m3", "299 kg/m3", "density is 299 kg/m3"),
        ("1000 kg/m3", "3001 kg/m3", "density is 3001 kg/m3"),
        ("4.18 kJ", "0.49 kJ", "heat_capacity is 0.49 kJ/(kg K)"),
        ("4.18 kJ", "11 kJ", "heat_capacity is 11 kJ/(kg K)"),
        ("1 cSt", '1 cSt", temperature = "1001 degC', "temperature is 1001 degC"),
        (
            "1 cSt",
            '1 cSt", kind = "water", temperature = "20 degC',
            'kind = "water" and density are both given',
        ),
    ],
)
def test_slips_of_the_pen(problems: Problems, old: str, new: str, what: str) -> None:
    assert what in problems((old, new))


def test_the_ends_of_what_is_plausible(read: Read) -> None:
    for density in ("300 kg/m3", "3000 kg/m3"):
        assert read(("1000 kg/m3", density)).liquids[0].density == pytest.approx(float(density.split()[0]))
    for capacity in ("0.5 kJ", "10 kJ"):
        heat = read(("4.18 kJ", capacity)).liquids[0].heat_capacity
        assert heat == pytest.approx(1000 * float(capacity.split()[0]))


def test_a_liquid_that_boils_in_the_suction_vessel(read: Read, problems: Problems) -> None:
    # [D] 101.325 kPa and 1 % for rounding: 102.34 kPa; with 100 kPa gauge on one of two levels 203.3 kPa
    assert read(("2 kPa", "102.3 kPa")).liquids[0].vapour_pressure == pytest.approx(102300)
    assert problems(("2 kPa", "102.4 kPa")) == [
        "'water' boils in the suction vessel: its vapour pressure is 1.024 bar absolute"
    ]
    closed = ("static_head = 26", 'static_head = 26, vessel_pressure = "100 kPa gauge"')
    assert read(("2 kPa", "203 kPa"), closed).liquids
    assert problems(("2 kPa", "204 kPa"), closed) == [
        "'water' boils in the suction vessel: its vapour pressure is 2.04 bar absolute"
    ]
    hot = (WATER, '{ name = "hot", kind = "water", temperature = "121 degC" }')
    assert len(problems(hot, closed)) == 1


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
    assert problems(
        (WATER, f"{spare}, {WATER}"),
        ("flow = 360, running", 'flow = 360, liquid = "water", running'),
        ("flow = 180, running", 'flow = 180, liquid = "water", running'),
    ) == ["no duty pumps 'hot'"]
