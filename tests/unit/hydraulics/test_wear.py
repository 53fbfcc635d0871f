"""Worn pumps by hand: a parabola whose whole head is lower, one of which part goes round, and both fitted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from screener.hydraulics.wear import PointsAbove, at_speed, fit, leakage, leaking, leaks, uniform
from screener.model.case import Branch, Installed, WearFit
from screener.model.curves import Pumps

Reading, Caution = WearFit.Reading, WearFit.Caution

SHUTOFF, BEND, END = 50.0, 2000.0, 0.1


@pytest.fixture
def pump(pumps_of: Callable[..., Pumps]) -> Pumps:
    flow = np.linspace(0, END, 9)
    return pumps_of([(flow, SHUTOFF - BEND * flow**2)])


def at_stations(pumps: Pumps) -> np.ndarray:
    return np.linspace(0, 1, pumps.curves.head.shape[1]) * pumps.curves.span[0]


def test_a_uniform_loss_lowers_every_head(pump: Pumps) -> None:
    worn = uniform(pump, loss=np.array([0.03]))
    assert worn.curves.head[0, [0, -1]] == pytest.approx([48.5, 0.97 * 30])


def test_leakage_that_costs_a_head_at_a_flow(pump: Pumps) -> None:
    # at 0.06 m3/s 42.8 m; 5 % less is 40.66 m, where the curve as new gives sqrt(9.34/2000)
    leak = leakage(pump, loss=np.array([0.05]), flow=np.array([0.06]))
    assert leak == pytest.approx([np.sqrt(9.34 / 2000) - 0.06], rel=1e-6)


def test_nothing_lost_is_nothing_round(pump: Pumps) -> None:
    assert leakage(pump, loss=np.array([0.0]), flow=np.array([0.06])) == [0.0]
    assert leakage(pump, loss=np.array([0.0]), flow=np.array([np.nan])) == [0.0]


def test_a_loss_that_the_curve_cannot_show(pump: Pumps) -> None:
    assert np.isnan(leakage(pump, loss=np.array([0.5]), flow=np.array([0.06]))).all()


def test_a_leaking_pump_stands_at_a_larger_flow_than_it_delivers(pump: Pumps) -> None:
    worn = leaking(pump, leak=np.array([0.01]))
    delivered = at_stations(worn)
    assert worn.curves.head[0] == pytest.approx(SHUTOFF - BEND * (delivered + 0.01) ** 2, rel=1e-9)
    assert (worn.curves.end[0], worn.curves.start[0]) == (pytest.approx(0.09), 0.0)


def test_its_power_is_that_of_the_flow_through_it_and_its_efficiency_that_of_what_it_delivers(
    pump: Pumps,
) -> None:
    known = replace(pump, curves=replace(pump.curves, efficiency=np.full_like(pump.curves.head, 0.8)))
    worn = leaking(known, leak=np.array([0.01]))
    delivered = at_stations(worn)[20]
    power = 1000 * 9.80665 * (delivered + 0.01) * (SHUTOFF - BEND * (delivered + 0.01) ** 2) / 0.8
    assert worn.curves.power[0, 20] == pytest.approx(power, rel=1e-9)
    assert worn.curves.efficiency[0, 20] == pytest.approx(0.8 * delivered / (delivered + 0.01), rel=1e-9)


RATED = 0.06
FLOWS = np.array([0.0, 0.03, 0.06, 0.085])


def new_head(flow: np.ndarray) -> np.ndarray:
    return SHUTOFF - BEND * flow**2


def fitted(
    pump: Pumps, flow: object, head: object, *, reading: float = 0.01, rated: float = RATED
) -> WearFit:
    return fit(pump, flow=np.array(flow), head=np.array(head), rated_flow=rated, reading=reading)


@pytest.mark.parametrize("share", [0.0, 0.004, 0.07, 0.35])
def test_a_lower_curve_is_found_from_exact_points(pump: Pumps, share: float) -> None:
    found = fitted(pump, FLOWS, new_head(FLOWS) * (1 - share))
    assert found.loss == pytest.approx(share, rel=1e-9, abs=1e-12)
    assert found.loss_residual == pytest.approx(0, abs=1e-9)
    assert found.prefers == (Reading.LOSS if share else Reading.NEITHER)
    # leakage could cost no more than 5.55 of 35.55 m at the last point
    assert found.cautions == (Caution.CURVE_ENDS if share == 0.35 else Caution.NONE)
    assert (found.points, found.reading) == (4, 0.01)


@pytest.mark.parametrize("leak", [0.0, 0.0003, 0.006, 0.014])
def test_leakage_is_found_from_exact_points(pump: Pumps, leak: float) -> None:
    found = fitted(pump, FLOWS, new_head(FLOWS + leak))
    assert found.leak == pytest.approx(leak, rel=1e-6, abs=1e-9)
    assert found.leak_residual == pytest.approx(0, abs=1e-6)
    assert found.prefers == (Reading.LEAK if leak else Reading.NEITHER)
    # [D] the lower curve that comes nearest: the share of least squares in closed form
    new = new_head(FLOWS)
    assert found.loss == pytest.approx(1 - new @ new_head(FLOWS + leak) / (new @ new), abs=1e-9)


def test_one_point_by_hand(pump: Pumps) -> None:
    # [D] 42.8 m as new at 0.06 m3/s; 40 m is 1 - 40/42.8 lost, or the head at sqrt(10/2000) m3/s;
    # an error of 0.4 m is 0.4/42.8 of head, or 0.4 / (2 * 2000 * Q) of flow
    found = fitted(pump, [0.06], [40.0])
    through = np.sqrt(10 / 2000)
    assert found.loss == pytest.approx(1 - 40 / 42.8)
    assert found.loss_error == pytest.approx(0.4 / 42.8)
    assert found.leak == pytest.approx(through - 0.06)
    assert found.leak_error == pytest.approx(0.4 / (4000 * through))
    assert (found.loss_residual, found.leak_residual) == (
        pytest.approx(0, abs=1e-9),
        pytest.approx(0, abs=1e-9),
    )
    assert found.prefers == Reading.NEITHER
    assert found.cautions == Caution.FEW_POINTS | Caution.SHUTOFF_INFERRED | Caution.NARROW


def test_twice_the_same_flow_prefers_nothing(pump: Pumps) -> None:
    assert fitted(pump, [0.06, 0.06], [40.0, 40.6]).prefers == Reading.NEITHER
    assert fitted(pump, [0.09, 0.09], [25.0, 25.0]).prefers == Reading.NEITHER  # leakage cannot reach them


def test_scatter_beyond_the_error_of_reading_governs(pump: Pumps) -> None:
    flow = np.array([0.02, 0.04, 0.06, 0.08])
    new = new_head(flow)
    head = 0.9 * new + np.array([1.5, -1.5, -1.5, 1.5])
    found = fitted(pump, flow, head, reading=0.001)
    # [D] one parameter: share = 1 - sum(H h)/sum(H^2), variance = sum(r^2) / (n - 1) / sum(H^2)
    left = new @ head / (new @ new)
    rest = head - left * new
    assert found.loss == pytest.approx(1 - left)
    assert found.loss_error == pytest.approx(np.sqrt(rest @ rest / 3 / (new @ new)))
    assert found.loss_residual == pytest.approx(np.sqrt(rest @ rest / 4))


def test_points_that_agree_by_chance_are_no_surer_than_their_reading(pump: Pumps) -> None:
    flow = np.array([0.03, 0.06])
    new = new_head(flow)
    found = fitted(pump, flow, 0.95 * new)
    # [D] var = sum((H * 0.01 * h)^2) / sum(H^2)^2
    assert found.loss_error == pytest.approx(0.0095 * np.sqrt((new**4).sum()) / (new @ new))


@pytest.mark.parametrize(("points", "noise"), [(1, 0.01), (2, 0.01), (3, 0.01), (8, 0.01), (12, 0.03)])
def test_noisy_points_give_the_truth_within_three_standard_uncertainties(
    pump: Pumps, points: int, noise: float
) -> None:
    random = np.random.default_rng(20240514)
    flow = np.linspace(0.03, 0.08, points) if points > 1 else np.array([0.05])
    within = {Reading.LOSS: 0, Reading.LEAK: 0}
    for _ in range(100):
        error = 1 + noise * random.standard_normal(points)
        lower = fitted(pump, flow, 0.9 * new_head(flow) * error)
        within[Reading.LOSS] += abs(lower.loss - 0.1) <= 3 * lower.loss_error
        round_ = fitted(pump, flow, new_head(flow + 0.012) * error)
        within[Reading.LEAK] += abs(round_.leak - 0.012) <= 3 * round_.leak_error
    assert min(within.values()) >= 95, within


def test_noisy_points_prefer_the_reading_that_made_them(pump: Pumps) -> None:
    random = np.random.default_rng(7)
    flow = np.array([0.0, 0.02, 0.04, 0.06, 0.08])
    right = 0
    for _ in range(20):
        error = 1 + 0.005 * random.standard_normal(5)
        right += fitted(pump, flow, 0.88 * new_head(flow) * error).prefers == Reading.LOSS
        right += fitted(pump, flow, new_head(flow + 0.012) * error).prefers == Reading.LEAK
    assert right == 40


def test_points_at_another_speed_are_brought_along_parabolas(pump: Pumps) -> None:
    # a pump that has lost 6 %, measured at 0.9 of the speed of its curve: 0.9 of the flow, 0.81 of the head
    flow, head = at_speed(flow=0.9 * FLOWS, head=0.81 * 0.94 * new_head(FLOWS), speed=1305.0, to=1450.0)
    assert flow == pytest.approx(FLOWS)
    assert fitted(pump, flow, head).loss == pytest.approx(0.06, rel=1e-9)


@pytest.mark.parametrize(
    ("caution", "flow", "head"),
    [
        (Caution.NONE, [0.003, 0.04, 0.08], None),  # 5 % of the rated flow counts as shutoff
        (Caution.SHUTOFF_INFERRED, [0.0031, 0.04, 0.08], None),
        (Caution.FEW_POINTS, [0.0, 0.08], None),
        (Caution.NARROW, [0.0, 0.01, 0.0199], None),  # 20 % of 0.1 m3/s
        (Caution.NONE, [0.0, 0.01, 0.0201], None),
        (Caution.ABOVE_NEW, [0.0, 0.04, 0.08], [46.0, 44.0, 37.58]),  # 37.2 m as new, 1.01 of that is 37.572
        (Caution.NONE, [0.0, 0.04, 0.08], [46.0, 44.0, 37.56]),
        (Caution.CURVE_ENDS, [0.0, 0.04, 0.099], [45.0, 41.0, 26.0]),
    ],
)
def test_each_caution(
    pump: Pumps, caution: WearFit.Caution, flow: list[float], head: list[float] | None
) -> None:
    head = head or list(0.97 * new_head(np.array(flow)))
    assert fitted(pump, flow, head).cautions == caution


def test_without_a_rated_flow_only_flow_nothing_is_shutoff(pump: Pumps) -> None:
    flow = np.array([0.001, 0.04, 0.08])
    assert fitted(pump, flow, 0.97 * new_head(flow), rated=np.nan).cautions == Caution.SHUTOFF_INFERRED
    flow[0] = 0.0
    assert fitted(pump, flow, 0.97 * new_head(flow), rated=np.nan).cautions == Caution.NONE


def test_leakage_goes_no_further_than_the_curve(pump: Pumps) -> None:
    assert fitted(pump, [0.09], [25.0]).leak == pytest.approx(0.01)
    at_shutoff = fitted(pump, [0.0], [40.0])  # sqrt(10/2000) is more than half of the curve
    assert (at_shutoff.leak, at_shutoff.cautions & Caution.CURVE_ENDS) == (0.05, Caution.CURVE_ENDS)
    at_end = fitted(pump, [0.1], [28.5])
    assert (at_end.leak, at_end.loss) == (0.0, pytest.approx(0.05))
    assert at_end.leak_error == pytest.approx(0.285 / 400)  # the slope there is 2 * 2000 * 0.1
    assert Caution.CURVE_ENDS in at_end.cautions
    assert Caution.CURVE_ENDS not in fitted(pump, [0.1], [30.0]).cautions


def test_a_flat_place_does_not_tell_the_leakage(pumps_of: Callable[..., Pumps]) -> None:
    flat = pumps_of([([0.0, 0.05, 0.1], [40.0, 40.0, 40.0])])
    found = fitted(flat, [0.05], [38.0])
    assert found.loss == pytest.approx(0.05)
    assert np.isinf(found.leak_error)


def test_the_nearest_of_several_places_is_taken(pumps_of: Callable[..., Pumps]) -> None:
    """On a curve that droops towards shutoff the head of a leaking pump may first rise."""
    flow = np.linspace(0, 0.1, 9)

    def drooping(at: np.ndarray) -> np.ndarray:
        return 40 + 300 * at - 6000 * at**2

    pump = pumps_of([(flow, drooping(flow))])
    at = np.array([0.0, 0.02, 0.04])
    assert fitted(pump, at, drooping(at + 0.045)).leak == pytest.approx(0.045, rel=1e-6)
    at = np.array([0.0, 0.005])  # both stand higher, by 5 %, than as new
    assert fitted(pump, at, drooping(at + 0.01), reading=0.1).leak == pytest.approx(0.01, rel=1e-6)


def test_points_above_the_curve(pump: Pumps) -> None:
    with pytest.raises(PointsAbove, match="4 % above the curve") as caught:
        fitted(pump, FLOWS, 1.04 * new_head(FLOWS))
    assert caught.value.share == pytest.approx(0.04)
    # nine points at 0.9 %: more than twice 0.34 %, but each within its error of reading
    nine = np.linspace(0, 0.09, 9)
    assert fitted(pump, nine, 1.009 * new_head(nine)).loss == 0
    # one at 1.9 %: less than twice its 1.019 %
    one = fitted(pump, [0.06], [1.019 * 42.8])
    assert (one.loss, one.leak) == (0, 0)
    assert Caution.ABOVE_NEW in one.cautions
    with pytest.raises(PointsAbove):
        fitted(pump, [0.06], [1.03 * 42.8])


def test_points_outside_the_curve_are_refused(pumps_of: Callable[..., Pumps], pump: Pumps) -> None:
    with pytest.raises(ValueError, match="outside the curve"):
        fitted(pump, [0.06, 0.1001], [40.0, 29.0])
    flow = np.linspace(0.02, 0.1, 9)
    late = pumps_of([(flow, new_head(flow))])
    with pytest.raises(ValueError, match="outside the curve"):
        fitted(late, [0.01, 0.06], [48.0, 40.0])


def test_no_array_is_changed(pump: Pumps) -> None:
    flow, head = np.array([0.03, 0.06]), np.array([46.0, 41.0])
    for array in (flow, head, pump.curves.head):
        array.flags.writeable = False
    fitted(pump, flow, head)
    assert (flow.tolist(), head.tolist()) == ([0.03, 0.06], [46.0, 41.0])


def test_leaks_are_as_fitted_or_by_the_loss_stated(pumps_of: Callable[..., Pumps]) -> None:
    flow = np.linspace(0, END, 9)
    pumps = pumps_of([(flow, new_head(flow))] * 4)
    known = fitted(pumps_of([(flow, new_head(flow))]), FLOWS, new_head(FLOWS + 0.006))
    as_new = replace(known, loss=0.0)

    def of(rated: float, loss: float, wear: WearFit | None) -> Installed:
        return Installed("P", "", Branch(), rated, np.nan, loss, wear=wear)

    installed = [
        of(np.nan, known.loss, known),
        of(0.06, 0.05, None),
        of(np.nan, 0.0, None),
        of(0.06, 0.0, as_new),
    ]
    found = leaks(pumps, installed=installed)
    assert found == pytest.approx([0.006, np.sqrt(9.34 / 2000) - 0.06, 0.0, 0.0], rel=1e-6)
