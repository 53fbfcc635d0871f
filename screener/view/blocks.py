"""What a screen is made of, free of any format."""

from __future__ import annotations

from collections.abc import Callable, Sequence
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


class Role(IntEnum):
    """What a series of a chart stands for; its colour, line and mark follow from it alone."""

    NEW = 0
    NEW_ASIDE = 1
    INSTALLED = 2
    RESTORED = 3
    COMBINED = 4
    SYSTEM = 5
    DUTY = 6
    TRIP = 7
    LIMIT = 8
    BAND = 9


class Mark(IntEnum):
    """How a series is drawn."""

    LINE = 0
    POINTS = 1
    AREA = 2
    UPRIGHT = 3


@dataclass(frozen=True, slots=True)
class Series:
    """One series: x and y of equal length, in the units of the axes; None breaks a line.

    AREA fills between `y` and `low`; UPRIGHT draws a line over the whole height at each x.
    label : written at the series itself where it fits; labels : one for each point, or empty
    """

    label: str
    role: Role
    mark: Mark
    x: Sequence[float | None]
    y: Sequence[float | None] = ()
    low: Sequence[float | None] = ()
    labels: Sequence[str] = ()


@dataclass(frozen=True, slots=True)
class Axis:
    """Title of an axis, and its unit ("" where none)."""

    title: str
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Panel:
    """One of several plots under each other over the same x axis; `height` is relative."""

    y: Axis
    series: Sequence[Series]
    height: float = 1.0


@dataclass(frozen=True, slots=True)
class Chart:
    """One chart, free of any library.

    key : name of it in file names and sheets;  note : what a reader must know;  told : what it shows, in
    words, for those who cannot see it
    """

    key: str
    title: str
    x: Axis
    panels: Sequence[Panel]
    note: str = ""
    told: str = ""


def no_charts() -> Sequence[Chart]:
    """For screens that have none."""
    return ()


def no_sheets() -> Sequence[tuple[str, Table]]:
    """For screens whose tables all stand in their blocks."""
    return ()


@dataclass(frozen=True, slots=True)
class Screen:
    """One result as blocks, with the one table that a csv holds, and the whole of it as plain data.

    charts, sheets : made only by the outputs that want them: charts, and further tables by name
    """

    blocks: Sequence[Block]
    table: Table
    data: dict[str, object]
    charts: Callable[[], Sequence[Chart]] = no_charts
    sheets: Callable[[], Sequence[tuple[str, Table]]] = no_sheets
