"""Screens in a terminal, by rich: as many columns as fit, numbers never broken."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from screener.export.clean import clean
from screener.view.blocks import Cell, Column, Heading, Lines, Pairs, Screen, Table, Tone

if TYPE_CHECKING:
    from rich.console import Console

SUFFIX = ""
NAME = "table"

STYLES = {Tone.PLAIN: "", Tone.GOOD: "green", Tone.WARNING: "yellow", Tone.BAD: "bold red", Tone.QUIET: "dim"}
GAP = 2
NARROWEST = 14


def show(screen: Screen, console: Console) -> None:
    """Print a screen, and say at its end where columns were left out for want of width."""
    left_out = 0
    for number, block in enumerate(screen.blocks):
        if number and isinstance(block, Heading):
            console.print()
        if isinstance(block, Table):
            left_out += _table(block, console)
        else:
            _print(block, console)
    if left_out:
        columns = "1 column" if left_out == 1 else f"{left_out} columns"
        more = f"{columns} did not fit this width; a wider terminal or --format csv shows more."
        _paragraph(console, more, indent=0, style=STYLES[Tone.QUIET])


def _print(block: Heading | Lines | Pairs, console: Console) -> None:
    if isinstance(block, Heading):
        _heading(block, console)
    elif isinstance(block, Lines):
        for line in block.lines:
            _paragraph(console, line, indent=block.indent, style=STYLES[block.tone])
    else:
        room = max(_length(clean(label)) for label, _ in block.pairs) + 2 + GAP
        for label, text in block.pairs:
            _paragraph(console, text, indent=room, style="", label=f"  {label}")


def _heading(block: Heading, console: Console) -> None:
    from rich.text import Text

    text, aside = clean(block.text), clean(block.aside)
    room = console.width - _length(text) - _length(aside)
    if aside and room >= GAP:
        console.print(Text.assemble((text, "bold"), " " * room + aside))
        return
    _paragraph(console, text, indent=0, style="bold")
    if aside:
        _paragraph(console, aside, indent=0, style="")


def _paragraph(console: Console, text: str, *, indent: int, style: str, label: str = "") -> None:
    """Print words, wrapped, with their label hanging to the left."""
    from rich.text import Text

    wrapped = Text(clean(text)).wrap(console, max(console.width - indent, NARROWEST))
    for number, line in enumerate(wrapped):
        before = clean(label) if number == 0 else ""
        room = " " * (indent - _length(before))
        console.print(Text.assemble((before, "bold"), room, (line.plain.rstrip(), style)))


def _table(block: Table, console: Console) -> int:
    """Print a table; returns how many of its columns did not fit."""
    from rich.text import Text

    places = fitting(block.columns, block.rows, console.width)
    widths = _widths(block, places, console.width)

    def line(cells: Sequence[tuple[str, str]]) -> Text:
        text = Text()
        for number, (place, (words, style)) in enumerate(zip(places, cells, strict=True)):
            words = _cut(clean(words), widths[place])
            last = number == len(places) - 1
            room = " " * (widths[place] - _length(words))
            if block.columns[place].left:
                text.append(words, style)
                text.append("" if last else room + " " * GAP)
            else:
                text.append(room)
                text.append(words, style)
                text.append("" if last else " " * GAP)
        text.rstrip()
        return text

    console.print(line([(block.columns[place].title, "underline") for place in places]))
    for row in block.rows:
        console.print(line([(row[place].text, STYLES[row[place].tone]) for place in places]))
    for note in block.note:
        _paragraph(console, note, indent=0, style=STYLES[Tone.QUIET])
    return sum(column.rank < 9 for column in block.columns) - len(places)


def _widths(block: Table, places: Sequence[int], width: int) -> dict[int, int]:
    """Width of each column shown; where even those do not fit, words are cut, then titles."""
    columns = {place: (block.columns[place], [row[place] for row in block.rows]) for place in places}
    widths = {place: max(_title(column), _cells(cells)) for place, (column, cells) in columns.items()}
    least = {place: NARROWEST if column.left else _cells(cells) for place, (column, cells) in columns.items()}
    over = sum(widths.values()) + GAP * (len(places) - 1) - width
    for place in sorted(places, key=lambda p: (not block.columns[p].left, -widths[p])):
        cut = min(max(over, 0), max(widths[place] - least[place], 0))
        widths[place] -= cut
        over -= cut
    return widths


def _title(column: Column) -> int:
    return _length(clean(column.title))


def _cells(cells: Sequence[Cell]) -> int:
    return max((_length(clean(cell.text)) for cell in cells), default=0)


def _length(text: str) -> int:
    from rich.cells import cell_len

    return cell_len(text)


def _cut(text: str, width: int) -> str:
    if _length(text) <= width:
        return text
    while text and _length(text) > width - 1:
        text = text[:-1]
    return text + "…"


def fitting(columns: Sequence[Column], rows: Sequence[Sequence[Cell]], width: int) -> list[int]:
    """Columns that fit side by side, in order; the ones of highest rank go first.

    A title counts for a quarter of the width at most: it is cut rather than lose its numbers.
    """
    widths = [
        max(min(_title(column), width // 4), _cells([row[place] for row in rows]))
        for place, column in enumerate(columns)
    ]
    kept = [place for place, column in enumerate(columns) if column.rank < 9]
    while sum(widths[place] + GAP for place in kept) - GAP > width:
        last = max(kept, key=lambda place: (columns[place].rank, place))
        if columns[last].rank == 0:
            break
        kept.remove(last)
    return kept
