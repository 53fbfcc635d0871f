"""Installed pumps, from the catalog or by a curve of their own, and the free place."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from screener.model.arrays import frozen
from screener.model.case import Case, Drive
from screener.model.curves import PumpTable

Read = Callable[..., Case]
Problems = Callable[..., list[str]]
TRIMMED = '{ pump = "with trims", diameter = 200 }'
PLAIN = '{ pump = "plain" }'
OWN = "{ speed = 1500, flow = [0, 90, 180], head = [50, 45, 30], diameter = 190, bep_flow = 100 }"


def test_a_pump_of_the_catalog(read: Read) -> None:
    case = read()
    assert [pump.tag for pump in case.installed] == ["P-1", "P-2"]
    assert [pump.title for pump in case.installed] == ["A pump with trims, 200 mm", "plain"]
    assert case.pumps.model.tolist() == [0, 1]
    assert case.pumps.diameter.tolist() == pytest.approx([0.2, math.nan], nan_ok=True)
    # the curves of the catalog as they are: 60 and 50 m at shutoff, 20 m less at 0.05 m3/s
    assert case.pumps.curves.head[:, 0].tolist() == pytest.approx([60.0, 50.0])
    assert case.pumps.curves.head[:, -1].tolist() == pytest.approx([40.0, 30.0])
    assert case.pumps.curves.end.tolist() == pytest.approx([0.05, 0.05])


def test_trim_and_speed(read: Read) -> None:
    case = read((TRIMMED, '{ pump = "with trims", diameter = 180 }, speed = 1595'))
    # [D] diameter 0.9, speed 1.1: flow 0.99, head 0.9801
    assert case.pumps.curves.end[0] == pytest.approx(0.0495)
    assert case.pumps.curves.head[0, 0] == pytest.approx(58.806)
    assert case.pumps.speed.tolist() == pytest.approx([1595.0, 1450.0])


def test_a_curve_of_its_own(read: Read) -> None:
    case = read((TRIMMED, f"{OWN}, speed = 1350"))
    # [D] speed 0.9: flow 0.9, head 0.81
    assert case.pumps.curves.end[0] == pytest.approx(0.045)
    assert case.pumps.curves.head[0, 0] == pytest.approx(40.5)
    assert case.pumps.bep_flow[0] == pytest.approx(0.025)
    assert case.pumps.model.tolist() == [-1, 1]
    assert case.installed[0].title == "own curve, 190 mm"


def test_npsh_of_a_curve_is_in_the_unit_of_head_where_it_has_none_of_its_own(read: Read) -> None:
    curve = "{ speed = 1500, flow = [0, 90, 180], head = [150, 140, 100], npsh_required = [10, 12, 20] }"
    feet = (TRIMMED, curve), ('head = "m"', 'head = "ft"')
    assert read(*feet).pumps.curves.npsh_required[0, 0] == pytest.approx(3.048)
    both = (TRIMMED, curve), ('head = "m"', 'head = "ft", npsh = "m"')
    assert read(*both).pumps.curves.npsh_required[0, 0] == pytest.approx(10.0)


def test_a_curve_without_efficiency_has_no_best_flow(read: Read) -> None:
    case = read((TRIMMED, "{ speed = 1500, flow = [0, 90], head = [50, 45] }"))
    assert math.isnan(case.installed[0].rated_flow)
    assert np.isnan(case.pumps.curves.power[0]).all()


def test_rated_flow_is_the_best_flow_where_not_stated(read: Read) -> None:
    assert read().installed[0].rated_flow == pytest.approx(0.025)
    assert read((TRIMMED, TRIMMED + ", rated_flow = 108")).installed[0].rated_flow == pytest.approx(0.03)


def test_figures_of_the_case_replace_the_catalogs(read: Read) -> None:
    plain = read().pumps
    assert plain.minimum_flow.tolist() == pytest.approx([0.005, math.nan], nan_ok=True)
    figures = "minimum_flow = 36, maximum_flow = 162, allowable_region = [40, 130], allowable_pressure = 10"
    pumps = read((TRIMMED, f"{TRIMMED}, {figures}, motor = 22")).pumps
    assert pumps.minimum_flow[0] == pytest.approx(0.01)
    assert pumps.maximum_flow[0] == pytest.approx(0.045)
    assert (pumps.region_low[0], pumps.region_high[0]) == pytest.approx((0.4, 1.3))
    assert pumps.allowable_pressure[0] == pytest.approx(1e6)
    assert np.isnan([pumps.minimum_flow[1], pumps.region_low[1], pumps.allowable_pressure[1]]).all()


def test_branch_and_motor(read: Read) -> None:
    way = (
        "suction_branch_loss = { head = 0.1, at_flow = 36 }, suction_head = -0.5, "
        "discharge_branch_loss = [{ head = 0.5, at_flow = 36 }, { head = 0.2, at_flow = 36, exponent = 1 }]"
    )
    pump = read((TRIMMED, f"{TRIMMED}, {way}, motor = 22")).installed[0]
    # [D] at 0.01 m3/s: 0.1 / 0.0001, 0.5 / 0.0001, 0.2 / 0.01
    assert pump.branch.suction.coefficient == pytest.approx((1000.0,))
    assert pump.branch.discharge.coefficient == pytest.approx((5000.0, 20.0))
    assert pump.branch.suction_head == -0.5
    assert pump.motor == pytest.approx(22000.0)


def test_nobody_can_change_the_curves(read: Read) -> None:
    pumps = read((TRIMMED, OWN)).pumps
    with pytest.raises(ValueError, match="read-only"):
        pumps.curves.head[0, 0] = 1.0
    with pytest.raises(ValueError, match="read-only"):
        pumps.minimum_flow[0] = 1.0


@pytest.mark.parametrize(
    ("curve", "what"),
    [
        ('{ pump = "with trim" }', "there is no pump in the catalog 'with trim'"),
        ('{ pump = "with trims" }', "'with trims' has no diameter"),
        ('{ pump = "with trims", diameter = 211 }', "diameter is 211"),
        ('{ pump = "with trims", diameter = 169 }', "diameter is 169"),
        ('{ pump = "plain", diameter = 200 }', "the catalog states no diameters of 'plain'"),
        ("{ speed = 1500, flow = [0, 90, 80], head = [50, 45, 30] }", "flow 80 comes after 90"),
        ("{ flow = [0, 90, 180], head = [50, 45, 30] }", "'speed' is missing"),
    ],
)
def test_problems_of_a_curve(problems: Problems, curve: str, what: str) -> None:
    assert problems((TRIMMED, curve)) == [what]


@pytest.mark.parametrize(
    ("figures", "what"),
    [
        ("allowable_region = [130, 40]", "allowable_region runs from 130 to 40 %"),
        ("minimum_flow = 50, maximum_flow = 40", "maximum_flow is 40"),
    ],
)
def test_problems_of_figures(problems: Problems, figures: str, what: str) -> None:
    assert problems((TRIMMED, f"{TRIMMED}, {figures}")) == [what]


def test_fixed_speed_by_default(read: Read) -> None:
    case = read()
    assert not case.installed[0].drive.varies
    assert case.installed[0].drive == case.new_pump.drive == Drive(1.0, 1.0, 1.0, 1.0)


def test_drives(read: Read) -> None:
    given = "speed_range = [60, 103], motor_efficiency = 93, drive_efficiency = 97.5"
    case = read((TRIMMED, f"{TRIMMED}, {given}"), ("new_pump = {}", "new_pump = { drive_efficiency = 96 }"))
    assert case.installed[0].drive == Drive(0.6, 1.03, 0.93, 0.975)
    assert case.installed[1].drive == Drive()
    assert case.new_pump.drive == Drive(drive_efficiency=0.96)


@pytest.fixture
def table(table: PumpTable) -> PumpTable:
    """The first pump may run at 870 to 1500 rpm."""
    unknown = math.nan
    return replace(table, lowest_speed=frozen([870.0, unknown]), highest_speed=frozen([1500.0, unknown]))


def test_a_range_within_the_catalogs(read: Read) -> None:
    assert not read().installed[0].drive.varies
    # [D] 60 % of 1450 rpm is 870, 103 % is 1493.5; 62 % of 1420 is 880.4
    assert read((TRIMMED, f"{TRIMMED}, speed_range = [60, 103]")).installed[0].drive.lowest == 0.6
    assert read((TRIMMED, f"{TRIMMED}, speed = 1420, speed_range = [62, 100]")).installed[0].drive.varies


@pytest.mark.parametrize(
    ("range_", "what"),
    [
        ("speed_range = [59, 100]", "speed_range runs from 856 to 1450 rpm"),
        ("speed_range = [60, 104]", "speed_range runs from 870 to 1508 rpm"),
        ("speed = 1420, speed_range = [60, 100]", "speed_range runs from 852 to 1420 rpm"),
        (
            "speed_range = [60, 99]",
            "speed_range runs from 60 to 99 %: the range leaves out the speed of the curve, 100 %",
        ),
        ("speed_range = [100, 100]", "speed_range runs from 100 to 100 %"),
    ],
)
def test_problems_of_a_range(problems: Problems, range_: str, what: str) -> None:
    assert problems((TRIMMED, f"{TRIMMED}, {range_}")) == [what]


def test_head_tolerance_in_place_of_the_catalogs(read: Read) -> None:
    # ISO 9906:2012: grade 2B +-5 %, 2U 0 to +10 % [M]
    for stated, figure in (
        ('acceptance_grade = "2B"', 0.05),
        ('acceptance_grade = "2U"', 0.1),
        ("head_uncertainty = 4", 0.04),
        ("head_uncertainty = 0", 0.0),
    ):
        pumps = read((TRIMMED, f"{TRIMMED}, {stated}")).pumps
        assert pumps.head_tolerance[0] == pytest.approx(figure)
        assert math.isnan(pumps.head_tolerance[1])


def test_new_is_not_a_tag(problems: Problems) -> None:
    assert "an installed pump is called 'new'" in problems(('tag = "P-2"', 'tag = "new"'))


def test_the_free_place_by_default(read: Read) -> None:
    new = read().new_pump
    assert (new.count, new.trim_step, new.motor_series) == (1, 0.001, "IEC")
    assert math.isnan(new.frequency)
    assert math.isnan(new.slip)


def test_the_free_place_as_given(read: Read, problems: Problems) -> None:
    given = (
        'count = 2, frequency = 60, slip = 1.5, trim_step = "0.1 in", motor_series = "NEMA", suction_head = 1'
    )
    new = read(("new_pump = {}", f"new_pump = {{ {given} }}")).new_pump
    assert (new.count, new.frequency, new.slip, new.motor_series) == (2, 60.0, 0.015, "NEMA")
    assert (new.trim_step, new.branch.suction_head) == pytest.approx((0.00254, 1.0))
    assert problems(("new_pump = {}", "new_pump = { slip = 1.5 }")) == ["slip is given without frequency"]


def test_whom_the_new_pump_replaces(read: Read, problems: Problems) -> None:
    listed = ('"P-1", "P-2", "new"', '"P-1", "new"')
    assert read().new_pump.replaces == -1
    assert read(("new_pump = {}", 'new_pump = { replaces = "P-2" }'), listed).new_pump.replaces == 1
    assert problems(("new_pump = {}", 'new_pump = { replaces = "P-3" }')) == ["there is no pump 'P-3'"]
