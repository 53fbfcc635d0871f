"""Energy, match and score of a tiny run, worked out by hand."""

from __future__ import annotations

import numpy as np
import pytest

from screener.model.case import Drive
from screener.model.run import Kind
from screener.ranking import figures

NAN = np.nan
WEIGHTS = {"efficiency": 1.0, "shutoff_match": 0.1, "load_share": 0.1}

# two duties, the second at two levels with half of its hours each, and a trip of each
CONDITIONS = {
    "kind": [Kind.DUTY, Kind.DUTY, Kind.DUTY, Kind.TRIP, Kind.TRIP],
    "rated": [True, False, False, False, False],
    "lowest": [False, True, False, False, False],
    "open": [False, False, False, True, True],
    "asked": [0.3, 0.2, 0.2, 0.3, 0.2],
    "share_of_hours": [1.0, 0.5, 0.5, 0.0, 0.0],
    "hours": [1000.0, 3000.0, 3000.0, 1000.0, 3000.0],
    "wanted_head": [30.0, 20.0, 25.0, 40.0, 40.0],
    "runs": [[True, True], [True, False], [True, True], [True, False], [True, True]],
}
RUN = {
    "total": [[0.3, 0.18, 0.25, 0.24, 0.26]],  # the third is open and gets more than it asks for
    "power": [[40e3, 60e3], [30e3, NAN], [35e3, 50e3], [55e3, NAN], [45e3, 70e3]],
    "shutoff_match": [[-0.08]],
    "load_share": [[0.12]],
}
# each new pump counts twice: 140, 60 and 120 kW over 1000, 1500 and 1500 h are 410 MWh
# useful, 9806.65 N/m3 * Q * H of what is asked: 88259.85 W, 39226.6 W, 49033.25 W over the same hours:
# 220.649625 MWh
EFFICIENCY = 220.649625 / 410


@pytest.fixture
def tiny(make_run):
    """Figures of the tiny run, with some of it changed."""

    def make(*, run: dict | None = None, conditions: dict | None = None, **weights: float):
        made = make_run(
            states=5, installed=1, run=RUN | (run or {}), conditions=CONDITIONS | (conditions or {})
        )
        return figures(made, made, count=2, drives=[Drive()] * 2, weights=WEIGHTS | weights)

    return make


def test_energy_and_efficiency(tiny) -> None:
    found = tiny()
    assert found.efficiency[0] == pytest.approx(EFFICIENCY, rel=1e-12)
    assert found.power[0] == pytest.approx(410e6 / 4000)
    assert found.energy[0] == pytest.approx(410e6 * 3600)
    # 0.3 * 1000 + 0.18 * 1500 + 0.2 * 1500 = 870 h m3/s
    assert found.volume[0] == pytest.approx(870 * 3600)


def test_score_in_points(tiny) -> None:
    assert tiny().score[0] == pytest.approx(100 * EFFICIENCY - 0.1 * 8 - 0.1 * 12, rel=1e-12)
    assert tiny(efficiency=2.0, shutoff_match=0.5, load_share=0.0).score[0] == pytest.approx(
        200 * EFFICIENCY - 4
    )


def test_share_of_the_duty_after_each_trip(tiny) -> None:
    np.testing.assert_allclose(tiny().firm, [[0.8, 1.0]])  # 0.24 / 0.3; 0.26 of 0.2 is all of it


def test_without_the_hours_of_one_duty_all_weigh_alike(tiny) -> None:
    found = tiny(conditions={"hours": [1000.0, NAN, NAN, 1000.0, NAN]})
    useful = 88259.85 + 0.5 * 39226.6 + 0.5 * 49033.25
    assert found.efficiency[0] == pytest.approx(useful / (140e3 + 30e3 + 60e3), rel=1e-12)
    assert found.power[0] == pytest.approx(230e3 / 2)
    assert np.isnan(found.energy[0])
    assert np.isnan(found.volume[0])


def test_a_denser_liquid_makes_more_useful_power(tiny) -> None:
    found = tiny(conditions={"density": 1200.0})
    assert found.efficiency[0] == pytest.approx(1.2 * EFFICIENCY, rel=1e-12)


def test_the_worst_match_keeps_its_sign(make_run) -> None:
    matches = [[0.03, -0.08, NAN], [0.09, -0.08, 0.01], [NAN, NAN, NAN]]
    shares = [[NAN, 0.05, 0.12], [0.3, 0.1, 0.2], [NAN, NAN, NAN]]
    run = make_run(candidates=3, installed=3, run={"shutoff_match": matches, "load_share": shares})
    found = figures(run, run, count=1, drives=[Drive()] * 4, weights=WEIGHTS)
    np.testing.assert_array_equal(found.shutoff, [-0.08, 0.09, NAN])
    np.testing.assert_array_equal(found.share, [0.12, 0.3, NAN])
    assert np.isnan(found.score).tolist() == [False, False, True]


def test_an_unknown_power_of_a_running_pump_leaves_no_score(tiny) -> None:
    found = tiny(run={"power": [[40e3, NAN], [30e3, NAN], [35e3, 50e3], [55e3, NAN], [45e3, 70e3]]})
    assert np.isnan([found.efficiency[0], found.power[0], found.score[0]]).all()
    assert found.volume[0] == pytest.approx(870 * 3600)  # the flow is known all the same


def test_states_that_are_no_duties_cost_nothing(tiny) -> None:
    power = [[40e3, 60e3], [30e3, NAN], [35e3, 50e3], [NAN, NAN], [NAN, NAN]]
    assert tiny(run={"power": power}).efficiency[0] == pytest.approx(EFFICIENCY, rel=1e-12)


def test_motors_and_drives_that_lose_power_cost_energy(make_run) -> None:
    run = make_run(installed=1)
    shaft = figures(run, run, count=1, drives=[Drive(), Drive()], weights=WEIGHTS)
    lossy = [Drive(motor_efficiency=0.8), Drive(motor_efficiency=0.8, drive_efficiency=0.5)]
    drawn = figures(run, run, count=1, drives=lossy, weights=WEIGHTS)
    # 40 kW each: 80 kW at the shafts, 50 + 100 kW drawn
    assert drawn.power[0] / shaft.power[0] == pytest.approx(150 / 80)
    assert drawn.efficiency[0] / shaft.efficiency[0] == pytest.approx(80 / 150)
