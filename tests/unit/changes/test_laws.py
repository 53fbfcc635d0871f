"""One pump under other trim laws: each held against closed forms, and against a case that names the law."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

import screener
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.changes.laws import ByLaw, by_law
from screener.model.arrays import frozen
from screener.model.case import Case
from screener.model.tables.trim_laws import NAMES
from screener.screening.assess import Bench, set_up
from screener.screening.one import trims
from screener.screening.shortlist import requirements
from screener.view.blocks import Heading, Table
from screener.view.data import trim_law_in_force
from screener.view.display import Display
from screener.view.laws import laws, laws_data

AFFINITY, EQUAL, ISO = NAMES
STEPS = np.array([0.39, 0.40, 0.41])
INLET = 0.25

SCALES = {  # of flow and head, for a diameter over 0.41 m, by hand
    AFFINITY: lambda ratio: (ratio, ratio**2),
    EQUAL: lambda ratio: (ratio**2.5, ratio**2.5),
    ISO: lambda ratio: (
        ((0.41**2 * ratio**2 - INLET**2) / (0.41**2 - INLET**2)) ** 0.5,
        (0.41**2 * ratio**2 - INLET**2) / (0.41**2 - INLET**2),
    ),
    "": lambda ratio: (ratio**1.1, ratio**2.2),
}


def head(law: str, diameter: float, flow: float) -> float:
    """52 m less 190 Q^2 at 0.41 m, cut by a law."""
    by_flow, by_head = SCALES[law](diameter / 0.41)
    return by_head * (52 - 190 * (flow / by_flow) ** 2)


def pump(**figures: object) -> Entry:
    flow = np.linspace(0, 0.4, 33)
    unknown = frozen(np.full(33, np.nan))
    test = TestedCurve(0.41, frozen(flow), frozen(52 - 190 * flow**2), unknown, unknown, unknown, 0.25)
    given = {"minimum": 0.36, "inlet_diameter": INLET, "trim_law": AFFINITY} | figures
    return Entry("p", "p", "end suction", "", 1480.0, (test,), **given)


@pytest.fixture(scope="module")
def case() -> Case:
    return screener.load_case(screener.demo("osier-bank", "case.toml"))


@pytest.fixture(scope="module")
def bench(case: Case) -> Bench:
    return set_up(case)


@pytest.fixture(scope="module")
def found(bench: Bench) -> ByLaw:
    return by_law(bench, pump(), steps=STEPS, chosen=1)


def test_head_at_the_rated_duty_by_each_law(found: ByLaw, bench: Bench) -> None:
    rated = requirements(bench)[bench.header.rated]
    assert (found.flow, found.needed) == (rated.flow, rated.head)
    assert [entry.trim_law for entry in found.entries] == [AFFINITY, EQUAL, ISO]
    expected = [head(law, 0.40, rated.flow) for law in (AFFINITY, EQUAL, ISO)]
    np.testing.assert_allclose(found.head, expected, rtol=1e-6)


def test_smallest_diameter_meets_every_duty_and_one_just(found: ByLaw, bench: Bench) -> None:
    needs = list(requirements(bench).values())
    for entry, wanted in zip(found.entries, found.wanted, strict=True):
        spare = [head(entry.trim_law, wanted, need.flow) - need.head for need in needs if need.flow > 0]
        assert min(spare) == pytest.approx(0, abs=1e-3)
    assert found.wanted[0] < found.wanted[1]  # the affinity law is the optimistic one
    assert found.wanted[0] < found.wanted[2]


@pytest.mark.parametrize("law", NAMES)
def test_verdicts_are_those_of_a_case_that_names_the_law(found: ByLaw, case: Case, law: str) -> None:
    alone = trims(case, compile_table([pump(minimum=0.39)], trim_law=law), 0).judged.candidates
    row = [entry.trim_law for entry in found.entries].index(law)
    at = np.searchsorted(alone.diameter, STEPS - 1e-6)
    np.testing.assert_allclose(alone.diameter[at], STEPS)
    assert found.verdict[row].tolist() == alone.verdict[at].tolist()


def test_the_law_of_the_case_comes_first_and_the_pump_s_own_stays_in_sight(bench: Bench) -> None:
    named = replace(bench.header.case, new_pump=replace(bench.header.case.new_pump, trim_law=EQUAL))
    under = replace(bench, header=replace(bench.header, case=named))
    own = pump(trim_law="", flow_exponent=1.1, head_exponent=2.2)
    result = by_law(under, own, steps=STEPS, chosen=0)
    assert [entry.trim_law for entry in result.entries] == [EQUAL, "", AFFINITY, ISO]
    assert result.named == EQUAL
    np.testing.assert_allclose(result.head[1], head("", 0.39, result.flow), rtol=1e-6)


def test_a_law_is_shown_once_and_the_inlet_s_only_where_it_is_stated(bench: Bench) -> None:
    own = pump(inlet_diameter=np.nan, trim_law="", flow_exponent=1.0, head_exponent=2.0)
    result = by_law(bench, own, steps=STEPS, chosen=0)
    assert [entry.trim_law for entry in result.entries] == ["", EQUAL]


def test_as_blocks_and_as_data(found: ByLaw, case: Case) -> None:
    display = Display(case.display)
    heading, table = laws(found, display)
    assert isinstance(heading, Heading)
    assert isinstance(table, Table)
    assert [row[0].text for row in table.rows] == [AFFINITY, "equal exponents, 2.5", ISO]
    data = laws_data(found, display)
    assert [item["law"] for item in data] == [AFFINITY, EQUAL, ISO]
    assert data[0]["head"] == pytest.approx(head(AFFINITY, 0.40, found.flow), rel=1e-6)
    assert data[1]["smallest_diameter"] == pytest.approx(1000 * found.wanted[1], rel=1e-6)
    assert any("5.5 % less" in note for note in table.note)  # the affinity law is in force


def test_a_law_that_the_pump_cannot_follow_is_said(bench: Bench) -> None:
    named = replace(bench.header.case, new_pump=replace(bench.header.case.new_pump, trim_law=ISO))
    under = replace(bench, header=replace(bench.header, case=named))
    result = by_law(under, pump(inlet_diameter=np.nan), steps=STEPS, chosen=0)
    (_, table) = laws(result, Display(named.display))
    assert table.note[-1] == f"It states no inlet diameter for the law of the case, {ISO}, and keeps its own."
    assert table.rows[0][0].text == AFFINITY


def test_a_pump_without_a_diameter_has_no_laws_to_show(bench: Bench) -> None:
    result = by_law(bench, pump(), steps=np.array([np.nan]), chosen=0)
    display = Display(bench.header.case.display)
    assert laws(result, display) == laws_data(result, display) == []


def test_what_is_said_of_a_catalog_under_the_law_of_the_case() -> None:
    pumps = [pump(), pump(inlet_diameter=np.nan), pump(inlet_diameter=np.nan)]
    assert trim_law_in_force(compile_table(pumps)) == []
    assert trim_law_in_force(compile_table(pumps, trim_law=EQUAL)) == [
        "Every pump is trimmed by the law of the case: equal exponents."
    ]
    assert trim_law_in_force(compile_table(pumps, trim_law=ISO))[1:] == [
        "2 of 3 state no inlet diameter for it and keep their own law."
    ]
    assert len(trim_law_in_force(compile_table(pumps[:1], trim_law=ISO))) == 1
