"""The html page: its structure, its charts, and that nothing in a name acts."""

from __future__ import annotations

import base64
import hashlib
import re
import sys
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from screener.errors import UsageError
from screener.export import html
from screener.view.blocks import (
    Axis,
    Block,
    Cell,
    Chart,
    Column,
    Heading,
    Lines,
    Mark,
    Pairs,
    Panel,
    Role,
    Screen,
    Series,
    Table,
    Tone,
)
from screener.view.part import Part

DATA = {
    "tool": {"name": "screener", "version": "9.9"},
    "date": "2031-05-02",
    "inputs": [{"file": "case.toml", "sha256": "ab" * 32}],
}
NAMES = ("=1+1", "<script>alert(1)</script>", "[/red]", "two\nlines", '"><img src=x>', "{{ 7*7 }}", "x" * 300)
VOID = {"meta", "link", "input", "img", "br"}

COLUMNS = [
    Column("rank", ""),
    Column("pump", "pump", left=True),
    Column("flow", "given", "m3/h"),
    Column("efficiency", "eff %", "%"),
    Column("level", "level", left=True, rank=9),
]
TABLE = Table(
    COLUMNS,
    [
        [Cell("1", 1.0), Cell("A", "A"), Cell("900", 900.25), Cell("81", 81.0), Cell("low", "low")],
        [Cell(""), Cell(""), Cell("past 950", None, Tone.BAD), Cell("-"), Cell("low", "low")],
        [Cell("2", 2.0), Cell("B", "B"), Cell("800", 800.5), Cell("pass", "pass", Tone.GOOD), Cell("")],
    ],
    ["given: by all pumps"],
)


class Page(HTMLParser):
    """Tags of a page with their attributes and the text right after each, checked for their nesting."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None], str]] = []
        self._open: list[str] = []
        self.feed(text)
        self.close()
        assert self._open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs), ""))
        if tag not in VOID:
            self._open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs), ""))

    def handle_endtag(self, tag: str) -> None:
        assert self._open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.tags:
            tag, attributes, before = self.tags[-1]
            self.tags[-1] = (tag, attributes, before + data)

    def of(self, tag: str) -> list[dict[str, str | None]]:
        """Attributes of every tag of one kind."""
        return [attributes for name, attributes, _ in self.tags if name == tag]

    def texts(self, *tags: str) -> list[str]:
        """Text of every tag of some kinds, up to the next tag, in the order of the page."""
        return [" ".join(text.split()) for name, _, text in self.tags if name in tags]


def _screen(*blocks: Block, charts: tuple[Chart, ...] = ()) -> Screen:
    return Screen([Heading("A header", "river water"), *blocks], TABLE, dict(DATA), charts=lambda: charts)


def _chart(key: str, name: str = "P-1") -> Chart:
    line = Series(name, Role.INSTALLED, Mark.LINE, [0.0, 100.0], [30.0, 20.0])
    panel = Panel(Axis("head", "m"), [line])
    return Chart(
        key, f"Curve of {name}", Axis("flow", "m3/h"), [panel], "Only measured points.", f"{name} falls."
    )


def test_landmarks_and_one_title() -> None:
    page = Page(html.render(_screen(Heading("TODAY", "at load"), TABLE, Heading("LATER"), TABLE)))
    for landmark in ("header", "nav", "main", "footer", "h1", "title"):
        assert len(page.of(landmark)) == 1, landmark
    assert page.of("html") == [{"lang": "en"}]
    assert page.texts("h1") == page.texts("title") == ["A header"]
    assert page.texts("h2") == ["Contents", "TODAY", "LATER"]
    targets = [f"#{attributes['id']}" for attributes in page.of("h2")[1:]]
    assert [attributes["href"] for attributes in page.of("a")[1:]] == targets


def test_where_it_came_from() -> None:
    text = html.render(_screen())
    assert "Date of the case: 2031-05-02. Made by screener 9.9." in text
    assert "case.toml" in text
    assert "ab" * 32 in text
    dateless = replace(_screen(), data=DATA | {"date": None})
    assert "The case states no date." in html.render(dateless)


def test_a_table_has_scoped_heads_a_caption_and_its_note() -> None:
    page = Page(html.render(_screen(Heading("TODAY"), TABLE)))
    assert page.texts("caption") == ["TODAY"]
    heads = [(a.get("scope"), a.get("data-key")) for a in page.of("th")]
    assert heads[:3] == [("col", "pump"), ("col", "flow"), ("col", "efficiency")]
    assert heads[3:] == [("row", None), ("row", None)]
    assert page.texts("th") == ["pump", "given", "eff %", "A", "B"]
    units = [text.strip() for _, a, text in page.tags if a.get("class") == "unit"]
    assert units == ["m3/h"]  # a title that says its unit does not say it twice
    assert "given: by all pumps" in page.texts("p")
    scrolled = [a for a in page.of("div") if a.get("class") == "scroll"]
    assert [(a["tabindex"], a["role"], a["aria-label"]) for a in scrolled] == [("0", "group", "TODAY")]


def test_rows_without_a_name_stay_with_the_row_above() -> None:
    text = html.render(_screen(TABLE))
    assert [body.count("<tr>") for body in text.split("<tbody>")[1:]] == [2, 1]


def test_rows_of_different_figures_are_not_sorted_and_set_back_names_go_with_the_row_above() -> None:
    columns = [Column("requirement", "", left=True), Column("offered 1", "A")]
    rows = [
        [Cell(f"{'  held' if n % 2 else 'flow'} {n}"), Cell("! 9", 9.0, Tone.WARNING)]
        for n in range(2 * html.LONG)
    ]
    text = html.render(_screen(Table(columns, rows)))
    assert Page(text).of("table") == [{}]
    assert [body.count("<tr>") for body in text.split("<tbody>")[1:]] == [2] * html.LONG
    assert "✗" not in text
    assert text.count(">! 9<") == text.count("with care: </span>") == 2 * html.LONG  # it has its mark already


def test_cells_hold_the_figure_behind_the_text_and_columns_of_rank_9_do_not_show() -> None:
    page = Page(html.render(_screen(TABLE)))
    assert [a["data-value"] for a in page.of("td") if "data-value" in a] == [
        "1.0",
        "900.25",
        "81.0",
        "2.0",
        "800.5",
    ]
    assert "low" not in page.texts("td")


def test_a_tone_is_marked_and_said_and_not_by_colour_alone() -> None:
    text = html.render(_screen(TABLE, Lines(["REJECTED: too low"], Tone.BAD)))
    assert re.search(r'class="num bad whole">.*✗</span><span class="unseen">bad: </span>\s*past 950', text)
    assert re.search(r'class="num good whole"><span class="mark" aria-hidden="true">✓</span>\s*pass<', text)
    assert re.search(r'<p class="bad"><span class="mark" aria-hidden="true">✗</span>\s*REJECTED', text)


def test_pairs_are_a_list_of_terms() -> None:
    page = Page(html.render(_screen(Pairs([("870 at 34 m", "the true duty"), ("not 379", "missing today")]))))
    assert page.texts("dt") == ["870 at 34 m", "not 379"]
    assert page.texts("dd") == ["the true duty", "missing today"]


def test_long_tables_can_be_sorted_and_short_ones_not() -> None:
    rows = [
        [Cell("1", 1.0), Cell(f"P{n}"), Cell("1", 1.0), Cell("2", 2.0), Cell("")] for n in range(html.LONG)
    ]
    page = Page(html.render(_screen(Table(COLUMNS, rows), Table(COLUMNS, rows[1:]))))
    assert [a.get("class") for a in page.of("table")] == ["long", None]


def test_a_report_is_two_deep_and_its_parts_hold_their_charts() -> None:
    blocks = [
        Part("The header", key="pump-1"),
        Heading("EVERY STATE"),
        TABLE,
        Part("Another", key="pump-10"),
        Part("Files read"),
    ]
    charts = (_chart("pump-10-curve"), _chart("pump-1-curve", "P-2"), _chart("loose", "P-3"))
    page = Page(html.render(_screen(*blocks, charts=charts)))
    assert page.texts("h2", "h3", "strong") == [
        "Contents",
        "The header",
        "Curve of P-2. Only measured points.",
        "EVERY STATE",
        "Another",
        "Curve of P-1. Only measured points.",
        "Files read",
        "CHARTS",
        "Curve of P-3. Only measured points.",
    ]
    assert len(page.of("h3")) == 1
    assert not [text for text in page.texts("p") if "sha256" in text]  # a report lists its files itself


def test_a_chart_is_a_figure_with_its_words() -> None:
    text = html.render(_screen(charts=(_chart("a"), _chart("b"))))
    page = Page(text)
    assert [a["aria-label"] for a in page.of("svg")] == ["Curve of P-1. P-1 falls."] * 2
    assert [a["role"] for a in page.of("svg")] == ["img", "img"]
    assert len(page.of("figure")) == len(page.of("figcaption")) == 2
    assert text.count("Only measured points.") == 2
    ids = [a["id"] for _, a, _ in page.tags if "id" in a]
    assert len(ids) == len(set(ids))
    used = re.findall(r'(?:url\(|xlink:href=")#([^")]+)', text)
    assert used
    assert set(used) <= set(ids)


def test_nothing_comes_from_outside_and_only_our_script_runs() -> None:
    text = html.render(_screen(TABLE, charts=(_chart("a"),)))
    page = Page(text)
    assert not re.search(r"https?:|@import|url\((?!#)", text)
    assert [a for tag, a, _ in page.tags if "src" in a or (tag == "link" and a["href"] != "data:,")] == []
    (policy,) = [a["content"] for a in page.of("meta") if a.get("http-equiv") == "Content-Security-Policy"]
    (script,) = re.findall(r"<script>(.*?)</script>", text, re.S)
    digest = base64.b64encode(hashlib.sha256(script.encode()).digest()).decode()
    assert policy is not None
    assert policy.startswith("default-src 'none'; ")
    assert f"script-src 'sha256-{digest}';" in policy


@pytest.mark.parametrize("name", NAMES)
def test_a_name_is_text_wherever_it_stands(name: str) -> None:
    columns = [Column(name, name, name, left=True), Column("b", "b")]
    screen = Screen(
        [
            Heading(name, name),
            Part(name, name),
            Heading(name, name),
            Lines([name], Tone.BAD),
            Pairs([(name, name)]),
            Table(columns, [[Cell(name, name, Tone.BAD), Cell(name, name)]], [name]),
        ],
        TABLE,
        DATA | {"date": name, "inputs": [{"file": name, "sha256": name}]},
        charts=lambda: [_chart("a", name)],
    )
    text = html.render(screen)
    page = Page(text)
    shown = name.replace("\n", " ")
    assert page.texts("h1") == page.texts("dt") == page.texts("dd") == page.texts("h3") == [shown]
    assert [a["data-key"] for a in page.of("th") if a.get("scope") == "col"] == [shown, "b"]
    assert page.of("img") == []
    assert len(page.of("script")) == 1
    assert [key for _, a, _ in page.tags for key in a if key.startswith("on")] == []
    assert all(character.isprintable() or character == "\n" for character in text)


def test_the_same_screen_gives_the_same_text() -> None:
    screen = _screen(Heading("TODAY"), TABLE, charts=(_chart("a"),))
    assert html.render(screen) == html.render(screen)


@pytest.mark.parametrize("package", ["jinja2", "matplotlib"])
def test_without_the_packages_of_the_extra_it_names_the_extra(
    package: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, package, None)
    with pytest.raises(UsageError, match=r"needs the extra 'report': pip install .*\[report\]"):
        html.render(_screen())
