"""Which tables of a screen go to which sheet of a workbook, and what the sheets are called."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from itertools import groupby
from typing import NamedTuple

from screener.export.clean import clean
from screener.view.blocks import Block, Cell, Column, Heading, Screen, Table

MANY = 3
"""Tables of like columns from which on they stand on one sheet."""

_FORBIDDEN = re.compile(r"[\[\]:*?/\\]+")
_CAPITALS = re.compile(r"[A-Z]{2,}( [A-Z]|[:,]|$)")


class Named(NamedTuple):
    """A table with the name of its sheet, and what stands over it; `rows` of the table are its own."""

    name: str
    heading: str
    aside: str
    table: Table
    rows: int


def complete(screen: Screen) -> Screen:
    """A screen with every table in its blocks: a further one takes the place of a shorter one of its name."""
    further = dict(screen.sheets())
    blocks: list[Block] = []
    head = -1
    for block in screen.blocks:
        if isinstance(block, Heading):
            head = len(blocks)
        elif isinstance(block, Table) and head >= 0:
            over = blocks[head]
            if isinstance(over, Heading) and over.text in further:
                blocks[head] = Heading(over.text)
                block = further.pop(over.text)
        blocks.append(block)
    if not any(block is screen.table for block in screen.blocks):
        further = {"EVERY ROW": screen.table, **further}
    return replace(screen, blocks=blocks, sheets=lambda: list(further.items()))


def tables(screen: Screen) -> list[Named]:
    """Every table of a complete screen, in order; many that follow each other with like columns as one."""
    found: list[tuple[str, str, Table]] = []
    heading = Heading("TABLE")
    for block in screen.blocks:
        if isinstance(block, Heading):
            heading = block
        elif isinstance(block, Table):
            found.append((heading.text, heading.aside, block))
    alike: list[list[tuple[str, str, Table]]] = []
    for _, some in groupby(found, key=lambda item: item[2].columns):
        run = list(some)
        alike += [run] if len(run) >= MANY else [[item] for item in run]
    alike += [[(name, "", table)] for name, table in screen.sheets()]
    joined = [_joined(run) if len(run) > 1 else run[0] for run in alike]
    names = unique(["Summary", "Chart data", *(name for name, *_ in joined)])[2:]
    return [
        Named(name, *whole, rows=len(table.rows))
        for name, whole, run in zip(names, joined, alike, strict=True)
        for *_, table in run
    ]


def _joined(run: Sequence[tuple[str, str, Table]]) -> tuple[str, str, Table]:
    """Tables of like columns as one, with their headings as its first column."""
    first, last = run[0], run[-1]
    columns = [Column("part", "part", left=True), *first[2].columns]
    rows = [[Cell(heading, heading), *row] for heading, _, table in run for row in table.rows]
    note = dict.fromkeys(line for *_, table in run for line in table.note)
    return f"{first[0]} TO {last[0]}", "", Table(columns, rows, list(note))


def unique(wanted: Sequence[str]) -> list[str]:
    """Names that sheets may have: 31 characters at most, none of []:*?/\\, no two alike.

    >>> unique(["REJECTED: a/b", "TRIMS", "trims", "'"])
    ['REJECTED a b', 'Trims', 'trims (2)', 'Sheet']
    """
    taken: set[str] = set()
    names = []
    for text in wanted:
        plain = " ".join(_FORBIDDEN.sub(" ", clean(text)).split())
        if plain.isupper() and _CAPITALS.match(plain):
            plain = plain.capitalize()
        number, name = 1, _short(plain, 31)
        while name.casefold() in taken:
            number += 1
            name = f"{_short(plain, 26)} ({number})"
        taken.add(name.casefold())
        names.append(name)
    return names


def _short(text: str, most: int) -> str:
    """The beginning of a name, of so many UTF-16 units, not broken within a word where that can be helped."""
    cut = text.encode("utf-16-le")[: 2 * most].decode("utf-16-le", "ignore")
    if cut != text and " " in cut[most // 2 :]:
        cut = cut.rsplit(" ", 1)[0]
    return cut.strip(" ',;") or "Sheet"
