"""Published corrections for viscosity. [V] two sources or recomputed here, [D] derived here.

ANSI/HI 9.6.7 and ISO/TR 17766:2005 (withdrawn 2022), correction of pump curves known with water.
"""

from __future__ import annotations

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.hydraulics.similarity import trimmed
from screener.hydraulics.viscosity import corrected, efficiency_factor, factors, flow_factor, parameter
from screener.model.arrays import frozen
from screener.model.curves import Pumps

FOOT = 0.3048
GALLON_PER_MINUTE = 6.309020e-5


@pytest.fixture(scope="module")
def worked() -> Pumps:
    """The pump of worked example 1: 110 m3/h, 77 m, eta 0.68, 2950 rpm; at 60 % of that flow 87.6 m [V].

    Between and beyond those two points the curve is ours: the parabola through them, to 176 m3/h.
    """
    hourly = np.linspace(0, 176, 9)
    bend = (87.6 - 77) / (110**2 - 66**2)
    head = 77 + bend * (110**2 - hourly**2)
    unknown = frozen(np.full(9, np.nan))
    best = 110 / 3600
    test = TestedCurve(
        np.nan, frozen(hourly / 3600), frozen(head), frozen(np.full(9, 0.68)), unknown, unknown, best
    )
    table = compile_table([Entry("worked", "", "", "", 2950.0, (test,))])
    return trimmed(table, model=np.array([0]), diameter=np.array([np.nan]), speed_ratio=np.ones(1))


def test_factors_of_the_worked_example(worked: Pumps) -> None:
    # worked example 1, 120 cSt: B 5.52, C_Q = C_BEP-H 0.938, C_eta 0.738 [V]
    found = factors(worked, viscosity=120e-6)
    assert found.parameter == pytest.approx([5.52], abs=0.005)
    assert found.flow == pytest.approx([0.938], abs=0.0005)
    assert found.head == pytest.approx([0.938], abs=0.0005)
    assert found.efficiency == pytest.approx([0.738], abs=0.0005)


def test_curve_of_the_worked_example(worked: Pumps) -> None:
    # at best efficiency 103.2 m3/h, 72.2 m, eta 0.502; at 60 % of it 83.9 m (C_H 0.958) [V]
    viscous = corrected(worked, viscosity=120e-6)
    sixty, best = 24, 40  # stations of 65 that stand at 66 and 110 of 176 m3/h
    hourly = viscous.curves.span[0] * best / 64 * 3600
    head, efficiency = viscous.curves.head[0, best], viscous.curves.efficiency[0, best]
    assert hourly == pytest.approx(103.2, abs=0.05)
    assert viscous.bep_flow * 3600 == pytest.approx([103.2], abs=0.05)
    assert head == pytest.approx(72.2, abs=0.05)
    assert viscous.curves.head[0, sixty] == pytest.approx(83.9, abs=0.05)
    assert efficiency == pytest.approx(0.502, abs=0.0005)
    # the shaft power that follows, at a specific gravity of 0.9: 36.4 kW [V]
    assert 900 * 9.80665 * hourly / 3600 * head / efficiency == pytest.approx(36.4e3, abs=50)


@pytest.mark.parametrize(
    ("b", "flow", "efficiency"),
    # the published equations worked out by independent arithmetic [D]
    [
        (2.0, 0.9963, 0.9407),
        (10.0, 0.8483, 0.5396),
        (30.0, 0.5700, 0.1430),
        (40.0, 0.4839, 0.0764),
    ],
)
def test_factors_by_independent_arithmetic(b: float, flow: float, efficiency: float) -> None:
    assert flow_factor(b) == pytest.approx(flow, abs=5e-5)
    assert efficiency_factor(b) == pytest.approx(efficiency, abs=5e-5)


@pytest.mark.parametrize(
    ("cst", "gpm", "feet", "rpm"),
    [(120, 484.3, 252.6, 2950), (4.3, 15, 25, 1750), (1000, 900, 400, 3550), (32, 5000, 90, 1180)],
)
def test_the_us_form_of_the_parameter(cst: float, gpm: float, feet: float, rpm: float) -> None:
    # B = 26.6 nu^0.5 H^0.0625 / (Q^0.375 N^0.25) with gpm and ft: the rounded constants differ by 0.4 % [V]
    us = 26.6 * cst**0.5 * feet**0.0625 / (gpm**0.375 * rpm**0.25)
    b = parameter(viscosity=cst * 1e-6, flow=gpm * GALLON_PER_MINUTE, head=feet * FOOT, speed=float(rpm))
    assert b == pytest.approx(us, rel=0.005)


def test_no_correction_up_to_a_parameter_of_one() -> None:
    # B <= 1: every factor is 1 [V]
    b = np.array([0.01, 0.5, 1.0])
    assert flow_factor(b).tolist() == efficiency_factor(b).tolist() == [1.0, 1.0, 1.0]
