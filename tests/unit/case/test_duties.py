"""Duties: which pumps run, at which levels, and which duty is rated."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from screener.model.case import Case, Control

Read = Callable[..., Case]
Problems = Callable[..., list[str]]
LISTED = 'running = ["P-1", "P-2", "new"]'
ANY = "running = { any = 1, new = true }"


def test_listed_pumps_are_one_combination(read: Read) -> None:
    duty = read((LISTED, 'running = ["new", "P-2", "P-1"]')).duties[0]
    assert (duty.running, duty.new) == (((0, 1),), (True,))


def test_pumps_that_rotate_are_all_combinations(read: Read) -> None:
    assert read().duties[1].running == ((0,), (1,))
    assert read().duties[1].new == (True, True)


def test_the_new_pump_alone(read: Read) -> None:
    duty = read((ANY, "running = { any = 0, new = true }")).duties[1]
    assert (duty.running, duty.new) == (((),), (True,))


def test_without_the_new_pump(read: Read) -> None:
    duty = read((ANY, "running = { any = 2, new = false }")).duties[1]
    assert (duty.running, duty.new) == (((0, 1),), (False,))


def test_defaults_and_given(read: Read) -> None:
    plain = read().duties[0]
    assert (plain.levels, plain.liquid, plain.control) == ((0, 1), 0, Control.THROTTLED)
    assert math.isnan(plain.hours)
    given = read((", flow = 360", ', flow = 360, levels = ["high"], control = "open", hours = 700')).duties[0]
    assert (given.levels, given.control, given.hours) == ((1,), Control.OPEN, 700.0)


def test_rated_is_the_largest_flow_with_the_new_pump(read: Read) -> None:
    assert [duty.rated for duty in read().duties] == [True, False]
    without = read((LISTED, 'running = ["P-1", "P-2"]'))
    assert [duty.rated for duty in without.duties] == [False, True]


def test_rated_as_stated(read: Read) -> None:
    assert [duty.rated for duty in read(("flow = 180", "flow = 180, rated = true")).duties] == [False, True]


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        ([(LISTED, 'running = ["P-3", "new"]')], ["there is no pump 'P-3'"]),
        ([(LISTED, 'running = ["P-1", "P-1", "new"]')], ["'P-1' is there twice"]),
        ([(ANY, "running = { any = 3, new = true }")], ["any 3 pumps, but only 2 are installed"]),
        ([(ANY, "running = { any = 0, new = false }")], ["no pump runs"]),
        ([(", flow = 360", ', flow = 360, levels = ["flood"]')], ["there is no level 'flood'"]),
        ([('name = "day"', 'name = "peak"')], ["name 'peak' is there twice"]),
        (
            [(", flow = 360", ", flow = 360, rated = true"), ("flow = 180", "flow = 180, rated = true")],
            ["duty 'peak' is rated already"],
        ),
        ([(LISTED, 'running = ["P-1"], rated = true')], ["the rated duty runs without the new pump"]),
        ([(LISTED, 'running = ["P-1"]'), ("new = true", "new = false")], ["no duty runs the new pump"]),
    ],
)
def test_problems(problems: Problems, changes: list[tuple[str, str]], expected: list[str]) -> None:
    assert problems(*changes) == expected


def test_a_misspelt_pump_is_said_once(problems: Problems) -> None:
    changes = (LISTED, 'running = ["P-1", "nwe"]'), ("new = true", "new = false")
    assert problems(*changes) == ["there is no pump 'nwe'"]


def test_a_level_that_is_there_twice_is_said_once(problems: Problems) -> None:
    assert problems(('name = "high"', 'name = "low"')) == ["name 'low' is there twice"]


def test_too_many_combinations_are_refused(problems: Problems) -> None:
    pump = '  { tag = "P-2", curve = { pump = "plain" } },\n'
    many = "".join(pump.replace("P-2", f"P-{n}") for n in range(2, 15))
    # [D] 14 pumps taken 5 at a time: 2002
    assert problems((pump, many), ("any = 1", "any = 5")) == ["any 5 of 14 pumps is 2002 combinations"]


def test_a_whole_number_may_be_written_with_a_point(read: Read) -> None:
    duty = read((ANY, "running = { any = 1.0, new = true }")).duties[1]
    assert duty.running == ((0,), (1,))


def test_only_some_pumps_rotate(read: Read, problems: Problems) -> None:
    duty = read((ANY, 'running = { any = 1, of = ["P-2"], new = true }')).duties[1]
    assert duty.running == ((1,),)
    told = problems((ANY, 'running = { any = 2, of = ["P-2", "P-3"], new = true }'))
    assert any("P-3" in problem for problem in told)


def test_more_hours_than_a_year_has(problems: Problems) -> None:
    told = problems((LISTED, LISTED + ", hours = 8000"), (ANY, ANY + ", hours = 1000"))
    assert told == ["the duties add up to 9000 h"]
