"""Charts as a matplotlib figure: what svg, pdf and png share. Positions are worked out in inches."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from screener.errors import UsageError
from screener.export import missing
from screener.export._labels import Labels
from screener.export.clean import clean
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Screen, Series, no_charts

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

NEEDS = "matplotlib"

WIDTH = 8.27
"""[in] Of A4."""

LEFT, RIGHT, TOP, BOTTOM, GAP = 0.75, 0.35, 0.62, 0.55, 0.14
LINE = 0.155
"""[in] Height of a line of a note or title."""

FIRST, FURTHER = 4.6, 1.45
"""[in] Height of the panels of a chart: with one of them, and for each one more."""

NOTE_WIDTH, TITLE_WIDTH, LONGEST = 142, 88, 36
"""Characters of a line of a note, of a title, and of a label, which may have three lines."""

FEW = 8
"""Lines of a panel up to which none is thinned."""

MANY = 30
"""Marks of a series from which on they are smaller."""

INK, FAINT, GRID = "#1c1f24", "#6d7278", "#e3e5e8"


@dataclass(frozen=True, slots=True)
class Style:
    """How a role is drawn: colours that the colour-blind tell apart, and a line that a grey print tells.

    dashes : on and off in line widths, empty for a full line;  filled : whether its mark is
    """

    colour: str
    width: float
    dashes: tuple[float, ...] = ()
    marker: str = "o"
    filled: bool = True
    size: float = 5.5
    shade: float = 0.16


STYLES: Mapping[Role, Style] = {
    Role.NEW: Style("#c0410e", 2.4),
    Role.NEW_ASIDE: Style("#b8663a", 0.9, filled=False),
    Role.INSTALLED: Style("#174a7c", 1.8, (5, 2), marker="s"),
    Role.RESTORED: Style("#6f9bc4", 1.2, (2, 1.5), marker="s", filled=False),
    Role.COMBINED: Style("#2b2b2b", 1.6, (8, 2, 1.5, 2)),
    Role.SYSTEM: Style("#6b4f8f", 1.6, (1, 1.2)),
    Role.DUTY: Style("#111111", 1.0, (4, 2), size=5.0),
    Role.TRIP: Style("#111111", 1.0, (1, 2), marker="D", filled=False, size=6.5),
    Role.LIMIT: Style("#6d7278", 1.1, (1.5, 1.5), marker="x"),
    Role.BAND: Style("#6f7630", 1.0, (1, 3), marker="+"),
}


def charts_of(screen: Screen) -> Sequence[Chart]:
    """The charts of a screen. UsageError where it has none, or where matplotlib is not installed."""
    if needed := missing(NEEDS):
        raise UsageError(f"a chart {needed}")
    found = screen.charts()
    if screen.charts is no_charts:
        raise UsageError("this command has no chart")
    if not found:
        raise UsageError("this result has nothing that a chart could show")
    return found


def told(charts: Sequence[Chart]) -> str:
    """What charts show, in words."""
    return clean(" ".join(f"{chart.title}. {chart.told}" for chart in charts))


@contextmanager
def settings() -> Iterator[None]:
    """Settings for the same bytes each time, with text as text."""
    import warnings

    from matplotlib import rc_context

    with (
        rc_context(
            {
                "svg.hashsalt": "screener",
                "svg.fonttype": "none",
                "pdf.fonttype": 42,
                "font.family": "sans-serif",
                "font.sans-serif": ["DejaVu Sans"],
                "font.size": 8.5,
                "axes.unicode_minus": True,
            }
        ),
        warnings.catch_warnings(),
    ):
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        yield


def draw(charts: Sequence[Chart]) -> Figure:
    """Charts one under another, each at the width of A4. To be called, and saved, within `settings`."""
    from matplotlib.figure import Figure

    heights = [_height(chart) for chart in charts]
    figure = Figure(figsize=(WIDTH, sum(heights)), dpi=200, facecolor="white")
    top = sum(heights)
    for chart, height in zip(charts, heights, strict=True):
        _chart(figure, chart, top)
        top -= height
    return figure


def _titles(chart: Chart) -> list[str]:
    return _wrapped(chart.title, TITLE_WIDTH, 2)


def _notes(chart: Chart) -> list[str]:
    return _wrapped(chart.note, NOTE_WIDTH, 12)


def _wrapped(text: str, width: int, lines: int) -> list[str]:
    """Text in lines, cut where it is longer."""
    return textwrap.wrap(clean(text), width, max_lines=lines, placeholder=" …")


def _short(text: str, width: int) -> str:
    """Text on one line, cut where it is longer."""
    return "".join(_wrapped(text, width, 1))


def _panels_height(chart: Chart) -> float:
    return FIRST + FURTHER * (len(chart.panels) - 1)


def _height(chart: Chart) -> float:
    extra = LINE * (len(_notes(chart)) + 1.4 * (len(_titles(chart)) - 1))
    return TOP + _panels_height(chart) + BOTTOM + 0.15 + extra


def _chart(figure: Figure, chart: Chart, top: float) -> None:
    """One chart, from `top` [in] downwards."""
    height = figure.get_figheight()

    def write(text: str, x: float, y: float, **kinds: Any) -> None:
        figure.text(x / WIDTH, y / height, text, parse_math=False, va="top", color=INK, **kinds)

    y = top - 0.14
    for text in _titles(chart):
        write(text, LEFT - 0.55, y, fontsize=11, fontweight="bold")
        y -= 1.4 * LINE
    key = y - 0.03
    y = top - TOP - 1.4 * LINE * (len(_titles(chart)) - 1)
    room = _panels_height(chart) - GAP * (len(chart.panels) - 1)
    share = room / sum(panel.height for panel in chart.panels)
    low, high = _x_range(chart)
    labels = Labels(figure, LONGEST)
    for number, panel in enumerate(chart.panels):
        tall = share * panel.height
        y -= tall
        axes = figure.add_axes((LEFT / WIDTH, y / height, (WIDTH - LEFT - RIGHT) / WIDTH, tall / height))
        _panel(axes, panel, chart.x, low, high, last=number == len(chart.panels) - 1)
        _label(labels, axes, panel)
        y -= GAP
    _key(figure, chart, key)
    y = y + GAP - BOTTOM
    for text in _notes(chart):
        write(text, LEFT - 0.55, y, fontsize=7.5)
        y -= LINE


def _x_range(chart: Chart) -> tuple[float, float]:
    """From 0 where that is near, with room at the right for labels."""
    values = [x for panel in chart.panels for series in panel.series for x in series.x if x is not None]
    low, high = min(values, default=0.0), max(values, default=1.0)
    if 0 <= low < 0.2 * high:
        low = 0.0
    room = (high - low) or abs(high) or 1.0
    return (low if low == 0 else low - 0.03 * room), high + 0.05 * room


def _y_range(panel: Panel) -> tuple[float, float]:
    values = [y for series in panel.series for y in (*series.y, *series.low) if y is not None]
    low, high = min(values, default=0.0), max(values, default=1.0)
    room = (high - low) or abs(high) or 1.0
    return (0.0 if 0 <= low < 0.2 * high else low - 0.06 * room), high + 0.08 * room


def _panel(axes: Axes, panel: Panel, x: Axis, low: float, high: float, *, last: bool) -> None:
    """One panel with its axes, without its labels."""
    axes.set_xlim(low, high)
    axes.set_ylim(*_y_range(panel))
    axes.grid(color=GRID, linewidth=0.6)
    axes.set_axisbelow(True)
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(FAINT)
    axes.tick_params(colors=INK, labelsize=8, length=3, color=FAINT, labelbottom=last)
    for which in ("xaxis", "yaxis"):
        formatter = getattr(axes, which).get_major_formatter()
        formatter.set_useOffset(False)
        formatter.set_scientific(False)
    if last:
        axes.set_xlabel(_axis(x), fontsize=8.5, color=INK, parse_math=False)
    if panel.y.title:
        axes.set_ylabel(_axis(panel.y), fontsize=8.5, color=INK, parse_math=False)
    else:  # rows, told apart by their labels
        axes.tick_params(axis="y", left=False, labelleft=False)
        axes.grid(visible=False, axis="y")
    thin = 0.6 if sum(series.mark == Mark.LINE for series in panel.series) > FEW else 1.0
    for series in panel.series:
        _series(axes, series, thin)


def _axis(axis: Axis) -> str:
    return _short(f"{axis.title}, {axis.unit}" if axis.unit else axis.title, TITLE_WIDTH)


def _series(axes: Axes, series: Series, thin: float) -> None:
    style = STYLES[series.role]
    x, y, low = (
        [float("nan") if v is None else v for v in values] for values in (series.x, series.y, series.low)
    )
    dashes: Any = (0, style.dashes) if style.dashes else "-"
    if series.mark == Mark.AREA:
        axes.fill_between(x, low, y, color=style.colour, alpha=style.shade, linewidth=0)
        for edge in (y, low):
            axes.plot(x, edge, color=style.colour, alpha=0.5, linewidth=0.6)
    elif series.mark == Mark.UPRIGHT:
        for place in x:
            axes.axvline(place, color=style.colour, linewidth=min(style.width, 1.2), linestyle=dashes)
    elif series.mark == Mark.POINTS:
        above = 4.2 if style.filled else 4  # so that a filled mark in an open one shows both
        axes.plot(x, y, linestyle="none", zorder=above, clip_on=False, **marks(style, len(x)))
    else:
        axes.plot(x, y, color=style.colour, linewidth=style.width * thin, linestyle=dashes, zorder=2.5)


def marks(style: Style, number: int = 1) -> dict[str, Any]:
    """How the marks of a role look, smaller where they are many."""
    return {
        "marker": style.marker,
        "markersize": style.size * (0.6 if number > MANY else 1),
        "markerfacecolor": style.colour if style.filled else "white",
        "markeredgecolor": style.colour,
        "markeredgewidth": 1.1,
    }


def _label(labels: Labels, axes: Axes, panel: Panel) -> None:
    """Labels of a panel: points first, as they have the least choice of place."""
    labels.begin(axes, panel.series)
    for mark in (Mark.UPRIGHT, Mark.POINTS, Mark.LINE, Mark.AREA):
        for series in panel.series:
            if series.mark == mark:
                labels.place(series, STYLES[series.role].colour)


def _key(figure: Figure, chart: Chart, y: float) -> None:
    """What each kind of mark stands for, in a row over the panels."""
    from matplotlib.lines import Line2D

    height = figure.get_figheight()
    kinds = {
        (series.role, series.label): STYLES[series.role]
        for panel in chart.panels
        for series in panel.series
        if series.mark == Mark.POINTS and series.label
    }
    x = LEFT
    for (_, label), style in kinds.items():
        text = _short(label, LONGEST)
        figure.add_artist(Line2D([x / WIDTH], [(y - 0.055) / height], linestyle="none", **marks(style)))
        figure.text(
            (x + 0.11) / WIDTH,
            (y - 0.055) / height,
            text,
            va="center",
            fontsize=8,
            color=INK,
            parse_math=False,
        )
        x += 0.38 + 0.062 * len(text)
