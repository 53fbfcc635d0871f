"""Published figures of pumps at another speed.

[V] two sources or recomputed here, [D] derived here by independent arithmetic.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from screener.header.branch import branch_curves
from screener.header.held import Varying, hold
from screener.header.left import flow_left
from screener.header.meet import meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import take
from screener.hydraulics.speed import at_speed
from screener.model.case import Branch
from screener.model.curves import Pumps

GALLON_PER_MINUTE, FOOT = 6.309020e-5, 0.3048

FLOW = np.array([0.0, 0.002, 0.004, 0.006, 0.008, 0.010])
HEAD = np.array([40.0, 39.5, 38.0, 35.0, 30.0, 20.0])
"""At 1200 rpm [m3/s, m]: C. Schaschke, Fluid Mechanics: Worked Examples for Engineers, Example 9.10."""

PumpsOf, SystemOf = Callable[..., Pumps], Callable[..., SystemCurve]


@pytest.fixture
def pump(pumps_of: PumpsOf) -> Pumps:
    return pumps_of([(FLOW, HEAD)])


@pytest.fixture
def duty(pump: Pumps, system_of: SystemOf) -> tuple[float, float]:
    """Where the pump meets the system at 1200 rpm [m3/s, m]."""
    new = branch_curves(pump.curves, [Branch()])
    nobody = branch_curves(take(pump, np.array([], np.int64)).curves, [])
    left = flow_left(
        nobody, running=(), curve=system_of(10.0, [(5.42e5, 2.0)]), asked=0.01, throttled=False, count=1
    )
    met = meet(new, left, nobody)
    return float(met.flow[0]), float(met.header[0])


def test_the_duty_at_full_speed(duty: tuple[float, float]) -> None:
    # Example 9.10 [V]: 0.0066 m3/s at 34 m, both as printed
    assert duty[0] == pytest.approx(0.0066, abs=5e-5)
    assert duty[1] == pytest.approx(34.0, abs=0.5)


def test_the_speed_for_a_quarter_less_flow_follows_the_parabola(
    pump: Pumps, duty: tuple[float, float]
) -> None:
    # [V] recomputed with three interpolants from the unrounded duty: 982 rpm. Scaling the head at constant
    # flow, the usual trap, gives 987 with the book's rounded heads and 998 from the unrounded duty.
    flow = 0.75 * duty[0]
    kind = Varying(pump, Branch(), np.array([0.5]), np.array([1.0]), 1, 0.0, 0.0)
    held = hold([kind], head=10 + 5.42e5 * flow**2, wanted=np.array([flow]))
    assert 1200 * held.ratio[0] == pytest.approx(982, abs=1)
    assert held.flow[0, 0] == pytest.approx(flow, rel=1e-9)
    trap = 1200 * np.sqrt((10 + 5.42e5 * flow**2) / duty[1])
    assert trap == pytest.approx(998, abs=1)


def test_ratios_of_the_affinity_laws(pumps_of: PumpsOf) -> None:
    # US DOE-HDBK-1012/3-92, centrifugal pumps [V]: twice the speed, 400 to 800 gpm, 48 to 192 ft, power x 8
    fast = at_speed(pumps_of([([0, 200, 400], [60, 57, 48])]), ratio=np.array([2.0]))
    assert fast.curves.end[0] == 800
    assert fast.curves.head[0, -1] == pytest.approx(192)
    assert fast.speed[0] == 2 * 1450
    with_power = pumps_of([([0, 200, 400], [60, 57, 48])])
    power = np.full_like(with_power.curves.head, 45.0)
    turned = at_speed(_with(with_power, power), ratio=np.array([2.0]))
    assert turned.curves.power[0, -1] == pytest.approx(360)


def test_a_quadratic_at_another_speed_keeps_its_bend(pumps_of: PumpsOf) -> None:
    # R. W. Fox and A. T. McDonald, Introduction to Fluid Mechanics, Example 10.7 [V]: 1170 to 1750 rpm takes
    # 300 gpm, 21.9 ft, shutoff 25 ft to 448.7 gpm, 48.99 ft, 55.93 ft; A in H0 - A Q^2 stays 3.444e-5
    flow = np.linspace(0, 300, 33)
    pump = pumps_of([(flow * GALLON_PER_MINUTE, (25 - 3.444e-5 * flow**2) * FOOT)])
    fast = at_speed(pump, ratio=np.array([1750 / 1170])).curves
    end = fast.end[0] / GALLON_PER_MINUTE
    shutoff, last = fast.head[0, 0] / FOOT, fast.head[0, -1] / FOOT
    assert (end, shutoff, last) == (
        pytest.approx(448.7, abs=0.05),
        pytest.approx(55.93, abs=0.005),
        pytest.approx(48.99, abs=0.01),
    )
    assert (shutoff - last) / end**2 == pytest.approx(3.444e-5, rel=1e-6)


def _with(pumps: Pumps, power: np.ndarray) -> Pumps:
    return replace(pumps, curves=replace(pumps.curves, power=power))
