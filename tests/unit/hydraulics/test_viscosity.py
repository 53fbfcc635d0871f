"""Whole curves in a viscous liquid, against hand calculations that share no code with the package."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.hydraulics.similarity import stack, take, trimmed
from screener.hydraulics.viscosity import (
    Cover,
    corrected,
    efficiency_factor,
    factors,
    flow_factor,
    head_factor,
    needed,
    npsh_factor,
    parameter,
)
from screener.model.arrays import frozen
from screener.model.curves import Curves, Pumps

BEST = 0.06
NAN = np.nan


def pump(*, scale: float = 1.0, best: float = BEST, start: int = 0, **figures: float) -> Pumps:
    """H = 50 - 2000 Q^2 and the rest by simple laws to 0.1 m3/s, 1450 rpm; `scale` multiplies every flow.

    start : first of nine evenly spaced points that was measured
    """
    flow = np.linspace(0, 0.1, 9)[start:]
    test = TestedCurve(
        NAN,
        flow=frozen(flow * scale),
        head=frozen(50 - 2000 * flow**2),
        efficiency=frozen(0.8 - 0.8 * (flow / BEST - 1) ** 2),
        power=frozen(20e3 + 200e3 * flow),
        npsh_required=frozen(2 + 100 * flow),
        bep_flow=best * scale,
    )
    table = compile_table([Entry("m", "", "", "", 1450.0, (test,), **figures)])
    return trimmed(table, model=np.array([0]), diameter=np.array([NAN]), speed_ratio=np.ones(1))


def changed(pumps: Pumps, **columns: np.ndarray) -> Pumps:
    return replace(pumps, curves=replace(pumps.curves, **columns))


def at_stations(pumps: Pumps) -> np.ndarray:
    return np.linspace(0, 1, pumps.curves.head.shape[1]) * pumps.curves.span[:, None]


# By hand at 200 cSt: 216 m3/h and 42.8 m at best efficiency, 1450 rpm; 30 digits, then rounded
B, C_Q, C_ETA = 6.3709181, 0.92053056, 0.69526017


def test_factors_by_hand() -> None:
    found = factors(pump(), viscosity=200e-6)
    assert found.cover.tolist() == [Cover.COVERED]
    assert found.parameter == pytest.approx([B], rel=1e-7)
    assert found.flow == pytest.approx([C_Q], rel=1e-7)
    assert found.head == pytest.approx([C_Q], rel=1e-7)
    assert found.efficiency == pytest.approx([C_ETA], rel=1e-7)
    # 1 + 0.5 (1/0.92053 - 1) 274000 * 8 m / (216^0.667 1450^1.33)
    assert found.npsh == pytest.approx([1.16378435], rel=1e-7)


def test_a_whole_curve_by_hand() -> None:
    viscous = corrected(pump(), viscosity=200e-6)
    curves, flow = viscous.curves, at_stations(viscous)[0]
    # no flow, half of best, best, and the end, moved by C_Q and read between stations by a straight line
    at = np.array([0, 0.03, 0.06, 0.1]) * C_Q
    head = [50.0, 45.922414, 39.398708, 26.502901]
    assert np.interp(at, flow, curves.head[0]) == pytest.approx(head, abs=2e-3)
    efficiency = [0.0, 0.41715610, 0.55620813, 0.30900452]
    assert np.interp(at, flow, curves.efficiency[0]) == pytest.approx(efficiency, abs=2e-4)
    power = [26480.175, 32797.586, 39001.297, 46786.764]
    assert np.interp(at, flow, curves.power[0]) == pytest.approx(power, rel=2e-4)
    npsh_at = np.linspace(0, 1, 65) * curves.npsh_span[0]
    npsh = [2.3275687, 5.8189217, 9.3102748, 13.965412]
    assert np.interp(at, npsh_at, curves.npsh_required[0]) == pytest.approx(npsh, rel=1e-6)
    assert curves.head[0, [0, -1]] == pytest.approx([50.0, 26.502901], rel=1e-7)


def test_flows_move_and_the_minimum_flow_stays() -> None:
    water = pump(start=1, minimum_flow=0.02, maximum_flow=0.09)
    viscous = corrected(water, viscosity=200e-6)
    moved = [viscous.curves.start, viscous.curves.end, viscous.bep_flow, viscous.maximum_flow]
    assert np.ravel(moved) == pytest.approx(C_Q * np.array([0.0125, 0.1, 0.06, 0.09]), rel=1e-7)
    assert viscous.minimum_flow.tolist() == [0.02]
    assert viscous.specific_speed == water.specific_speed


def test_power_agrees_with_flow_head_and_efficiency() -> None:
    water = pump()
    with np.errstate(invalid="ignore"):
        power = 9806.65 * at_stations(water) * water.curves.head / water.curves.efficiency
    viscous = corrected(changed(water, power=power), viscosity=200e-6)
    useful = 9806.65 * at_stations(viscous) * viscous.curves.head
    ratio = useful[:, 1:] / viscous.curves.efficiency[:, 1:] / viscous.curves.power[:, 1:]
    np.testing.assert_allclose(ratio, 1, rtol=1e-12)


def assert_same(one: Pumps, other: Pumps) -> None:
    for f in fields(Curves):
        np.testing.assert_array_equal(getattr(one.curves, f.name), getattr(other.curves, f.name), f.name)
    for f in fields(Pumps):
        if f.name != "curves":
            np.testing.assert_array_equal(getattr(one, f.name), getattr(other, f.name), f.name)


@pytest.mark.parametrize("changes", [{}, {"scale": 3.0}, {"start": 2}])
def test_up_to_a_parameter_of_one_all_stays(changes: dict[str, float]) -> None:
    water = pump(**changes)
    assert factors(water, viscosity=1.5e-6).parameter < 1
    assert_same(corrected(water, viscosity=1.5e-6), water)


def test_it_stays_where_npsh_is_not_known_at_best_efficiency() -> None:
    short = changed(pump(), npsh_span=np.array([0.05]))
    assert_same(corrected(short, viscosity=1.5e-6), short)
    assert np.isnan(factors(short, viscosity=200e-6).npsh).all()


def test_head_is_counted_per_stage_and_speed_is_the_pump_s_own() -> None:
    # four stages of 10.7 m: B = 5.8421576; half the speed, flow and a quarter of the head: 2^0.5 times B
    assert factors(pump(stages=4), viscosity=200e-6).parameter == pytest.approx([5.8421576], rel=1e-7)
    half = replace(pump(scale=0.5), speed=np.array([725.0]))
    slow = changed(half, head=half.curves.head / 4)
    assert factors(slow, viscosity=200e-6).parameter == pytest.approx([B * 2**0.5], rel=1e-7)


def test_the_flow_of_the_whole_pump_counts_though_it_has_two_eyes() -> None:
    assert factors(pump(eyes=2), viscosity=200e-6).parameter == pytest.approx([B], rel=1e-7)


@pytest.mark.parametrize(
    ("water", "viscosity", "cover"),
    [
        (pump(scale=0.05), 800e-6, Cover.COVERED),  # B = 6.371 * 20^0.375 * 2 = 39.18
        (pump(scale=0.05), 835e-6, Cover.B_TOO_HIGH),  # 40.03
        (pump(), 4000e-6, Cover.COVERED),
        (pump(), 4001e-6, Cover.B_TOO_HIGH),  # B is 28, but the liquid too viscous
        (pump(scale=7.9), 200e-6, Cover.COVERED),  # n_q = 1450 * 0.474^0.5 / 42.8^0.75 = 59.7
        (pump(scale=8.1), 200e-6, Cover.SPECIFIC_SPEED),  # 60.4
        (pump(start=6), 200e-6, Cover.NO_BEST_FLOW),  # the best flow lies before the first point
        (replace(pump(), bep_flow=np.array([NAN])), 200e-6, Cover.NO_BEST_FLOW),
        (replace(pump(), bep_flow=np.array([0.11])), 200e-6, Cover.NO_BEST_FLOW),
        (replace(pump(), bep_flow=np.array([0.0])), 200e-6, Cover.NO_BEST_FLOW),
        (changed(pump(), end=np.array([0.05])), 200e-6, Cover.NO_BEST_FLOW),
        (changed(pump(), head=pump().curves.head - 43), 200e-6, Cover.NO_BEST_FLOW),  # no head there
        (replace(pump(), specific_speed=np.array([NAN])), 200e-6, Cover.NO_BEST_FLOW),
        (pump(best=0.1), 200e-6, Cover.COVERED),  # at the very end of the data
    ],
)
def test_what_the_method_covers(water: Pumps, viscosity: float, cover: Cover) -> None:
    found = factors(water, viscosity=viscosity)
    viscous = corrected(water, viscosity=viscosity)
    assert found.cover.tolist() == [cover]
    known = cover is Cover.COVERED
    for figure in (found.flow, found.efficiency, found.head, found.npsh):
        assert np.isfinite(figure).tolist() == [known]
    for name in ("head", "efficiency", "power", "npsh_required"):
        values, before = getattr(viscous.curves, name), getattr(water.curves, name)
        np.testing.assert_array_equal(np.isfinite(values), np.isfinite(before) & known)
    for name in ("start", "end", "span", "npsh_span"):  # flows can still be looked at
        assert np.isfinite(getattr(viscous.curves, name)).all()


def test_a_parameter_too_high_is_told() -> None:
    b = factors(pump(scale=0.05), viscosity=835e-6).parameter
    assert b == pytest.approx([B * 20**0.375 * (835 / 200) ** 0.5], rel=1e-7)
    assert np.isnan(factors(pump(start=6), viscosity=835e-6).parameter).all()


def test_no_row_knows_of_another() -> None:
    each = [pump(), pump(scale=0.05), replace(pump(), bep_flow=np.array([NAN])), pump(scale=3.0, stages=2)]
    viscosity = np.array([200e-6, 2000e-6, 200e-6, 1.5e-6])
    together = corrected(stack(each), viscosity=viscosity)
    for row, (water, nu) in enumerate(zip(each, viscosity, strict=True)):
        assert_same(take(together, np.array([row])), corrected(water, viscosity=float(nu)))


def test_no_row_is_left_out_of_many() -> None:
    many = corrected(take(pump(), np.zeros(2500, np.int64)), viscosity=200e-6)
    one = corrected(pump(), viscosity=200e-6)
    np.testing.assert_array_equal(many.curves.head, np.repeat(one.curves.head, 2500, axis=0))
    np.testing.assert_array_equal(many.curves.power, np.repeat(one.curves.power, 2500, axis=0))


def test_the_pump_with_water_is_not_touched() -> None:
    water, before = pump(), pump()
    corrected(water, viscosity=200e-6)
    assert_same(water, before)


def test_factors_fall_with_the_parameter() -> None:
    b = np.linspace(1, 40, 400)
    for factor in (flow_factor(b), efficiency_factor(b)):
        assert factor[0] == 1
        assert (np.diff(factor) < 0).all()
        assert factor[-1] > 0
    assert (efficiency_factor(b) <= flow_factor(b)).all()
    assert np.isnan([flow_factor(NAN), efficiency_factor(NAN)]).all()


def test_the_head_factor_falls_with_flow_from_one() -> None:
    # 1 - 0.2 * 16^0.75 at 16 times the best flow: 1 - 0.2 * 8
    assert head_factor(at_best=0.8, share=np.array([0.0, 1.0, 16.0])) == pytest.approx([1.0, 0.8, -0.6])


def test_the_parameter_rises_with_viscosity_and_head_and_falls_with_flow_and_speed() -> None:
    usual = {"viscosity": 1e-4, "flow": 0.03, "head": 40.0, "speed": 1450.0}
    powers = {"viscosity": 0.5, "flow": -0.375, "head": 0.0625, "speed": -0.25}
    for name, power in powers.items():
        twice = parameter(**usual | {name: 2 * usual[name]})
        assert twice / parameter(**usual) == pytest.approx(2**power, rel=1e-12)


def test_npsh_required_is_raised_and_more_so_where_much_is_lost() -> None:
    raised = npsh_factor(at_best=np.array([1.0, 0.9, 0.6]), npsh_required=4.0, flow=0.03, speed=1450.0)
    assert raised[0] == 1
    assert (np.diff(raised) > 0).all()


def test_where_a_pump_must_stand_with_water() -> None:
    found = factors(stack([pump(), pump(scale=3.0), pump(start=6)]), viscosity=np.array([2e-4, 1.5e-6, 2e-4]))
    best = np.array([0.06, 0.18, 0.06])
    flow, head = needed(flow=0.0552318336, head=39.398708, factors=found, bep_flow=best)
    # the first stands at its best flow; B <= 1 asks for no more; the third is not covered
    assert flow == pytest.approx([0.06, 0.0552318336, NAN], rel=1e-7, nan_ok=True)
    assert head == pytest.approx([42.8, 39.398708, NAN], rel=1e-7, nan_ok=True)
    # at half of the best flow the head factor is 0.95274719
    flow, head = needed(flow=np.full(3, 0.03 * C_Q), head=np.full(3, 40.0), factors=found, bep_flow=best)
    assert (flow[0], head[0]) == pytest.approx((0.03, 40 / 0.95274719), rel=1e-7)


def test_no_head_with_water_does_where_the_liquid_leaves_none() -> None:
    # 1 - 0.079469 (Q / Q_BEP)^0.75 is below 0 from 29.3 times the best flow
    found = factors(pump(), viscosity=200e-6)
    _, head = needed(flow=30 * BEST * C_Q, head=10.0, factors=found, bep_flow=np.array([BEST]))
    assert head.tolist() == [np.inf]


def test_where_b_is_at_most_1_every_pump_is_covered_and_stays_as_it_was() -> None:
    steep = replace(pump(), specific_speed=np.array([90.0]))
    found = factors(steep, viscosity=1.1e-6)
    assert found.parameter[0] < 1
    assert found.cover[0] == Cover.COVERED
    assert (found.flow[0], found.efficiency[0], found.head[0], found.npsh[0]) == (1, 1, 1, 1)


@pytest.mark.parametrize(("cst", "cover"), [(4.3, Cover.COVERED), (4.4, Cover.NO_BEST_FLOW)])
def test_a_thin_liquid_needs_no_best_flow(cst: float, cover: Cover) -> None:
    unknown = replace(pump(), bep_flow=np.array([NAN]))
    assert factors(unknown, viscosity=cst * 1e-6).cover[0] == cover
    if cover == Cover.COVERED:
        same = corrected(unknown, viscosity=cst * 1e-6).curves
        np.testing.assert_array_equal(same.head, unknown.curves.head)
