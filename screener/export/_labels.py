"""Labels beside what they name, where they hide the least: each place is tried, the clearest is taken."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Iterable, Iterator, Sequence
from functools import partial
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from screener.export.clean import clean
from screener.view.blocks import Mark, Series

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Box = tuple[float, float, float, float]
"""Left, bottom, right, top in dots of the figure."""

Place = tuple[float, float, float, float]
"""Where a label may go: the point it belongs to, and the lower left corner of its text."""

DISTANCES = (6.0, 13.0, 24.0, 38.0, 54.0)
"""[pt] From a point to its label."""

PULL = 8.0
"""[pt] Beyond which a thin line leads from the label to its point."""

SPOTS = (1.0, 0.9, 0.75, 0.6, 0.45, 0.3, 0.15, 0.0)
"""Shares of a line at which its label may stand, its end first."""


class Labels:
    """Places labels on one figure."""

    def __init__(self, figure: Figure, longest: int) -> None:
        from matplotlib.backends.backend_agg import FigureCanvasAgg

        self._figure, self._longest = figure, longest
        self._renderer = FigureCanvasAgg(figure).get_renderer()  # type: ignore[no-untyped-call]
        self._dot = figure.dpi / 72  # dots of a point
        self._placed: list[Box] = []

    def begin(self, axes: Axes, series: Sequence[Series]) -> None:
        """Take up a panel: what is drawn in it is in the way of labels."""
        import numpy as np

        self._axes = axes
        self._line: dict[int, Any] = {}
        left, bottom, right, top = axes.get_window_extent(self._renderer).extents
        self._panel: Box = (left, bottom, right, top)
        lines, points = [np.empty((0, 2))], [np.empty((0, 2))]
        for item in series:
            if item.mark == Mark.POINTS:
                points.append(self._dots(item.x, item.y))
            elif item.mark == Mark.LINE:
                self._line[id(item)] = _close(self._dots(item.x, item.y), 3 * self._dot)
                lines.append(self._line[id(item)])
            elif item.mark == Mark.UPRIGHT:
                ends = axes.get_ylim()
                lines += [_close(self._dots([x, x], ends), 3 * self._dot) for x in item.x]
        self._lines, self._points = np.concatenate(lines), np.concatenate(points)

    def place(self, series: Series, colour: str) -> None:
        """Put the labels of one series."""
        if series.mark == Mark.POINTS:
            for x, y, label in zip(series.x, series.y, series.labels, strict=False):
                if label and x is not None and y is not None:
                    self._put(label, "#1c1f24", 7.5, partial(self._round, (x, y)))
        elif series.mark == Mark.UPRIGHT:
            names = series.labels or [series.label] * len(series.x)
            for x, label in zip(series.x, names, strict=True):
                if label and x is not None:
                    self._put(label, colour, 7.5, partial(self._upright, x))
        elif series.label:
            spots = self._middle if series.mark == Mark.AREA else self._along
            others = [dots for item, dots in self._line.items() if item != id(series)]
            self._put(series.label, colour, 8, partial(spots, series), others)

    def _dots(self, x: Sequence[float | None], y: Sequence[float | None]) -> Any:
        """Points in dots, (n, 2); NaN where there is none."""
        import numpy as np

        pairs = np.array([[np.nan if v is None else v for v in values] for values in (x, y)], np.float64).T
        return self._axes.transData.transform(pairs.reshape(-1, 2))

    def _put(
        self,
        label: str,
        colour: str,
        size: float,
        places: Callable[[float, float], Iterable[Place]],
        others: Sequence[Any] = (),
    ) -> None:
        """Put one label where it hides the least, and where it is clear which line it belongs to.

        others : the lines that it does not belong to
        """
        text = "\n".join(textwrap.wrap(clean(label), self._longest, max_lines=3, placeholder=" …"))
        artist = self._figure.text(
            0,
            0,
            text,
            fontsize=size,
            color=colour,
            parse_math=False,
            va="bottom",
            ha="left",
            zorder=5,
            bbox={"facecolor": "white", "alpha": 0.72, "edgecolor": "none", "pad": 0.6},
        )
        extent = artist.get_window_extent(self._renderer)
        width, height = extent.width, extent.height

        def cost(place: Place) -> float:
            x, y, left, bottom = place
            box = (left, bottom, left + width, bottom + height)
            near = sum(
                3 * bool(_inside(dots, (x, y, x, y), 8 * self._dot).any())
                + bool(_inside(dots, box, 5 * self._dot).any())
                for dots in others
            )
            return self._cost(box) + self._lead_cost(x, y, box) + 50.0 * near

        best = min(
            ((cost(place) + rank, rank, place) for rank, place in enumerate(places(width, height))),
            default=None,
        )
        if best is None:
            artist.remove()
            return
        x, y, left, bottom = best[2]
        self._placed.append((left, bottom, left + width, bottom + height))
        wide, tall = self._figure.bbox.width, self._figure.bbox.height
        artist.set_position((left / wide, bottom / tall))
        self._lead(x, y, self._placed[-1], colour)

    def _lead(self, x: float, y: float, box: Box, colour: str) -> None:
        """A thin line from a label to its point, where that is far."""
        from matplotlib.lines import Line2D

        if not self._far(x, y, box):
            return
        to_x, to_y = _nearest(x, y, box)
        wide, tall = self._figure.bbox.width, self._figure.bbox.height
        ends = [x / wide, to_x / wide], [y / tall, to_y / tall]
        self._figure.add_artist(Line2D(*ends, color=colour, linewidth=0.5, zorder=4.5))

    def _far(self, x: float, y: float, box: Box) -> bool:
        to_x, to_y = _nearest(x, y, box)
        return bool(((to_x - x) ** 2 + (to_y - y) ** 2) ** 0.5 > PULL * self._dot)

    def _lead_cost(self, x: float, y: float, box: Box) -> float:
        """How much a line from a label to its point would cross."""
        import numpy as np

        if not self._far(x, y, box):
            return 0.0
        way = np.linspace((x, y), _nearest(x, y, box), 12)[2:]
        crossed = sum(_inside(way, other, 0).any() for other in self._placed) * 300.0
        gaps = np.abs(way[:, None] - self._points).max(axis=2, initial=0)
        gaps = gaps[:, np.abs(self._points - (x, y)).max(axis=1, initial=0) > self._dot]
        return float(crossed + 60.0 * (gaps < 3 * self._dot).any(axis=0).sum())

    def _cost(self, box: Box) -> float:
        """How much a label would hide here, and how far it would stand out of the panel."""
        left, bottom, right, top = box
        hidden = sum(_inside(self._points, box, 4 * self._dot)) * 40.0
        hidden += sum(_inside(self._lines, box, 0)) * 8.0
        for other in self._placed:
            across = min(right, other[2]) - max(left, other[0])
            up = min(top, other[3]) - max(bottom, other[1])
            if across > -2 * self._dot and up > 0:
                hidden += 400.0 + across * up
        low, floor, high, roof = self._panel
        out = max(low - left, 0) + max(right - high - 12 * self._dot, 0)
        out += max(floor - bottom, 0) + max(top - roof - 4 * self._dot, 0)
        return float(hidden + 30.0 * out)

    def _round(self, at: tuple[float, float], width: float, height: float) -> Iterator[Place]:
        """Around a point, farther and farther off."""
        x, y = self._dots([at[0]], [at[1]])[0]
        for distance in DISTANCES:
            far = distance * self._dot
            near = 0.7 * far
            for left, bottom in (
                (x + far, y - height / 2),
                (x + near, y + near - 0.3 * height),
                (x - near - width, y + near - 0.3 * height),
                (x + near, y - near - 0.7 * height),
                (x - near - width, y - near - 0.7 * height),
                (x - far - width, y - height / 2),
                (x - width / 2, y + far),
                (x - width / 2, y - far - height),
            ):
                yield x, y, left, bottom

    def _along(self, series: Series, width: float, height: float) -> Iterator[Place]:
        """Beside a line: at its end, then anywhere along it."""
        import numpy as np

        dots = self._dots(series.x, series.y)
        dots = dots[np.isfinite(dots).all(axis=1)]
        dots = dots[np.argsort(dots[:, 0], kind="stable")]
        gap = 4 * self._dot
        for spot in SPOTS if len(dots) else ():
            x, y = dots[round(spot * (len(dots) - 1))]
            ends = spot in (0.0, 1.0)
            sides = [
                (x + gap, y - height / 2),
                (x + gap, y),
                (x - width - gap, y + gap / 2),
                (x - width / 2, y + gap),
                (x - width / 2, y - height - gap),
                (x - width - gap, y - height - gap / 2),
            ]
            for left, bottom in sides if ends else sides[1:]:
                yield x, y, left, bottom

    def _upright(self, x: float, width: float, height: float) -> Iterator[Place]:
        """Beside an upright, from the top downwards."""
        at = self._dots([x], [self._axes.get_ylim()[1]])[0, 0]
        top, gap = self._panel[3], 3 * self._dot
        for step in range(8):
            bottom = top - height * (1 + 1.15 * step)
            for left in (at + gap, at - gap - width):
                yield at, bottom, left, bottom

    def _middle(self, series: Series, width: float, height: float) -> Iterator[Place]:
        """Inside an area, where it is thickest first; else beside its end."""
        import numpy as np

        high, low = self._dots(series.x, series.y), self._dots(series.x, series.low)
        known = np.isfinite(high).all(axis=1) & np.isfinite(low).all(axis=1)
        high, low = high[known], low[known]
        if not len(high):
            return
        x = np.linspace(high[0, 0], high[-1, 0], 25)[1:-1]
        top, floor = np.interp(x, high[:, 0], high[:, 1]), np.interp(x, low[:, 0], low[:, 1])
        thick = np.minimum(top - floor, 1.5 * height)
        for place in np.lexsort((np.abs(x - x.mean()), -thick.round())):
            for share in (0.5, 0.15, 0.8, 0.02):
                y = floor[place] + share * (top[place] - floor[place] - height)
                yield x[place], y, x[place] - width / 2, y
        yield high[-1, 0], high[-1, 1], high[-1, 0] + 4 * self._dot, (high[-1, 1] + low[-1, 1] - height) / 2


def _nearest(x: float, y: float, box: Box) -> tuple[float, float]:
    """The place of a box that is nearest to a point."""
    return min(max(x, box[0]), box[2]), min(max(y, box[1]), box[3])


def _inside(dots: Any, box: Box, more: float) -> Any:
    left, bottom, right, top = box
    across = (dots[:, 0] > left - more) & (dots[:, 0] < right + more)
    return across & (dots[:, 1] > bottom - more) & (dots[:, 1] < top + more)


def _close(dots: Any, step: float) -> Any:
    """The same line as dots close to each other."""
    import numpy as np

    parts = [np.empty((0, 2))]
    for start, end in pairwise(dots):
        length = float(np.hypot(*(end - start)))
        if np.isfinite(length):
            parts.append(np.linspace(start, end, int(length / step) + 2))
    return np.concatenate(parts)
