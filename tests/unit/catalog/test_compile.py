"""Catalog entries to columns: points kept, ends kept, the best flow where it is known, one axis per model."""

from __future__ import annotations

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.model.arrays import frozen
from screener.model.curves import PumpTable

NAN = np.nan
EIGHTHS = np.linspace(0, 0.08, 9)  # every eighth of the 65 stations
NASTY = [50.0, 50.0, 47.0, 46.9, 40.0, 39.0, 20.0, 19.5, 19.0]


def curve(diameter: float, flow: object, head: object, *, bep: float = NAN, **columns: object) -> TestedCurve:
    missing = np.full(len(flow), NAN)
    measured = {name: columns.get(name, missing) for name in ("efficiency", "power", "npsh_required")}
    return TestedCurve(
        diameter, frozen(flow), frozen(head), **{n: frozen(v) for n, v in measured.items()}, bep_flow=bep
    )


def table_of(*curves: TestedCurve, **figures: float) -> PumpTable:
    return compile_table([Entry("one", "One", "in line", "a sheet", 1450.0, curves, **figures)])


def test_points_on_stations_are_kept_whatever_their_shape() -> None:
    need = [NAN, NAN, 2.0, 2.5, 2.4, 3.0, 4.0, 4.1, NAN]
    found = table_of(curve(0.2, EIGHTHS, NASTY, npsh_required=need, power=np.geomspace(1e3, 9e3, 9))).tested
    np.testing.assert_allclose(found.head[0, ::8], NASTY, rtol=1e-12)
    np.testing.assert_allclose(found.power[0, ::8], np.geomspace(1e3, 9e3, 9), rtol=1e-12)
    assert (found.start[0], found.end[0], found.span[0]) == (0.0, 0.08, 0.08)
    # NPSH has an axis of its own, up to its last point: 0.02 to 0.07 are measured
    assert found.npsh_span[0] == 0.07
    known = np.linspace(0, 0.07, 65) >= 0.02
    assert np.isnan(found.npsh_required[0]).tolist() == (~known).tolist()
    assert found.npsh_required[0, -1] == pytest.approx(4.1)


def test_a_curve_that_starts_late_keeps_its_start() -> None:
    flow = np.array([0.02, 0.04, 0.06, 0.08])
    found = table_of(curve(0.2, flow, 50 - 1000 * flow**2, efficiency=[0.5, 0.7, 0.8, 0.7])).tested
    grid = np.linspace(0, 0.08, 65)
    assert (found.start[0], found.end[0]) == (0.02, 0.08)
    # head goes on as its first piece, only to carry the cubic; the other columns stop
    np.testing.assert_allclose(found.head[0], 50 - 1000 * grid**2, rtol=1e-12)
    assert np.isnan(found.efficiency[0]).tolist() == (grid < 0.02 - 1e-12).tolist()


def test_two_points_make_a_straight_curve_and_one_point_none() -> None:
    found = table_of(
        curve(0.2, [0.0, 0.06], [30.0, 24.0], efficiency=[0.1, 0.7], power=[NAN, 9e3], npsh_required=[NAN, 3])
    ).tested
    np.testing.assert_allclose(found.head[0], np.linspace(30, 24, 65))
    np.testing.assert_allclose(found.efficiency[0], np.linspace(0.1, 0.7, 65))
    assert np.isnan(found.power).all()
    assert np.isnan(found.npsh_required).all()


def test_best_flow_is_the_vertex_and_not_the_highest_point() -> None:
    efficiency = 0.82 - 300 * (EIGHTHS - 0.0437) ** 2
    assert table_of(curve(0.2, EIGHTHS, NASTY, efficiency=efficiency)).bep_flow[0] == pytest.approx(0.0437)
    gappy = np.where(np.arange(9) == 5, NAN, efficiency)  # 0.05 missing: points 0.03, 0.04, 0.06 serve
    assert table_of(curve(0.2, EIGHTHS, NASTY, efficiency=gappy)).bep_flow[0] == pytest.approx(0.0437)


def test_best_flow_as_stated_wins() -> None:
    efficiency = 0.82 - 300 * (EIGHTHS - 0.0437) ** 2
    found = table_of(curve(0.2, EIGHTHS, NASTY, efficiency=efficiency, bep=0.041))
    assert found.bep_flow[0] == 0.041


@pytest.mark.parametrize(
    "efficiency",
    [
        np.linspace(0.1, 0.8, 9),
        np.linspace(0.8, 0.1, 9),
        np.full(9, NAN),
        [NAN, NAN, 0.6, 0.7, NAN, NAN, NAN, NAN, NAN],
        [NAN, 0.2, 0.4, 0.6, 0.7, NAN, NAN, NAN, NAN],
    ],
    ids=["last is best", "first is best", "none", "two points", "last known is best"],
)
def test_best_flow_is_unknown(efficiency: object) -> None:
    assert np.isnan(table_of(curve(0.2, EIGHTHS, NASTY, efficiency=efficiency)).bep_flow[0])


def test_best_flow_of_a_pump_with_power_only() -> None:
    efficiency = 0.8 - 250 * (EIGHTHS[1:] - 0.0412) ** 2
    power = np.append(6e3, 9806.65 * EIGHTHS[1:] * NASTY[1:] / efficiency)  # P = rho g Q H / efficiency
    found = table_of(curve(0.2, EIGHTHS, NASTY, power=power))
    assert found.bep_flow[0] == pytest.approx(0.0412, rel=1e-9)
    assert np.isnan(found.tested.efficiency).all()


def test_tests_of_one_model_share_an_axis_of_scaled_flow() -> None:
    exponents = {"flow_exponent": 1.5, "head_exponent": 2.5}
    short, long = np.linspace(0, 0.05, 9), np.linspace(0, 0.09, 9)
    found = table_of(
        curve(0.2, short, 40 - 4000 * short**2), curve(0.25, long, 60 - 3000 * long**2), **exponents
    )
    law = (0.2 / 0.25) ** 1.5
    tested = found.tested
    assert tested.end.tolist() == [0.05, 0.09]
    np.testing.assert_allclose(tested.span, [0.09 * law, 0.09], rtol=1e-13)  # the longer scaled one leads
    inside = np.linspace(0, tested.span[0], 65) <= 0.05
    flow = np.linspace(0, tested.span[0], 65)
    np.testing.assert_allclose(tested.head[0, inside], (40 - 4000 * flow**2)[inside], rtol=1e-12)
    # past its end: the longer test brought down, and what the two differ by where both are last known
    head_law = (0.2 / 0.25) ** 2.5
    brought = head_law * (60 - 3000 * (flow / law) ** 2)
    last = np.flatnonzero(inside)[-1]
    difference = 40 - 4000 * flow[last] ** 2 - brought[last]
    np.testing.assert_allclose(tested.head[0, ~inside], (brought + difference)[~inside], rtol=1e-12)


def test_tests_lend_each_other_what_one_of_them_lacks() -> None:
    need = 1 + 300 * EIGHTHS**2
    bare, full = curve(0.2, EIGHTHS, NASTY), curve(0.22, EIGHTHS, NASTY, npsh_required=need, bep=0.055)
    for curves in ((bare, full), (curve(0.18, EIGHTHS, NASTY, npsh_required=need, bep=0.045), bare)):
        found = table_of(*curves)
        np.testing.assert_allclose(found.tested.npsh_required[0], found.tested.npsh_required[1])
        np.testing.assert_allclose(found.tested.npsh_required[:, -1], need[-1])
        np.testing.assert_allclose(found.bep_flow / found.diameter, 0.25)  # 0.055 / 0.22 = 0.045 / 0.18


def test_the_next_larger_test_lends_first() -> None:
    def test(diameter: float, need: float) -> TestedCurve:
        return curve(diameter, EIGHTHS, NASTY, npsh_required=np.full(9, need))

    need = table_of(test(0.18, NAN), test(0.20, 2.0), test(0.22, 3.0)).tested.npsh_required
    assert need[:, 0].tolist() == [2.0, 2.0, 3.0]
    need = table_of(test(0.18, 1.0), test(0.20, NAN), test(0.22, 3.0), test(0.24, NAN)).tested.npsh_required
    assert need[:, 0].tolist() == [1.0, 3.0, 3.0, 3.0]


def test_efficiency_is_lent_only_where_power_is_missing_too() -> None:
    measured = curve(0.22, EIGHTHS, NASTY, efficiency=np.full(9, 0.7))
    lent = table_of(curve(0.2, EIGHTHS, NASTY), measured).tested
    assert lent.efficiency[0, 10] == pytest.approx(0.7)
    own = table_of(curve(0.2, EIGHTHS, NASTY, power=np.full(9, 8e3)), measured).tested
    assert np.isnan(own.efficiency[0]).all()


def test_models_keep_their_rows_and_figures() -> None:
    one = Entry("a", "A", "in line", "sheet 1", 1450.0, (curve(NAN, EIGHTHS, NASTY),), stages=2)
    two = Entry(
        "b",
        "B",
        "end suction",
        "sheet 2",
        2900.0,
        (curve(0.18, EIGHTHS, NASTY), curve(0.2, EIGHTHS, NASTY)),
        minimum=0.15,
        eyes=2,
        minimum_flow=0.01,
        region_low=0.5,
        head_tolerance=0.03,
    )
    three = Entry("c", "C", "", "", 960.0, (curve(0.3, EIGHTHS, NASTY),), maximum=0.32)
    table = compile_table([one, two, three])
    assert table.ids == ("a", "b", "c")
    assert table.sources == ("sheet 1", "sheet 2", "")
    assert table.first.tolist() == [0, 1, 3, 4]
    np.testing.assert_array_equal(table.diameter, [NAN, 0.18, 0.2, 0.3])
    np.testing.assert_array_equal(table.maximum, [NAN, 0.2, 0.32])  # the largest test where not stated
    np.testing.assert_array_equal(table.minimum, [NAN, 0.15, NAN])
    assert table.speed.tolist() == [1450, 2900, 960]
    assert (table.stages.tolist(), table.eyes.tolist()) == ([2, 1, 1], [1, 2, 1])
    np.testing.assert_array_equal(table.minimum_flow, [NAN, 0.01, NAN])
    np.testing.assert_array_equal(table.region_low, [NAN, 0.5, NAN])
    np.testing.assert_array_equal(table.head_tolerance, [NAN, 0.03, NAN])
    assert len(table) == 3
    assert len(table.tested) == 4


def test_the_order_of_models_changes_nothing_but_the_order() -> None:
    entries = [
        Entry("a", "", "", "", 1450.0, (curve(NAN, EIGHTHS, NASTY),)),
        Entry("b", "", "", "", 1450.0, (curve(0.18, EIGHTHS, NASTY), curve(0.2, EIGHTHS[:5], NASTY[:5]))),
    ]
    there, back = compile_table(entries), compile_table(entries[::-1])
    np.testing.assert_array_equal(there.tested.head[[1, 2, 0]], back.tested.head)
    np.testing.assert_array_equal(there.tested.span[[1, 2, 0]], back.tested.span)


def test_no_column_can_be_written() -> None:
    table = table_of(curve(0.2, EIGHTHS, NASTY))
    for array in (table.first, table.diameter, table.maximum, table.bep_flow, table.tested.head):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0
