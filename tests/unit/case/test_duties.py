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


def test_the_pumps_that_stay_take_turns(read: Read, problems: Problems) -> None:
    leaves = ("new_pump = {}", 'new_pump = { replaces = "P-1" }')
    listed = (LISTED, 'running = ["P-2", "new"]')
    duty = read(leaves, listed).duties[1]
    assert (duty.running, duty.new) == (((1,),), (True,))
    assert problems(leaves, listed, ("any = 1", "any = 2")) == [
        "any 2 pumps, but only 1 are left beside the new one"
    ]
    gone = "'P-1' leaves the header: the new pump replaces it"
    assert problems(leaves) == [gone]
    assert problems(leaves, listed, (ANY, 'running = { any = 1, of = ["P-1"], new = true }')) == [gone]


SPEED = (", flow = 180", ', flow = 180, control = "speed"')
RANGE = "speed_range = [60, 100]"
FIRST = "diameter = 200 }"


def test_control_by_speed(read: Read) -> None:
    for changed in ((FIRST, f"{FIRST}, {RANGE}"), ("flow = 180", "flow = 180")):
        case = read(SPEED, changed, ("new_pump = {}", f"new_pump = {{ {RANGE} }}"))
        assert [duty.control for duty in case.duties] == [Control.THROTTLED, Control.SPEED]


@pytest.mark.parametrize(
    ("running", "who"),
    [
        ("{ any = 1, new = true }", "new, P-2"),
        ("{ any = 1, new = false }", "P-2"),
        ('["new", "P-2"]', "new, P-2"),
        ('["new"]', "new"),
    ],
)
def test_no_pump_that_can_hold_the_flow(problems: Problems, running: str, who: str) -> None:
    changes = SPEED, (FIRST, f"{FIRST}, {RANGE}"), (ANY, f"running = {running}")
    assert problems(*changes) == [f"control is by speed, but no pump has a speed range when these run: {who}"]


def test_bypasses(read: Read) -> None:
    given = (LISTED, f'{LISTED}, bypass = {{ "P-2" = 36, new = "5 L/s" }}')
    assert read(given).duties[0].bypass == pytest.approx((0.005, 0.0, 0.01))
    assert read(given).duties[1].bypass == ()
    assert read((LISTED, f'{LISTED}, bypass = {{ "P-2" = 0 }}')).duties[0].bypass == ()
    turns = read((ANY, f'{ANY}, bypass = {{ "P-2" = 36 }}')).duties[1]
    assert turns.bypass == pytest.approx((0.0, 0.0, 0.01))


@pytest.mark.parametrize(
    ("bypass", "what"),
    [
        ('"P-3" = 10', "there is no pump 'P-3'"),
        ('"P-1" = -10', "the bypass of 'P-1' is -10"),
        ('"P-1" = 180', "'P-1' takes back 180"),
        ('"P-2" = 10', "'P-2' does not run in this duty"),
        ("new = 10", "'new' does not run in this duty"),
    ],
)
def test_problems_of_a_bypass(problems: Problems, bypass: str, what: str) -> None:
    assert problems((LISTED, f'running = ["P-1"], bypass = {{ {bypass} }}')) == [what]


def test_a_bypass_at_a_misspelt_pump_is_said_once(problems: Problems) -> None:
    changed = (LISTED, 'running = ["P1", "new"], bypass = { "P-1" = 10 }')
    assert problems(changed) == ["there is no pump 'P1'"]


def test_more_hours_than_a_year_has(problems: Problems) -> None:
    told = problems((LISTED, LISTED + ", hours = 8000"), (ANY, ANY + ", hours = 1000"))
    assert told == ["the duties add up to 9000 h"]
