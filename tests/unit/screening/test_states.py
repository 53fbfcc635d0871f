"""The states of a header: each once, shares of hours whole, upsets where they are worst."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import pytest

from screener.model.case import Branch, Control, Level, Loss
from screener.model.run import Kind
from screener.screening.states import classes, rated_state, states

LOW, HIGH = Level("low", 22.0, 1.0, 0.0), Level("high", 18.0, 4.0, 0.0)
DEEP = Level("deep", 16.0, -1.0, 0.0)  # least static and least suction head at once
LIFT = Level("lift", 24.0, -2.0, 0.0)


def brief(found) -> list[tuple]:
    return [(s.duty, s.level, s.kind.name, s.running, s.new, s.lost, round(s.share, 9)) for s in found]


def test_one_duty_with_two_identical_pumps(plant, duty) -> None:
    assert brief(states(plant(duty((0, 1))))) == [
        (0, 0, "DUTY", (0, 1), 1, None, 1.0),
        (0, 0, "WIDE_OPEN", (0, 1), 1, None, 0.0),
        (0, 0, "TRIP", (1,), 1, 0, 0.0),  # the other one would be the same
    ]


def test_pumps_that_differ_trip_one_by_one(plant, duty) -> None:
    found = states(plant(duty((0, 1, 2)), shutoff=(50.0, 48.0, 50.0)))
    assert brief(found)[2:] == [
        (0, 0, "TRIP", (1, 2), 1, 0, 0.0),
        (0, 0, "TRIP", (0, 2), 1, 1, 0.0),
    ]


def test_what_makes_pumps_differ(plant, duty) -> None:
    case = plant(duty((0, 1)))
    assert classes(case).tolist() == [0, 0]
    first, second = case.installed
    for other in (
        replace(second, motor=160e3),
        replace(second, rated_flow=0.05),
        replace(second, branch=Branch(discharge=Loss((10.0,), (2.0,)))),
        replace(second, branch=Branch(suction_head=0.5)),
    ):
        assert classes(replace(case, installed=(first, other))).tolist() == [0, 1]
    renamed = replace(second, tag="another", title="other words")
    assert classes(replace(case, installed=(first, renamed))).tolist() == [0, 0]
    assert classes(plant(duty((0,)), shutoff=(50.0, 48.0, 50.0, 48.0))).tolist() == [0, 1, 0, 1]


def test_rotating_pumps_share_the_hours(plant, duty) -> None:
    # any two of three, of which the first and the last are identical: {0, 1} = {1, 2} twice, {0, 2} once
    any_two = tuple(combinations(range(3), 2))
    found = states(plant(duty(*any_two), shutoff=(50.0, 48.0, 50.0)))
    assert brief(state for state in found if state.kind == Kind.DUTY) == [
        (0, 0, "DUTY", (0, 1), 1, None, pytest.approx(2 / 3)),
        (0, 0, "DUTY", (0, 2), 1, None, pytest.approx(1 / 3)),
    ]
    trips = [(s.running, s.lost) for s in found if s.kind == Kind.TRIP]
    assert trips == [((1,), 0), ((0,), 1)]  # the last of the three alone is the first alone


def test_rotating_identical_pumps_are_one_case(plant, duty) -> None:
    found = states(plant(duty((0,), (1,))))
    assert brief(found) == [
        (0, 0, "DUTY", (0,), 1, None, 1.0),
        (0, 0, "WIDE_OPEN", (0,), 1, None, 0.0),
        (0, 0, "TRIP", (), 1, 0, 0.0),
    ]


@pytest.mark.parametrize("heads", [(50.0, 50.0, 50.0), (50.0, 48.0, 50.0), (50.0, 49.0, 48.0)])
def test_shares_of_hours_are_whole_for_each_duty(plant, duty, heads) -> None:
    duties = [
        duty(*combinations(range(3), 2), levels=(0, 1)),
        duty(*combinations(range(3), 1), levels=(0, 1, 2), new=False),
        duty((0, 1, 2), levels=(2,)),
    ]
    found = states(plant(*duties, shutoff=heads, levels=(LOW, HIGH, DEEP)))
    for number in range(3):
        assert sum(s.share for s in found if s.duty == number) == pytest.approx(1.0)
    assert all((s.share > 0) == (s.kind == Kind.DUTY) for s in found)


@pytest.mark.parametrize(
    ("levels", "upset"),
    [
        ((LOW, HIGH), [1, 0]),  # least static is "high", least suction is "low"
        ((LOW, HIGH, DEEP), [2]),
        ((HIGH, LOW, LIFT), [0, 2]),
        ((LOW,), [0]),
    ],
)
def test_upsets_are_taken_at_least_static_and_at_least_suction_head(plant, duty, levels, upset) -> None:
    case = plant(duty((0, 1), levels=range(len(levels))), levels=levels)
    found = states(case)
    assert [s.level for s in found if s.kind == Kind.WIDE_OPEN] == upset
    assert [s.level for s in found if s.kind == Kind.TRIP] == upset
    assert [s.level for s in found if s.kind == Kind.DUTY] == list(range(len(levels)))
    assert all(s.static == levels[s.level].static_head for s in found)


def test_only_levels_of_the_duty_count(plant, duty) -> None:
    found = states(plant(duty((0, 1), levels=(0, 1)), levels=(LOW, HIGH, DEEP)))
    assert {s.level for s in found} == {0, 1}


def test_a_vessel_pressure_counts_as_head(plant, duty) -> None:
    # 98066.5 Pa are 10 m of water: 22 m against a pressed vessel are 12 m
    pressed = replace(LOW, vessel_pressure=98066.5)
    found = states(plant(duty((0,), levels=(0, 1)), levels=(HIGH, pressed)))
    assert [s.static for s in found if s.kind == Kind.DUTY] == [18.0, pytest.approx(12.0)]
    assert [s.level for s in found if s.kind == Kind.WIDE_OPEN] == [1]


def test_who_holds_the_flow(plant, duty) -> None:
    throttled, open_, held = (states(plant(duty((0, 1), control=control))) for control in Control)
    assert [(s.kind.name, s.throttled) for s in throttled] == [
        ("DUTY", True),
        ("WIDE_OPEN", False),
        ("TRIP", False),
    ]
    # an open duty is wide open already
    assert [(s.kind.name, s.throttled) for s in open_] == [("DUTY", False), ("TRIP", False)]
    # where speed holds the flow, upsets find the pumps at their highest speed
    assert [(s.kind.name, s.speed.name) for s in held] == [
        ("DUTY", "HELD"),
        ("WIDE_OPEN", "HIGHEST"),
        ("TRIP", "HIGHEST"),
    ]
    assert {s.speed.name for s in (*throttled, *open_)} == {"AT_LOAD"}


def test_without_a_new_pump_only_the_duty_itself(plant, duty) -> None:
    assert brief(states(plant(duty((0, 1)), duty((0, 1), (0,), new=False)))[3:]) == [
        (1, 0, "DUTY", (0, 1), 0, None, 0.5),
        (1, 0, "DUTY", (0,), 0, None, 0.5),
    ]


def test_two_new_pumps_may_lose_one_of_them(plant, duty) -> None:
    found = states(plant(duty((0,)), count=2))
    assert brief(found) == [
        (0, 0, "DUTY", (0,), 2, None, 1.0),
        (0, 0, "WIDE_OPEN", (0,), 2, None, 0.0),
        (0, 0, "TRIP", (), 2, 0, 0.0),
        (0, 0, "TRIP", (0,), 1, -1, 0.0),
    ]


def test_the_rated_state_is_the_rated_duty_at_its_highest_static_head(plant, duty) -> None:
    case = plant(
        duty((0,), levels=(1,)),
        duty((0, 1), levels=(1, 0, 2), rated=True),
        levels=(LOW, HIGH, DEEP),
    )
    found = states(case)
    rated = found[rated_state(case, found)]
    assert (rated.duty, rated.level, rated.kind, rated.new) == (1, 0, Kind.DUTY, 1)


def test_the_flow_asked_is_that_of_the_duty(plant, duty) -> None:
    found = states(plant(duty((0,), flow=0.07), duty((0, 1), flow=0.12)))
    assert {(s.duty, s.asked) for s in found} == {(0, 0.07), (1, 0.12)}
