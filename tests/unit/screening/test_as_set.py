"""After a trip with the users' valves left as they were, against the closed form for parabolas."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from screener.model.case import Case, Control, Duty
from screener.model.curves import Pumps
from screener.screening.as_set import valves_as_set
from screener.screening.assess import judged, set_up

STATIC, SHUTOFF, BEND = 20.0, 50.0, 2000.0  # of the plant; pump heads are 50 - 2000 Q^2 [m, m3/s]


@pytest.fixture
def third(pumps_of: Callable[..., Pumps]) -> Pumps:
    flow = np.linspace(0, 0.1, 9)
    return pumps_of([(flow, SHUTOFF - BEND * flow**2)])


def test_two_of_three_identical_pumps_through_the_same_valves(
    plant: Callable[..., Case], duty: Callable[..., Duty], third: Pumps
) -> None:
    asked = 0.15  # 0.05 each: the header stands at 45 m, and the valves take 25 m of it at that flow
    bench = set_up(plant(duty((0, 1), flow=asked, rated=True)))
    (found,) = valves_as_set(bench.header, judged(bench, third))  # P-0 and P-1 are one case
    valves = (SHUTOFF - BEND * 0.05**2 - STATIC) / asked**2
    each = np.sqrt((SHUTOFF - STATIC) / (BEND + 4 * valves))  # 50 - 2000 q^2 = 20 + valves (2 q)^2
    assert (found.lost, found.total) == (0, pytest.approx(2 * each, rel=1e-7))
    assert found.header == pytest.approx(SHUTOFF - BEND * each**2, rel=1e-7)
    assert found.flow[[0, 2]] == pytest.approx([each, each], rel=1e-7)
    assert np.isnan(found.flow[1])


def test_a_duty_without_valves_has_none_to_leave(
    plant: Callable[..., Case], duty: Callable[..., Duty], third: Pumps
) -> None:
    bench = set_up(plant(duty((0, 1), control=Control.OPEN, rated=True)))
    assert valves_as_set(bench.header, judged(bench, third)) == ()
