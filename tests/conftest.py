"""Short ways to make pumps and system curves from numbers, for the tests of the header."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import nan

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.header.system import SystemCurve, system_curve
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import Floats, frozen
from screener.model.case import Level, Liquid, Loss, System
from screener.model.curves import Pumps, PumpTable

Points = tuple[Sequence[float] | Floats, Sequence[float] | Floats]

WATER = Liquid("water", 20.0, 998.2, 1e-6, 2340.0, 4184.0)


def _table(curves: Sequence[Points], diameter: float = nan) -> PumpTable:
    entries = []
    for number, (flow, head) in enumerate(curves):
        unknown = frozen(np.full(len(flow), nan))
        test = TestedCurve(diameter, frozen(flow), frozen(head), unknown, unknown, unknown, nan)
        entries.append(Entry(f"pump {number}", "", "", "", 1450.0, (test,)))
    return compile_table(entries)


def _pumps(curves: Sequence[Points]) -> Pumps:
    rows = np.arange(len(curves))
    return trimmed(
        _table(curves), model=rows, diameter=np.full(len(rows), nan), speed_ratio=np.ones(len(rows))
    )


def _system(
    static: float, friction: Sequence[tuple[float, float]] = (), table: Points | None = None
) -> SystemCurve:
    coefficients, exponents = zip(*friction, strict=True) if friction else ((), ())
    flow, head = table or ((), ())
    system = System(Loss(coefficients, exponents), frozen(flow), frozen(head), nan, 0.0, nan)
    return system_curve(system, Level("only", static, 0.0, 0.0), WATER)


@pytest.fixture(scope="session")
def table_of() -> Callable[..., PumpTable]:
    """Curves, each (flow [m3/s], head [m]), and the diameter [m] of their only test, to a catalog table."""
    return _table


@pytest.fixture(scope="session")
def pumps_of() -> Callable[..., Pumps]:
    """Curves, each (flow [m3/s], head [m]), to pumps that run as tested."""
    return _pumps


@pytest.fixture(scope="session")
def system_of() -> Callable[..., SystemCurve]:
    """Static head [m] with (coefficient, exponent) terms or a table of friction to a system curve."""
    return _system
