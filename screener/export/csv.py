"""The main table of a result as CSV, every row and every figure, units in the header."""

from __future__ import annotations

from screener.export.clean import clean
from screener.view.blocks import Cell, Column, Screen

NAME = "csv"
SUFFIX = ".csv"

_FORMULA = ("=", "+", "-", "@")


def render(screen: Screen) -> str:
    """The table of a screen."""
    import csv
    import io

    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow([_title(column) for column in screen.table.columns])
    writer.writerows([_value(cell) for cell in row] for row in screen.table.rows)
    return out.getvalue()


def _title(column: Column) -> str:
    return clean(f"{column.key} [{column.unit}]" if column.unit else column.key)


def _value(cell: Cell) -> object:
    """The number or word of a cell; a word that a spreadsheet would run as a formula is quoted."""
    if not isinstance(cell.value, str):
        return "" if cell.value is None else cell.value
    word = clean(cell.value)
    return f"'{word}" if word.lstrip().startswith(_FORMULA) else word
