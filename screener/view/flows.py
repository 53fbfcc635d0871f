"""Flows of pumps to cells, the marks in words."""

from __future__ import annotations

import numpy as np

from screener.model.run import Run, in_state
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
        return Cell(
            f"past {display.text('flow', in_state(run.bounds.end, place)[row, column])}", None, Tone.BAD
        )
    if np.isneginf(value):
        start = float(in_state(run.bounds.start, place)[row, column])
        # a measured curve that has no figures: the viscosity method does not cover the pump
        return Cell(f"below {display.text('flow', start)}" if start else "no curve", None, Tone.BAD)
    if value == 0:
        opens = in_state(run.bounds.opening, place)[row, column] > run.header[row, place]
        return Cell("past peak" if opens else "shut", 0.0, Tone.BAD)
    return display.cell("flow", value)
