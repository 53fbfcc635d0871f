"""What would make a pump pass, and what its tolerance does to its verdict: to blocks and data."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from screener.changes.smallest import Change, ChangeKind
from screener.changes.tolerance import Corner
from screener.model.finding import Verdict
from screener.screening.assess import Bench
from screener.view import names
from screener.view.blocks import Block, Column, Heading, Lines, Table
from screener.view.data import VERDICTS
from screener.view.display import Display, word
from screener.view.findings import Found, found


def changes(bench: Bench, display: Display, items: Sequence[Change], verdict: Verdict) -> list[Block]:
    """What would make a rejected pump pass."""
    if verdict != Verdict.REJECTED:
        return []
    heading = Heading("WHAT WOULD MAKE IT PASS", "each by itself, run again in full")
    if not items:
        tried = "no other combination or lowest flow of one duty, and no larger motor on an installed pump"
        return [heading, Lines([f"No single change that was tried: {tried}."])]
    lines = [
        f"{_sentence(bench, display, change)}: then it is {VERDICTS[change.verdict]}." for change in items
    ]
    return [heading, Lines(lines)]


def _sentence(bench: Bench, display: Display, change: Change) -> str:
    case = bench.header.case
    duty = case.duties[change.duty].name if change.duty >= 0 else ""
    tag = names.alike(case, [int(row) for row in bench.header.alike], change.pump) if change.pump >= 0 else ""
    if change.kind == ChangeKind.FEWER_INSTALLED:
        return f"Run {duty} with one fewer of {tag}"
    if change.kind == ChangeKind.WITHOUT_NEW:
        return f"Run {duty} without the new pump; the installed pumps meet it alone"
    if change.kind == ChangeKind.LOWEST_FLOW:
        return f"Keep {duty} at {display.full('flow', change.value)} or more"
    if change.kind == ChangeKind.RESTORED:
        return "Restore the installed pumps to what they gave as new"
    return f"Put {display.full('power', change.value)} motors on {tag}"


def changes_data(bench: Bench, display: Display, items: Sequence[Change]) -> list[dict[str, Any]]:
    """The same as data."""
    case = bench.header.case
    return [
        {
            "change": change.kind.name.lower().replace("_", " "),
            "duty": case.duties[change.duty].name if change.duty >= 0 else None,
            "pump": case.installed[change.pump].tag if change.pump >= 0 else None,
            "lowest_flow": display.number("flow", change.value)
            if change.kind == ChangeKind.LOWEST_FLOW
            else None,
            "motor": display.number("power", change.value) if change.kind == ChangeKind.MOTOR else None,
            "verdict": VERDICTS[change.verdict],
        }
        for change in items
    ]


def corners(bench: Bench, display: Display, items: Sequence[Corner]) -> list[Block]:
    """What fails only where curves come as high or as low as their tolerance allows."""
    heading = Heading("WITHIN THE HEAD TOLERANCE OF THE CURVES", "fails only there: a caution")
    rows = [
        [
            word(_corner(bench, corner)),
            word(item.criterion.name),
            item.value,
            item.limit,
            word(item.pump),
            word(item.where),
        ]
        for corner in items
        for item in _failing(display, corner)
    ]
    if not rows:
        return [heading, Lines(["The verdict holds in every corner."])]
    columns = [
        Column("corner", "curves", left=True),
        Column("criterion", "criterion", left=True),
        Column("observed", "is"),
        Column("limit", "limit"),
        Column("pump", "of", left=True, rank=1),
        Column("where", "where", left=True),
    ]
    note = [
        "A tolerance holds at the guarantee point; applying it to the whole curve, and "
        f"{100 * bench.limits['start']['unknown_tolerance']:g} % where no grade is stated, are ours."
    ]
    return [heading, Table(columns, rows, note)]


def _failing(display: Display, corner: Corner) -> list[Found]:
    items = found(corner.bench, display, corner.findings, 0)
    return [item for item, fails in zip(items, corner.fails[0], strict=True) if fails]


def _corner(bench: Bench, corner: Corner) -> str:
    level, rest = ("high", "low") if corner.high else ("low", "high")
    if corner.odd < 0:
        return f"all {level}"
    return f"{names.pump(bench.header.case, corner.odd)} {level}, rest {rest}"


def corners_data(bench: Bench, display: Display, items: Sequence[Corner]) -> list[dict[str, Any]]:
    """The same as data: every corner, and what fails only there."""
    return [
        {
            "curves": _corner(bench, corner),
            "fails": [
                {
                    "criterion": item.criterion.name,
                    "observed": item.value.value,
                    "limit": item.limit.value,
                    "pump": item.pump,
                    "where": item.where,
                }
                for item in _failing(display, corner)
            ],
        }
        for corner in items
    ]
