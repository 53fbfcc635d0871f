"""Units: factors against their definitions, quantities as people write them, and every refusal."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener import units
from screener.units import Quantity, UnitError

# [D] exact arithmetic from definitions: foot 0.3048 m and pound 0.45359237 kg (international yard and pound
# agreement, 1959); standard gravity 9.80665 m/s2 (3rd CGPM, 1901); US gallon 231 in3 (NIST Handbook 44,
# appendix C); imperial gallon 4.54609 L (UK Units of Measurement Regulations 1995, schedule)
FOOT, INCH, POUND, GRAVITY = (
    Fraction("0.3048"),
    Fraction("0.0254"),
    Fraction("0.45359237"),
    Fraction("9.80665"),
)
US_GALLON, IMPERIAL_GALLON = 231 * INCH**3, Fraction("0.00454609")
EXACT = {
    ("m3/h", "flow"): Fraction(1, 3600),
    ("m3/s", "flow"): 1,
    ("L/s", "flow"): Fraction(1, 1000),
    ("L/min", "flow"): Fraction(1, 60000),
    ("US gpm", "flow"): US_GALLON / 60,
    ("imp gpm", "flow"): IMPERIAL_GALLON / 60,
    ("ML/d", "flow"): Fraction(1000, 86400),
    ("ft3/s", "flow"): FOOT**3,
    ("m", "head"): 1,
    ("ft", "head"): FOOT,
    ("W", "power"): 1,
    ("kW", "power"): 10**3,
    ("MW", "power"): 10**6,
    ("hp", "power"): 550 * FOOT * POUND * GRAVITY,
    ("PS", "power"): 75 * GRAVITY,
    ("mm", "length"): Fraction(1, 1000),
    ("cm", "length"): Fraction(1, 100),
    ("m", "length"): 1,
    ("in", "length"): INCH,
    ("ft", "length"): FOOT,
    ("Pa", "pressure"): 1,
    ("kPa", "pressure"): 10**3,
    ("MPa", "pressure"): 10**6,
    ("mbar", "pressure"): 100,
    ("bar", "pressure"): 10**5,
    ("kgf/cm2", "pressure"): GRAVITY * 10**4,
    ("psi", "pressure"): POUND * GRAVITY / INCH**2,
    ("K", "temperature"): 1,
    ("degC", "temperature"): 1,
    ("degF", "temperature"): Fraction(5, 9),
    ("kg/m3", "density"): 1,
    ("kg/L", "density"): 1000,
    ("lb/ft3", "density"): POUND / FOOT**3,
    ("m2/s", "viscosity"): 1,
    ("mm2/s", "viscosity"): Fraction(1, 10**6),
    ("cSt", "viscosity"): Fraction(1, 10**6),
    ("m3", "volume"): 1,
    ("L", "volume"): Fraction(1, 1000),
    ("ft3", "volume"): FOOT**3,
    ("US gal", "volume"): US_GALLON,
    ("imp gal", "volume"): IMPERIAL_GALLON,
    ("J/(kg K)", "heat_capacity"): 1,
    ("kJ/(kg K)", "heat_capacity"): 1000,
    ("J", "energy"): 1,
    ("kWh", "energy"): 3600 * 10**3,
    ("MWh", "energy"): 3600 * 10**6,
}


def test_every_row_of_the_table_has_its_definition_here():
    assert {(unit.name, unit.dimension) for unit in units.TABLE} == set(EXACT)


@pytest.mark.parametrize("unit", units.TABLE, ids=lambda unit: f"{unit.dimension} {unit.name}")
def test_factor_is_the_definition_to_the_last_digit_of_a_float(unit):
    exact = Fraction(EXACT[unit.name, unit.dimension])
    assert abs(Fraction(unit.scale) / exact - 1) <= Fraction(1, 2**52)


@pytest.mark.parametrize(
    ("value", "unit", "dimension", "si"),
    [
        # [V] NIST SP 811 (2008), appendix B.8, seven digits; from memory, recomputed by the table above
        (1, "US gpm", "flow", 6.309020e-5),
        (1, "ft3/s", "flow", 2.831685e-2),
        (1, "hp", "power", 7.456999e2),
        (1, "PS", "power", 7.354988e2),
        (1, "psi", "pressure", 6.894757e3),
        (1, "kgf/cm2", "pressure", 9.80665e4),
        (1, "lb/ft3", "density", 1.601846e1),
        (1, "cSt", "viscosity", 1e-6),
    ],
)
def test_published_factors(value, unit, dimension, si):
    assert units.to_si(value, unit, dimension) == pytest.approx(si, rel=1e-6)


@pytest.mark.parametrize(
    ("value", "unit", "kelvin"),
    [
        (0, "degC", 273.15),
        (100, "degC", 373.15),
        (32, "degF", 273.15),
        (212, "degF", 373.15),
        (-40, "degF", 233.15),
    ],
)
def test_temperatures_have_their_zero(value, unit, kelvin):
    # [V] SI Brochure (9th ed.), 2.3.1: t/degC = T/K - 273.15
    # [V] NIST SP 811 (2008), B.8: t/degC = (t/degF - 32)/1.8
    assert units.to_si(value, unit, "temperature") == pytest.approx(kelvin, rel=1e-15)
    assert units.from_si(kelvin, unit) == pytest.approx(value, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "dimension", "value", "gauge"),
    [
        ("750 m3/h", "flow", 750 / 3600, None),
        ("750 m³/h", "flow", 750 / 3600, None),
        ("750m3/h", "flow", 750 / 3600, None),
        ("  750   m^3 / h ", "flow", 750 / 3600, None),
        ("750\u00a0M3/H", "flow", 750 / 3600, None),
        ("3300 US gpm", "flow", 3300 * 6.30901964e-5, None),
        ("3300 usgpm", "flow", 3300 * 6.30901964e-5, None),
        ("120 l/s", "flow", 0.12, None),
        ("86.4 ML/d", "flow", 1.0, None),
        ("45 ft", "head", 13.716, None),
        ("-2.5 m", "head", -2.5, None),
        ("−2.5 m", "head", -2.5, None),
        ("+.5 m", "head", 0.5, None),
        ("5. m", "head", 5.0, None),
        ("160 hp", "power", 160 * 745.6998715822702, None),
        ("160 KW", "power", 160e3, None),
        ("1.2 MW", "power", 1.2e6, None),
        ("390 mm", "length", 0.39, None),
        ('10 "', "length", 0.254, None),
        ("12 degC", "temperature", 285.15, None),
        ("12 °C", "temperature", 285.15, None),
        ("12 C", "temperature", 285.15, None),
        ("998 kg/m3", "density", 998.0, None),
        ("1.0e-6 m2/s", "viscosity", 1e-6, None),
        ("1E-6 m²/s", "viscosity", 1e-6, None),
        ("1 cSt", "viscosity", 1e-6, None),
        ("4.18 kJ/(kg K)", "heat_capacity", 4180.0, None),
        ("4.18 kJ/( kg·K )", "heat_capacity", 4180.0, None),
        ("4.18 kJ/kgK", "heat_capacity", 4180.0, None),
        ("2 MWh", "energy", 7.2e9, None),
        ("2.5 bar", "pressure", 2.5e5, None),
        ("2.5 bar gauge", "pressure", 2.5e5, True),
        ("2.5 bar(g)", "pressure", 2.5e5, True),
        ("2.5 bar (gauge)", "pressure", 2.5e5, True),
        ("2.5 barg", "pressure", 2.5e5, True),
        ("2.5 bar g", "pressure", 2.5e5, True),
        ("36 PSIG", "pressure", 36 * 6894.757293168361, True),
        ("14.7 psia", "pressure", 14.7 * 6894.757293168361, False),
        ("101.3 kPa absolute", "pressure", 101300.0, False),
        ("101.3 kPa(a)", "pressure", 101300.0, False),
        ("101.3 kPa abs", "pressure", 101300.0, False),
        ("2 kg/cm2(g)", "pressure", 196133.0, True),
        ("5 Pa", "pressure", 5.0, None),
        ("5 Paa", "pressure", 5.0, False),
    ],
)
def test_quantities_as_people_write_them(text, dimension, value, gauge):
    quantity = units.parse(text, dimension)
    assert quantity == Quantity(pytest.approx(value, rel=1e-9), gauge)


@pytest.mark.parametrize(
    ("text", "dimension", "what", "hint"),
    [
        ("", "flow", "is not a quantity", "a number and a unit"),
        ("m3/h", "flow", "is not a quantity", "a number and a unit"),
        ("nan m", "head", "is not a quantity", "a number and a unit"),
        ("inf m", "head", "is not a quantity", "a number and a unit"),
        ("٣ m", "head", "is not a quantity", "a number and a unit"),
        ("750", "flow", "has no unit", "m3/h, m3/s, L/s"),
        ("7,5 m3/h", "flow", "comma", "no decimal comma"),
        ("2,5 bar", "pressure", "comma", "no decimal comma"),
        ("1,000.5 m3/h", "flow", "comma", "nothing between thousands"),
        ("1 000 m3/h", "flow", "not one number", "nothing between thousands"),
        ("1.2.3 m", "head", "not one number", ""),
        ("1_000 m", "head", "unknown unit", ""),
        ("1e999 m", "head", "too large", ""),
        ("1e305 MW", "power", "too large", ""),
        ("5 m - 3", "head", "unknown unit of head 'm - 3'", ""),
        ("5 m m", "length", "unknown unit of length 'm m'", ""),
        ("3300 gpm", "flow", "'gpm' is not one unit", "US gpm or imp gpm"),
        ("3300 GPM", "flow", "'GPM' is not one unit", "US gpm or imp gpm"),
        ("5 mW", "power", "unknown unit of power 'mW'", "W, kW, MW, hp, PS"),
        ("5 Mbar", "pressure", "unknown unit of pressure 'Mbar'", "did you mean 'mbar'?"),
        ("5 mpa", "pressure", "unknown unit of pressure 'mpa'", "did you mean"),
        ("5 Mm", "length", "unknown unit of length 'Mm'", ""),
        ("5 ml/d", "flow", "unknown unit of flow 'ml/d'", "ML/d"),
        ("5 ps", "power", "unknown unit of power 'ps'", "PS"),
        ("5 k", "temperature", "unknown unit of temperature 'k'", ""),
        ("5 m3/hh", "flow", "unknown unit of flow 'm3/hh'", "did you mean 'm3/h'?"),
        ("5 kJ/(kg C)", "heat_capacity", "unknown unit of heat capacity", "did you mean 'kJ/(kg K)'?"),
        ("5 kW", "flow", "'kW' is a unit of power, not of flow", "one of m3/h"),
        ("2 bar", "head", "'bar' is a unit of pressure, not of head", "one of m, ft"),
        ("2 m gauge", "head", "unknown unit of head 'm gauge'", ""),
        ("2 gauge", "pressure", "unknown unit of pressure 'gauge'", ""),
        ("2 barg gauge", "pressure", "unknown unit of pressure", ""),
    ],
)
def test_what_is_refused_says_why_and_what_is_allowed(text, dimension, what, hint):
    with pytest.raises(UnitError) as caught:
        units.parse(text, dimension)
    assert what in caught.value.what
    assert hint in caught.value.hint
    assert caught.value.what in str(caught.value)


@given(
    unit=st.sampled_from([unit for unit in units.TABLE if not unit.offset]),
    value=st.floats(-1e12, 1e12).filter(lambda value: value == 0 or abs(value) > 1e-12),
)
def test_there_and_back_is_the_same_number(unit, value):
    back = units.from_si(units.to_si(value, unit.name, unit.dimension), unit.name)
    assert abs(back - value) <= 2**-52 * abs(value)


@given(value=st.floats(-273, 2000), unit=st.sampled_from(["degC", "degF"]))
def test_temperature_there_and_back(value, unit):
    assert abs(units.from_si(units.to_si(value, unit, "temperature"), unit) - value) <= 1e-12 * 1024


@given(value=st.floats(1e-6, 1e6), unit=st.sampled_from(units.TABLE))
def test_what_is_written_is_read_back(value, unit):
    read = units.parse(f"{value!r} {unit.name}", unit.dimension)
    assert read == Quantity(units.to_si(value, unit.name, unit.dimension), None)


def test_arrays_convert_as_their_numbers_do_and_are_left_alone():
    flows = np.array([0.0, 36.0, np.nan, 7200.0])
    flows.flags.writeable = False
    converted = units.to_si(flows, "m3/h", "flow")
    np.testing.assert_allclose(converted, [0.0, 0.01, np.nan, 2.0], rtol=1e-15)
    np.testing.assert_allclose(units.from_si(converted, "m3/h"), flows, rtol=1e-15)


def test_a_name_means_one_size_whatever_the_dimension_and_case():
    meanings = {}
    for unit in units.TABLE:
        for name in (unit.name, *unit.aliases):
            spellings = {name, name.lower(), name.upper()} if unit.any_case else {name}
            for spelling in spellings:
                assert meanings.setdefault(spelling, (unit.scale, unit.offset)) == (unit.scale, unit.offset)


def test_every_dimension_has_its_si_unit():
    assert units.SI == {
        "flow": "m3/s",
        "head": "m",
        "power": "W",
        "length": "m",
        "pressure": "Pa",
        "temperature": "K",
        "density": "kg/m3",
        "viscosity": "m2/s",
        "volume": "m3",
        "heat_capacity": "J/(kg K)",
        "energy": "J",
    }


def test_names_are_listed_and_checked():
    assert units.unit_names("head") == ["m", "ft"]
    assert units.check_unit("l/S", "flow") == "L/s"
    assert units.check_unit("igpm", "flow") == "imp gpm"
    with pytest.raises(UnitError, match="did you mean 'kPa'"):
        units.check_unit("kpaa", "pressure")
    with pytest.raises(UnitError, match="unknown unit 'furlong'"):
        units.from_si(1.0, "furlong")
    with pytest.raises(UnitError, match="'ft' is a unit of head, not of flow"):
        units.to_si(1.0, "ft", "flow")


@pytest.mark.parametrize(
    ("value", "unit", "decimals", "text"),
    [
        (0.2, "m3/h", 1, "720.0 m3/h"),
        (285.15, "degC", 0, "12 degC"),
        (2.5e5, "bar", 2, "2.50 bar"),
        (-1e-9, "m", 2, "0.00 m"),
    ],
)
def test_values_are_written_with_their_unit(value, unit, decimals, text):
    assert units.format_value(value, unit, decimals) == text
