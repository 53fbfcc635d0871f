"""Why pumps do not pass: the most efficient one, the open ones, the near misses, and those out of reach."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from screener.criteria import criteria
from screener.model.finding import Candidates, Outcome, Verdict
from screener.screening.reach import Reason
from screener.screening.shortlist import Shortlist
from screener.view import data, names
from screener.view.blocks import Block, Cell, Column, Heading, Lines, Table, Tone
from screener.view.display import Display, percent, plain, word
from screener.view.findings import Found, found, sentence, unit_of, worst_first

if TYPE_CHECKING:
    from screener.view.closer import Nearer

FEW = 20
"""Models in a catalog up to which those that cannot reach the duties are listed one by one."""

SHOWN = 4
"""Reasons shown of each rejected pump, unless everything is asked for."""

HOLDS = (
    Column("corners", "corners", left=True),
    Column("reading", "reading", left=True, rank=1),
    Column("probability", "likely %", "%", rank=1),
)
"""Columns on whether a verdict holds; `holds` fills them."""

HOLDS_NOTE = (
    "corners: the verdict holds with curves as high or low as their tolerance allows, else which pump fails "
    "first and when. reading: it holds with the curve read wrong, else in how many of the runs it turns. "
    "likely: probability that it passes under the assumptions that explain lists, with its sampling error."
)


def holds(words: Mapping[int, Nearer], row: int) -> list[Cell]:
    """Whether the verdict of a candidate holds, where something was looked at closer."""
    if row not in words:
        return [word("")] * len(HOLDS) if words else []
    cells = [
        word(text, Tone.GOOD if text == "hold" else Tone.WARNING)
        for text in (words[row].corners, words[row].reading)
    ]
    return [*cells, words[row].likely]


def most_efficient(result: Shortlist, display: Display, groups: dict[Verdict, Any]) -> list[Block]:
    """Why the pump that a search by efficiency would put first is not accepted."""
    efficiency = np.where(np.isnan(result.duty_efficiency), -1.0, result.duty_efficiency)
    rejected = groups[Verdict.REJECTED]
    if not rejected.size:
        return []
    row = int(rejected[efficiency[rejected].argmax()])
    others = efficiency[groups[Verdict.ACCEPTED]]
    if efficiency[row] <= others.max(initial=0.0):
        return []
    name = result.table.ids[int(result.best.model[row])]
    reasons = worst_first(found(result.bench, display, result.best.findings, row))
    first = [reason for reason in reasons if reason.criterion.name == "start" and reason.pump == names.NEW]
    rest = [reason for reason in reasons if reason not in first]
    need = result.needs[result.bench.header.rated]
    against = ""
    if others.size:
        best = int(groups[Verdict.ACCEPTED][others.argmax()])
        accepted = result.table.ids[int(result.best.model[best])]
        against = f", against {100 * others.max():.1f} % of {accepted}, the best that is accepted"
    lines = [
        f"{name} at {display.full('length', result.best.diameter[row])} has {100 * efficiency[row]:.1f} % "
        f"at {display.full('flow', need.flow)}{against}."
    ]
    if first:
        lines.append(_held_shut(result, display, row))
    lines += [_sentence(reason, display, "it") for reason in rest[:SHOWN]]
    return [Heading("THE MOST EFFICIENT PUMP IS REJECTED"), Lines(lines, indent=4)]


def _held_shut(result: Shortlist, display: Display, row: int) -> str:
    """The governing start of the new pump in words: the header stands above its shutoff head."""
    column = [criterion.name for criterion in criteria()].index("start")
    state = int(result.best.findings.state[row, column])
    margin = float(result.best.findings.observed[row, column])
    header = float(result.bench.today.header[0, state])
    where = names.where(result.bench.header.case, result.bench.header.states[state])
    return (
        f"At {where} the others hold the header at {display.full('head', header)}; its shutoff head is "
        f"{display.full('head', header * (1 + margin))}. Its check valve stays shut: it gives nothing, and "
        "heats up."
    )


def _sentence(item: Found, display: Display, pump: str) -> str:
    text = sentence(item, display, pump)
    return f"{text[0].upper()}{text[1:]}."


def conditional(result: Shortlist, display: Display, rows: Any, words: Mapping[int, Nearer]) -> Table:
    """What each open candidate would need to be judged."""
    columns = [
        Column("pump", "pump", left=True),
        Column("diameter", display.unit("length")),
        Column("score", "score"),
        Column("efficiency", "eff %", rank=1),
        *(HOLDS if words else ()),
        Column("missing", "not assessed for want of", left=True),
    ]
    table = []
    for row in rows:
        items = found(result.bench, display, result.best.findings, int(row))
        gaps = [item for item in items if item.outcome == Outcome.NOT_ASSESSED and item.criterion.gates]
        needs = dict.fromkeys(item.needs for item in gaps)
        model = int(result.best.model[row])
        figures = ranked_cells(result.best, display, int(row))
        for number, need in enumerate(needs):
            head = [word(result.table.ids[model]), *figures[:3], *holds(words, int(row))]
            table.append([*(head if number == 0 else [word("")] * len(head)), word(need)])
    return Table(columns, table)


def rejected(
    result: Shortlist, display: Display, rows: Any, everything: bool, words: Mapping[int, Nearer]
) -> Table:
    """One row for each reason, the worst first: is, limit, where; under them what it would pass with."""
    columns = [
        Column("pump", "pump", left=True),
        Column("diameter", display.unit("length"), rank=1),
        Column("why", "why not", left=True),
        Column("observed", "is"),
        Column("limit", "limit"),
        Column("criterion", "criterion", left=True, rank=2),
        Column("of", "of", left=True),
        Column("where", "where", left=True),
    ]
    table: list[Sequence[Cell]] = []
    for row in rows:
        reasons = worst_first(found(result.bench, display, result.best.findings, int(row)))
        kept = reasons if everything else reasons[:SHOWN]
        for number, item in enumerate(kept):
            model = int(result.best.model[row])
            first = [word(result.table.ids[model]), display.cell("length", result.best.diameter[row])]
            table.append(
                [
                    *(first if number == 0 else [word(""), word("")]),
                    word(_what(item, display)),
                    Cell(item.value.text, item.value.value, Tone.BAD),
                    item.limit,
                    word(item.criterion.name),
                    word(item.pump),
                    word(item.where),
                ]
            )
        if len(reasons) > len(kept):
            more = f"and {len(reasons) - len(kept)} more"
            table.append([word(""), word(""), word(more, Tone.QUIET), *[word("")] * 5])
        if row in words:
            change = words[row].change
            table.append([word(""), word(""), word("would pass with"), *[word("")] * 4, word(change)])
    note = "screener explain CASE PUMP tells what would make one of them pass"
    return Table(columns, table, [f"{note}, and --closer the easiest for each." if not words else f"{note}."])


def _what(item: Found, display: Display) -> str:
    unit = unit_of(item.criterion, display)
    return item.criterion.title if unit in ("", "%") else f"{item.criterion.title}, {unit}"


def out_of_reach(result: Shortlist, display: Display, everything: bool) -> list[Block]:
    """Models that cannot reach the duties: counts by reason, or every one of them."""
    reason = result.reach.reason
    counts = [(name, int((reason == code).sum())) for code, name in data.REASONS.items()]
    if not any(count for _, count in counts):
        return []
    line = "Cannot reach the duties: " + ", ".join(f"{count} {name}" for name, count in counts if count) + "."
    blocks: list[Block] = [Lines([line])]
    few = len(result.table) <= FEW
    if everything or few:
        blocks.append(_unreached(result, display))
    return blocks


def _unreached(result: Shortlist, display: Display) -> Table:
    columns = [
        Column("pump", "pump", left=True),
        Column("reason", "cannot reach the duties", left=True),
        Column("flow", "at flow", display.unit("flow")),
        Column("head", "gives", display.unit("head")),
        Column("needed", "needs", display.unit("head")),
        Column("end", "curve ends", display.unit("flow"), rank=1),
    ]
    r = result.reach
    rows = [
        [
            word(result.table.ids[int(model)]),
            word(data.REASONS[Reason(int(r.reason[model]))]),
            display.cell("flow", r.flow[model]),
            display.cell("head", r.head[model]),
            display.cell("head", r.needed[model]),
            display.cell("flow", r.end[model]),
        ]
        for model in np.flatnonzero(r.reason != Reason.REACHES)
    ]
    return Table(columns, rows, ["At the largest impeller on offer, the duty that it misses most."])


def unreached_data(result: Shortlist, display: Display) -> list[dict[str, Any]]:
    """Every model that cannot reach the duties, at its largest impeller and the duty it misses most."""
    r = result.reach
    return [
        {
            "pump": result.table.ids[int(model)],
            "reason": data.REASONS[Reason(int(r.reason[model]))],
            "flow": display.number("flow", r.flow[model]),
            "head": display.number("head", r.head[model]),
            "needed": display.number("head", r.needed[model]),
            "end": display.number("flow", r.end[model]),
        }
        for model in np.flatnonzero(r.reason != Reason.REACHES)
    ]


def ranked_cells(candidates: Candidates, display: Display, row: int) -> list[Cell]:
    """The figures of one candidate, as cells of the ranked table."""
    f = candidates.figures
    energy, volume = float(f.energy[row]), float(f.volume[row])
    cautions = int((candidates.findings.outcome[row] == Outcome.CAUTION).sum())
    return [
        display.cell("length", candidates.diameter[row]),
        plain(float(f.score[row]), 1),
        percent(float(f.efficiency[row]), 1),
        plain(energy / 3.6e9, 0),
        percent(float(f.shutoff[row]), 1, sign=True),
        percent(float(f.share[row]), 1),
        percent(float(candidates.lowest_share[row])),
        plain(float(candidates.npsh[row]), 2),
        display.nameplate(candidates.motor[row]),
        plain(data.kwh_per_m3(energy, volume), 4),
        percent(float(np.fmin.reduce(f.firm[row]))) if f.firm.shape[1] else Cell("-"),
        plain(cautions, 0),
    ]
