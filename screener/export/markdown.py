"""Screens as Markdown, every column of every table."""

from __future__ import annotations

from screener.export.clean import clean
from screener.view.blocks import Column, Heading, Lines, Pairs, Screen, Table

NAME = "markdown"
SUFFIX = ".md"

_SPECIAL = str.maketrans({character: f"\\{character}" for character in "\\`*_{}[]<>#|&~"})


def render(screen: Screen) -> str:
    """All blocks of a screen."""
    parts: list[str] = []
    for number, block in enumerate(screen.blocks):
        if isinstance(block, Heading):
            level = "#" if number == 0 else "##"
            parts.append(f"{level} {_text(block.text)}")
            if block.aside:
                parts.append(f"*{_text(block.aside)}*")
        elif isinstance(block, Lines):
            parts += [_paragraph(line) for line in block.lines]
        elif isinstance(block, Pairs):
            parts.append("\n".join(f"- **{_text(label)}**: {_text(text)}" for label, text in block.pairs))
        else:
            parts.append(_table(block))
            parts += [f"*{_text(note)}*" for note in block.note]
    return "\n\n".join(parts) + "\n"


def _table(table: Table) -> str:
    places = [place for place, column in enumerate(table.columns) if column.rank < 9]
    columns = [table.columns[place] for place in places]
    lines = [
        "| " + " | ".join(_title(column) for column in columns) + " |",
        "|" + "|".join("---" if column.left else "--:" for column in columns) + "|",
    ]
    lines += ["| " + " | ".join(_text(row[place].text) for place in places) + " |" for row in table.rows]
    return "\n".join(lines)


def _title(column: Column) -> str:
    """Title with its unit, where the title does not say it already."""
    said = not column.unit or f" {column.unit} " in f" {column.title.replace(',', ' ')} "
    return _text(column.title if said else f"{column.title}, {column.unit}")


def _paragraph(text: str) -> str:
    """Text whose beginning is not taken for a list or a rule either."""
    import re

    return re.sub(r"^([0-9]+(?=[.)] )|(?=[-+=]))", r"\1\\", _text(text))


def _text(text: str) -> str:
    """Text in which nothing is taken for Markdown or HTML, on one line."""
    return " ".join(clean(text).split()).translate(_SPECIAL)
