"""What would make a pump pass, and whether its verdict holds within what is uncertain: to blocks and data."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from screener.changes.near import Near
from screener.changes.reading import Misread, Reading, error
from screener.changes.smallest import Change, ChangeKind
from screener.changes.tolerance import Corner
from screener.criteria import criteria
from screener.model.arrays import Bools, Codes
from screener.model.finding import Outcome, Verdict
from screener.screening.assess import Bench
from screener.view import names
from screener.view import sampling as view_sampling
from screener.view.blocks import Block, Cell, Column, Heading, Lines, Table
from screener.view.data import VERDICTS
from screener.view.display import Display, word
from screener.view.findings import Found, found

TURNED = {
    Misread.HIGHER: "higher",
    Misread.LOWER: "lower",
    Misread.STEEPER: "steeper",
    Misread.FLATTER: "flatter",
}


def changes(bench: Bench, display: Display, items: Sequence[Change], verdict: Verdict) -> list[Block]:
    """What would make a rejected pump pass."""
    if verdict != Verdict.REJECTED:
        return []
    heading = Heading("WHAT WOULD MAKE IT PASS", "each by itself, run again in full")
    if not items:
        worn = " No worn pump restored, one or all." if bench.header.case.as_new is not None else ""
        tried = (
            "no other diameter, no other combination, lowest flow or bypass in one duty, and no larger motor "
            "on an installed pump"
        )
        return [heading, Lines([f"No single change that was tried: {tried}.{worn}"])]
    lines = [
        f"{_sentence(bench, display, change)}: then it is {VERDICTS[change.verdict]}." for change in items
    ]
    return [heading, Lines(lines)]


def _sentence(bench: Bench, display: Display, change: Change) -> str:
    duty, tag = _duty(bench, change), _tags(bench, change)
    match change.kind:
        case ChangeKind.DIAMETER:
            return f"Take {_diameters(display, change)}"
        case ChangeKind.FEWER_INSTALLED:
            return f"Run {duty} with one fewer of {tag}"
        case ChangeKind.WITHOUT_NEW:
            return f"Run {duty} without the new pump; the installed pumps meet it alone"
        case ChangeKind.LOWEST_FLOW:
            return f"Keep {duty} at {display.full('flow', change.value)} or more"
        case ChangeKind.BYPASS:
            flow = display.full("flow", change.value)
            each = " each" if "," in tag else ""
            return f"Take back {flow}{each} at {tag} in {duty}, by a bypass ahead of the check valve"
        case ChangeKind.MOTOR:
            return f"Put {display.full('power', change.value)} motors on {tag}"
        case ChangeKind.ONE_RESTORED:
            return f"Restore {_tag(bench, change)} to what it gave as new"
        case _:
            return "Restore the installed pumps to what they gave as new"


def short(bench: Bench, display: Display, change: Change | None) -> str:
    """A change in as few words as a table has room for."""
    if change is None:
        return "no single change"
    duty = _duty(bench, change)
    match change.kind:
        case ChangeKind.DIAMETER:
            text = _diameters(display, change)
        case ChangeKind.FEWER_INSTALLED:
            text = f"without {_tag(bench, change)} at {duty}"
        case ChangeKind.WITHOUT_NEW:
            text = f"without it at {duty}"
        case ChangeKind.LOWEST_FLOW:
            text = f"{duty} from {display.full('flow', change.value)} on"
        case ChangeKind.BYPASS:
            text = f"bypass {display.text('flow', change.value)} at {duty}, {_tags(bench, change)}"
        case ChangeKind.MOTOR:
            text = f"motor {display.full('power', change.value)}, {_tags(bench, change)}"
        case ChangeKind.ONE_RESTORED:
            text = f"{_tag(bench, change)} restored"
        case _:
            text = "all restored"
    return text if change.verdict == Verdict.ACCEPTED else f"{text} ({VERDICTS[change.verdict]})"


def _duty(bench: Bench, change: Change) -> str:
    return bench.header.case.duties[change.duty].name if change.duty >= 0 else ""


def _tag(bench: Bench, change: Change) -> str:
    return names.pump(bench.header.case, change.pump) if change.pump >= 0 else ""


def _tags(bench: Bench, change: Change) -> str:
    """The pump, and those identical to it."""
    if change.pump < 1:
        return _tag(bench, change)
    return names.alike(bench.header.case, [int(row) for row in bench.header.alike], change.pump - 1)


def _diameters(display: Display, change: Change) -> str:
    low, high = display.text("length", change.value), display.text("length", change.to)
    unit = display.unit("length")
    return f"{low} {unit}" if low == high else f"{low} to {high} {unit}"


def changes_data(bench: Bench, display: Display, items: Sequence[Change]) -> list[dict[str, Any]]:
    """The same as data."""

    def of(change: Change, kind: ChangeKind, quantity: str) -> float | None:
        return display.number(quantity, change.value) if change.kind == kind else None

    return [
        {
            "change": change.kind.name.lower().replace("_", " "),
            "duty": _duty(bench, change) or None,
            "pump": _tag(bench, change) or None,
            "lowest_flow": of(change, ChangeKind.LOWEST_FLOW, "flow"),
            "bypass": of(change, ChangeKind.BYPASS, "flow"),
            "motor": of(change, ChangeKind.MOTOR, "power"),
            "smallest_diameter": of(change, ChangeKind.DIAMETER, "length"),
            "largest_diameter": display.number("length", change.to),
            "verdict": VERDICTS[change.verdict],
        }
        for change in items
    ]


def corners(bench: Bench, display: Display, items: Sequence[Corner]) -> list[Block]:
    """What fails only where curves come as high or as low as their tolerance allows."""
    heading = Heading("WITHIN THE HEAD TOLERANCE OF THE CURVES", "fails only there: a caution")
    rows = [
        [word(_corner(bench, corner)), *_row(item)]
        for corner in items
        for item in _failing(display, corner, 0)
    ]
    if not rows:
        return [heading, Lines(["The verdict holds in every corner."])]
    note = [
        "A tolerance holds at the guarantee point; applying it to the whole curve, and "
        f"{100 * bench.limits['start']['unknown_tolerance']:g} % where no grade is stated, are ours."
    ]
    parked = [
        f"With {_corner(bench, corner)} {shut['pump']} is held shut by its check valve at {shut['where']}."
        for corner in items
        for shut in _held_shut(corner, 0)
    ]
    return [heading, Table([Column("corner", "curves", left=True), *_COLUMNS], rows, note), Lines(parked)]


_COLUMNS = (
    Column("criterion", "criterion", left=True),
    Column("observed", "is"),
    Column("limit", "limit"),
    Column("pump", "of", left=True, rank=1),
    Column("where", "where", left=True),
)


def _row(item: Found) -> list[Cell]:
    return [word(item.criterion.name), item.value, item.limit, word(item.pump), word(item.where)]


def _failing(display: Display, corner: Corner, row: int) -> list[Found]:
    return _those(corner.bench, display, corner, corner.fails, row)


def _those(bench: Bench, display: Display, run: Corner | Reading, wanted: Bools, row: int) -> list[Found]:
    items = found(bench, display, run.findings, row)
    return [item for item, says in zip(items, wanted[row], strict=True) if says]


def _held_shut(corner: Corner, row: int) -> list[dict[str, str]]:
    """Which pumps a corner parks, and where; none where their minimum flow fails without it too."""
    parks = [criterion.name for criterion in criteria()].index("minimum-flow")
    if not corner.fails[row, parks]:
        return []
    header = corner.bench.header
    return [
        {
            "pump": names.pump(header.case, column),
            "where": names.where(header.case, header.states[state]),
        }
        for state, column in np.argwhere(corner.shut[row]).tolist()
    ]


def _corner(bench: Bench, corner: Corner) -> str:
    level, rest = ("high", "low") if corner.high else ("low", "high")
    if corner.odd < 0:
        return f"all {level}"
    return f"{names.pump(bench.header.case, corner.odd)} {level}, rest {rest}"


def corners_data(bench: Bench, display: Display, items: Sequence[Corner], row: int) -> list[dict[str, Any]]:
    """The same as data, for one candidate: every corner, and what fails only there."""
    return [
        {
            "curves": _corner(bench, corner),
            "held_shut": _held_shut(corner, row),
            "fails": [_item(item) for item in _failing(display, corner, row)],
        }
        for corner in items
    ]


def _item(item: Found) -> dict[str, Any]:
    return {
        "criterion": item.criterion.name,
        "observed": item.value.value,
        "limit": item.limit.value,
        "pump": item.pump,
        "where": item.where,
    }


def worst_corner(items: Sequence[Corner], row: int) -> str:
    """Pump and situation of what fails most in any corner, "P-1 night"; "hold" where nothing does."""
    fails = np.array([corner.fails[row] for corner in items])
    if not fails.any():
        return "hold"
    shortfall = np.array([corner.findings.shortfall[row] for corner in items])
    number, column = np.unravel_index(np.where(fails, shortfall, -np.inf).argmax(), fails.shape)
    corner = items[int(number)]
    header = corner.bench.header
    state, pump = int(corner.findings.state[row, column]), int(corner.findings.pump[row, column])
    where = names.situation(header.case, header.states[state]) if state >= 0 else criteria()[int(column)].name
    return f"{names.pump(header.case, pump)} {where}" if pump >= 0 else where


def readings(bench: Bench, display: Display, items: Sequence[Reading], source: str) -> list[Block]:
    """What fails, or no longer fails, where the points of the curve were misread."""
    share = f"{100 * error(bench):g} %"
    heading = Heading(f"READING ERROR OF {share} OF HEAD", "the new pump's curve, power with it")
    rows = [
        [
            word(TURNED[reading.misread]),
            word("fails" if item.outcome == Outcome.FAIL else "passes"),
            *_row(item),
        ]
        for reading in items
        for item in _those(bench, display, reading, reading.flips, 0)
    ]
    if not rows:
        return [heading, Lines(["The verdict holds."])]
    lines = [] if any(reading.turns[0] for reading in items) else ["The verdict holds all the same."]
    if not source or source.startswith("catalogue"):
        kind = "A catalogue curve" if source else "No source of the curve is stated"
        lines.append(f"{kind}: points read off a chart are where this matters most.")
    columns = [Column("curve", "truly", left=True), Column("outcome", "then", left=True), *_COLUMNS]
    return [heading, Table(columns, rows), Lines(lines)]


def readings_data(bench: Bench, display: Display, items: Sequence[Reading], row: int) -> dict[str, Any]:
    """The same as data, for one candidate: every run, and what flips in it."""
    return {
        "share_of_head": 100 * error(bench),
        "runs": [
            {
                "curve": TURNED[reading.misread],
                "verdict_flips": bool(reading.turns[row]),
                "fails": [
                    _item(item)
                    for item in _those(bench, display, reading, reading.flips, row)
                    if item.outcome == Outcome.FAIL
                ],
                "passes": [
                    item.criterion.name
                    for item in _those(bench, display, reading, reading.flips, row)
                    if item.outcome != Outcome.FAIL
                ],
            }
            for reading in items
        ],
    }


def misread(items: Sequence[Reading], row: int) -> str:
    """How many of the runs turn the verdict of a candidate: "2 of 4"; "hold" where none does."""
    turns = sum(bool(reading.turns[row]) for reading in items)
    return f"{turns} of {len(items)}" if turns else "hold"


@dataclass(frozen=True, slots=True)
class Nearer:
    """What a shortlist shows of the closer look at one candidate.

    change   : what it would pass with, "" where it passes
    corners, reading, likely : whether its verdict holds, and how likely that is; "" where it does not pass
    data     : all of it as data
    """

    change: str
    corners: str
    reading: str
    likely: Cell
    data: dict[str, Any]


def nearer(bench: Bench, display: Display, near: Near, verdicts: Codes) -> dict[int, Nearer]:
    """The closer look at each candidate of a shortlist, by its row. verdicts : of every candidate."""
    result = {}
    for place, row in enumerate(near.rows.tolist()):
        passes, change = verdicts[row] != Verdict.REJECTED, near.changes[place]
        result[row] = Nearer(
            change="" if passes else short(bench, display, change),
            corners=worst_corner(near.corners, place) if passes else "",
            reading=misread(near.readings, place) if passes else "",
            likely=view_sampling.likely(near.sampled, place) if passes else Cell(""),
            data={
                "changes": changes_data(bench, display, [change] if change else []),
                "tolerance": corners_data(bench, display, near.corners, place),
                "reading_error": readings_data(bench, display, near.readings, place),
                "probability": view_sampling.sampling_data(bench, display, near.sampled, place)
                if passes
                else None,
            },
        )
    return result
