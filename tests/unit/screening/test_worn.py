"""Worn installed pumps: read both ways, the worse governs, and restored they are as before."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import screener
from screener.case.read import read_case
from screener.changes.closer import look_closer
from screener.changes.smallest import ChangeKind
from screener.errors import InputError
from screener.files.document import load
from screener.hydraulics.similarity import trimmed
from screener.hydraulics.wear import leakage, leaking, uniform
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Verdict
from screener.screening.assess import judged, restored, set_up
from screener.screening.shortlist import shortlist

LOSS = 0.04


@pytest.fixture(scope="module")
def worn_of(case: Case) -> Callable[[float], Case]:
    """The demo with P-2 worn by a share of its head."""

    def make(loss: float) -> Case:
        losses = np.array([0.0, loss])
        installed = tuple(replace(pump, head_loss=x) for pump, x in zip(case.installed, losses, strict=True))
        pumps = uniform(case.pumps, loss=losses)
        return replace(case, installed=installed, pumps=pumps, as_new=case.pumps)

    return make


@pytest.fixture(scope="module")
def worn(worn_of: Callable[[float], Case]) -> Case:
    return worn_of(LOSS)


def read(tmp_path: Path, line: str, table: PumpTable) -> Case:
    """The demo's case file with a line under P-2."""
    text = screener.demo("osier-bank", "case.toml").read_text()
    changed = text.replace('tag = "P-2"\n', f'tag = "P-2"\n{line}\n')
    assert changed != text
    (tmp_path / "case.toml").write_text(changed)
    return read_case(load(tmp_path / "case.toml"), table)


def test_the_case_file_says_so(tmp_path: Path, case: Case, table: PumpTable) -> None:
    found = read(tmp_path, "condition = { head_loss = 4 }", table)
    assert [pump.head_loss for pump in found.installed] == [0.0, pytest.approx(0.04)]
    new, now = case.pumps.curves.head, found.pumps.curves.head
    assert now[0] == pytest.approx(new[0])
    assert now[1] == pytest.approx(0.96 * new[1])
    assert found.as_new is not None
    assert found.as_new.curves.head == pytest.approx(new)


def test_without_a_loss_nothing_is_worn(case: Case) -> None:
    assert case.as_new is None


def test_a_loss_that_the_curve_cannot_show_is_a_problem(tmp_path: Path, table: PumpTable) -> None:
    with pytest.raises(InputError) as caught:
        read(tmp_path, "condition = { head_loss = 45 }", table)
    (problem,) = caught.value.problems
    assert "the curve ends before" in problem.what
    assert problem.line > 0


def test_the_worse_of_both_readings_governs(worn: Case, table: PumpTable) -> None:
    """Each reading alone, as a case of its own: no verdict is better than the worse of the two."""
    result = shortlist(worn, table)
    rows = result.best.model
    pumps = trimmed(
        table,
        model=rows,
        diameter=result.best.diameter,
        speed_ratio=result.reach.speed_ratio[rows],
    )
    flow = np.array([pump.rated_flow for pump in worn.installed])
    leak = leakage(worn.as_new, loss=np.array([0.0, LOSS]), flow=flow)
    assert leak[1] > 0
    lower = judged(set_up(replace(worn, as_new=None)), pumps).candidates
    round_ = judged(
        set_up(replace(worn, pumps=leaking(worn.as_new, leak=leak), as_new=None)), pumps
    ).candidates
    assert (lower.verdict != round_.verdict).any()
    assert result.best.verdict.tolist() == np.maximum(lower.verdict, round_.verdict).tolist()
    outcomes = np.maximum(lower.findings.outcome, round_.findings.outcome)
    assert result.best.findings.outcome.tolist() == outcomes.tolist()


def test_restored_is_the_case_as_it_was(worn: Case, case: Case, table: PumpTable) -> None:
    result = shortlist(worn, table)
    assert result.restored is not None
    rows = result.best.model
    pumps = trimmed(
        table, model=rows, diameter=result.best.diameter, speed_ratio=result.reach.speed_ratio[rows]
    )
    before = judged(set_up(case), pumps).candidates
    assert result.restored.verdict.tolist() == before.verdict.tolist()
    assert result.restored.figures.score == pytest.approx(before.figures.score, nan_ok=True)
    today = set_up(restored(worn))
    assert result.alone is not None
    assert result.alone.total == pytest.approx(today.today.total[0, today.header.rated])


def test_restoring_is_told_as_a_change(worn: Case, table: PumpTable) -> None:
    found = look_closer(screener.explain(worn, table, table.ids.index("250-400-4 F"), 0.393))
    assert Verdict(int(found.explained.judged.candidates.verdict[0])) == Verdict.REJECTED
    assert ChangeKind.ONE_RESTORED in [change.kind for change in found.changes]


def test_more_wear_asks_more_of_the_new_pump(worn_of: Callable[[float], Case], table: PumpTable) -> None:
    asked = []
    for loss in (0.0, 0.02, 0.04):
        result = shortlist(worn_of(loss), table)
        asked.append(result.needs[result.bench.header.rated].flow)
    assert asked[0] < asked[1] < asked[2]
