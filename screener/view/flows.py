"""Flows of pumps to cells, the marks in words."""

from __future__ import annotations

import numpy as np

from screener.model.run import Run
from screener.view.blocks import Cell, Tone
from screener.view.display import Display

NOTE = (
    "shut: held shut by its check valve. past peak: a drooping curve without an operating point on its "
    "falling side. past: beyond the last measured point; such a state has no figures."
)


def flow_cell(display: Display, run: Run, place: int, column: int, row: int = 0) -> Cell:
    """Flow of one pump in one state of one candidate; `column` 0 is the new pump."""
    value = float(run.flow[row, place, column])
    if np.isposinf(value):
        return Cell(f"past {display.text('flow', run.ratings.end[row, column])}", None, Tone.BAD)
    if np.isneginf(value):
        return Cell(f"below {display.text('flow', run.ratings.start[row, column])}", None, Tone.BAD)
    if value == 0:
        opens = run.ratings.header_shutoff[row, column] > run.header[row, place]
        return Cell("past peak" if opens else "shut", 0.0, Tone.BAD)
    return display.cell("flow", value)
