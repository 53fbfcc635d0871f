"""Worn pumps by hand: a parabola whose whole head is lower, and one of which part goes round."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from screener.hydraulics.wear import leakage, leaking, uniform
from screener.model.curves import Pumps

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
