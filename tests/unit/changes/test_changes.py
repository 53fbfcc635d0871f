"""What would make a pump pass, on the demo plant: each change written into the case file by hand."""

from __future__ import annotations

from pathlib import Path

import pytest

import screener
from screener.changes.closer import Closer, look_closer
from screener.changes.smallest import Change, ChangeKind
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Verdict

NEAR_MISS = "300-400-4 B"


@pytest.fixture(scope="module")
def demo() -> tuple[Case, PumpTable]:
    loaded = screener.load(screener.demo("osier-bank", "case.toml"))
    return loaded.case, loaded.catalog


@pytest.fixture(scope="module")
def found(demo: tuple[Case, PumpTable]) -> Closer:
    case, catalog = demo
    return look_closer(screener.explain(case, catalog, catalog.ids.index(NEAR_MISS)))


@pytest.fixture
def verdict(demo: tuple[Case, PumpTable], found: Closer, tmp_path: Path):
    """Verdict of the near miss, by the ordinary way, with words of the night duty replaced in the file."""
    diameter = float(found.explained.judged.candidates.diameter[0])
    text = screener.demo("osier-bank", "case.toml").read_text()
    start = text.index('[[duty]]\nname = "night"')

    def of(old: str, new: str) -> Verdict:
        assert old in text[start:]
        (tmp_path / "case.toml").write_text(text[:start] + text[start:].replace(old, new))
        case = screener.load_case(tmp_path / "case.toml", demo[1])
        judged = screener.explain(case, demo[1], demo[1].ids.index(NEAR_MISS), diameter).judged
        return Verdict(int(judged.candidates.verdict[0]))

    return of


def change(found: Closer, kind: ChangeKind) -> Change:
    (one,) = (change for change in found.changes if change.kind == kind)
    assert found.explained.bench.header.case.duties[one.duty].name == "night"
    return one


def test_the_lowest_flow_told_passes_and_a_lower_one_does_not(found: Closer, verdict) -> None:
    flow = change(found, ChangeKind.LOWEST_FLOW).value * 3600
    assert verdict("flow = 1700", f"flow = {flow!r}") == Verdict.ACCEPTED
    assert verdict("flow = 1700", f"flow = {flow - 12!r}") == Verdict.REJECTED


def test_without_the_new_pump_the_duty_no_longer_judges_it(found: Closer, verdict) -> None:
    assert change(found, ChangeKind.WITHOUT_NEW).pump == 0
    assert verdict('running = ["P-1", "P-2", "new"]', 'running = ["P-1", "P-2"]') == Verdict.ACCEPTED
