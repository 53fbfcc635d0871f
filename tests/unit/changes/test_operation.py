"""Combinations of two pumps and a third in closed form: what each may do, worked out here a second time [D].

Flows in m3/h, heads in m, powers in kW.

    installed  P-1, P-2: H = 52.5 - 10.5 (Q/2400)^2, best efficiency 86 % at 2500, allowed 50 to 130 % of that
    new        C: H = 52.0 - 8.5 (Q/2200)^2, 86 % at 2300
    system     static + 22 (Q/6600)^2 + 5 (Q/4800)^2, static 12 or 20
    efficiency best (1 - 0.75 (1 - Q/BEP)^2); curves end at 150 % of BEP, minimum flow is 25 % of it
    NPSH       required 4 + 3 (Q/BEP)^2, at least 1.1 times that and 0.6 more is wanted
"""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence
from dataclasses import replace
from math import nan
from typing import Any

import numpy as np
import pytest

import screener
from screener.case.load import Loaded
from screener.changes import operation as module
from screener.changes.combination import BREACHES, Plant, Ran, every_run, run_as
from screener.changes.operation import Operation, cheapest
from screener.hydraulics.similarity import trimmed
from screener.model.case import Control, Drive
from screener.model.curves import Pumps

GRAVITY = 9.80665
HOUR = 3600.0
INSTALLED = (52.5, 10.5, 2400, 2500)
NEW = (52.0, 8.5, 2200, 2300)
LEVELS = {"high": 20.0, "low": 12.0}
CASE = """
format = "pump-case/1"
title = "Two running, one to be added"
catalog = ["pumps.json"]
units = { flow = "m3/h", head = "m", power = "kW", pressure = "bar" }
site = { atmospheric_pressure = "1.01325 bar" }
new_pump = { }

[[liquid]]
name = "cold"
density = "1000 kg/m3"
viscosity = "1 cSt"
vapour_pressure = "2000 Pa"
heat_capacity = "4.18 kJ/(kg K)"

[system]
friction = [{ head = 22, at_flow = 6600 }, { head = 5, at_flow = 4800 }]
allowable_pressure = "10 bar gauge"

[[level]]
name = "high"
static_head = 20
suction_head = 4

[[level]]
name = "low"
static_head = 12
suction_head = 4

[[installed]]
tag = "P-1"
curve = { pump = "P" }
motor = 355

[[installed]]
tag = "P-2"
curve = { pump = "P" }
motor = 355

[[duty]]
name = "most"
flow = 6600
levels = ["low"]
running = ["P-1", "P-2", "new"]
control = "open"
hours = 2628

[[duty]]
name = "usual"
flow = 5400
levels = ["low"]
running = ["P-1", "P-2", "new"]
hours = 4380

[[duty]]
name = "least"
flow = 2400
running = ["P-2"]
hours = 1000
"""


def pump(name: str, curve: tuple[float, float, float, float], **limits: Any) -> dict[str, Any]:
    shutoff, drop, at, best = curve
    flow = [best * 1.5 * point / 30 for point in range(31)]
    return {
        "id": name,
        "speed": 1480,
        "eyes": 2,
        "limits": {"minimum_flow": best / 4, "allowable_pressure": "10 bar gauge", **limits},
        "curves": [
            {
                "bep_flow": best,
                "flow": flow,
                "head": [shutoff - drop * (q / at) ** 2 for q in flow],
                "efficiency": [86 * (1 - 0.75 * (1 - q / best) ** 2) for q in flow],
                "npsh_required": [4 + 3 * (q / best) ** 2 for q in flow],
            }
        ],
    }


@pytest.fixture(scope="module")
def load(tmp_path_factory: pytest.TempPathFactory) -> Callable[..., Loaded]:
    """The plant read from its files, with words of the case replaced."""

    def read(*changes: tuple[str, str], text: str = CASE) -> Loaded:
        folder = tmp_path_factory.mktemp("plant")
        catalog = {
            "format": "pump-catalog/1",
            "units": {"flow": "m3/h", "head": "m", "npsh": "m"},
            "pumps": [pump("P", INSTALLED, allowable_region=[50, 130]), pump("C", NEW), *EXTRA],
        }
        (folder / "pumps.json").write_text(json.dumps(catalog), encoding="utf-8")
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        (folder / "case.toml").write_text(text, encoding="utf-8")
        return screener.load(folder / "case.toml")

    return read


DROOP = pump("droop", (0, 0, 1, 1000), minimum_flow=100)
DROOP["curves"][0]["flow"] = [1500 * point / 30 for point in range(31)]
DROOP["curves"][0]["head"] = [40 + 8 * (q / 1000) - 8 * (q / 1000) ** 2 for q in DROOP["curves"][0]["flow"]]
EXTRA = [
    pump("weak", (30, 5, 2200, 2300)),
    pump("frail", NEW, maximum_power="100 kW"),
    pump("flat", (45, 3, 5000, 6000), minimum_flow=1000),
    DROOP,
]


@pytest.fixture(scope="module")
def plant(load: Callable[..., Loaded]) -> Loaded:
    return load()


@pytest.fixture(scope="module")
def with_c(plant: Loaded) -> Operation:
    return screener.operation(plant.case, plant.catalog, plant.catalog.ids.index("C"))


@pytest.fixture(scope="module")
def alone(plant: Loaded) -> Operation:
    return screener.operation(plant.case)


def head_of(curve: Sequence[float], flow: float) -> float:
    return curve[0] - curve[1] * (flow / curve[2]) ** 2


def power_of(curve: Sequence[float], flow: float) -> float:
    efficiency = 0.86 * (1 - 0.75 * (1 - flow / curve[3]) ** 2)
    return GRAVITY * flow / HOUR * head_of(curve, flow) / efficiency


def share(curves: Sequence[Sequence[float]], flow: float, static: float) -> list[float]:
    """Flows of parallel pumps that give a flow, or what the open system takes where that is less."""
    low, high = -500.0, max(curve[0] for curve in curves)
    for _ in range(200):
        head = (low + high) / 2
        open_ = (max(head - static, 0) / (22 / 6600**2 + 5 / 4800**2)) ** 0.5
        flows = [at * (max(shutoff - head, 0) / drop) ** 0.5 for shutoff, drop, at, _ in curves]
        low, high = (head, high) if sum(flows) > min(flow, open_) else (low, head)
    return flows


def told(curves: dict[str, Sequence[float]], flow: float, static: float, motor: float) -> str:
    """The first limit broken and by which pump, by the same rules in a few plain lines; "" where none is."""
    flows = dict(zip(curves, share(list(curves.values()), flow, static), strict=True))
    worst: dict[str, tuple[float, str]] = {}
    for tag, given in flows.items():
        best = curves[tag][3]
        required = 4 + 3 * (given / best) ** 2
        available = (101325 - 2000) / (1000 * GRAVITY) + 4
        nameplate = motor if tag == "new" else 355
        broken = {
            "past": given / (1.5 * best) - 1,
            "shut": 1.0 if given == 0 else 0.0,
            "low": 1 - given / (0.25 * best),
            "low region": 0.5 * best - given if tag != "new" else 0,
            "high": given - 1.3 * best if tag != "new" else 0,
            "NPSH": max(1.1 * required, required + 0.6) - available,
            "motor": power_of(curves[tag], given) / nameplate - 1,
        }
        for name, by in broken.items():
            if by > 0 and by > worst.get(name, (0.0, ""))[0] * (1 + 1e-6):
                worst[name] = (by, tag)
    if "past" in worst:
        return f"past {worst['past'][1]}"
    if sum(flows.values()) < 0.999 * flow:
        return "short"
    names = ("shut", "low", "low region", "high", "NPSH", "motor")
    return next((f"{name.split()[0]} {worst[name][1]}" for name in names if name in worst), "")


def code(ran: Ran) -> str:
    tags = {-1: "", 0: " new", 1: " P-1", 2: " P-2"}
    return "" if ran.within else BREACHES[ran.breach].word + tags[ran.pump]


def pumps_of(combination: tuple[tuple[int, ...], bool]) -> dict[str, Sequence[float]]:
    return {f"P-{row + 1}": INSTALLED for row in combination[0]} | ({"new": NEW} if combination[1] else {})


def test_two_pumps_suffice_where_the_case_runs_three(with_c: Operation) -> None:
    usual = with_c.choices[1]
    assert usual.asked is not None
    assert round(usual.asked.power / 1e3) == 838
    assert (usual.best.running, usual.best.new, round(usual.best.power / 1e3)) == ((0, 1), 0, 674)
    assert usual.best.power / 1e3 == pytest.approx(2 * power_of(INSTALLED, 2700), rel=1e-5)
    three = [INSTALLED, INSTALLED, NEW]
    asked = sum(power_of(*item) for item in zip(three, share(three, 5400, 12), strict=True))
    assert usual.asked.power / 1e3 == pytest.approx(asked, rel=1e-5)
    saved = (asked - 2 * power_of(INSTALLED, 2700)) * 4380
    assert usual.saved / 3.6e6 == pytest.approx(saved, rel=1e-4)


def test_every_level_has_its_share_of_the_hours_and_one_pump_its_price(with_c: Operation) -> None:
    least = with_c.choices[2:]
    assert [(choice.duty, choice.level, choice.hours) for choice in least] == [(2, 0, 500), (2, 1, 500)]
    for choice in least:
        assert choice.asked is not None
        assert choice.asked.power / 1e3 == pytest.approx(power_of(INSTALLED, 2400), rel=1e-5)
        assert (choice.best.running, choice.best.new) == ((), 1)
        assert choice.best.power / 1e3 == pytest.approx(power_of(NEW, 2400), rel=1e-5)
        assert choice.without is not None
        assert choice.without.running in ((0,), (1,))


def test_the_header_as_it_is_has_no_new_pump(alone: Operation) -> None:
    assert (alone.tried, alone.explained) == (2, None)
    assert all(not choice.best.new and choice.best == choice.without for choice in alone.choices)
    most, usual, *_ = alone.choices
    assert most.asked is not None
    assert (most.best.within, code(most.best), np.isnan(most.saved)) == (False, "short", True)
    assert most.best.shortfall == pytest.approx(
        1 - sum(share([INSTALLED] * 2, 9e9, 12)) / 6600 / 0.999, abs=1e-5
    )
    assert (usual.asked, usual.saved) == (usual.best, 0.0)


@pytest.mark.parametrize("named", ["with_c", "alone"])
def test_every_cell_of_the_map_is_what_one_evaluation_says(
    named: str, request: pytest.FixtureRequest
) -> None:
    result: Operation = request.getfixturevalue(named)
    found = result.map
    assert [result.bench.header.case.levels[row].name for row in found.levels] == ["high", "low"]
    assert len(found.combinations) == (5 if named == "with_c" else 2)
    seen = set()
    for flow, spots in zip(found.flows, found.spots, strict=True):
        for combination, spot in zip(found.combinations, spots, strict=True):
            by_level = [
                told(pumps_of(combination), flow * HOUR, static, result.motor / 1e3)
                for static in LEVELS.values()
            ]
            assert code(spot.ran) in by_level, (flow * HOUR, combination)
            assert spot.ran.within == (by_level == ["", ""])
            one_only = by_level.count("") == 1
            assert spot.level == (
                found.levels[by_level.index(next(filter(None, by_level)))] if one_only else -1
            )
            seen.add(code(spot.ran).split(" ")[0])
    assert seen >= {"", "past", "short", "low"}


def test_flows_of_the_map_are_round_and_hold_those_of_the_duties(with_c: Operation) -> None:
    flows = [round(flow * HOUR, 6) for flow in with_c.map.flows]
    assert flows == sorted({*range(500, 6600, 500), 2400, 5400, 6600})


def test_ranges_end_where_a_limit_is_broken_to_one_percent(with_c: Operation) -> None:
    for combination, ranges in zip(with_c.map.combinations, with_c.map.ranges, strict=True):
        (found,) = ranges
        for flow, spot, side in ((found.low, found.below, 0.985), (found.high, found.above, 1.015)):
            words = [
                [
                    told(pumps_of(combination), at * HOUR, static, with_c.motor / 1e3)
                    for static in LEVELS.values()
                ]
                for at in (flow, flow * side)
            ]
            assert words[0] == ["", ""]
            assert spot is not None
            assert code(spot.ran) in words[1]


def test_lowest_flow_of_a_pair_is_that_of_the_region(with_c: Operation) -> None:
    """Two alike under 50 % of 2500 each; the closed form knows only the minimum flow."""
    place = with_c.map.combinations.index(((0, 1), False))
    assert with_c.map.ranges[place][0].low * HOUR == pytest.approx(2500, rel=0.01)


@pytest.fixture(scope="module")
def one(load: Callable[..., Loaded]) -> Callable[..., Ran]:
    """One combination at one flow [m3/h] at static head 12 m."""

    def run(
        running: tuple[int, ...], new: str, flow: float, *changes: tuple[str, str], motor: float = nan
    ) -> Ran:
        loaded = load(*changes)
        pumps = pumps_from(loaded, new) if new else None
        duty = replace(loaded.case.duties[1], flow=flow / HOUR)
        ((ran,),) = every_run(Plant(loaded.case, pumps, motor), [run_as(duty, (running, bool(new)))])
        return ran

    return run


def pumps_from(loaded: Loaded, name: str) -> Pumps:
    row = np.array([loaded.catalog.ids.index(name)])
    return trimmed(loaded.catalog, model=row, diameter=np.array([nan]), speed_ratio=np.ones(1))


TABLE = (
    "friction = [{ head = 22, at_flow = 6600 }, { head = 5, at_flow = 4800 }]",
    "table = { flow = [0, 1000], head = [0, 38] }",
)
DROOPING = ('tag = "P-1"\ncurve = { pump = "P" }', 'tag = "P-1"\ncurve = { pump = "droop" }')
FLAT = ('tag = "P-2"\ncurve = { pump = "P" }\nmotor = 355', 'tag = "P-2"\ncurve = { pump = "flat" }')
OPEN = ('flow = 5400\nlevels = ["low"]', 'flow = 5400\nlevels = ["low"]\ncontrol = "open"')
EASY = ("{ head = 22, at_flow = 6600 }", "{ head = 2, at_flow = 6600 }")


@pytest.mark.parametrize(
    ("told", "criterion", "arguments"),
    [
        ("", "", ((0,), "", 2500)),
        ("past P-1", "curve-end", ((0,), "", 5000)),
        ("no data", "duty-flow", ((0,), "", 2500, TABLE, OPEN)),
        ("short", "duty-flow", ((0, 1), "", 6600)),
        ("shut new", "minimum-flow", ((0,), "weak", 1500)),
        ("low P-1", "minimum-flow", ((0,), "", 600)),
        ("low P-1", "region", ((0,), "", 1200)),
        ("high P-1", "region", ((0,), "", 3300)),
        ("NPSH P-1", "npsh-margin", ((0,), "", 2500, ("suction_head = 4", "suction_head = -4"))),
        ("motor P-2", "motor-installed", ((1,), "", 2500, ("motor = 355", "motor = 250"))),
        ("start P-1", "start", ((0, 1), "", 5600, DROOPING, FLAT, EASY)),
        ("shaft new", "shaft-power", ((), "frail", 2300)),
    ],
)
def test_each_word_for_a_limit(
    told: str, criterion: str, arguments: tuple[Any, ...], one: Callable[..., Ran]
) -> None:
    ran = one(*arguments)
    assert code(ran) == told
    assert told == "" or BREACHES[ran.breach].criterion == criterion
    assert (ran.shortfall > 0) == bool(told)


@pytest.mark.parametrize(("motor", "word"), [(250e3, "motor new"), (355e3, "")])
def test_the_motor_of_the_new_pump_is_the_one_given(motor: float, word: str, one: Callable[..., Ran]) -> None:
    assert 250 < power_of(NEW, 2300) < 355
    ran = one((), "C", 2300, motor=motor)
    assert code(ran) == word
    if word:
        assert ran.shortfall == pytest.approx(power_of(NEW, 2300) / 250 - 1, rel=1e-4)


def test_what_is_not_known_is_told_and_is_no_failure(one: Callable[..., Ran]) -> None:
    ran = one((0,), "", 2500, ("motor = 355", ""))
    assert (ran.within, ran.unknown) == (True, ("motor-installed",))
    assert one((), "C", 2300).unknown == ("motor-new",)


def test_a_worn_pump_is_held_against_both_readings_of_its_wear(one: Callable[..., Ran]) -> None:
    """3 % of 42 m at 2400 is a leakage of 140: it takes the power of 2440 to give 2300."""
    leak = 2400 * ((52.5 - 0.97 * 42) / 10.5) ** 0.5 - 2400
    through = power_of(INSTALLED, 2300 + leak)
    assert power_of(INSTALLED, 2300) < 317 < through
    worn = ("motor = 355", "motor = 317\nrated_flow = 2400\ncondition = { head_loss = 3 }")
    ran = one((1,), "", 2300, worn)
    assert code(ran) == "motor P-2"
    assert ran.shortfall == pytest.approx(through / 317 - 1, rel=1e-3)


def test_energy_is_before_motor_and_drive_where_their_efficiencies_are_stated(
    plant: Loaded, one: Callable[..., Ran]
) -> None:
    shaft = power_of(INSTALLED, 2500) * 1e3
    assert one((0,), "", 2500).power == pytest.approx(shaft, rel=2e-5)
    drive = Drive(motor_efficiency=0.95, drive_efficiency=0.97)
    installed = tuple(replace(pump, drive=drive) for pump in plant.case.installed)
    duty = run_as(replace(plant.case.duties[1], flow=2500 / HOUR), ((0,), False))
    case = replace(plant.case, installed=installed)
    assert every_run(Plant(case, None, nan), [duty])[0][0].power == pytest.approx(
        shaft / 0.95 / 0.97, rel=2e-5
    )


def test_every_combination_of_unlike_pumps_is_tried_and_no_twin(
    load: Callable[..., Loaded], monkeypatch: Any
) -> None:
    third = '[[installed]]\ntag = "P-3"\ncurve = { pump = "C" }\n\n[[duty]]\nname = "most"'
    case = load(('[[duty]]\nname = "most"', third)).case
    plant = Plant(case, pumps_from(load(), "C"), nan)
    found = module._combinations(plant, case.duties[0])
    # none, one or both of the pair; P-3 or not; the new one or not; less the empty one
    assert len(found) == 3 * 2 * 2 - 1
    assert found[0] == ((0, 1), True)
    sizes = [abs(len(running) + new - 3) for running, new in found]
    assert max(sizes) == 2
    monkeypatch.setattr(module, "MOST", 5)
    near = module._combinations(plant, case.duties[0])
    assert near == found[:5]


def choices_of(loaded: Loaded, new: str = "") -> tuple[list[Any], tuple[Any, ...]]:
    """Combinations tried and choices made, without the map."""
    plant = Plant(loaded.case, pumps_from(loaded, new) if new else None, nan)
    tried = [module._combinations(plant, duty) for duty in loaded.case.duties]
    return tried, module._choices(plant, tried)


def test_a_pump_that_is_replaced_runs_until_the_new_one_comes(load: Callable[..., Loaded]) -> None:
    loaded = load(
        ("new_pump = { }", 'new_pump = { replaces = "P-2" }'),
        ('running = ["P-2"]', 'running = ["P-1"]'),
        ('["P-1", "P-2", "new"]', '["P-1", "new"]'),
    )
    tried, (_, usual, *_) = choices_of(loaded, "C")
    assert (usual.asked.running, usual.asked.new) == ((0,), 1)
    assert 1 not in usual.best.running
    assert usual.without.running == (0, 1)
    assert not any(1 in running and new for running, new in tried[1])
    assert choices_of(loaded)[1][1].asked.running == (0, 1)


def test_pumps_that_take_turns_are_one_combination(load: Callable[..., Loaded]) -> None:
    usual = 'flow = 5400\nlevels = ["low"]\nrunning = ["P-1", "P-2", "new"]'
    turns = 'flow = 2000\nlevels = ["low"]\nrunning = { any = 1, new = false }'
    _, choices = choices_of(load((usual, turns)))
    (only,) = (choice for choice in choices if choice.duty == 1)
    assert (only.hours, only.saved) == (4380, 0.0)


def ran(power: float, breach: int = -1, shortfall: float = 0.0) -> Ran:
    return Ran((0,), 0, 0, 40.0, 0.5, power, breach, 1, shortfall, ())


@pytest.mark.parametrize(
    ("rans", "place"),
    [
        ([ran(3.0), ran(2.0), ran(1.0, 5, 0.1)], 1),
        ([ran(nan), ran(2.0)], 1),
        ([ran(1.0, 5, 0.2), ran(2.0, 7, 0.1)], 1),
    ],
)
def test_cheapest_is_within_limits_else_least_outside(rans: list[Ran], place: int) -> None:
    assert cheapest(rans) is rans[place]


def test_duties_held_by_speed_need_nothing_special(plant: Loaded) -> None:
    """The pump that varies its speed gives what the other leaves of the flow, at the head of the system."""
    drive = Drive(lowest=0.6, highest=1.0)
    fixed, varies = plant.case.installed
    case = replace(plant.case, installed=(fixed, replace(varies, drive=drive)))
    usual = replace(case.duties[1], control=Control.SPEED, flow=5000 / HOUR)
    duties = [run_as(usual, combination) for combination in (((0, 1), False), ((1,), False))]
    (both,), (single,) = every_run(Plant(case, None, nan), duties)
    head = 12 + 22 * (5000 / 6600) ** 2 + 5 * (5000 / 4800) ** 2
    assert both.header == pytest.approx(head, rel=1e-6)
    assert both.unknown == ()
    assert (both.within, code(both)) == (False, "high P-1")  # 3509 of the fixed one at that head
    assert 2400 * ((52.5 - head) / 10.5) ** 0.5 > 1.3 * 2500
    assert code(single) == "past P-2"


def test_the_worst_liquid_rules_a_cell_of_the_map(load: Callable[..., Loaded]) -> None:
    """One pump at 2500 gives 41.1 m at 86 %: 325 kW of water, 488 kW at 1500 kg/m3, on a motor of 355 kW."""
    dense = '[[liquid]]\nname = "dense"\ndensity = "1500 kg/m3"\nviscosity = "1 cSt"\n'
    dense += 'vapour_pressure = "2000 Pa"\nheat_capacity = "4.18 kJ/(kg K)"\n\n[system]'
    flow = ("flow = 2400", "flow = 2500")
    water = screener.operation(load(flow).case).map
    both = screener.operation(
        load(flow, ("[system]", dense), ('name = "least"', 'name = "least"\nliquid = "dense"')).case
    ).map
    for found, within, liquids in ((water, True, (0,)), (both, False, (0, 1))):
        place = next(place for place, flow in enumerate(found.flows) if round(flow * HOUR) == 2500)
        one = next(number for number, item in enumerate(found.combinations) if len(item[0]) == 1)
        spot = found.spots[place][one]
        assert found.liquids == liquids
        assert spot.ran.within is within, code(spot.ran)
    assert code(spot.ran).startswith("motor")
