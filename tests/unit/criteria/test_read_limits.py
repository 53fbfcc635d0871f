"""Limits of a case: read in the unit of the limit, over the defaults; every problem at once."""

from __future__ import annotations

import pytest

from screener.criteria import default_limits, read_limits


def problems(raw: dict) -> list[tuple[tuple[str, ...], str, str]]:
    return read_limits(raw)[1]


def test_nothing_written_gives_the_defaults() -> None:
    assert read_limits({}) == (default_limits(), [])


@pytest.mark.parametrize(
    ("criterion", "limit", "written", "expected"),
    [
        ("region", "caution_below", 60, 0.6),
        ("shutoff-match", "caution_below", -7.5, -0.075),
        ("npsh-margin", "ratio", 1.35, 1.35),
        ("npsh-margin", "difference", 0.8, 0.8),
        ("npsh-margin", "difference", "2 ft", 0.6096),  # 0.3048 m, exact by definition [V]
        ("npsh-margin", "difference", "1 m", 1.0),
        ("motor-new", "fail_above", 200, 200e3),  # bare: kW
        ("motor-new", "fail_above", "0.25 MW", 250e3),
        ("minimum-flow", "temperature_rise", 10, 10.0),
        ("minimum-flow", "temperature_rise", "10 K", 10.0),
        ("suction-specific-speed", "caution_above", 250, 250.0),
    ],
)
def test_a_limit_in_si(criterion: str, limit: str, written: object, expected: float) -> None:
    limits, wrong = read_limits({criterion: {limit: written}})
    assert wrong == []
    assert limits[criterion][limit] == pytest.approx(expected, rel=1e-12)
    unchanged = default_limits()
    unchanged[criterion][limit] = limits[criterion][limit]
    assert limits == unchanged


def test_reading_does_not_change_the_defaults() -> None:
    before = default_limits()
    read_limits({"region": {"caution_below": 60}})
    assert default_limits() == before


def test_a_near_name_of_a_criterion() -> None:
    assert problems({"npsh-margn": {"ratio": 1.2}}) == [
        (("npsh-margn",), 'there is no criterion "npsh-margn"', 'did you mean "npsh-margin"?')
    ]


def test_a_far_name_lists_what_there_is() -> None:
    ((path, what, hint),) = problems({"zzz": {}})
    assert (path, what) == (("zzz",), 'there is no criterion "zzz"')
    assert hint.startswith("one of ")
    assert all(name in hint for name in default_limits())


def test_a_near_name_of_a_limit() -> None:
    assert problems({"npsh-margin": {"ratoi": 1.2}}) == [
        (("npsh-margin", "ratoi"), 'npsh-margin has no limit "ratoi"', 'did you mean "ratio"?')
    ]


@pytest.mark.parametrize(
    ("criterion", "limit", "written", "what"),
    [
        ("region", "caution_below", "60 %", "a bare number is expected here, in %"),
        ("npsh-margin", "ratio", "1.2", "a bare number is expected"),
        ("region", "caution_below", [60], "expected a number"),
        ("region", "caution_below", True, "expected a number"),
        ("npsh-margin", "difference", {}, "expected a number with its unit, in m"),
        ("npsh-margin", "difference", "0.6", "'0.6' has no unit"),
        ("npsh-margin", "difference", "0.6 bar", "'bar' is a unit of pressure, not of head"),
    ],
)
def test_a_value_of_a_wrong_kind(criterion: str, limit: str, written: object, what: str) -> None:
    ((path, said, _),) = problems({criterion: {limit: written}})
    assert path == (criterion, limit)
    assert said == what


def test_a_rise_of_temperature_is_no_temperature() -> None:
    # 10 degC read as a temperature is 283.15 K: the thermal minimum would all but vanish
    ((path, said, _),) = problems({"minimum-flow": {"temperature_rise": "10 degC"}})
    assert path == ("minimum-flow", "temperature_rise")
    assert said == "a difference of temperature is expected, in K"


def test_a_criterion_that_is_no_table() -> None:
    ((path, what, hint),) = problems({"region": 60})
    assert (path, what) == (("region",), "expected a table of limits")
    assert hint == "for example { caution_below = 70 }"


def test_an_example_is_in_the_unit_that_a_bare_number_has() -> None:
    ((_, _, hint),) = problems({"motor-new": 200})
    assert hint == "for example { fail_above = 1e+06 }"  # kW, of 1e9 W


def test_every_problem_at_once() -> None:
    found = problems({"regoin": {}, "region": {"caution_blow": 1, "caution_above": "x"}, "start": 3})
    assert [path for path, _, _ in found] == [
        ("regoin",),
        ("region", "caution_blow"),
        ("region", "caution_above"),
        ("start",),
    ]
