"""Trims and speeds: tested diameters as tested, a blend between them, the laws outside."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.hydraulics import interpolate
from screener.hydraulics.similarity import end_at, head_at, stack, take, trimmed
from screener.model.arrays import frozen
from screener.model.curves import Curves, Pumps, PumpTable

NAN = np.nan
NONE = frozen(np.full(9, NAN))


def curve(
    diameter: float, shutoff: float, bend: float, end: float, *, scale: float = 1.0, **columns: object
) -> TestedCurve:
    """H = shutoff - bend Q^2 at nine points up to `end`; `scale` multiplies every flow."""
    flow = np.linspace(0, end, 9)
    given = {name: NONE if read is None else frozen(read(flow)) for name, read in columns.items()}
    measured = {"efficiency": NONE, "power": NONE, "npsh_required": NONE} | given
    return TestedCurve(
        diameter=diameter,
        flow=frozen(flow * scale),
        head=frozen(shutoff - bend * flow**2),
        bep_flow=0.6 * end * scale,
        **measured,
    )


def hill(best: float) -> Callable[[np.ndarray], np.ndarray]:
    """An efficiency of 0.8 at the flow `best`, 0 at no flow."""
    return lambda flow: 0.8 - 0.8 * (flow / best - 1) ** 2


def model(*curves: TestedCurve, **figures: float) -> Entry:
    return Entry("m", "m", "end suction", "", 1450.0, curves, **figures)


SMALL = curve(
    0.20,
    40.0,
    4000.0,
    0.05,
    efficiency=hill(0.03),
    power=lambda q: 9e3 + 3e5 * q,
    npsh_required=lambda q: 1 + 900 * q**2,
)
LARGE = curve(
    0.22,
    50.0,
    3500.0,
    0.06,
    efficiency=hill(0.036),
    power=lambda q: 13e3 + 4e5 * q,
    npsh_required=lambda q: 1.2 + 800 * q**2,
)
TWO = model(SMALL, LARGE, maximum=0.24, minimum=0.16, minimum_flow=0.012, maximum_flow=0.07)
BARE = model(curve(NAN, 30.0, 2000.0, 0.04))
TABLE = compile_table([TWO, BARE])


def at(table: PumpTable, diameter: float, *, row: int = 0, ratio: float = 1.0) -> Pumps:
    return trimmed(table, model=np.array([row]), diameter=np.array([diameter]), speed_ratio=np.array([ratio]))


def read(pumps: Pumps, column: str, flow: float | np.ndarray) -> np.ndarray:
    """One column of one pump, read between its stations by parabolas through the nearest three."""
    reach = pumps.curves.npsh_span[0] if column == "npsh_required" else pumps.curves.span[0]
    place = np.atleast_1d(np.asarray(flow) / reach * 64)
    middle = np.clip(np.rint(place), 1, 63).astype(int)
    before, here, after = (getattr(pumps.curves, column)[0][middle + offset] for offset in (-1, 0, 1))
    t = place - middle
    return here + t * (after - before) / 2 + t**2 * (after - 2 * here + before) / 2


@pytest.mark.parametrize(
    ("diameter", "shutoff", "bend", "end", "npsh", "npsh_bend", "still", "grows"),
    [(0.20, 40.0, 4000.0, 0.05, 1.0, 900.0, 9e3, 3e5), (0.22, 50.0, 3500.0, 0.06, 1.2, 800.0, 13e3, 4e5)],
)
def test_as_tested_at_each_tested_diameter(
    diameter, shutoff, bend, end, npsh, npsh_bend, still, grows
) -> None:
    pumps = at(TABLE, diameter)
    flow = np.linspace(0, end * 0.97, 7)
    assert pumps.curves.start[0] == 0
    assert pumps.curves.end[0] == pytest.approx(end, rel=1e-13)
    np.testing.assert_allclose(read(pumps, "head", flow), shutoff - bend * flow**2, rtol=1e-11)
    np.testing.assert_allclose(read(pumps, "power", flow), still + grows * flow, rtol=1e-11)
    np.testing.assert_allclose(read(pumps, "npsh_required", flow), npsh + npsh_bend * flow**2, rtol=1e-11)
    assert pumps.bep_flow[0] == pytest.approx(0.6 * end, rel=1e-13)
    assert (pumps.from_test[0], pumps.diameter[0]) == (0.0, diameter)


def test_between_tests_both_come_by_the_trim_law_and_mix_in_diameter() -> None:
    pumps, share = at(TABLE, 0.205), 0.25
    low, high = 0.205 / 0.20, 0.205 / 0.22
    flow = np.linspace(0, 0.045, 8)
    # H ~ D^2, Q ~ D, P ~ D^3, by hand
    below = low**2 * (40 - 4000 * (flow / low) ** 2)
    above = high**2 * (50 - 3500 * (flow / high) ** 2)
    np.testing.assert_allclose(read(pumps, "head", flow), (1 - share) * below + share * above, rtol=1e-11)
    power = (1 - share) * low**3 * (9e3 + 3e5 * flow / low) + share * high**3 * (13e3 + 4e5 * flow / high)
    np.testing.assert_allclose(read(pumps, "power", flow), power, rtol=1e-11)
    efficiency = (1 - share) * hill(0.03)(flow / low) + share * hill(0.036)(flow / high)
    np.testing.assert_allclose(read(pumps, "efficiency", flow), efficiency, rtol=1e-9, atol=1e-12)
    need = (1 - share) * (1 + 900 * flow**2) + share * (1.2 + 800 * flow**2)  # at the same flow
    np.testing.assert_allclose(read(pumps, "npsh_required", flow), need, rtol=1e-11)
    assert pumps.curves.end[0] == pytest.approx((1 - share) * 0.05 * low + share * 0.06 * high)
    assert pumps.bep_flow[0] == pytest.approx((1 - share) * 0.03 * low + share * 0.036 * high)
    assert pumps.from_test[0] == pytest.approx(0.025)


def test_past_the_end_of_the_shorter_test_its_last_difference_is_kept() -> None:
    # scaled ends: 0.05/0.20 = 0.25 and 0.06/0.22 = 0.2727. At 0.21 the two ends are 0.0525 and 0.05727.
    pumps, low, high = at(TABLE, 0.21), 0.21 / 0.20, 0.21 / 0.22
    station = 0.06 * high / 64
    last = int(0.05 * low / station)  # the last station that the shorter test reaches

    def short(flow: float) -> float:
        return low**2 * (40 - 4000 * (flow / low) ** 2)

    def long(flow: float) -> float:
        return high**2 * (50 - 3500 * (flow / high) ** 2)

    known = short(last * station) - long(last * station)
    for number in (last + 1, last + 2):
        flow = number * station
        expected = long(flow) + 0.5 * known
        assert flow > 0.05 * low
        assert flow < pumps.curves.end[0] == pytest.approx(0.5 * (0.05 * low + 0.06 * high))
        assert pumps.curves.head[0, number] == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("ratio", [1.0, 0.93])
def test_trim_law_with_exponents_and_speed_from_one_test(ratio: float) -> None:
    table = compile_table(
        [model(SMALL, maximum=0.2, minimum=0.15, flow_exponent=1.5, head_exponent=2.5, minimum_flow=0.01)]
    )
    pumps = at(table, 0.18, ratio=ratio)
    by_flow, by_head = 0.9**1.5 * ratio, 0.9**2.5 * ratio**2
    flow = np.linspace(0, 0.05, 6)
    np.testing.assert_allclose(read(pumps, "head", flow * by_flow), by_head * (40 - 4000 * flow**2))
    np.testing.assert_allclose(
        read(pumps, "power", flow * by_flow), 0.9**4 * ratio**3 * (9e3 + 3e5 * flow), rtol=1e-11
    )
    np.testing.assert_allclose(read(pumps, "efficiency", flow * by_flow), hill(0.03)(flow), atol=1e-12)
    assert pumps.curves.end[0] == pytest.approx(0.05 * by_flow)
    assert pumps.bep_flow[0] == pytest.approx(0.03 * by_flow)
    assert pumps.from_test[0] == pytest.approx(0.1)


def test_above_the_largest_test_its_curve_follows_the_law() -> None:
    pumps = at(TABLE, 0.231)
    assert pumps.curves.head[0, 0] == pytest.approx(50 * 1.05**2)
    assert pumps.curves.end[0] == pytest.approx(0.06 * 1.05)
    assert pumps.from_test[0] == pytest.approx(0.05)


@pytest.mark.parametrize("exponent", [2.0, 1.5])
def test_speed_laws(exponent: float) -> None:
    entry = model(SMALL, maximum=0.2, minimum_flow=0.01, maximum_flow=0.04, npsh_speed_exponent=exponent)
    table = compile_table([entry])
    pumps = at(table, 0.2, ratio=0.9)
    flow = np.linspace(0, 0.05, 6)
    np.testing.assert_allclose(read(pumps, "head", 0.9 * flow), 0.81 * (40 - 4000 * flow**2), rtol=1e-11)
    np.testing.assert_allclose(read(pumps, "power", 0.9 * flow), 0.729 * (9e3 + 3e5 * flow), rtol=1e-11)
    need = 0.9**exponent * (1 + 900 * flow**2)
    np.testing.assert_allclose(read(pumps, "npsh_required", 0.9 * flow), need, rtol=1e-11)
    found = [pumps.speed, pumps.bep_flow, pumps.minimum_flow, pumps.maximum_flow, pumps.curves.end]
    np.testing.assert_allclose(np.concatenate(found), 0.9 * np.array([1450, 0.03, 0.01, 0.04, 0.05]))


def test_a_trim_leaves_the_inlet_and_the_minimum_flow_alone() -> None:
    table = compile_table([model(SMALL, maximum=0.2, minimum=0.15, minimum_flow=0.01, maximum_flow=0.04)])
    full, cut = at(table, 0.2), at(table, 0.16)
    flow = np.linspace(0, 0.05, 6)
    np.testing.assert_allclose(read(cut, "npsh_required", flow), 1 + 900 * flow**2, rtol=1e-11)
    assert cut.minimum_flow[0] == 0.01
    assert cut.maximum_flow[0] == 0.04
    assert cut.suction_specific_speed[0] == full.suction_specific_speed[0]
    assert cut.specific_speed[0] == full.specific_speed[0]


@pytest.mark.parametrize(("diameter", "lost"), [(0.2, 0.0), (0.18, 0.03), (0.16, 0.06), (0.22, 0.0)])
def test_efficiency_lost_by_a_cut(diameter: float, lost: float) -> None:
    table = compile_table([model(SMALL, maximum=0.24, efficiency_loss=0.3)])
    best = 0.03 * diameter / 0.2
    assert read(at(table, diameter), "efficiency", best)[0] == pytest.approx(0.8 - lost, rel=1e-9)


def test_no_efficiency_is_lost_between_tests() -> None:
    table = compile_table([model(SMALL, LARGE, efficiency_loss=0.3)])
    lossless = at(TABLE, 0.21).curves.efficiency
    assert at(table, 0.21).curves.efficiency.tolist() == lossless.tolist()


def test_a_test_without_npsh_borrows_it() -> None:
    table = compile_table([model(curve(0.20, 40.0, 4000.0, 0.05), LARGE)])
    flow = np.linspace(0, 0.06, 7)
    for diameter in (0.17, 0.20, 0.21, 0.22):
        np.testing.assert_allclose(
            read(at(table, diameter), "npsh_required", flow), 1.2 + 800 * flow**2, rtol=1e-11
        )


def test_specific_speeds_by_hand() -> None:
    # 0.04 m3/s at best efficiency, H = 64 - 10000 * 0.04^2 = 48 m over 3 stages, NPSHr = 4 m, two eyes
    test = curve(0.25, 64.0, 1e4, 0.0666666666666667, npsh_required=lambda q: 2.4 + 1000 * q**2)
    pumps = at(compile_table([model(test, stages=3, eyes=2)]), 0.25)
    # 1450 * sqrt(0.02) = 205.0610; 16^0.75 = 8; 4^0.75 = 2.828427  [D]
    assert pumps.specific_speed[0] == pytest.approx(205.0610 / 8, rel=1e-6)
    assert pumps.suction_specific_speed[0] == pytest.approx(205.0610 / 2.828427, rel=1e-6)


def test_specific_speeds_are_unknown_without_a_best_flow_or_npsh() -> None:
    pumps = at(TABLE, NAN, row=1)
    assert np.isnan(pumps.suction_specific_speed[0])
    assert pumps.specific_speed[0] > 0  # its best flow was stated


@pytest.mark.parametrize("tested", [0.20, 0.21, 0.22])
def test_continuous_across_a_tested_diameter(tested: float) -> None:
    middle = curve(
        0.21, 46.0, 4100.0, 0.053, npsh_required=lambda q: 1.5 + 700 * q**2, efficiency=hill(0.033)
    )
    small = curve(0.20, 40.0, 4000.0, 0.05, npsh_required=lambda q: 1 + 900 * q**2, efficiency=hill(0.03))
    large = curve(0.22, 50.0, 3500.0, 0.06, npsh_required=lambda q: 1 + 800 * q**2, efficiency=hill(0.036))
    table = compile_table([model(small, middle, large, efficiency_loss=0.3, maximum=0.25, minimum=0.15)])
    below, exactly, above = (at(table, tested + step) for step in (-1e-10, 0.0, 1e-10))
    for pumps in (below, above):
        for name in ("end", "span", "npsh_span"):
            assert getattr(pumps.curves, name)[0] == pytest.approx(getattr(exactly.curves, name)[0], rel=1e-6)
        for column in ("head", "efficiency", "npsh_required"):
            found, expected = getattr(pumps.curves, column)[0], getattr(exactly.curves, column)[0]
            known = ~np.isnan(expected)
            np.testing.assert_allclose(found[known], expected[known], rtol=1e-6, atol=1e-7)
        assert pumps.bep_flow[0] == pytest.approx(exactly.bep_flow[0], rel=1e-6)


@settings(max_examples=60, deadline=None)
@given(st.floats(0.16, 0.24), st.floats(0.8, 1.2), st.floats(0.0, 1.2))
def test_head_at_and_end_at_agree_with_the_whole_curve(diameter: float, ratio: float, share: float) -> None:
    pumps = at(TABLE, diameter, ratio=ratio)
    asked = {"model": np.array([0]), "diameter": np.array([diameter]), "speed_ratio": np.array([ratio])}
    end = float(pumps.curves.end[0])
    assert end_at(TABLE, **asked)[0] == pytest.approx(end, rel=1e-12)
    found = head_at(TABLE, **asked, flow=np.array([share * end]))[0]
    if share > 1:
        assert np.isnan(found)
    else:
        head = pumps.curves.head
        place = np.array([share * end / pumps.curves.span[0] * 64])
        whole = interpolate.value(head, interpolate.station_slopes(head), np.array([0]), place)[0]
        assert found == pytest.approx(whole, rel=1e-10)


def test_head_at_ends_with_the_blended_end() -> None:
    # at 0.205 m: 0.75 * 0.05 * 0.205/0.20 + 0.25 * 0.06 * 0.205/0.22 = 0.0524148; the longer alone 0.0559
    end = 0.75 * 0.05 * 0.205 / 0.20 + 0.25 * 0.06 * 0.205 / 0.22
    asked = {"model": np.array([0, 0]), "diameter": np.full(2, 0.205), "speed_ratio": np.ones(2)}
    found = head_at(TABLE, **asked, flow=end * np.array([0.999, 1.001]))
    assert np.isnan(found).tolist() == [False, True]


def test_head_at_by_hand_and_silent_outside_the_points() -> None:
    late = TestedCurve(
        0.3, frozen([0.02, 0.04, 0.06]), frozen([30.0, 27.0, 22.0]), *[frozen([NAN] * 3)] * 3, NAN
    )
    table = compile_table([model(late, maximum=0.3)])
    flows = np.array([0.0199, 0.02, 0.05, 0.06, 0.0601])
    asked = {"model": np.zeros(5, np.int64), "diameter": np.full(5, 0.3), "speed_ratio": np.ones(5)}
    # the parabola through the three points: 30 - (Q - 0.02) * 150 - (Q - 0.02)(Q - 0.04) * 2500
    np.testing.assert_allclose(
        head_at(table, **asked, flow=flows), [NAN, 30.0, 30 - 4.5 - 0.75, 22.0, NAN], rtol=1e-10
    )
    # cut by a tenth and at 110 % speed the start moves to 0.02 * 0.9 * 1.1
    asked |= {"diameter": np.full(5, 0.27), "speed_ratio": np.full(5, 1.1)}
    found = head_at(table, **asked, flow=flows * 0.99 + [0, 1e-15, 0, -1e-15, 0])
    np.testing.assert_allclose(found, np.array([NAN, 30.0, 24.75, 22.0, NAN]) * 0.99**2, rtol=1e-10)


def test_a_model_without_diameters_runs_as_tested() -> None:
    pumps = at(TABLE, NAN, row=1)
    flow = np.linspace(0, 0.04, 5)
    np.testing.assert_allclose(read(pumps, "head", flow), 30 - 2000 * flow**2, rtol=1e-12)
    assert np.isnan(pumps.diameter[0])
    assert pumps.from_test[0] == 0
    assert np.isnan(pumps.curves.npsh_required).all()
    asked = {"model": np.array([1]), "diameter": np.array([NAN]), "speed_ratio": np.array([1.0])}
    assert head_at(TABLE, **asked, flow=np.array([0.02]))[0] == pytest.approx(29.2)
    assert end_at(TABLE, **asked)[0] == pytest.approx(0.04)


def test_no_diameter_asked_is_that_of_the_largest_test() -> None:
    pumps = at(TABLE, NAN)
    assert pumps.diameter[0] == 0.22
    assert pumps.curves.head[0, 0] == 50


def columns(pumps: Pumps) -> dict[str, np.ndarray]:
    own = {f.name: getattr(pumps, f.name) for f in fields(Pumps) if f.name != "curves"}
    return own | {f"curves.{f.name}": getattr(pumps.curves, f.name) for f in fields(Curves)}


def test_many_at_once_are_each_alone_and_stack_and_take_keep_rows() -> None:
    rows = np.array([0, 1, 0, 0, 0])
    diameters = np.array([0.205, NAN, 0.22, 0.17, 0.235])
    ratios = np.array([1.0, 1.02, 0.9, 1.0, 1.1])
    together = trimmed(TABLE, model=rows, diameter=diameters, speed_ratio=ratios)
    alone = [at(TABLE, d, row=int(row), ratio=r) for row, d, r in zip(rows, diameters, ratios, strict=True)]
    for name, values in columns(together).items():
        np.testing.assert_array_equal(values, columns(stack(alone))[name], err_msg=name)
        np.testing.assert_array_equal(values[[3, 1]], columns(take(together, np.array([3, 1])))[name])
    assert len(together) == len(together.curves) == 5


@settings(max_examples=40, deadline=None)
@given(st.floats(0.15, 0.25), st.floats(0.5, 1.5))
def test_doubling_every_flow_doubles_every_flow(diameter: float, ratio: float) -> None:
    def table(scale: float) -> PumpTable:
        small = curve(0.20, 40.0, 4000.0, 0.05, scale=scale, npsh_required=lambda q: 1 + 900 * q**2)
        large = curve(0.22, 50.0, 3500.0, 0.06, scale=scale)
        return compile_table([model(small, large, minimum_flow=0.01 * scale, maximum_flow=0.05 * scale)])

    once, twice = (columns(at(table(scale), diameter, ratio=ratio)) for scale in (1.0, 2.0))
    for name in ("bep_flow", "minimum_flow", "maximum_flow", "curves.end", "curves.span", "curves.npsh_span"):
        np.testing.assert_allclose(twice[name], 2 * once[name], rtol=1e-12, err_msg=name)
    for name in ("curves.head", "curves.npsh_required", "from_test"):
        np.testing.assert_allclose(twice[name], once[name], rtol=1e-9, atol=1e-9, err_msg=name)
    root = 2**0.5  # both specific speeds go with the root of the flow
    np.testing.assert_allclose(twice["specific_speed"], root * once["specific_speed"], rtol=1e-9)
    np.testing.assert_allclose(
        twice["suction_specific_speed"], root * once["suction_specific_speed"], rtol=1e-9
    )
