"""Headers solved by a network solver (EPANET 2.3.5), kept as files beside this test.

Every file holds the curves as points, the branch losses, the system and the answers; the last pump is
the new one. The curve of a pump with a `speed_ratio` is at the speed of its test.
"""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from screener.header.branch import branch_curves
from screener.header.left import flow_left, without_new
from screener.header.meet import Mark, meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import stack, trimmed
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps, PumpTable

HOUR = 3600.0
OF_SHUTOFF = 1e-4
OF_CURVE_END = 3e-3

CASES = {
    path.stem: json.loads(path.read_text()) for path in Path(__file__).parent.glob("header_cases/*.json")
}


def si(terms: list[list[float]]) -> list[tuple[float, float]]:
    return [(coefficient * HOUR**exponent, exponent) for coefficient, exponent in terms]


def points(pump: dict[str, Any], ratio: float = 1.0) -> tuple[list[float], list[float]]:
    """Points in SI; with a ratio brought there by Q ~ ratio, H ~ ratio^2."""
    return [q / HOUR * ratio for q in pump["flow"]], [h * ratio**2 for h in pump["head"]]


def place(pump: dict[str, Any]) -> Branch:
    terms = si(pump["branch_loss"])
    return Branch(
        discharge=Loss(*zip(*terms, strict=True)) if terms else Loss(), suction_head=pump["suction_head"]
    )


def solve(
    case: dict[str, Any], pumps: Pumps, system_of: Callable[..., SystemCurve]
) -> list[tuple[int, float, list[float]]]:
    """For the installed pumps alone and for all: how many run, header head and flows."""
    branches = branch_curves(pumps.curves, [place(pump) for pump in case["pumps"]])
    last = len(pumps) - 1
    system, asked = case["system"], 1.0
    if "demand" in system:
        asked = system["demand"] / HOUR
        curve = system_of(0.0, [(1.0 / asked**2, 2.0)])  # 1 m at the demand: the header can always give it
    elif "table" in system:
        flow, head = np.array(system["table"]["flow"]) / HOUR, np.array(system["table"]["head"])
        curve = system_of(head[0], table=(flow, head - head[0]))
    else:
        curve = system_of(system["static_head"], si(system["friction"]))
    left = flow_left(
        branches, running=range(last), curve=curve, asked=asked, throttled="demand" in system, count=1
    )
    new = branch_curves(pumps.curves, [place(case["pumps"][-1])])
    met = meet(new, left, branches)
    assert met.mark[last] in (Mark.RUNS, Mark.SHUT)
    alone, flows_alone = without_new(left, last)
    return [
        (last, alone, list(flows_alone)),
        (last + 1, float(met.header[last]), [*met.installed[last, :last], float(met.flow[last])]),
    ]


def check(case: dict[str, Any], answers: list[tuple[int, float, list[float]]]) -> None:
    shutoff = max(pump["head"][0] for pump in case["pumps"])
    for expected in case["expected"]:
        _, header, flows = next(answer for answer in answers if answer[0] == len(expected["flows"]))
        assert header == pytest.approx(expected["header_head"], abs=OF_SHUTOFF * shutoff, rel=0)
        for pump, flow in zip(case["pumps"], flows, strict=False):
            end = pump["flow"][-1] * pump.get("speed_ratio", 1.0)
            assert flow * HOUR == pytest.approx(expected["flows"][pump["tag"]], abs=OF_CURVE_END * end, rel=0)


@pytest.mark.parametrize("name", sorted(CASES))
def test_case(name: str, pumps_of: Callable[..., Pumps], system_of: Callable[..., SystemCurve]) -> None:
    case = CASES[name]
    pumps = pumps_of([points(pump, pump.get("speed_ratio", 1.0)) for pump in case["pumps"]])
    check(case, solve(case, pumps, system_of))


def test_every_kind_of_case_is_there() -> None:
    assert len(CASES) == 14
    systems = [set(case["system"]) for case in CASES.values()]
    assert all(any(kind in system for system in systems) for kind in ("demand", "table", "static_head"))
    assert any(0.0 in state["flows"].values() for case in CASES.values() for state in case["expected"])


@pytest.mark.parametrize("name", ["trimmed", "speed_scaled"])
def test_same_answer_from_the_curve_as_tested(
    name: str,
    pumps_of: Callable[..., Pumps],
    table_of: Callable[..., PumpTable],
    system_of: Callable[..., SystemCurve],
) -> None:
    case = CASES[name]
    installed, new = case["pumps"]
    tested = installed if name == "trimmed" else new  # both pumps of `trimmed` are one model
    table = table_of([points(tested)], diameter=0.4)
    scaled = trimmed(
        table,
        model=np.array([0]),
        diameter=np.array([0.4 * new.get("diameter_ratio", 1.0)]),
        speed_ratio=np.array([new.get("speed_ratio", 1.0)]),
    )
    answers = solve(case, stack([pumps_of([points(installed)]), scaled]), system_of)
    check(case, answers)
    by_points = pumps_of([points(installed), points(new, new.get("speed_ratio", 1.0))])
    _, header, flows = solve(case, by_points, system_of)[-1]
    assert answers[-1][1] == pytest.approx(header, rel=1e-6)  # the points given are rounded to 0.1 mm
    assert answers[-1][2] == pytest.approx(flows, rel=1e-5)
