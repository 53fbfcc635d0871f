"""Levels and the system curve in its three forms."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from screener.model.case import Case

Read = Callable[..., Case]
Problems = Callable[..., list[str]]
FRICTION = "system = { friction = { head = 16, at_flow = 360 } }"


def test_terms_add_up(read: Read) -> None:
    terms = "[{ head = 16, at_flow = 360 }, { head = 2, at_flow = '50 L/s', exponent = 1.5 }]"
    friction = read((FRICTION, f"system = {{ friction = {terms} }}")).system.friction
    # [D] 16 / 0.1^2 and 2 / 0.05^1.5
    assert friction.coefficient == pytest.approx((1600.0, 178.885438))
    assert friction.exponent == (2.0, 1.5)


def test_table(read: Read) -> None:
    system = read((FRICTION, "system = { table = { flow = [0, 180, 360], head = [0, 4, 16] } }")).system
    assert system.table_flow.tolist() == pytest.approx([0.0, 0.05, 0.1])
    assert system.table_head.tolist() == [0.0, 4.0, 16.0]
    assert not system.table_flow.flags.writeable
    assert system.friction.coefficient == ()
    assert math.isnan(system.fit_deviation)


@pytest.mark.parametrize(
    ("flow", "head", "what"),
    [
        ("[0, 180, 360]", "[0, 16, 4]", "head goes from 16 to 4"),
        ("[0, 180, 180]", "[0, 4, 16]", "flow goes from 180 to 180"),
        ("[0, 180, 360]", "[1, 4, 16]", "the first head is 1"),
        ("[9, 180, 360]", "[0, 4, 16]", "the first flow is 9"),
        ("[0, 180, 360]", "[0, 4]", "head has 2 values, flow has 3"),
    ],
)
def test_table_rises_from_zero(problems: Problems, flow: str, head: str, what: str) -> None:
    assert problems((FRICTION, f"system = {{ table = {{ flow = {flow}, head = {head} }} }}")) == [what]


def test_measured_points_are_fitted(read: Read) -> None:
    measured = 'measured = { level = "low", flow = [180, 360], head = [32, 45] }'
    system = read((FRICTION, f"system = {{ {measured} }}")).system
    # [D] over 28 m: 4 at Q^2 = 0.0025 and 17 at 0.01; k = (0.01 + 0.17) / (0.0025^2 + 0.01^2) = 1694.1176
    # [D] residuals: 4 - 4.2353 = -0.2353 and 17 - 16.9412 = 0.0588
    assert system.friction.coefficient == pytest.approx((1694.117647,))
    assert system.fit_deviation == pytest.approx(0.2352941)


def test_measured_heads_contain_the_pressures(read: Read) -> None:
    measured = 'measured = { level = "low", flow = [180, 360], head = [42, 54], exponent = 2 }'
    system = read(
        (FRICTION, f'system = {{ {measured}, destination_pressure = "196.133 kPa" }}'),
        ("static_head = 28", 'static_head = 28, vessel_pressure = "98.0665 kPa gauge"'),
    ).system
    # [D] static 28 + 98066.5 / (1000 * 9.80665) = 38 m; 4 and 16 m are left: k = 1600, no residual
    assert system.friction.coefficient == pytest.approx((1600.0,))
    assert system.fit_deviation == pytest.approx(0.0, abs=1e-9)
    assert system.destination_pressure == pytest.approx(196133.0)


def test_the_liquid_of_the_measurement(read: Read, problems: Problems) -> None:
    system = (
        'system = { destination_pressure = "98.0665 kPa", measured = { level = "low", flow = [180, 360], '
    )
    heavy = (
        'liquid = [{ name = "water"',
        'liquid = [{ name = "brine", density = "1250 kg/m3", \
viscosity = "1 cSt", vapour_pressure = "2 kPa", heat_capacity = "3 kJ/(kg K)" }, { name = "water"',
    )
    pumped = ('"peak", flow = 360', '"peak", flow = 360, liquid = "water"')
    # [D] 98066.5 Pa are 10 m of 1000 kg/m3 and 8 m of 1250 kg/m3; 4 and 16 m are left: k = 1600
    with_first = (FRICTION, system + "head = [40, 52] } }")
    assert read(with_first, heavy, pumped).system.friction.coefficient == pytest.approx((1600.0,))
    with_other = (FRICTION, system + 'head = [42, 54], liquid = "water" } }')
    assert read(with_other, heavy, pumped).system.friction.coefficient == pytest.approx((1600.0,))
    unknown = (FRICTION, system + 'head = [42, 54], liquid = "waiter" } }')
    assert problems(unknown) == ["there is no liquid 'waiter'"]


def test_a_liquid_that_was_only_measured_with(read: Read) -> None:
    spare = (
        (
            'liquid = [{ name = "water"',
            'liquid = [{ name = "cold", kind = "water", temperature = 10 }, \
{ name = "water"',
        ),
        ('pressure = "bar"', 'pressure = "bar", temperature = "degC"'),
    )
    oil = (
        ("flow = 360, running", 'flow = 360, liquid = "water", running'),
        ("flow = 180, running", 'flow = 180, liquid = "water", running'),
    )
    measured = (FRICTION, 'system = { measured = { level = "low", flow = [180, 360], head = [32, 45] } }')
    assert len(read(measured, *spare, *oil).liquids) == 2


def test_measured_heads_below_static(problems: Problems) -> None:
    measured = 'measured = { level = "low", flow = [180, 360], head = [27, 25] }'
    assert problems((FRICTION, f"system = {{ {measured} }}")) == [
        "the measured heads are no higher than the static head of 28.00 m"
    ]


def test_measured_without_flow(problems: Problems) -> None:
    measured = 'measured = { level = "low", flow = [0, 0], head = [30, 31] }'
    assert problems((FRICTION, f"system = {{ {measured} }}")) == ["every flow is 0"]


@pytest.mark.parametrize(
    ("system", "what"),
    [
        ("{}", "the system has no curve"),
        (
            "{ friction = { head = 1, at_flow = 1 }, table = { flow = [0, 1], head = [0, 1] } }",
            "the system has friction and table",
        ),
        ("{ friction = { head = 0, at_flow = 1 } }", "the system has no friction"),
    ],
)
def test_one_curve_with_friction(problems: Problems, system: str, what: str) -> None:
    assert problems((FRICTION, f"system = {system}")) == [what]


def test_a_surface_cannot_be_below_vacuum(problems: Problems) -> None:
    changed = ("static_head = 28", 'static_head = 28, vessel_pressure = "-1.1 bar gauge"')
    assert problems(changed) == ["vessel_pressure is -1.1 bar gauge"]


def test_suction_lift(read: Read) -> None:
    level = read(("suction_head = 3", "suction_head = -3")).levels[1]
    assert (level.name, level.static_head, level.suction_head) == ("high", 26.0, -3.0)


def test_a_loss_is_not_negative(problems: Problems) -> None:
    assert problems((FRICTION, "system = { friction = { head = -16, at_flow = 360 } }")) == ["head is -16"]
