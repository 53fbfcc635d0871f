"""A small invented header of pumps in closed form, H = H0 - 1000 Q2, without branch losses."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import nan

import numpy as np
import pytest

from screener.case.read import WEIGHTS
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.criteria import default_limits
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import frozen
from screener.model.case import Branch, Case, Control, Duty, Installed, Level, Liquid, Loss, NewPump, System
from screener.model.curves import PumpTable
from screener.screening.one import Explained, explain

DAY, NIGHT = 0.19, 0.08
UNITS = {"flow": "m3/h", "head": "m", "npsh": "m", "power": "kW", "length": "mm", "pressure": "bar"}


def _entry(name: str, shutoff: float, minimum: float, end: float, tolerance: float, source: str) -> Entry:
    flow = np.linspace(0, end, 33)
    test = TestedCurve(
        diameter=0.4,
        flow=frozen(flow),
        head=frozen(shutoff - 1000 * flow**2),
        efficiency=frozen(np.full(33, nan)),
        power=frozen(25e3 + 250e3 * flow),
        npsh_required=frozen(np.full(33, 2.0)),
        bep_flow=0.1,
    )
    return Entry(
        name,
        name,
        "end suction",
        source,
        1450.0,
        (test,),
        maximum=0.4,
        minimum=0.36,
        minimum_flow=minimum,
        maximum_flow=0.2,
        region_low=0.1,
        region_high=1.6,
        allowable_pressure=1e6,
        maximum_power=200e3,
        head_tolerance=tolerance,
    )


def _table(
    *shutoffs: float, minimum: float = 0.035, end: float = 0.16, tolerance: float = 0.0, source: str = ""
) -> PumpTable:
    return compile_table([_entry(f"H {h:g}", h, minimum, end, tolerance, source) for h in shutoffs])


def _case(
    *shutoffs: float, motor: float = 75e3, running: Sequence[int] = (), night: float = NIGHT, **of: float
) -> Case:
    """Installed pumps by their shutoff heads; day and night run them all, or at night those of `running`."""
    table = _table(*shutoffs, **of)
    rows = np.arange(len(shutoffs))
    everyone = tuple(int(row) for row in rows)
    pumps = trimmed(table, model=rows, diameter=table.maximum, speed_ratio=np.ones(len(rows)))

    def duty(name: str, flow: float, runs: Sequence[int], rated: bool) -> Duty:
        return Duty(name, flow, (0,), 0, (tuple(runs),), (True,), Control.THROTTLED, 1000.0, rated)

    day = DAY * (1 + len(shutoffs)) / 2
    friction = 500 * (2 / (1 + len(shutoffs))) ** 2  # so that each pump has the same to do
    return Case(
        title="A small header",
        date="",
        liquids=(Liquid("water", nan, 1000.0, 1e-6, 2e3, 4180.0),),
        atmospheric_pressure=101325.0,
        system=System(Loss((friction,), (2.0,)), frozen([]), frozen([]), nan, 0.0, 1e6),
        levels=(Level("only", 20.0, 3.0, 0.0),),
        suction_friction=Loss(),
        installed=tuple(Installed(f"P-{1 + row}", "", Branch(), 0.1, motor) for row in everyone),
        pumps=pumps,
        new_pump=NewPump(1, nan, nan, Branch(), 0.001, "IEC"),
        duties=(duty("day", day, everyone, True), duty("night", night, running or everyone, False)),
        limits=default_limits(),
        weights=WEIGHTS,
        display=UNITS,
    )


@pytest.fixture(scope="session")
def case_of() -> Callable[..., Case]:
    """A case from the shutoff heads of its installed pumps."""
    return _case


@pytest.fixture(scope="session")
def table_of() -> Callable[..., PumpTable]:
    """A catalog from the shutoff heads of its pumps."""
    return _table


@pytest.fixture(scope="session")
def explained() -> Callable[..., Explained]:
    """A pump of one shutoff head [m] beside the installed ones of a case, at its largest diameter."""

    def make(case: Case, shutoff: float, diameter: float = 0.4, **of: float) -> Explained:
        return explain(case, _table(shutoff, **of), 0, diameter)

    return make
