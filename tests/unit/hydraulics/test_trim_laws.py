"""Properties of the trim laws: as tested at each test, continuous, rising with the diameter."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve, with_law
from screener.hydraulics.similarity import end_at, head_at, trimmed
from screener.hydraulics.trim_laws import trim_head_uncertainty, trim_length
from screener.model.arrays import frozen
from screener.model.curves import Pumps, PumpTable

NAN = np.nan
AFFINITY, EQUAL, ISO = "affinity", "equal exponents", "ISO 9906 inlet diameter"
EVERY = pytest.mark.parametrize("law", [AFFINITY, EQUAL, ISO])


def curve(diameter: float, shutoff: float, bend: float, end: float) -> TestedCurve:
    flow, unknown = np.linspace(0, end, 9), frozen(np.full(9, NAN))
    head = shutoff - bend * flow**2
    return TestedCurve(
        diameter, frozen(flow), frozen(head), unknown, frozen(9e3 + 3e5 * flow), unknown, end / 2
    )


SMALL, LARGE = curve(0.20, 40.0, 4000.0, 0.05), curve(0.22, 50.0, 3500.0, 0.06)


def table(law: str, *curves: TestedCurve, inlet: float = 0.11) -> PumpTable:
    entry = Entry("m", "m", "", "", 1450.0, curves or (SMALL, LARGE), inlet_diameter=inlet)
    return compile_table([with_law(entry, law)])


def at(of: PumpTable, *diameters: float) -> Pumps:
    count = len(diameters)
    return trimmed(
        of, model=np.zeros(count, np.int64), diameter=np.array(diameters), speed_ratio=np.ones(count)
    )


@EVERY
def test_as_tested_at_each_test(law: str) -> None:
    pumps = at(table(law), 0.20, 0.22)
    np.testing.assert_allclose(pumps.curves.head[:, 0], [40, 50], rtol=1e-13)
    np.testing.assert_allclose(pumps.curves.end, [0.05, 0.06], rtol=1e-13)
    np.testing.assert_allclose(pumps.bep_flow, [0.025, 0.03], rtol=1e-13)
    flow = np.array([0.03, 0.03])
    asked = {"model": np.zeros(2, np.int64), "speed_ratio": np.ones(2)}
    found = head_at(table(law), **asked, diameter=np.array([0.20, 0.22]), flow=flow)
    np.testing.assert_allclose(found, [40 - 3.6, 50 - 3.15], rtol=1e-10)


@EVERY
@pytest.mark.parametrize("tested", [0.20, 0.22])
def test_continuous_across_a_test(law: str, tested: float) -> None:
    curves = at(table(law), tested - 1e-10, tested, tested + 1e-10).curves
    for values in (curves.head, curves.power, curves.end[:, None], curves.span[:, None]):
        np.testing.assert_allclose(values[[0, 2]], values[[1, 1]], rtol=1e-7)


@EVERY
@settings(max_examples=40, deadline=None)
@given(st.floats(0.15, 0.245), st.floats(0.001, 0.005), st.floats(0.0, 0.03))
def test_a_larger_impeller_gives_more_head(law: str, diameter: float, step: float, flow: float) -> None:
    asked = {"model": np.zeros(2, np.int64), "speed_ratio": np.ones(2), "flow": np.full(2, flow)}
    small, large = head_at(table(law), **asked, diameter=np.array([diameter, diameter + step]))
    assert np.isnan(small) or small < large


@settings(max_examples=20, deadline=None)
@given(st.floats(0.15, 0.25))
def test_without_an_inlet_the_rule_is_the_affinity_law(diameter: float) -> None:
    rule, affinity = at(table(ISO, inlet=0.0), diameter), at(table(AFFINITY), diameter)
    np.testing.assert_allclose(rule.curves.head, affinity.curves.head, rtol=1e-12)
    np.testing.assert_allclose(rule.curves.end, affinity.curves.end, rtol=1e-12)


@EVERY
def test_end_at_and_head_at_follow_the_law_of_the_whole_curve(law: str) -> None:
    diameters = (0.16, 0.205, 0.24)
    pumps, of = at(table(law), *diameters), table(law)
    asked = {"model": np.zeros(3, np.int64), "diameter": np.array(diameters), "speed_ratio": np.ones(3)}
    np.testing.assert_allclose(end_at(of, **asked), pumps.curves.end, rtol=1e-13)
    station = pumps.curves.span * 20 / 64  # the twentieth, where the curve is known exactly
    np.testing.assert_allclose(head_at(of, **asked, flow=station), pumps.curves.head[:, 20], rtol=1e-12)


def test_between_tests_both_come_by_the_rule_and_mix_in_diameter() -> None:
    # by hand at 0.205 m with an inlet of 0.11 m: R^2 = (0.042025 - 0.0121) / (0.04 - 0.0121) = 1.0725806
    # from below, (0.042025 - 0.0121) / (0.0484 - 0.0121) = 0.8243802 from above; a quarter of the way
    pumps = at(table(ISO), 0.205)
    assert pumps.curves.head[0, 0] == pytest.approx(0.75 * 1.0725806 * 40 + 0.25 * 0.8243802 * 50, rel=1e-7)
    end = 0.75 * 1.0725806**0.5 * 0.05 + 0.25 * 0.8243802**0.5 * 0.06
    assert pumps.curves.end[0] == pytest.approx(end, rel=1e-7)
    power = 0.75 * 1.0725806**1.5 * 9e3 + 0.25 * 0.8243802**1.5 * (9e3)
    assert pumps.curves.power[0, 0] == pytest.approx(power, rel=1e-7)


def test_past_the_shorter_test_the_longer_one_is_brought_by_the_rule() -> None:
    # scaled ends 0.05 / sqrt(0.0279) = 0.29934 and 0.06 / sqrt(0.0363) = 0.31492: the larger test leads
    tested = table(ISO).tested
    ratio = (0.0279 / 0.0363) ** 0.5
    assert tested.span.tolist() == pytest.approx([0.06 * ratio, 0.06], rel=1e-12)
    flow = np.linspace(0, tested.span[0], 65)
    inside = flow <= 0.05
    brought = ratio**2 * (50 - 3500 * (flow / ratio) ** 2)
    last = np.flatnonzero(inside)[-1]
    difference = 40 - 4000 * flow[last] ** 2 - brought[last]
    np.testing.assert_allclose(tested.head[0, ~inside], (brought + difference)[~inside], rtol=1e-11)


def test_a_cut_leaves_the_efficiency_loss_and_the_distance_in_diameter() -> None:
    flow = np.linspace(0, 0.05, 9)
    test = TestedCurve(
        0.2, frozen(flow), frozen(40 - 4000 * flow**2), frozen(np.full(9, 0.7)), *[frozen([NAN] * 9)] * 2, NAN
    )
    entry = Entry("m", "m", "", "", 1450.0, (test,), inlet_diameter=0.11, efficiency_loss=0.2)
    pumps = at(compile_table([with_law(entry, ISO)]), 0.18)
    assert pumps.from_test[0] == pytest.approx(0.1)
    assert pumps.curves.efficiency[0, 30] == pytest.approx(0.68)  # 0.2 of a cut of 10 % [D]
    assert pumps.law_inlet[0] == 0.11


def test_uncertainty_is_none_at_and_between_tests_and_never_missing() -> None:
    pumps = at(table(AFFINITY), 0.18, 0.20, 0.217, 0.22, 0.24, NAN)
    assert pumps.trim_uncertainty.tolist() == pytest.approx([1 - 0.9**0.33, 0, 0, 0, 0, 0], abs=1e-12)
    assert at(table(AFFINITY, curve(NAN, 40.0, 4000.0, 0.05)), 0.18).trim_uncertainty.tolist() == [0]


def test_uncertainty_of_a_law_that_gives_less_is_less() -> None:
    # real 0.9^2.33 against the law: exponent 2.2 leaves 1 - 0.9^0.13 = 1.36 %; 2.5 gives less already [D]
    ratio = np.full(3, 0.9)
    found = trim_head_uncertainty(ratio=ratio, law_head=np.array([0.9**2, 0.9**2.2, 0.9**2.5]))
    assert found == pytest.approx([0.0341715, 0.0136032, 0.0], abs=1e-6)
    # and one that promises more for a larger impeller is less sure there: 1 - 1.1^(2.33 - 2.5) [D]
    larger = trim_head_uncertainty(ratio=np.array([1.1]), law_head=np.array([1.1**2.5]))
    assert larger == pytest.approx([0.0160721], abs=1e-6)


def test_trim_length_by_hand() -> None:
    found = trim_length(diameter=np.array([0.5, 0.5, NAN]), inlet=np.array([0.3, 0.0, 0.1]))
    np.testing.assert_allclose(found, [0.4, 0.5, NAN])
