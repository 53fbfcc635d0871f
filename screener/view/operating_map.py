"""Which combination of pumps may run at which header flow: ranges and the operating map, blocks and data."""

from __future__ import annotations

from typing import Any

import numpy as np

from screener.changes.combination import BREACHES, Ran
from screener.changes.operating_map import Spot
from screener.changes.operation import Operation
from screener.header.system import system_curve
from screener.view import names
from screener.view.blocks import Cell, Column, Table, Tone
from screener.view.display import DASH, Display, tidy, word

MEANS = {
    "past": "beyond its last measured point, no figures",
    "no data": "the header has no figures, its system curve is not known that far",
    "short": "the combination cannot give that flow",
    "shut": "held shut by its check valve, or no operating point on its falling side",
    "low": "below its minimum flow, allowable region or first measured point",
    "high": "above its allowable region",
    "NPSH": "too little NPSH",
    "motor": "motor overloaded",
    "shaft": "more power than its shaft is made for",
    "start": "cannot open its check valve against the others",
}
"""Short words for a broken limit; the pump named beside them is the one that breaks it."""


def _letter(place: int) -> str:
    return chr(ord("A") + place)


def ranges(result: Operation, display: Display) -> Table:
    """One row for each range of flows of each combination."""
    columns = [
        Column("column", "", left=True),
        Column("running", "running", left=True),
        Column("lowest", "from", display.unit("flow")),
        Column("below", "below that", left=True, rank=1),
        Column("highest", "to", display.unit("flow")),
        Column("above", "above that", left=True, rank=1),
    ]
    rows = []
    for place, found in enumerate(result.map.ranges):
        who = [word(_letter(place)), word(running(result, place))]
        for item in found:
            rows.append(
                [
                    *who,
                    display.cell("flow", item.low),
                    _spot(result, item.below),
                    display.cell("flow", item.high),
                    _spot(result, item.above),
                ]
            )
        if not found:
            rows.append([*who, Cell("never", None, Tone.BAD), Cell(""), Cell(""), Cell("")])
    note = ["Ends of ranges are found to about 1 %, on the safe side."]
    alike = result.bench.header.alike
    kinds = [names.alike(result.bench.header.case, list(alike), int(row)) for row in np.unique(alike)]
    identical = [tags for tags in kinds if ", " in tags]
    if identical:
        note.append(f"Any of identical pumps may stand for another: {'; '.join(identical)}.")
    if result.map.left_out:
        note.append(f"{result.map.left_out} more combinations are not shown: no duty asks for them.")
    return Table(columns, rows, note)


def running(result: Operation, place: int) -> str:
    """Names of the pumps of one combination of the map."""
    case = result.bench.header.case
    rows, new = result.map.combinations[place]
    return names.combination(case, rows, case.new_pump.count if new else 0)


def _spot(result: Operation, spot: Spot | None) -> Cell:
    """Allowed, or the limit broken, marked where it is so at one level only."""
    if spot is None:
        return Cell(DASH)
    if spot.ran.within:
        return word("ok", Tone.GOOD)
    mark = "" if spot.level < 0 else " +" if spot.level == result.map.levels[0] else " -"
    return word(f"{why(result, spot.ran)}{mark}", Tone.BAD)


def table(result: Operation, display: Display) -> Table:
    """One row a header flow, one column a combination; those that fit least well go last."""
    case = result.bench.header.case
    columns = [
        Column("flow", "flow", display.unit("flow")),
        Column("duty", "duty", left=True),
        *(
            Column(running(result, place), _letter(place), left=True, rank=_rank(result, place))
            for place in range(len(result.map.combinations))
        ),
    ]
    rows = []
    for flow, spots in zip(result.map.flows, result.map.spots, strict=True):
        cells = [_spot(result, spot) for spot in spots]
        rows.append([display.cell("flow", flow), word(", ".join(_duties_at(result, flow))), *cells])
    every = [spot for spots in result.map.spots for spot in spots]
    note = meanings({spot.ran.breach for spot in every})
    if len(result.map.levels) > 1:
        high, low = (case.levels[row].name for row in result.map.levels)
        note.append(
            f"Judged at the highest static head ({high}) and at the lowest ({low}), the worse shown: "
            "+ at the highest only, - at the lowest only."
        )
    drives = [case.new_pump.drive, *(pump.drive for pump in case.installed)]
    if any(drive.varies for drive in drives):
        note.append("Pumps that can vary their speed run at their speed at load.")
    liquids = [case.liquids[row].name for row in result.map.liquids]
    if len(liquids) > 1:
        note.append(f"A cell holds for every liquid pumped ({', '.join(liquids)}): the worst of them rules.")
    return Table(columns, rows, note)


def _rank(result: Operation, place: int) -> int:
    """Combinations that a duty asks for, or should ask for, stay longest where there is no room."""
    running, new = result.map.combinations[place]
    for choice in result.choices:
        for ran in (choice.asked, choice.best):
            if ran and (ran.running, ran.new > 0) == (running, new):
                return 1
    return 2


def _duties_at(result: Operation, flow: float) -> list[str]:
    return [
        duty.name for duty in result.bench.header.case.duties if abs(duty.flow - flow) <= 1e-9 * abs(flow)
    ]


def as_data(result: Operation, display: Display) -> dict[str, Any]:
    """The map and the ranges as data."""
    case = result.bench.header.case
    statics = [
        system_curve(case.system, case.levels[row], case.liquids[result.map.liquids[0]]).static
        for row in result.map.levels
    ]
    return {
        "levels": [
            {"level": case.levels[row].name, "static_head": display.number("head", static)}
            for row, static in zip(result.map.levels, statics, strict=True)
        ],
        "left_out": result.map.left_out,
        "combinations": [
            {
                "running": running(result, place),
                "ranges": [
                    {
                        "lowest": display.number("flow", item.low),
                        "below": _outside(result, item.below),
                        "highest": display.number("flow", item.high),
                        "above": _outside(result, item.above),
                    }
                    for item in ranges
                ],
            }
            for place, ranges in enumerate(result.map.ranges)
        ],
        "flows": [
            {
                "flow": display.number("flow", flow),
                "duties": _duties_at(result, flow),
                "combinations": [
                    {
                        "running": running(result, place),
                        "allowed": spot.ran.within,
                        "outside": _outside(result, spot),
                        "not_assessed": list(spot.ran.unknown),
                    }
                    for place, spot in enumerate(spots)
                ],
            }
            for flow, spots in zip(result.map.flows, result.map.spots, strict=True)
        ],
    }


def _outside(result: Operation, spot: Spot | None) -> dict[str, Any] | None:
    if spot is None or spot.ran.within:
        return None
    level = result.bench.header.case.levels[spot.level].name if spot.level >= 0 else None
    return broken(result, spot.ran, level)


def why(result: Operation, ran: Ran) -> str:
    """The limit broken first, and by which pump: "low P-1"."""
    text = BREACHES[ran.breach].word
    return f"{text} {names.pump(result.bench.header.case, ran.pump)}" if ran.pump >= 0 else text


def meanings(breaches: set[int]) -> list[str]:
    """What the words for broken limits mean, those that occur."""
    words = dict.fromkeys(BREACHES[breach].word for breach in sorted(breaches) if breach >= 0)
    return [" ".join(f"{text}: {MEANS[text]}." for text in words)] if words else []


def broken(result: Operation, ran: Ran, level: str | None) -> dict[str, Any]:
    """The limit broken first as data. level : its name where only one level breaks it."""
    breach = BREACHES[ran.breach]
    return {
        "word": breach.word,
        "criterion": breach.criterion,
        "pump": names.pump(result.bench.header.case, ran.pump) if ran.pump >= 0 else None,
        "level": level,
        "shortfall": tidy(ran.shortfall),
    }
