"""A level that moves under a pump of variable speed: when does its check valve open, when is its flow enough?

Every figure was computed independently from the closed forms below, by brentq of scipy where needed [D].
Flows in m3/h, heads in m, speeds over the speed at load.

    fixed     2 x H = 58 - 14 (Q/500)^2
    new       H = H0 n^2 - (H0 - 45) (Q/480)^2 at speed n, minimum flow 150 n;  steep H0 60, flat H0 45.4
    system    static between 36 and 44, and 0.4 (Q/1400)^2

The flat one reaches 45 m at 480, as the steep one does. Nothing is throttled; no branch has a loss.
"""

from __future__ import annotations

import pytest
from scipy.optimize import brentq

LEVELS = (36.0, 39.0, 42.0, 44.0)
SPEED = 1480
MINIMUM = 150
CLOSE = 5e-5  # of a speed: the flow left for the new pump is a table
SHUTOFF = {"steep": 60.0, "flat": 45.4}
CASE = """
format = "pump-case/1"
title = "A level that moves"
catalog = ["pumps.json"]
units = { flow = "m3/h", head = "m", power = "kW", pressure = "bar" }
system = { friction = { head = 0.4, at_flow = 1400 }, allowable_pressure = "16 bar gauge" }
new_pump = { speed_range = [50, 100] }
liquid = [{ name = "water", kind = "water", temperature = "15 degC" }]

[[installed]]
tag = "P-1"
curve = { pump = "fixed" }

[[installed]]
tag = "P-2"
curve = { pump = "fixed" }

[[duty]]
name = "supply"
flow = 1400
running = ["P-1", "P-2", "new"]
control = "speed"
"""


def fixed_flow(head):
    return 500 * (max(58 - head, 0) / 14) ** 0.5


def header(static, flow=0.0):
    """Header head when the new pump gives some flow and the others follow."""
    return brentq(
        lambda head: static + 0.4 * ((flow + 2 * fixed_flow(head)) / 1400) ** 2 - head, static, static + 5
    )


def opens(shutoff, static):
    return (header(static) / shutoff) ** 0.5


def least(shutoff, static):
    at_minimum = shutoff - (shutoff - 45) * (MINIMUM / 480) ** 2
    return brentq(lambda n: n**2 * at_minimum - header(static, n * MINIMUM), 0.3, 1.2)


@pytest.fixture(scope="module")
def plant(tmp_path_factory, pump_of, plant_of):
    curves = {"fixed": (58, 14, 500)} | {name: (h, h - 45, 480) for name, h in SHUTOFF.items()}
    pumps = [
        pump_of(
            name,
            curve,
            end=850,
            best_flow=curve[2],
            best_efficiency=80,
            npsh_required=lambda flow: 2 + 2 * (flow / 480) ** 2,
            speed=SPEED,
            eyes=2,
            limits={"minimum_flow": MINIMUM, "allowable_pressure": "16 bar gauge", "maximum_power": "200 kW"},
        )
        for name, curve in curves.items()
    ]
    levels = "".join(
        f'\n[[level]]\nname = "at {level}"\nstatic_head = {level}\nsuction_head = 3\n' for level in LEVELS
    )
    return plant_of(tmp_path_factory.mktemp("moves"), CASE + levels, pumps)


@pytest.fixture
def speeds(plant):
    return lambda name: plant("explain", name)["speeds"]


@pytest.mark.parametrize("name", SHUTOFF)
def test_both_speeds_as_functions_of_the_level(speeds, name):
    assert [row["level"] for row in speeds(name)] == [f"at {level}" for level in LEVELS]
    for level, row in zip(LEVELS, speeds(name), strict=True):
        assert row["opens"] == pytest.approx(SPEED * opens(SHUTOFF[name], level), rel=CLOSE)
        assert row["minimum_flow"] == pytest.approx(SPEED * least(SHUTOFF[name], level), rel=CLOSE)


@pytest.mark.parametrize("name", SHUTOFF)
def test_both_speeds_rise_with_the_level(speeds, name):
    for key in ("opens", "minimum_flow"):
        found = [row[key] for row in speeds(name)]
        assert found == sorted(set(found))
    for row in speeds(name):
        assert row["opens"] < row["minimum_flow"]


def test_static_head_alone_would_open_it_too_early(speeds):
    """The others lift the header above the level: at 44 by what 1,000 m3/h take of the system."""
    last = speeds("steep")[-1]
    assert last["opens"] > SPEED * (44 / 60) ** 0.5


@pytest.mark.parametrize(("name", "first", "last"), [("steep", "21.2", "13.0"), ("flat", "10.4", "1.2")])
def test_usable_speed(speeds, reads, name, first, last):
    found = [row["usable"] for row in speeds(name)]
    assert found == sorted(found, reverse=True)
    assert reads(100 * (1 - least(SHUTOFF[name], 36)), first)
    assert reads(100 * (1 - least(SHUTOFF[name], 44)), last)
    assert reads(found[0], first)
    assert reads(found[-1], last)


@pytest.mark.parametrize("name", SHUTOFF)
def test_speed_that_holds_the_flow(plant, state_of, speeds, name):
    shutoff = SHUTOFF[name]
    for level, row in zip(LEVELS, speeds(name), strict=True):
        head = level + 0.4
        own = 1400 - 2 * fixed_flow(head)
        exact = ((head + (shutoff - 45) * (own / 480) ** 2) / shutoff) ** 0.5
        state = state_of(plant("explain", name), f"supply, at {level}")
        assert row["holds"] == pytest.approx(SPEED * exact, rel=CLOSE)
        assert state["total_flow"] == pytest.approx(1400)
        assert state["flows"]["new"] == pytest.approx(own, rel=CLOSE)


def test_narrow_range_is_told(plant, findings_of):
    flat = findings_of(plant("explain", "flat"), "caution")["speed-range"]
    assert (flat["pump"], flat["where"]) == ("new", f"supply, at {LEVELS[-1]}")
    assert "speed-range" in findings_of(plant("explain", "steep"), "pass")
