"""The screen of `screener report`: the other screens as parts of one, and what stands behind them."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from typing import Any

from screener.changes.report import Report
from screener.model.finding import Outcome, Verdict
from screener.view import basis, data
from screener.view import explain as explain_view
from screener.view import header as header_view
from screener.view import shortlist as shortlist_view
from screener.view.blocks import Block, Chart, Column, Heading, Lines, Pairs, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.display import Display, word
from screener.view.findings import found
from screener.view.part import Part

TOP = 50

NEVER = (
    ("surge", "pressure surge where pumps start, trip, or check valves slam"),
    ("vibration", "resonance, critical speeds, pulsation, foundations and nozzle loads"),
    ("relief", "relief and safety valves, their size and setting"),
    ("electrical", "supply, starting current, protection, cables, hazardous areas"),
    ("intake", "vortices, submergence, and air or solids in the liquid"),
    ("materials", "corrosion, erosion, seals and bearings"),
)
"""What no criterion looks at."""


def screen(report: Report, origin: Origin, *, top: int = TOP, everything: bool = False) -> Screen:
    """One case as a whole: blocks of the other screens under parts; the ranked table; all of it as data.

    top, everything : rows shown of each group, as in the shortlist
    """
    bench = report.shortlist.bench
    display = Display(bench.header.case.display)
    today = header_view.screen(report.today, origin)
    ranked = shortlist_view.screen(report.shortlist, origin, top=top, everything=everything)
    looks = [explain_view.screen(one, origin) for one in report.explained]
    title, brief, *shortlist = _body(ranked)
    assert isinstance(title, Heading)
    unknown = _unknown(report, display)
    screens = {"header": today, "shortlist": ranked}
    screens |= {f"pump-{number}": look for number, look in enumerate(looks, start=1)}
    blocks: list[Block] = [
        replace(title, aside=f"Report of the screening: {title.aside}"),
        brief,
        *_first(ranked.data, display),
        Lines(data.CAUTIONS, Tone.WARNING),
        Part("The header today, and what it asks of a new pump", key="header"),
        *_body(today)[1:],
        Part("The shortlist, and why the rest is not on it", key="shortlist"),
        *shortlist,
    ]
    for number, look in enumerate(looks, start=1):
        blocks += [
            Part(f"{_name(look.data, display)}: {look.data['verdict']}", key=f"pump-{number}"),
            *_body(look)[1:],
        ]
    blocks += [
        Part("What was not assessed"),
        Heading("FOR ANY PUMP"),
        Pairs(NEVER),
        *_not_assessed(unknown),
        Part("What the case says, what was assumed, and the limits used"),
        *basis.blocks(bench, display),
        Part("Files read"),
        _files(origin),
    ]
    content = {
        **data.head(bench, "pump-report", origin),
        "header": today.data,
        "shortlist": ranked.data,
        "explanations": [look.data for look in looks],
        "not_assessed": {"for_any_pump": [name for name, _ in NEVER], "by_pump": unknown},
        "basis": basis.basis(bench, display),
        "limits": data.limits(bench, display),
    }
    return Screen(
        blocks,
        ranked.table,
        content,
        charts=lambda: list(_charts(screens)),
        sheets=lambda: [(name, one.table) for name, one in screens.items()],
    )


def _first(shortlist: dict[str, Any], display: Display) -> list[Block]:
    """The pump that is ranked first, in one line."""
    if not shortlist["accepted"]:
        return []
    best = shortlist["accepted"][0]
    figures = [_name(best, display)]
    if best["efficiency"] is not None:
        figures.append(f"system efficiency {best['efficiency']:.1f} %")
    if best["motor"] is not None:
        figures.append(f"motor {best['motor']:g} {display.unit('power')}")
    return [Lines([f"Ranked first: {', '.join(figures)}."])]


def _body(one: Screen) -> list[Block]:
    """The blocks of a screen without the cautions, which a report says once."""
    return [block for block in one.blocks if block != Lines(data.CAUTIONS, Tone.QUIET)]


def _charts(screens: dict[str, Screen]) -> Iterator[Chart]:
    """Charts of every part, each by a name of its own."""
    for name, one in screens.items():
        yield from (replace(chart, key=f"{name}-{chart.key}") for chart in one.charts())


def _name(pump: dict[str, Any], display: Display) -> str:
    """A pump and its impeller: "200-400-4 M, 398 mm"."""
    impeller = "" if pump["diameter"] is None else f", {pump['diameter']:g} {display.unit('length')}"
    return f"{pump['pump']}{impeller}"


def _unknown(report: Report, display: Display) -> list[dict[str, Any]]:
    """What could not be judged of each pump that was run, best first."""
    result = report.shortlist
    return [
        {
            "pump": result.table.ids[int(result.best.model[row])],
            "verdict": data.VERDICTS[Verdict(int(result.best.verdict[row]))],
            "criterion": item.criterion.name,
            "missing": item.needs,
        }
        for row in range(len(result.best))
        for item in found(result.bench, display, result.best.findings, row)
        if item.outcome == Outcome.NOT_ASSESSED
    ]


def _not_assessed(unknown: Sequence[dict[str, Any]]) -> list[Block]:
    """The same as a table, criteria and pumps that share a reason in one row."""
    heading = Heading("PUMP BY PUMP", "not assessed is never a pass")
    if not unknown:
        return [heading, Lines(["Every criterion was assessed for every pump that was run."])]
    columns = [
        Column("pump", "pump", left=True),
        Column("verdict", "verdict", left=True),
        Column("criterion", "not assessed", left=True),
        Column("missing", "for want of", left=True),
    ]
    together: dict[tuple[str, str, str], list[str]] = {}
    for item in unknown:
        together.setdefault((item["pump"], item["verdict"], item["missing"]), []).append(item["criterion"])
    rows, before = [], ""
    for (pump, verdict, missing), several in together.items():
        first = [word(pump), word(verdict)] if pump != before else [word(""), word("")]
        rows.append([*first, word(", ".join(several)), word(missing)])
        before = pump
    return [heading, Table(columns, rows)]


def _files(origin: Origin) -> Table:
    columns = [Column("file", "file", left=True), Column("sha256", "sha256", left=True)]
    return Table(columns, [[word(name), word(digest)] for name, digest in origin.files])
