"""The screen of `screener datasheet`: one candidate field by field, each with where it came from."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from screener.changes.datasheet import DataSheet
from screener.model.finding import Verdict
from screener.view import data
from screener.view.blocks import Block, Cell, Column, Heading, Lines, Pairs, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.datasheet_fields import Field, Writer
from screener.view.datasheet_groups import Group, groups
from screener.view.display import Display, word
from screener.view.explain import VERDICT_TONES

US_SPECIFIC_SPEED = 51.645
"""Specific speed in rpm, US gpm and ft over that in rpm, m3/s and m."""

BLANK = "What is blank is not known; nothing is guessed."


def screen(sheet: DataSheet, origin: Origin) -> Screen:
    """The sheet as blocks, one row a field as the table, and all of it as data."""
    explained = sheet.explained
    display = Display(explained.bench.header.case.display)
    parts = groups(Writer(sheet, display))
    verdict = Verdict(int(explained.judged.candidates.verdict[0]))
    diameter = explained.judged.run.pumps.diameter[0]
    impeller = f", impeller {display.full('length', diameter)}" if np.isfinite(diameter) else ""
    notes = [*_us_units(sheet), BLANK]
    blocks: list[Block] = [
        Heading(explained.bench.header.case.title, "data sheet"),
        Lines([explained.table.ids[explained.model] + impeller]),
        Lines([data.VERDICTS[verdict].upper()], VERDICT_TONES[verdict]),
        *(block for part in parts for block in _group(part)),
        Lines([*notes, *data.CAUTIONS], Tone.QUIET),
    ]
    return Screen(blocks, _flat(parts), _data(sheet, display, origin, parts, notes))


def _group(group: Group) -> list[Block]:
    """One group: its long words first, where they may wrap, then its figures, each with its source."""
    blocks: list[Block] = [Heading(group.name.upper())]
    long = [(field.label, field.cell.text) for field in group.fields if field.long and field.cell.text]
    if long:
        blocks.append(Pairs(long))
    columns = [
        Column("field", "field", left=True),
        Column("value", "value", left=True),
        Column("source", "from", left=True),
    ]
    short = [field for field in group.fields if not field.long]
    rows = [[word(field.label), _with_unit(field), word(field.source)] for field in short]
    return [*blocks, Table(columns, rows)]


def _with_unit(field: Field) -> Cell:
    cell = field.cell
    return Cell(f"{cell.text} {field.unit}", cell.value, cell.tone) if cell.text and field.unit else cell


def _us_units(sheet: DataSheet) -> list[str]:
    """The specific speeds in US units, where they are known."""
    pumps = sheet.explained.judged.run.pumps
    numbers = {
        "specific speed": pumps.specific_speed,
        "suction specific speed": pumps.suction_specific_speed,
    }
    told = [
        f"{name} {US_SPECIFIC_SPEED * float(value[0]):.0f}"
        for name, value in numbers.items()
        if np.isfinite(value[0])
    ]
    return [f"In US units (rpm, US gpm, ft): {', '.join(told)}."] if told else []


def _flat(parts: Sequence[Group]) -> Table:
    columns = [
        Column("group", "group", left=True),
        Column("key", "key", left=True),
        Column("of", "of", left=True),
        Column("field", "field", left=True),
        Column("value", "value"),
        Column("unit", "unit", left=True),
        Column("source", "from", left=True),
    ]
    rows = [
        [word(part.name), word(f.key), word(f.of), word(f.label), f.cell, word(f.unit), word(f.source)]
        for part in parts
        for f in part.fields
    ]
    return Table(columns, rows)


def _data(
    sheet: DataSheet, display: Display, origin: Origin, parts: Sequence[Group], notes: Sequence[str]
) -> dict[str, Any]:
    explained = sheet.explained
    candidates = explained.judged.candidates
    return {
        **data.head(explained.bench, "pump-datasheet", origin),
        "pump": explained.table.ids[explained.model],
        "diameter": display.number("length", candidates.diameter[0]),
        "verdict": data.VERDICTS[Verdict(int(candidates.verdict[0]))],
        "notes": list(notes),
        "fields": [
            {
                "group": part.name,
                "key": field.key,
                "of": field.of or None,
                "field": field.label,
                "value": field.cell.value,
                "unit": field.unit,
                "source": field.source,
            }
            for part in parts
            for field in part.fields
        ],
        "limits": data.limits(explained.bench, display),
    }
