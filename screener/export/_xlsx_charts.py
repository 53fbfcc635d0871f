"""Charts of a workbook: their figures in cells, and charts that refer to those cells."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

from screener.export._draw import FAINT, GRID, INK, LONGEST, STYLES, Style
from screener.export.clean import clean
from screener.view.blocks import Axis, Chart, Mark, Panel, Series

DATA = "Chart data"
LANDSCAPE, PORTRAIT = (1040, 500), (830, 720)
"""[px] Width of a chart, and height for its panels: with one or two of them, and with more."""

LEFT, RIGHT, TITLE, TOP, BOTTOM = 72, 24, 50, 16, 56
"""[px] Round the panel: the second of top where it has no title."""

KEY, ROW = 20, 20
"""[px] Height of a line of the legend, and of a row of the sheet."""

LETTER, SIGN, SAMPLE = 6.2, 15, 50
"""[px] Width of a letter and height of a line of a label; room for the sample in a legend."""

FIRST = 4
"""First row of figures; over them chart, panel, series, and axis with unit."""

TITLED = 110
"""Characters of a title at most."""

DEFAULT = 8.43
"""Characters of a column that is left as it is, 64 px."""

MARKERS = {"o": "circle", "s": "square", "D": "diamond", "x": "x", "+": "plus"}

Number = float | None
Range = tuple[float, float, float]
"""First and last figure of an axis, and the step between its figures."""


def write_charts(
    book: Any, add: Callable[[str], Any], paragraph: Callable[..., None], charts: Mapping[str, Chart]
) -> None:
    """One sheet for each chart, and one for the figures of all.

    add : makes a sheet;  paragraph : writes words over columns;  charts : by the name of their sheet
    """
    if not charts:
        return
    sheets = {name: add(name) for name in charts}
    figures = Figures(book, add(DATA))
    for name, chart in charts.items():
        sheet, row = sheets[name], 0
        sheet.fit_to_pages(1, 1)
        width, height = LANDSCAPE if len(chart.panels) < 3 else PORTRAIT
        if len(chart.panels) > 2:
            sheet.set_portrait()
        share = height / sum(panel.height for panel in chart.panels)
        for number, panel in enumerate(chart.panels):
            drawn, tall = figures.chart(chart, panel, width, int(share * panel.height), titled=number == 0)
            sheet.insert_chart(row, 0, drawn, {"description": clean(chart.told)[:2000]})
            row += -(-tall // ROW) + 1
        if chart.note:
            paragraph(sheet, row, chart.note, [DEFAULT] * (width // 64), font_color=FAINT)


class Figures:
    """The sheet of figures, filled column by column."""

    def __init__(self, book: Any, sheet: Any) -> None:
        self._book, self._sheet, self._column = book, sheet, 0
        self._head = book.add_format(
            {"text_wrap": True, "valign": "top", "font_color": FAINT, "align": "right"}
        )
        self._axis = book.add_format({"text_wrap": True, "bold": True, "align": "right", "bottom": 1})
        self._plain = book.add_format({"font_color": INK})
        sheet.freeze_panes(FIRST, 0)
        sheet.repeat_rows(0, FIRST - 1)
        sheet.set_print_scale(60)
        for row in range(FIRST):
            sheet.set_row(row, 46)

    def chart(self, chart: Chart, panel: Panel, width: int, height: int, *, titled: bool) -> tuple[Any, int]:
        """One panel as a chart, and the height [px] it takes with what is round it."""
        drawn = self._book.add_chart({"type": "scatter", "subtype": "straight_with_markers"})
        across = _range(x for part in chart.panels for series in part.series for x in series.x)
        up = _range(y for series in panel.series for y in (*series.y, *series.low))
        places = Places(across, up, width - LEFT - RIGHT, height)
        for series in panel.series:
            if series.mark == Mark.POINTS:
                places.keep_free(series)
        start, unlisted, count = self._column, [], 0
        for series in panel.series:
            for line, listed in self._lines(chart, panel, series, up, places):
                drawn.add_series(line)
                if not listed:
                    unlisted.append(count)
                count += 1
        name = {"size": 12, "color": INK}
        drawn.set_title({"name": [DATA, 0, start], "name_font": name} if titled else {"none": True})
        drawn.set_x_axis({"name": [DATA, FIRST - 1, start], **_axis(across)})
        named = {"name": [DATA, FIRST - 1, start + 1]} if panel.y.title else {"visible": False}
        drawn.set_y_axis(_axis(up) | named)
        drawn.set_legend({"position": "bottom", "font": {"size": 9, "color": INK}, "delete_series": unlisted})
        drawn.show_blanks_as("gap")
        entries = [LETTER * len(_cut(one.label, LONGEST)) + SAMPLE for one in panel.series if one.label]
        abreast = max(int(width / max(entries, default=1.0)), 1)
        top = TITLE if titled else TOP
        tall = top + height + BOTTOM + KEY * -(-len(entries) // abreast)
        layout = {"x": LEFT / width, "y": top / tall}
        layout |= {"width": 1 - (LEFT + RIGHT) / width, "height": height / tall}
        drawn.set_plotarea({"layout": layout})
        drawn.set_size({"width": width, "height": tall})
        return drawn, tall

    def _lines(
        self, chart: Chart, panel: Panel, series: Series, up: Range, places: Places
    ) -> list[tuple[dict[str, object], bool]]:
        """The figures of one series into cells, what refers to them, and whether the legend lists it.

        Two lines for an area; its label stands at its beginning where there is room.
        """
        x, y, labels = list(series.x), list(series.y), list(series.labels)
        if series.mark == Mark.UPRIGHT:
            x = [value for one in series.x for value in (one, one, None)]
            y = [up[0], up[1], None] * len(series.x)
            labels = [text for label in labels for text in ("", label, "")]
        columns: list[tuple[str, Sequence[Number | str]]] = [(_titled(chart.x), x), (_titled(panel.y), y)]
        if series.mark == Mark.AREA:
            columns.append((f"{_titled(panel.y)} (lower edge)", series.low))
        if any(labels):
            columns.append(("label", labels))
        first, last = self._column, FIRST + max(len(x), 1) - 1
        for head, values in columns:
            self._write((chart.title, panel.y.title, series.label, head), values)
        self._column += 1
        area = series.mark == Mark.AREA
        texts = [series.label, *[""] * len(x)][: len(x)] if area else labels or [""] * len(x)
        shown = _labels(places, x, y, texts, beside=not area)
        name = {"name": [DATA, 2, first]} if series.label else {}
        common = {**_look(series.mark, STYLES[series.role]), **name}
        common["categories"] = [DATA, FIRST, first, last, first]
        upper = common | {"values": [DATA, FIRST, first + 1, last, first + 1]} | shown
        lower = common | {"values": [DATA, FIRST, first + 2, last, first + 2]}
        return [(upper, bool(series.label) and not (area and shown)), *([(lower, False)] if area else [])]

    def _write(self, heads: Sequence[str], values: Sequence[Number | str]) -> None:
        """One column: what it belongs to, and its figures."""
        sheet, column = self._sheet, self._column
        sheet.set_column(column, column, 16)
        for row, text in enumerate(heads):
            sheet.write_string(
                row,
                column,
                _cut(text, LONGEST if row == 2 else TITLED),
                self._head if row < FIRST - 1 else self._axis,
            )
        for row, value in enumerate(values, FIRST):
            if isinstance(value, str):
                sheet.write_string(row, column, clean(value), self._plain)
            elif value is not None:
                sheet.write_number(row, column, value, self._plain)
        self._column += 1


def _titled(axis: Axis) -> str:
    return f"{axis.title}, {axis.unit}" if axis.unit else axis.title


def _range(values: Iterable[Number]) -> Range:
    """An axis that holds some figures, from 0 where that is near, in steps of 1, 2 or 5."""
    known = [value for value in values if value is not None]
    low, high = min(known, default=0.0), max(known, default=1.0)
    if 0 <= low < 0.35 * high:
        low = 0.0
    room = (high - low) or abs(high) or 1.0
    step = 10.0 ** math.floor(math.log10(room / 5))
    step *= next(times for times in (1, 2, 5, 10) if room <= 6 * times * step)
    first = low if low == 0 else low - 0.02 * room
    return (
        round(math.floor(first / step) * step, 9),
        round(math.ceil((high + 0.02 * room) / step) * step, 9),
        step,
    )


def _axis(span: Range) -> dict[str, object]:
    """How an axis looks; the other one crosses it at its beginning."""
    return {
        "min": span[0],
        "max": span[1],
        "major_unit": span[2],
        "crossing": "min",
        "label_position": "low",
        "name_font": {"size": 10, "bold": False, "color": INK},
        "num_font": {"size": 9, "color": INK},
        "line": {"color": FAINT},
        "major_gridlines": {"visible": True, "line": {"color": GRID}},
    }


def _look(mark: Mark, style: Style) -> dict[str, object]:
    """Line and marker of a series."""
    if mark == Mark.POINTS:
        shape = MARKERS[style.marker] if style.filled or style.marker != "o" else "triangle"
        colour = {"color": style.colour}
        return {
            "line": {"none": True},
            "marker": {"type": shape, "size": 8, "border": colour, "fill": colour},
        }
    width = 1.0 if mark == Mark.AREA else style.width
    line = {"color": style.colour, "width": width, "dash_type": _dash(style.dashes)}
    return {"line": line, "marker": {"type": "none"}}


def _dash(dashes: tuple[float, ...]) -> str:
    """The nearest dashes that workbooks know."""
    if not dashes:
        return "solid"
    if len(dashes) > 2:
        return "long_dash_dot"
    return "dash" if dashes[0] > 3 else "square_dot" if dashes[0] > 1.2 else "round_dot"


def _cut(text: str, most: int) -> str:
    """Words on one line, cut where they are longer."""
    words = clean(text)
    return words if len(words) <= most else f"{words[: most - 1]}…"


def _labels(
    places: Places, x: Sequence[Number], y: Sequence[Number], labels: Sequence[str], *, beside: bool
) -> dict[str, object]:
    """Labels of points where there is room for them, nothing where there is for none.

    A blank follows each mark of exclamation, or a label could be taken for the name of a cell.
    """
    custom: list[dict[str, object]] = []
    for across, up, label in zip(x, y, labels, strict=True):
        text = _cut(label, LONGEST).replace("!", "! ")
        known = text and across is not None and up is not None
        spot = places.find(across or 0.0, up or 0.0, len(text), beside=beside) if known else ""
        custom.append({"value": text, "position": spot} if spot else {"delete": True})
    if not any("value" in label for label in custom):
        return {}
    return {"data_labels": {"value": True, "custom": custom, "font": {"size": 9, "color": INK}}}


class Places:
    """Where the labels of one panel stand without hiding one another, in pixels."""

    def __init__(self, across: Range, up: Range, width: int, height: int) -> None:
        self._across, self._up, self._width, self._height = across, up, width, height
        self._taken: list[tuple[float, float, float, float]] = []

    def _at(self, x: float, y: float) -> tuple[float, float]:
        (left, right, _), (low, high, _) = self._across, self._up
        return (x - left) / (right - left) * self._width, (y - low) / (high - low) * self._height

    def keep_free(self, series: Series) -> None:
        """Let no label hide the points of a series."""
        for x, y in zip(series.x, series.y, strict=True):
            if x is not None and y is not None:
                across, up = self._at(x, y)
                self._taken.append((across - 4, up - 4, across + 4, up + 4))

    def find(self, x: float, y: float, letters: int, *, beside: bool) -> str:
        """On which side of its point a label goes, `beside` it too; "" where none is free."""
        across, up = self._at(x, y)
        wide, half = LETTER * letters, SIGN / 2
        sides = [("above", across - wide / 2, up + 6), ("below", across - wide / 2, up - 6 - SIGN)]
        if beside:
            sides[1:1] = [("right", across + 6, up - half), ("left", across - 6 - wide, up - half)]
        for side, left, low in sides:
            box = (left, low, left + wide, low + SIGN)
            inside = (
                left >= -4
                and box[2] <= self._width + RIGHT
                and low >= -half
                and box[3] <= self._height + half
            )
            free = all(
                box[2] <= other[0] or other[2] <= box[0] or box[3] <= other[1] or other[3] <= box[1]
                for other in self._taken
            )
            if inside and free:
                self._taken.append(box)
                return side
        return ""
