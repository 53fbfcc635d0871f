"""Charts as files: what is written in them, the same bytes each time, and names that act on nothing."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Sequence
from typing import Any
from xml.etree import ElementTree

import pytest

from screener.errors import UsageError
from screener.export import _draw, formats, pdf, png, svg
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Screen, Series, Table

HOSTILE = (
    "=1+1",
    "<script>alert(1)</script>",
    "[/red]",
    "$x_1$ \\frac{1}{2}",
    "two\nlines",
    "\x1b[2Jred\x07",
    "long" * 75,
    "揚水ポンプ",
    "& ]]> -->",
)
X, NONE = [0.0, 50.0, 100.0], None


def chart(name: str = "A", key: str = "one") -> Chart:
    """One of every mark, everything called by one name."""
    line = Series(f"{name} line", Role.NEW, Mark.LINE, X, [40.0, 38.0, NONE])
    area = Series(f"{name} area", Role.SYSTEM, Mark.AREA, X, [20.0, 25.0, 40.0], [10.0, 15.0, 30.0])
    upright = Series(f"{name} upright", Role.LIMIT, Mark.UPRIGHT, [30.0])
    points = Series(
        f"{name} points", Role.DUTY, Mark.POINTS, [20.0, 80.0], [39.0, 36.0], labels=[f"{name} first", ""]
    )
    return Chart(
        key,
        f"{name} title",
        Axis(f"{name} flow", "m3/h"),
        [
            Panel(Axis(f"{name} head", "m"), [line, area, upright, points], 3.0),
            Panel(Axis("", ""), [replaced(line, f"{name} beneath")]),
        ],
        note=f"{name} note",
        told=f"{name} told.",
    )


def replaced(series: Series, label: str) -> Series:
    return Series(label, Role.INSTALLED, series.mark, series.x, series.y)


def screen(charts: Sequence[Chart]) -> Screen:
    return Screen([], Table([], []), {}, charts=lambda: charts)


def texts(content: bytes) -> list[str]:
    """What is written in a svg, lines of one label joined."""
    root = ElementTree.fromstring(content)
    assert {element.tag.split("}")[1] for element in root.iter()}.isdisjoint(
        {"script", "image", "foreignObject"}
    )
    return ["".join(element.itertext()) for element in root.iter("{http://www.w3.org/2000/svg}text")]


def test_a_svg_says_as_text_what_the_charts_say() -> None:
    content = svg.render(screen([chart("A"), chart("B", "two")]))
    written = texts(content)
    for name in "AB":
        for words in ("line", "area", "upright", "points", "first", "title", "note", "beneath"):
            assert written.count(f"{name} {words}") == 1, words
        assert f"{name} flow, m3/h" in written
        assert f"{name} head, m" in written
    assert b"A title. A told. B title. B told." in content
    assert b"'DejaVu Sans', sans-serif" in content


def test_lines_and_marks_are_all_drawn() -> None:
    with _draw.settings():
        figure = _draw.draw([chart()])
    above, beneath = figure.axes
    assert len(above.lines) == 2 + 1 + 1 + 1  # edges of the area, upright, line, points
    assert len(above.collections) == 1
    assert len(beneath.lines) == 1
    assert above.get_xlim()[0] == 0
    assert above.get_xlim()[1] > 100
    assert above.get_ylim()[0] <= 10
    assert above.get_ylim()[1] >= 40


def test_charts_stand_one_under_another_at_the_width_of_a4() -> None:
    with _draw.settings():
        one, two = _draw.draw([chart()]), _draw.draw([chart(), chart()])
    assert one.get_figwidth() == two.get_figwidth() == 8.27
    assert two.get_figheight() == pytest.approx(2 * one.get_figheight())
    assert one.get_figheight() < 11.69


def test_labels_keep_clear_of_each_other_and_of_the_edge() -> None:
    lines = [
        Series(f"curve {number}", Role.INSTALLED, Mark.LINE, X, [40.0 - number / 4, 38.0, 36.0 - number / 50])
        for number in range(8)
    ]
    near = [50.0 + number / 4 for number in range(6)]
    points = Series("", Role.DUTY, Mark.POINTS, near, near, labels=[f"curve point {n}" for n in range(6)])
    close = Chart("close", "", Axis("flow", "m3/h"), [Panel(Axis("head", "m"), [*lines, points])])
    with _draw.settings():
        figure = _draw.draw([close])
        figure.canvas.draw()
        boxes = [text.get_window_extent() for text in figure.texts if text.get_text().startswith("curve")]
    assert len(boxes) == 14
    for number, box in enumerate(boxes):
        assert figure.bbox.x0 <= box.x0
        assert box.x1 <= figure.bbox.x1
        assert not any(box.overlaps(other) for other in boxes[number + 1 :])


def test_more_lines_than_a_few_are_thinner() -> None:
    def width(number: int) -> float:
        lines = [Series("", Role.NEW, Mark.LINE, X, [1.0, 2.0, float(n)]) for n in range(number)]
        with _draw.settings():
            figure = _draw.draw([Chart("k", "", Axis(""), [Panel(Axis(""), lines)])])
        return float(figure.axes[0].lines[0].get_linewidth())

    assert width(9) < width(8)


def test_a_gap_stays_a_gap() -> None:
    series = Series("", Role.NEW, Mark.LINE, [0.0, 1.0, NONE, 2.0, 3.0], [1.0, 1.0, NONE, 2.0, 2.0])
    with _draw.settings():
        figure = _draw.draw([Chart("gap", "", Axis("x"), [Panel(Axis("y"), [series])])])
    y = figure.axes[0].lines[0].get_ydata()
    assert [value != value for value in y] == [False, False, True, False, False]


@pytest.mark.parametrize("name", HOSTILE)
def test_a_name_acts_on_nothing(name: str) -> None:
    charts = [chart(name)]
    for module in (svg, pdf):
        assert len(module.render(screen(charts))) > 5000
    written = texts(svg.render(screen(charts)))
    assert all(text.isprintable() for text in written)
    shown = [text for text in written if text.endswith("first")] or [text for text in written if "…" in text]
    assert shown
    start = "".join(c for c in name if c.isprintable() and c not in " ")[:10]
    assert sum(text.replace(" ", "").replace("�", "").startswith(start) for text in written) >= 10
    assert max(map(len, written)) < 200


@pytest.mark.parametrize("module", [svg, pdf, png])
def test_the_same_bytes_twice(module: Any) -> None:
    again = (
        "import sys; sys.path.insert(0, sys.argv[1]); import test_charts as t;"
        f"sys.stdout.buffer.write(t.{module.NAME}.render(t.screen([t.chart('A'), t.chart('B', 'two')])))"
    )
    done = subprocess.run(
        [sys.executable, "-c", again, os.path.dirname(__file__)],
        capture_output=True,
        env=os.environ | {"PYTHONHASHSEED": "11", "TZ": "Pacific/Chatham"},
        check=True,
    )
    assert done.stdout == module.render(screen([chart("A"), chart("B", "two")]))


def test_one_page_of_the_pdf_a_chart() -> None:
    content = pdf.render(screen([chart("A"), chart("B"), chart("C")]))
    assert content.startswith(b"%PDF-")
    assert content.count(b"/Type /Page ") == 3 or b"/Count 3" in content
    assert b"CreationDate" not in content


def test_no_chart_is_said() -> None:
    with pytest.raises(UsageError, match="this command has no chart"):
        svg.render(Screen([], Table([], []), {}))
    with pytest.raises(UsageError, match="nothing that a chart could show"):
        svg.render(screen([]))


@pytest.mark.parametrize("module", [svg, pdf, png])
def test_a_missing_extra_is_named(module: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "matplotlib", None)
    with pytest.raises(
        UsageError, match=r"needs the extra 'report': pip install 'pump-header-screener\[report\]'"
    ):
        module.render(screen([chart()]))


def test_looking_for_formats_loads_no_plotting() -> None:
    code = "import sys; from screener.export import formats; formats(); print('matplotlib' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"
    assert {"svg", "pdf", "png"} <= {module.NAME for module in formats()}


def test_other_formats_make_no_chart() -> None:
    def fail() -> Sequence[Chart]:
        raise AssertionError("a chart was made")

    shown = Screen([], Table([], []), {}, charts=fail)
    for module in formats():
        if module.NAME in ("json", "csv", "markdown"):
            module.render(shown)
