"""A screen as one HTML page that needs nothing from outside: for filing, review and print."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

from screener.errors import UsageError
from screener.export import missing
from screener.export.clean import clean
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Screen, Table, Tone
from screener.view.part import Part

if TYPE_CHECKING:
    from jinja2 import Environment

NAME = "html"
SUFFIX = ".html"
NEEDS = "jinja2"

TEMPLATES = Path(__file__).parent / "templates"
MARKS = {Tone.GOOD: ("✓", "good"), Tone.WARNING: ("!", "with care"), Tone.BAD: ("✗", "bad")}
SAID = ("x", "!", "?", "*")
"""Marks with which the text of a cell may begin; it gets no other."""

LONG = 10
"""Rows from which on a table can be sorted and filtered."""

MEASURES = ("measure", "requirement", "candidate", "field")
"""Keys of a first column that names figures: rows of different figures are not sorted."""

ENDLESS = 30
"""Characters of a word from which on it may be broken anywhere."""


@dataclass(frozen=True, slots=True)
class Grid:
    """A table as it is shown: columns with the unit that their title does not say, and groups of rows.

    A row is (column, cell, whether the cell names the row); rows without a name of their own, or with one
    that is set back, go with the row above.  long : whether it is worth sorting
    """

    caption: str
    columns: Sequence[tuple[Column, str]]
    groups: Sequence[Sequence[Sequence[tuple[Column, Cell, bool]]]]
    note: Sequence[str]
    long: bool


@dataclass(frozen=True, slots=True)
class Figure:
    """A chart with its words, drawn as inline SVG."""

    title: str
    note: str
    drawn: str


@dataclass(slots=True)
class Section:
    """What stands under a heading, each block by its kind; `inner` are the sections beneath it."""

    id: str
    heading: Heading
    blocks: list[tuple[str, Block | Grid]] = field(default_factory=list)
    figures: list[Figure] = field(default_factory=list)
    inner: list[Section] = field(default_factory=list)

    @property
    def plain(self) -> bool:
        """Whether it is no part of a report."""
        return not isinstance(self.heading, Part)


def render(screen: Screen) -> str:
    """The page: blocks, charts and where it all came from; the same text for the same input.

    UsageError where the packages that it needs are not installed.
    """
    if needed := missing("jinja2") or missing("matplotlib"):
        raise UsageError(f"html {needed}")
    page = _environment().get_template("page.html")
    opening, sections = _sections(screen)
    data: dict[str, Any] = screen.data
    style, script = ((TEMPLATES / name).read_text(encoding="utf-8") for name in ("page.css", "page.js"))
    reported = any(not section.plain for section in sections)
    return page.render(
        title=opening.heading,
        opening=opening,
        sections=sections,
        tool=f"{data['tool']['name']} {data['tool']['version']}",
        date=data["date"],
        files=[] if reported else data["inputs"],
        marks=MARKS,
        style=_markup(style),
        script=_markup(script),
        script_hash=_hash(script),
    )


@lru_cache(maxsize=1)
def _environment() -> Environment:
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    environment = Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        finalize=lambda value: clean(value) if type(value) is str else value,
    )
    environment.tests["marked"] = lambda text: text.partition(" ")[0] in SAID
    environment.tests["endless"] = lambda text: any(len(word) > ENDLESS for word in text.split())
    return environment


def _sections(screen: Screen) -> tuple[Section, list[Section]]:
    """What stands before the first heading under the title, and the sections, those of a report two deep."""
    title, *rest = screen.blocks
    assert isinstance(title, Heading)
    opening = Section("top", title)
    found: list[Section] = []
    here = opening
    for number, block in enumerate(rest):
        if isinstance(block, Heading):
            here = Section(f"s{number}", block)
            beneath = found and not found[-1].plain and not isinstance(block, Part)
            (found[-1].inner if beneath else found).append(here)
        elif isinstance(block, Table):
            tables = sum(kind == "grid" for kind, _ in here.blocks)
            caption = here.heading.text + (f", {tables + 1}" if tables else "")
            here.blocks.append(("grid", _grid(block, caption)))
        else:
            here.blocks.append((type(block).__name__.lower(), block))
    return opening, _with_figures(screen, found)


def _with_figures(screen: Screen, sections: list[Section]) -> list[Section]:
    """The same sections with charts in the part that they belong to, else in a section of their own."""
    rest: list[Figure] = []
    for number, chart in enumerate(screen.charts()):
        figure = Figure(chart.title, chart.note, _drawn(screen, chart, f"c{number}-"))
        homes = [s for s in sections if isinstance(s.heading, Part) and _within(chart, s.heading)]
        (homes[0].figures if homes else rest).append(figure)
    return [*sections, Section("charts", Heading("CHARTS"), figures=rest)] if rest else sections


def _within(chart: Chart, part: Part) -> bool:
    return bool(part.key) and chart.key.startswith(f"{part.key}-")


def _grid(table: Table, caption: str) -> Grid:
    places = [place for place, column in enumerate(table.columns) if column.rank < 9]
    named = [place for place in places if table.columns[place].left]
    head = named[0] if named else places[0]
    groups: list[list[list[tuple[Column, Cell, bool]]]] = []
    for row in table.rows:
        cells = [
            (table.columns[place], row[place], place == head and row[place].text != "") for place in places
        ]
        if row[head].text[:1].strip() or not groups:
            groups.append([])
        groups[-1].append(cells)
    columns = [(table.columns[place], _unit(table.columns[place])) for place in places]
    long = len(groups) >= LONG and table.columns[head].key not in MEASURES
    return Grid(caption, columns, groups, table.note, long)


def _unit(column: Column) -> str:
    """The unit of a column, where its title does not say it already."""
    said = f" {column.unit} " in f" {column.title.replace(',', ' ')} "
    return "" if said else column.unit


def _drawn(screen: Screen, chart: Chart, prefix: str) -> str:
    """One chart as an SVG element: title and note are left to the page, ids that are used become its own."""
    from markupsafe import Markup

    from screener.export import svg

    bare = replace(chart, title="", note="")
    text = svg.render(replace(screen, charts=lambda: [bare])).decode()
    whole = re.search(r'<svg[^>]* viewBox="([0-9 .]+)"[^>]*>(.*)</svg>', text, re.S)
    assert whole
    view, inner = whole.groups()
    inner = re.sub(r"<metadata>.*?</metadata>|<style.*?</style>|<!--.*?-->", "", inner, flags=re.S)
    used = set(re.findall(r'(?:url\(|href=")#([^")]+)', inner))

    def tag(found: re.Match[str]) -> str:
        kept = re.sub(
            r' id="([^"]*)"', lambda name: f' id="{prefix}{name[1]}"' if name[1] in used else "", found[0]
        )
        return re.sub(r'(url\(|xlink:href=")#', rf"\g<1>#{prefix}", kept)

    inner = re.sub(r"\s*\n\s*", " ", re.sub(r"<[^<>]*>", tag, inner))
    label = clean(f"{chart.title}. {chart.told}")
    return Markup('<svg role="img" aria-label="{}" viewBox="{}">{}</svg>').format(label, view, Markup(inner))


def _markup(text: str) -> str:
    from markupsafe import Markup

    return Markup(text)


def _hash(script: str) -> str:
    """What the page's policy lets run: this script and no other."""
    import base64
    import hashlib

    return f"sha256-{base64.b64encode(hashlib.sha256(script.encode()).digest()).decode()}"
