"""The demo plant, and small cases by hand."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import nan
from pathlib import Path

import numpy as np
import pytest

from screener.case.read import WEIGHTS, catalog_paths, read_case
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry
from screener.catalog.read import read
from screener.criteria import default_limits
from screener.files.document import load
from screener.model.arrays import frozen
from screener.model.case import Branch, Case, Control, Duty, Installed, Level, Liquid, Loss, NewPump, System
from screener.model.curves import Pumps, PumpTable
from screener.screening.shortlist import Shortlist, shortlist

DEMO = Path(__file__).parents[3] / "catalogs" / "osier-bank" / "case.toml"


@pytest.fixture(scope="session")
def entries() -> tuple[Entry, ...]:
    """The catalog of the demo as it was read."""
    return tuple(read(catalog_paths(load(DEMO)))[0])


@pytest.fixture(scope="session")
def table(entries: tuple[Entry, ...]) -> PumpTable:
    return compile_table(entries)


@pytest.fixture(scope="session")
def case(table: PumpTable) -> Case:
    return read_case(load(DEMO), table)


@pytest.fixture(scope="session")
def found(case: Case, table: PumpTable) -> Shortlist:
    """The shortlist of the demo."""
    return shortlist(case, table)


@pytest.fixture(scope="session")
def duty() -> Callable[..., Duty]:
    """A duty from its combinations of installed pumps, and whether the new pump runs in them."""

    def make(
        *running: tuple[int, ...],
        new: bool = True,
        levels: Sequence[int] = (0,),
        flow: float = 0.1,
        control: Control = Control.THROTTLED,
        rated: bool = False,
    ) -> Duty:
        return Duty("d", flow, tuple(levels), 0, running, (new,) * len(running), control, 1000.0, rated)

    return make


@pytest.fixture(scope="session")
def plant(pumps_of: Callable[..., Pumps]) -> Callable[..., Case]:
    """A case with installed pumps of the shutoff heads given; those of one head are identical."""

    def make(
        *duties: Duty, shutoff: Sequence[float] = (50.0, 50.0), count: int = 1, levels: Sequence[Level] = ()
    ) -> Case:
        flow = np.linspace(0, 0.1, 9)
        return Case(
            title="",
            date="",
            liquids=(Liquid("water", nan, 1000.0, 1e-6, 2e3, 4180.0),),
            atmospheric_pressure=101325.0,
            system=System(Loss((400.0,), (2.0,)), frozen([]), frozen([]), nan, 0.0, nan),
            levels=tuple(levels) or (Level("only", 20.0, 2.0, 0.0),),
            suction_friction=Loss(),
            installed=tuple(Installed(f"P-{i}", "", Branch(), nan, nan) for i in range(len(shutoff))),
            pumps=pumps_of([(flow, head - 2000 * flow**2) for head in shutoff]),
            new_pump=NewPump(count, nan, nan, Branch(), 0.001, "IEC"),
            duties=duties,
            limits=default_limits(),
            weights=WEIGHTS,
            display={},
        )

    return make
