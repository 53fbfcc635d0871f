"""What one pump comes to under other trim laws, to blocks and data."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from screener.catalog.entry import Entry
from screener.changes.laws import ByLaw
from screener.model.arrays import Floats
from screener.model.finding import Verdict
from screener.model.tables.trim_laws import AFFINITY, EQUAL_EXPONENTS
from screener.view.blocks import Block, Cell, Column, Heading, Table
from screener.view.data import VERDICTS
from screener.view.display import Display, word
from screener.view.explain import VERDICT_TONES, passing


def laws(result: ByLaw, display: Display) -> list[Block]:
    """One row for each law, the one in force first; nothing for a pump that states no diameter."""
    if math.isnan(result.steps[0]):
        return []
    at = display.full("length", result.steps[result.chosen])
    columns = [
        Column("law", "trim law", left=True),
        Column("smallest_diameter", "meets every duty from", display.unit("length")),
        Column("head", f"head at {at}", display.unit("head")),
        Column("verdict", f"at {at}", left=True),
        Column("passing_diameters", "all diameters", left=True, rank=1),
    ]
    rows = [
        [
            word(name(entry)),
            display.cell("length", result.wanted[row]),
            display.cell("head", result.head[row]),
            _verdict(result, row),
            word(_passing(result, display, row)),
        ]
        for row, entry in enumerate(result.entries)
    ]
    units = f"diameters {display.unit('length')}, heads {display.unit('head')}"
    heading = Heading("BY OTHER TRIM LAWS", f"the first is in force; {units}")
    return [heading, Table(columns, rows, _notes(result, display))]


def laws_data(result: ByLaw, display: Display) -> list[dict[str, Any]]:
    """The same as data, with the diameters accepted under each law."""
    if math.isnan(result.steps[0]):
        return []
    return [
        {
            "law": entry.trim_law or None,
            "flow_exponent": entry.flow_exponent,
            "head_exponent": entry.head_exponent,
            "smallest_diameter": display.number("length", result.wanted[row]),
            "head": display.number("head", result.head[row]),
            "verdict": VERDICTS[Verdict(int(result.verdict[row, result.chosen]))],
            "passing_diameters": [display.number("length", value) for value in _accepted(result, row)],
        }
        for row, entry in enumerate(result.entries)
    ]


def name(entry: Entry) -> str:
    """The trim law of a pump, in words."""
    if entry.trim_law == EQUAL_EXPONENTS:
        return f"{EQUAL_EXPONENTS}, {entry.head_exponent:g}"
    return entry.trim_law or f"exponents {entry.flow_exponent:g} and {entry.head_exponent:g}"


def _notes(result: ByLaw, display: Display) -> list[str]:
    notes = ["Laws differ only away from tested diameters."]
    if math.isfinite(result.flow):
        flow, head = display.full("flow", result.flow), display.full("head", result.needed)
        notes[0] = f"The rated duty asks for {head} at {flow}, at which the heads are read. " + notes[0]
    if result.entries[0].trim_law == AFFINITY:
        notes.append(
            "In the one published example a cut of 16 % gave 5.5 % less head than the affinity law says."
        )
    if result.named and result.entries[0].trim_law != result.named:
        notes.append(
            f"It states no inlet diameter for the law of the case, {result.named}, and keeps its own."
        )
    return notes


def _accepted(result: ByLaw, row: int) -> Floats:
    return np.asarray(result.steps[result.verdict[row] == Verdict.ACCEPTED])


def _passing(result: ByLaw, display: Display, row: int) -> str:
    conditional = int(np.sum(result.verdict[row] == Verdict.CONDITIONAL))
    return passing(_accepted(result, row), result.steps, conditional, display)


def _verdict(result: ByLaw, row: int) -> Cell:
    verdict = Verdict(int(result.verdict[row, result.chosen]))
    return Cell(VERDICTS[verdict], VERDICTS[verdict], VERDICT_TONES[verdict])
