"""Flows in words: what a reader sees of each mark."""

from __future__ import annotations

import numpy as np
import pytest

from screener.view.blocks import Tone
from screener.view.display import Display
from screener.view.flows import flow_cell

SHOWN = {"flow": "m3/h", "head": "m", "npsh": "m", "power": "kW", "length": "mm", "pressure": "bar"}


@pytest.mark.parametrize(
    ("flow", "header", "text", "value"),
    [
        (0.25, 40.0, "900", 900.0),
        (0.0, 51.0, "shut", 0.0),  # the header stands above its 50 m
        (0.0, 49.0, "past peak", 0.0),  # its valve would open, but the curve droops
        (np.inf, np.nan, "past 1080", None),
        (-np.inf, np.nan, "below 180", None),
    ],
)
def test_each_mark(make_run, flow: float, header: float, text: str, value: float | None) -> None:
    run = make_run(
        run={"flow": flow, "header": header},
        bounds={"opening": 50.0, "end": 0.3, "start": 0.05},
    )
    cell = flow_cell(Display(SHOWN), run, 0, 0)
    assert (cell.text, cell.value) == (text, value)
    assert (cell.tone == Tone.BAD) is (text != "900")
