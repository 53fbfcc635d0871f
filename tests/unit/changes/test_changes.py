"""What would make a pump pass, and the corners of the tolerance: each held against a run of its own."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import screener
from screener.changes.closer import look_closer
from screener.changes.smallest import ChangeKind
from screener.criteria import criteria
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Outcome, Verdict

NAMES = [criterion.name for criterion in criteria()]
NEAR_MISS, PARKED, PASSING = "300-400-4 B", "200-400-4 K", "250-400-4 F"


@pytest.fixture(scope="module")
def demo() -> tuple[Case, PumpTable]:
    loaded = screener.load(screener.demo("osier-bank", "case.toml"))
    return loaded.case, loaded.catalog


def closer(demo, pump: str):
    case, catalog = demo
    return look_closer(screener.explain(case, catalog, catalog.ids.index(pump)))


def verdict(demo, text: str, pump: str, diameter: float, folder: Path) -> Verdict:
    """Verdict of one pump in a changed case file, by the ordinary way."""
    (folder / "case.toml").write_text(text)
    case = screener.load_case(folder / "case.toml", demo[1])
    found = screener.explain(case, demo[1], demo[1].ids.index(pump), diameter)
    return Verdict(int(found.judged.candidates.verdict[0]))


@pytest.fixture
def night() -> tuple[str, str]:
    """The demo's case file, cut before its night duty."""
    text = screener.demo("osier-bank", "case.toml").read_text()
    start = text.index('[[duty]]\nname = "night"')
    return text[:start], text[start:]


def test_the_lowest_flow_told_passes_and_a_lower_one_does_not(demo, night, tmp_path) -> None:
    found = closer(demo, NEAR_MISS)
    (change,) = (c for c in found.changes if c.kind == ChangeKind.LOWEST_FLOW)
    assert demo[0].duties[change.duty].name == "night"
    diameter = float(found.explained.judged.candidates.diameter[0])
    before, duty = night
    for flow, expected in (
        (change.value * 3600, Verdict.ACCEPTED),
        (change.value * 3600 - 12, Verdict.REJECTED),
    ):
        changed = before + duty.replace("flow = 1700", f"flow = {flow!r}")
        assert changed != before + duty
        assert verdict(demo, changed, NEAR_MISS, diameter, tmp_path) == expected


def test_without_the_new_pump_the_duty_no_longer_judges_it(demo, night, tmp_path) -> None:
    found = closer(demo, NEAR_MISS)
    assert ChangeKind.WITHOUT_NEW in [change.kind for change in found.changes]
    diameter = float(found.explained.judged.candidates.diameter[0])
    before, duty = night
    changed = before + duty.replace('running = ["P-1", "P-2", "new"]', 'running = ["P-1", "P-2"]')
    assert verdict(demo, changed, NEAR_MISS, diameter, tmp_path) == Verdict.ACCEPTED


@pytest.mark.parametrize("pump", [PARKED, PASSING])
def test_nothing_is_told_where_no_single_change_helps_or_none_is_needed(demo, pump: str) -> None:
    assert closer(demo, pump).changes == ()


def test_a_motor_one_size_up_is_told_where_only_the_motor_fails(demo) -> None:
    case, catalog = demo
    small = replace(case, installed=tuple(replace(pump, motor=75e3) for pump in case.installed))
    found = look_closer(screener.explain(small, catalog, catalog.ids.index(PASSING), 0.393))
    failed = found.explained.judged.candidates.findings.outcome[0] == Outcome.FAIL
    assert [NAMES[column] for column in np.flatnonzero(failed)] == ["motor-installed"]
    (change,) = found.changes
    # P-1 and P-2 take at most 81.3 % of 160 kW in any state, 130.1 kW: 132 kW is the IEC size for that
    assert (change.kind, change.pump, change.value) == (ChangeKind.MOTOR, 0, 132e3)


def test_corners_without_tolerance_change_nothing(demo) -> None:
    case, catalog = demo
    exact = replace(case, pumps=replace(case.pumps, head_tolerance=np.zeros(len(case.installed))))
    table = replace(catalog, head_tolerance=np.zeros(len(catalog)))
    found = look_closer(screener.explain(exact, table, table.ids.index(PASSING)))
    assert len(found.corners) == 2 * 2 + 2  # two kinds of pump, and all low, all high
    assert not any(corner.fails.any() for corner in found.corners)


def test_a_low_new_pump_beside_high_ones_fails_to_open_its_valve(demo) -> None:
    """By hand: it starts with 16.0 % over the header at night; 10 % on each side leave nothing of that."""
    case, catalog = demo
    wide = replace(case, pumps=replace(case.pumps, head_tolerance=np.full(len(case.installed), 0.10)))
    table = replace(catalog, head_tolerance=np.full(len(catalog), 0.10))
    found = look_closer(screener.explain(wide, table, table.ids.index(PASSING), 0.393))
    (corner,) = (corner for corner in found.corners if corner.odd == 0 and not corner.high)
    assert corner.fails[0, NAMES.index("start")]
    assert corner.findings.pump[0, NAMES.index("start")] == 0
    low_shutoff = 0.9 * (1 + 0.160) * 37.41  # its shutoff head at the header, 10 % lower
    assert low_shutoff < 1.1 * 37.41
