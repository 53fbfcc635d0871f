"""What a screen is made of, free of any format."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from enum import IntEnum


class Tone(IntEnum):
    """How a cell or a line is to be taken; the words say it too."""

    PLAIN = 0
    GOOD = 1
    WARNING = 2
    BAD = 3
    QUIET = 4


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell: how it reads, and the number or word behind it (None where there is none)."""

    text: str
    value: float | str | bool | None = None
    tone: Tone = Tone.PLAIN


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a table.

    title : short, over the column;  unit : "" where none
    left  : words, not numbers
    rank  : 0 is always shown; where there is no room the highest rank goes first
    key   : name of the field in the json and the csv
    """

    key: str
    title: str
    unit: str = ""
    left: bool = False
    rank: int = 0


@dataclass(frozen=True, slots=True)
class Heading:
    """The title of a part; `aside` stands at the right where there is room."""

    text: str
    aside: str = ""


@dataclass(frozen=True, slots=True)
class Lines:
    """Running text, each line a paragraph; `label` hangs to its left."""

    lines: Sequence[str]
    tone: Tone = Tone.PLAIN
    indent: int = 0


@dataclass(frozen=True, slots=True)
class Pairs:
    """Short labels with the text that explains each."""

    pairs: Sequence[tuple[str, str]]


@dataclass(frozen=True, slots=True)
class Table:
    """Rows under columns; `note` explains the columns."""

    columns: Sequence[Column]
    rows: Sequence[Sequence[Cell]]
    note: Sequence[str] = field(default_factory=tuple)


Block = Heading | Lines | Pairs | Table


@dataclass(frozen=True, slots=True)
class Screen:
    """One result as blocks, with the one table that a csv holds, and the whole of it as plain data."""

    blocks: Sequence[Block]
    table: Table
    data: dict[str, object]
