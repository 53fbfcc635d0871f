"""Screens as a workbook: a summary, a sheet for each table, and charts that can be edited."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import lru_cache
from textwrap import wrap
from typing import Any

from screener.errors import UsageError
from screener.export import missing
from screener.export._xlsx_charts import write_charts
from screener.export._xlsx_tables import Named, complete, tables, unique
from screener.export.clean import clean
from screener.view.blocks import Cell, Column, Heading, Lines, Pairs, Screen, Table, Tone

NAME = "xlsx"
SUFFIX = ".xlsx"
FILE_ONLY = True
NEEDS = "xlsxwriter"

INK, FAINT, RULE = "#1c1f24", "#5d636b", "#b9bec5"
TONES: dict[Tone, dict[str, object]] = {
    Tone.PLAIN: {},
    Tone.GOOD: {"bg_color": "#e4eff8"},
    Tone.WARNING: {"bg_color": "#fbeec2", "italic": True},
    Tone.BAD: {"bg_color": "#f3bfa6", "bold": True},
    Tone.QUIET: {"font_color": FAINT, "italic": True},
}
"""Blue, yellow and orange are told apart by the colour-blind; fill and type tell them on a grey print."""

KEYS, HEAD, FIRST = 2, 3, 4
"""Rows of a table's sheet: keys as in the json, titles with units, the first row of the table."""

NARROWEST, WIDEST, WIDEST_NUMBER = 7, 46, 15
"""Characters of a column."""

LABEL, TEXT = 30, 104
"""Characters of the two columns of the summary."""

ONE_PAGE, PAGE = 48, 215
"""Rows of a summary, and characters of a table across, that are still read well on one page."""

LINE = 15
"""[pt] Height of a line."""

_ZEROS = str.maketrans("123456789", "000000000")
_NUMBER = re.compile(r"([^0-9]*?)([-+]?)(\d+)(\.\d+)?(.*)", re.DOTALL)


def render(screen: Screen) -> bytes:
    """A screen as a workbook, the same bytes for the same input.

    UsageError where xlsxwriter is not installed.
    """
    import io
    from datetime import datetime

    if needed := missing(NEEDS):
        raise UsageError(f"a workbook {needed}")
    import xlsxwriter

    out = io.BytesIO()
    words = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    book = xlsxwriter.Workbook(out, {"in_memory": True, **words})
    title = next((clean(block.text) for block in screen.blocks if isinstance(block, Heading)), "")
    book.set_properties({"title": title[:200], "created": datetime(2000, 1, 1)})
    book.set_size(2400, 1500)
    Writer(book, title).write(complete(screen))
    book.close()
    return out.getvalue()


class Writer:
    """Writes the sheets of one workbook."""

    def __init__(self, book: Any, title: str) -> None:
        self._book, self._title = book, title
        self._formats: dict[object, Any] = {}

    def write(self, screen: Screen) -> None:
        """Summary, tables, charts."""
        summary, named = self._sheet("Summary"), tables(screen)
        charts = screen.charts()
        drawn = unique(
            ["Summary", "Chart data", *(item.name for item in named), *(f"Chart {c.key}" for c in charts)]
        )
        drawn = drawn[len(drawn) - len(charts) :]
        self._summary(summary, screen, named, list(zip(drawn, charts, strict=True)))
        for name, item in {item.name: item for item in named}.items():
            self._table(self._sheet(name), item)
        write_charts(self._book, self._sheet, self._paragraph, dict(zip(drawn, charts, strict=True)))

    def _sheet(self, name: str) -> Any:
        """A sheet set up for A4, one page wide."""
        sheet = self._book.add_worksheet(name)
        sheet.set_landscape()
        sheet.set_paper(9)
        sheet.fit_to_pages(1, 0)
        sheet.set_margins(left=0.5, right=0.5, top=0.75, bottom=0.7)
        sheet.hide_gridlines(2)
        title = self._title[:90].replace("&", "&&")
        sheet.set_header(f"&L{title}&R&A")
        sheet.set_footer("&LScreening only&RPage &P of &N")
        return sheet

    def _format(self, **kinds: object) -> Any:
        key = tuple(sorted(kinds.items()))
        if key not in self._formats:
            self._formats[key] = self._book.add_format({"font_color": INK, "valign": "top", **kinds})
        return self._formats[key]

    def _paragraph(self, sheet: Any, row: int, text: str, widths: Sequence[float], **kinds: object) -> None:
        """Words over several columns, wrapped; the row is made high enough for them."""
        words, style = clean(text), self._format(text_wrap=True, **kinds)
        lines = _lines(words, sum(widths))
        sheet.set_row(row, LINE * lines)
        if len(widths) > 1:
            sheet.merge_range(row, 0, row, len(widths) - 1, "", style)
        sheet.write_string(row, 0, words, style)

    def _summary(
        self, sheet: Any, screen: Screen, named: Sequence[Named], drawn: Sequence[tuple[str, Any]]
    ) -> None:
        """All that is no table, and where each table stands."""
        sheet.set_column(0, 0, LABEL)
        sheet.set_column(1, 1, TEXT)
        row, places = 0, iter(named)
        for number, block in enumerate(screen.blocks):
            if isinstance(block, Heading):
                row += number > 0
                size = 11 if number else 14
                self._paragraph(sheet, row, block.text, [LABEL, TEXT], bold=True, font_size=size)
                sheet.set_row(row, 1.5 * size * -(-len(block.text) // 100))
                row += 1
                if block.aside:
                    self._paragraph(sheet, row, block.aside, [LABEL, TEXT], font_color=FAINT)
                    row += 1
            elif isinstance(block, Lines):
                for line in block.lines:
                    kinds = TONES[block.tone] | ({"indent": 1} if block.indent else {})
                    self._paragraph(sheet, row, line, [LABEL, TEXT], **kinds)
                    row += 1
            elif isinstance(block, Pairs):
                row = self._pairs(sheet, row, block.pairs)
            else:
                place = next(places)
                text = f'{_rows(place.rows)} on the sheet "{place.name}"'
                self._paragraph(sheet, row, text, [LABEL, TEXT], font_color=FAINT)
                row += 1
        more = [(item.name, _rows(item.rows)) for item in places]
        more += [(name, chart.title) for name, chart in drawn]
        for heading, pairs in (("FURTHER SHEETS", more), ("MADE FROM", list(_origin(screen.data)))):
            if pairs:
                self._paragraph(sheet, row + 1, heading, [LABEL, TEXT], bold=True)
                row = self._pairs(sheet, row + 2, pairs)
        sheet.fit_to_pages(1, 1 if row < ONE_PAGE else 0)

    def _pairs(self, sheet: Any, row: int, pairs: Sequence[tuple[str, str]]) -> int:
        """Labels beside their text; returns the row under them."""
        for label, text in pairs:
            sheet.set_row(row, LINE * max(_lines(label, 0.85 * LABEL), _lines(text, TEXT)))
            sheet.write_string(row, 0, clean(label), self._format(text_wrap=True, bold=True))
            sheet.write_string(row, 1, clean(text), self._format(text_wrap=True))
            row += 1
        return row

    def _table(self, sheet: Any, item: Named) -> None:
        """One table: title, keys, titles with units, rows, and notes under it."""
        table = item.table
        places = [place for place, column in enumerate(table.columns) if column.rank < 9]
        columns = [_as_words(table, place) for place in places]
        widths = [_width(column, table.rows, place) for column, place in zip(columns, places, strict=True)]
        for number, (column, width) in enumerate(zip(columns, widths, strict=True)):
            side: dict[str, object] = {"align": "left", "indent": 1} if column.left else {"align": "right"}
            key, over = self._format(font_size=7, font_color=FAINT, **side), {"bottom": 1, "top": 1}
            title = self._format(bold=True, text_wrap=True, **side | {"valign": "bottom"} | over)
            sheet.set_column(number, number, width)
            sheet.write_string(KEYS, number, clean(column.key), key)
            sheet.write_string(HEAD, number, heading(column), title)
        tall = [len(wrap(heading(c), max(int(w) - 3, 1))) for c, w in zip(columns, widths, strict=True)]
        sheet.set_row(HEAD, LINE * min(max(tall, default=1), 4) + 2)
        wide = [*widths, *[8.43] * _missing(widths)]
        sheet.write_string(0, 0, clean(item.heading), self._format(bold=True, font_size=13))
        sheet.set_row(0, 20)
        if item.aside:
            sheet.write_string(1, 0, clean(item.aside), self._format(font_color=FAINT))
        self._cells(sheet, table.rows, places, columns, widths)
        sheet.freeze_panes(FIRST, _frozen(columns))
        last = FIRST + len(table.rows)
        if columns:
            sheet.autofilter(HEAD, 0, max(last - 1, FIRST), len(columns) - 1)
        sheet.repeat_rows(KEYS, HEAD)
        if sum(widths) > PAGE:
            sheet.fit_to_pages(-(-int(sum(widths)) // PAGE), 0)
            sheet.repeat_columns(0, max(_frozen(columns) - 1, 0))
        for number, note in enumerate(table.note):
            self._paragraph(sheet, last + 1 + number, note, wide, font_color=FAINT)

    def _cells(
        self,
        sheet: Any,
        rows: Sequence[Sequence[Cell]],
        places: Sequence[int],
        columns: Sequence[Column],
        widths: Sequence[float],
    ) -> None:
        """The cells of a table: a number as one, formatted as its text reads; else the words."""
        across: list[tuple[int, int, bool, int, dict[object, Any]]] = [
            (number, place, column.left, int(width) - 2, {})
            for number, (place, column, width) in enumerate(zip(places, columns, widths, strict=True))
        ]
        write_number, write_string = sheet.write_number, sheet.write_string
        for row, cells in enumerate(rows, FIRST):
            lines = 1
            for number, place, left, width, styles in across:
                cell = cells[place]
                value, text, tone = cell.value, cell.text, cell.tone
                if isinstance(value, float) or value.__class__ is int:
                    shape = text.translate(_ZEROS)
                    key = (shape, value < 0, int(tone))
                    style = styles.get(key)
                    if style is None:
                        style = self._cell(number_format(text, value), tone, left)
                        if not shape.strip("+-.0"):  # a figure alone: others of its shape are shown alike
                            styles[key] = style
                    write_number(row, number, value, style)
                    continue
                style = self._cell("", tone, left)
                if text:
                    write_string(row, number, clean(text), style)
                    if left and len(text) >= width:
                        lines = max(lines, len(wrap(text, width)))
                else:
                    sheet.write_blank(row, number, None, style)
            if lines > 1:
                sheet.set_row(row, LINE * min(lines, 12))

    def _cell(self, shown: str, tone: Tone, left: bool) -> Any:
        """How a cell of a table looks; shown : its number format, "" for words."""
        key = (shown, int(tone), left)
        if key not in self._formats:
            side = {"align": "left", "indent": 1, "text_wrap": True} if left else {"align": "right"}
            kinds = {"num_format": shown} if shown else {}
            self._formats[key] = self._format(**side, **kinds, bottom=7, bottom_color=RULE, **TONES[tone])
        return self._formats[key]


def number_format(text: str, value: float) -> str:
    """The number format in which a value reads as its text does.

    >>> number_format("+1.25", 1.2477), number_format("min 0.8", 0.81), number_format("shut", 0.0)
    ('+0.00;-0.00', '"min "0.0;"min "-0.0', '"shut"')
    """
    found = _NUMBER.fullmatch(text)
    if found is None:
        return _literal(text)
    before, sign, whole, decimals, after = found.groups("")
    places = max(len(decimals) - 1, 0)
    if abs(float(sign + whole + decimals) - value) > 0.51 * 10.0**-places:
        return "General"
    return _pattern(before, sign, places, after, value < 0)


@lru_cache(maxsize=1000)
def _pattern(before: str, sign: str, places: int, after: str, negative: bool) -> str:
    """The number format of words, a sign, a number of so many decimals, and words."""
    body = f"0.{'0' * places}" if places else "0"
    if not (before or after or sign):
        return f"{body};{body}" if negative else body  # rounded to 0, and no -0
    plus = "+" if sign == "+" else ""
    return f"{_literal(before)}{plus}{body}{_literal(after)};{_literal(before)}-{body}{_literal(after)}"


def _literal(text: str) -> str:
    """Words within a number format."""
    plain = clean(text).replace('"', "'")[:60]
    return f'"{plain}"' if plain else ""


def heading(column: Column) -> str:
    """Title of a column with its unit; its key in words where the title is nothing but a unit."""
    from screener import units

    title, key = clean(column.title), clean(column.key).replace("_", " ")
    unit = column.unit
    if title == column.key:
        title = key
    if not title or title == unit or (units.dimension_of(title) and not unit):
        title, unit = key, unit or title
    said = not unit or f" {unit} " in f" {title.replace(',', ' ')} "
    return title if said else f"{title}, {clean(unit)}"


def _as_words(table: Table, place: int) -> Column:
    """A column of a table; to the left where it says so, or where it holds nothing but words."""
    column = table.columns[place]
    values = [row[place].value for row in table.rows if row[place].value is not None]
    words = bool(values) and all(isinstance(value, str) for value in values)
    return replace(column, left=column.left or words)


def _width(column: Column, rows: Sequence[Sequence[Cell]], place: int) -> float:
    """Width of a column [characters]: for its cells within bounds, its key, and words of its title."""
    least = max(0.66 * len(column.key) + 1, max(map(len, heading(column).split()), default=0) + 4, NARROWEST)
    cells = max((len(row[place].text) for row in rows), default=0) + (4 if column.left else 2)
    most = WIDEST if column.left else WIDEST_NUMBER
    return min(max(cells, least), max(most, min(least, WIDEST)))


def _lines(text: str, width: float) -> int:
    """Lines that words take in a column [characters]; most letters are narrower than the digits it counts."""
    return max(-(-len(text) // max(int(1.15 * width), 1)), 1)


def _missing(widths: Sequence[float]) -> int:
    """Columns to add to a narrow table so that its notes have room."""
    return max(0, -(-int(90 - sum(widths)) // 9))


def _frozen(columns: Sequence[Column]) -> int:
    """Columns that stay in view: those up to the first name, where it stands near the left."""
    return next((number for number, column in enumerate(columns[:2], 1) if column.left), 0)


def _rows(count: int) -> str:
    return "1 row" if count == 1 else f"{count} rows"


def _origin(data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Tool, date and files of a result."""
    if "tool" in data:
        yield "tool", f"{data['tool']['name']} {data['tool']['version']}"
    if data.get("date"):
        yield "date", data["date"]
    for item in data.get("inputs", ()):
        yield item["file"], f"sha256 {item['sha256']}"
