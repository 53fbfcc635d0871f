"""A small case as text, a catalog of two pumps, and a reader that changes the text first."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from screener.case.read import read_case
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.errors import InputError
from screener.files.document import Document, load
from screener.model.arrays import frozen
from screener.model.case import Case
from screener.model.curves import PumpTable

CASE = """\
format = "pump-case/1"
title = "Two pumps and a free place"
units = { flow = "m3/h", head = "m", power = "kW", length = "mm", pressure = "bar" }
site = {}
liquid = [{ name = "water", \
density = "1000 kg/m3", viscosity = "1 cSt", vapour_pressure = "2 kPa", heat_capacity = "4.18 kJ/(kg K)" }]
system = { friction = { head = 16, at_flow = 360 } }
level = [{ name = "low", static_head = 28 }, { name = "high", static_head = 26, suction_head = 3 }]
installed = [
  { tag = "P-1", curve = { pump = "with trims", diameter = 200 } },
  { tag = "P-2", curve = { pump = "plain" } },
]
new_pump = {}
duty = [
  { name = "peak", flow = 360, running = ["P-1", "P-2", "new"] },
  { name = "day", flow = 180, running = { any = 1, new = true } },
]
"""


def tested(diameter: float, shutoff: float) -> TestedCurve:
    """H = shutoff - 20 (Q / 180 m3/h)^2 at nine points up to 180 m3/h, best efficiency at 90 m3/h."""
    flow = np.linspace(0, 0.05, 9)
    unknown = np.full(9, np.nan)
    return TestedCurve(
        diameter=diameter,
        flow=frozen(flow),
        head=frozen(shutoff - 20 * (flow / 0.05) ** 2),
        efficiency=frozen(unknown),
        power=frozen(unknown),
        npsh_required=frozen(unknown),
        bep_flow=0.025,
    )


@pytest.fixture(scope="session")
def table() -> PumpTable:
    return compile_table(
        [
            Entry(
                id="with trims",
                title="A pump with trims",
                construction="",
                source="",
                speed=1450.0,
                curves=(tested(0.2, 60.0),),
                maximum=0.21,
                minimum=0.17,
                minimum_flow=0.005,
                allowable_pressure=1.6e6,
            ),
            Entry("plain", "plain", "", "", 1450.0, (tested(np.nan, 50.0),)),
        ]
    )


@pytest.fixture
def document(tmp_path: Path) -> Callable[..., Document]:
    """Write the case with some of its text changed, as (old, new) pairs, and load it."""

    def changed(*changes: tuple[str, str]) -> Document:
        text = CASE
        for old, new in changes:
            assert old in text
            text = text.replace(old, new)
        path = tmp_path / "case.toml"
        path.write_text(text, encoding="utf-8")
        return load(path)

    return changed


@pytest.fixture
def read(document: Callable[..., Document], table: PumpTable) -> Callable[..., Case]:
    """Read the case with some of its text changed."""
    return lambda *changes: read_case(document(*changes), table)


@pytest.fixture
def problems(read: Callable[..., Case]) -> Callable[..., list[str]]:
    """Return what is wrong with the case once its text is changed, without places and hints."""

    def found(*changes: tuple[str, str]) -> list[str]:
        with pytest.raises(InputError) as caught:
            read(*changes)
        return [problem.what for problem in caught.value.problems]

    return found
