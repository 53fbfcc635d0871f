"""Match of curves: shape, shutoff, and how much head a pump may lose before it stops delivering."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from math import nan

import numpy as np
import pytest

from screener.header.branch import BranchCurves, branch_curves
from screener.header.left import flow_left
from screener.header.match import load_share, shutoff_match
from screener.header.meet import Mark, meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import take
from screener.model.arrays import Floats, frozen
from screener.model.case import Branch, Case, Control, Duty, Installed, Level, Liquid, Loss, NewPump, System
from screener.model.curves import Pumps
from screener.screening.evaluate import run
from screener.screening.header import prepare

X = np.linspace(0, 1, 65)
RATED_FLOW, RATED_HEAD = 0.05, 40.0


def branches_of(pumps: Pumps, losses: Sequence[float] | Floats = ()) -> BranchCurves:
    places = [Branch(discharge=Loss((loss,), (2.0,))) for loss in losses] or [Branch()]
    return branch_curves(pumps.curves, places)


def quadratic(rise: float, *, deficit: float = 0.0) -> tuple[Floats, Floats]:
    """H0 - a Q^2 with a rise to shutoff over the rated head; `deficit` of H0 is lost at every flow."""
    flow = 1.4 * RATED_FLOW * X
    shutoff = RATED_HEAD * (1 + rise)
    return flow, shutoff * (1 - deficit) - RATED_HEAD * rise * (flow / RATED_FLOW) ** 2


@pytest.mark.parametrize("droop", [0.0, 0.8])
def test_equal_shapes_share_the_load_equally_whatever_their_sizes(
    pumps_of: Callable[..., Pumps], droop: float
) -> None:
    sizes = np.array([0.03, 0.05, 0.11, 0.4])
    head = 50 * (1 + droop * X * 0.2 - 0.4 * X**2 - 0.1 * X**3)
    branches = branches_of(pumps_of([(size * X, head) for size in sizes]), 3 / sizes**2)
    low, high, rated = 30.0, 48.5, 42.0
    share = load_share(
        branches,
        branches,
        low_head=np.full(4, low),
        high_head=np.full(4, high),
        rated_head=np.full(4, rated),
        beside=np.arange(4),
    )
    assert share == pytest.approx(np.zeros((4, 4)), abs=1e-4)


def test_load_share_against_a_sweep_of_the_header_head(pumps_of: Callable[..., Pumps]) -> None:
    """Parabolas without a rise: s(H) = sqrt((H0 - H)/(H0 - H_rated)), 0 above shutoff, largest difference."""
    rng = np.random.default_rng(31)
    number = 12
    shutoff, end = rng.uniform(46, 56, number), rng.uniform(0.03, 0.1, number)
    steep = rng.uniform(0.5, 0.8, number) * shutoff
    branches = branches_of(
        pumps_of([(e * X, h - s * X**2) for h, e, s in zip(shutoff, end, steep, strict=True)])
    )
    low, high = rng.uniform(36, 40, number), rng.uniform(44, 54, number)
    rated = low + rng.uniform(0.1, 0.9, number) * (np.minimum(high, shutoff) - low)
    share = load_share(
        branches,
        branches,
        low_head=low,
        high_head=np.minimum(high, shutoff + 0.5),
        rated_head=rated,
        beside=np.arange(number),
    )
    head = low[:, None] + (np.minimum(high, shutoff + 0.5) - low)[:, None] * np.linspace(0, 1, 20001)
    kept, possible = np.zeros((number, number, head.shape[1])), np.ones((number, number), bool)
    for pump in range(number):
        possible[:, pump] = rated < shutoff[pump]
        with np.errstate(invalid="ignore"):
            kept[:, pump] = np.sqrt(np.maximum(shutoff[pump] - head, 0) / (shutoff[pump] - rated[:, None]))
    own = kept[np.arange(number), np.arange(number)]
    expected = np.where(possible, np.minimum(np.abs(own[:, None] - kept).max(axis=2), 1), nan)
    assert 100 < possible.sum() < number**2
    assert (expected > 0.3).sum() > 20
    assert share == pytest.approx(expected, abs=0.01, nan_ok=True)  # one point: 33 heads, unlike shapes
    assert np.nanmax(share - expected) < 1e-3  # never more than there is


def test_shutoff_match_is_signed_and_over_the_head_of_the_installed_pump(
    pumps_of: Callable[..., Pumps],
) -> None:
    flow = 0.1 * X
    pumps = pumps_of([(flow, 50 - 1000 * flow**2), (flow, 40 - 500 * flow**2)])
    lifted = branch_curves(pumps.curves, [Branch(suction_head=2.0), Branch()])
    match = shutoff_match(lifted, lifted, pump_shutoff=np.array([50.0, 40.0]))
    assert match == pytest.approx(np.array([[0.0, 12 / 40], [-12 / 50, 0.0]]))


@pytest.mark.parametrize("rise", [0.04, 0.10, 0.15, 0.30])
@pytest.mark.parametrize("fraction", [1.0, 0.6])
def test_a_pump_stops_delivering_at_its_parking_deficit(
    pumps_of: Callable[..., Pumps], system_of: Callable[..., SystemCurve], rise: float, fraction: float
) -> None:
    """x = r q^2 / (1 + r) of the shutoff head, strong pump at the fraction q of rated flow [D]."""
    deficit = rise * fraction**2 / (1 + rise)
    demand = fraction * RATED_FLOW
    weak = [quadratic(rise, deficit=deficit * factor) for factor in (0.0, 0.9, 0.999, 1.001, 1.1)]
    strong = branches_of(pumps_of([quadratic(rise)]))
    left = flow_left(
        strong, running=[0], curve=system_of(0.0, [(1.0, 2.0)]), asked=demand, throttled=True, count=1
    )
    met = meet(branches_of(pumps_of(weak)), left, strong)
    assert list(met.mark) == [Mark.RUNS, Mark.RUNS, Mark.RUNS, Mark.SHUT, Mark.SHUT]
    assert met.flow[0] == pytest.approx(demand / 2)
    assert np.all(np.diff(met.flow) <= 0)
    assert met.installed[3:, 0] == pytest.approx(demand)
    # where the weak pump has just stopped, the strong one gives the fraction of its rated flow
    assert met.header[3] == pytest.approx(RATED_HEAD * (1 + rise - rise * fraction**2))


def two_pumps(pumps: Pumps, demand: float) -> Case:
    """One installed pump and a free place; the users hold one demand."""
    pump = Installed("P-1", "", Branch(), nan, nan)
    duty = Duty("only", demand, (0,), 0, ((0,),), (True,), Control.THROTTLED, nan, True)
    none = frozen(np.empty(0))
    return Case(
        title="",
        date="",
        liquids=(Liquid("water", 20.0, 998.2, 1e-6, 2340.0, 4184.0),),
        atmospheric_pressure=101325.0,
        system=System(Loss((1.0,), (2.0,)), none, none, nan, 0.0, nan),
        levels=(Level("only", 0.0, 0.0, 0.0),),
        suction_friction=Loss(),
        installed=(pump,),
        pumps=pumps,
        new_pump=NewPump(1, nan, nan, Branch(), 1e-3, "IEC"),
        duties=(duty,),
        limits={},
        weights={},
        display={},
    )


@pytest.mark.parametrize("rise", [0.04, 0.10, 0.25])
@pytest.mark.parametrize(("fraction", "minimum"), [(1.0, 0.3), (0.7, 0.3), (0.5, 0.0), (0.3, 0.5)])
def test_head_to_lose_before_minimum_flow(
    pumps_of: Callable[..., Pumps], rise: float, fraction: float, minimum: float
) -> None:
    """x = r (q^2 - m^2) / (1 + r - r m^2) of its head at every flow, weak pump at the fraction m [D].

    The strong pump is at the fraction q when the weak one has come down to m, so that the demand is q + m.
    """
    lost = rise * (fraction**2 - minimum**2) / (1 + rise - rise * minimum**2)
    pair = pumps_of([quadratic(rise)] * 2)
    pair = replace(pair, minimum_flow=np.full(2, minimum * RATED_FLOW))
    header = prepare(
        two_pumps(take(pair, np.array([0])), (fraction + minimum) * RATED_FLOW), temperature_rise=8.0
    )
    found = run(header, take(pair, np.array([1])))
    head_at_minimum = RATED_HEAD * (1 + rise - rise * minimum**2)
    # finer than 1e-4 of the head, for the new pump and for the installed one
    assert found.spare_head[0] / head_at_minimum == pytest.approx([lost, lost], abs=2e-5)
    # and a pump that has lost that much of its head at every flow gives just its minimum
    flow, head = quadratic(rise)
    worn = run(header, pumps_of([(flow, head * (1 - lost))]))
    assert worn.flow[0, 0] == pytest.approx(np.array([minimum, fraction]) * RATED_FLOW, abs=1e-6)
