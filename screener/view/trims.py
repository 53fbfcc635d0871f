"""The screen of `screener trims`: the diameters of one pump side by side."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from screener.changes.laws import ByLaw
from screener.model.arrays import Floats
from screener.model.finding import Outcome, Verdict
from screener.screening.judge import worst_criterion
from screener.screening.one import Trims
from screener.view import data, names
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.display import Display, percent, plain, word
from screener.view.explain import VERDICT_TONES, passing
from screener.view.findings import found, sentence, worst_first
from screener.view.flows import flow_cell
from screener.view.laws import laws, laws_data

ABREAST = 9
WORDS = {Verdict.ACCEPTED: "pass", Verdict.CONDITIONAL: "open", Verdict.REJECTED: "FAIL"}


def screen(result: Trims, by_law: ByLaw, origin: Origin) -> Screen:
    """The diameters as blocks, one row a diameter as the table, and all of it as data.

    by_law : the same pump at the same diameters under each trim law
    """
    bench, candidates = result.bench, result.judged.candidates
    display = Display(bench.header.case.display)
    diameters = candidates.diameter
    accepted = diameters[candidates.verdict == Verdict.ACCEPTED]
    shown = _abreast(candidates.verdict, result.best)
    name = result.table.ids[result.model]
    span = f"{display.text('length', diameters[0])} to {display.full('length', diameters[-1])}"
    blocks: list[Block] = [
        Heading(f"{name}, {span}", f"best: {display.full('length', diameters[result.best])}"),
        Lines([_sentence(result, display, accepted)]),
        _side_by_side(result, display, shown),
        Lines([f"Lowest and highest: permitted header flow with {_everyone(result)} running."], Tone.QUIET),
        *laws(by_law, display),
        Lines(data.CAUTIONS, Tone.QUIET),
    ]
    content = _data(result, display, origin, accepted) | {"trim_laws": laws_data(by_law, display)}
    return Screen(blocks, _flat(result, display), content, charts=lambda: _charts(result))


def _charts(result: Trims) -> list[Chart]:
    from screener.view.charts import trims as chart

    found = chart.chart(result)
    return [found] if found else []


def _abreast(verdict: Any, best: int) -> Any:
    """Diameters worth seeing: the best, where the verdict changes, the ends, and some between."""
    count = len(verdict)
    changes = np.flatnonzero(verdict[1:] != verdict[:-1])
    wanted = [
        best,
        *changes,
        *(changes + 1),
        0,
        count - 1,
        *np.linspace(0, count - 1, ABREAST).round().astype(int),
    ]
    return np.array(sorted(list(dict.fromkeys(int(row) for row in wanted))[:ABREAST]))


def _sentence(result: Trims, display: Display, accepted: Floats) -> str:
    """What passes, and what stops the pump just below and just above."""
    candidates = result.judged.candidates
    diameters = candidates.diameter
    conditional = int((candidates.verdict == Verdict.CONDITIONAL).sum())
    text = f"{passing(accepted, diameters, conditional, display)}."
    text = text[0].upper() + text[1:]
    if not accepted.size:
        nearest = display.full("length", diameters[result.best])
        return f"{text} Nearest, at {nearest}: {_stop(result, display, result.best)}."
    inside = np.flatnonzero(candidates.verdict == Verdict.ACCEPTED)
    if inside[0] > 0:
        text += f" Smaller: {_stop(result, display, int(inside[0]) - 1)}."
    if inside[-1] < len(diameters) - 1:
        text += f" Larger: {_stop(result, display, int(inside[-1]) + 1)}."
    return text


def _stop(result: Trims, display: Display, row: int) -> str:
    items = found(result.bench, display, result.judged.candidates.findings, row)
    failed = worst_first(items)
    if failed:
        return sentence(failed[0], display, "it")
    return "not assessed: " + ", ".join(
        i.criterion.name for i in items if i.outcome == Outcome.NOT_ASSESSED and i.criterion.gates
    )


def _everyone(result: Trims) -> str:
    header = result.bench.header
    state = header.states[header.lowest]
    return names.combination(header.case, state.running, state.new)


def _measures(result: Trims, display: Display) -> list[tuple[Column, Callable[[int], Cell]]]:
    """What is compared: its column, and its cell for a row."""
    header, run, candidates = result.bench.header, result.judged.run, result.judged.candidates
    case, f, low = header.case, candidates.figures, header.lowest
    flow, power = display.unit("flow"), display.unit("power")
    lowest = names.situation(case, header.states[low])
    rated = names.situation(case, header.states[header.rated])

    def flows(place: int, column: int) -> Callable[[int], Cell]:
        return lambda row: flow_cell(display, run, place, column, row)

    def limit(values: Floats) -> Callable[[int], Cell]:
        return lambda row: display.cell("flow", values[row])

    kinds = dict.fromkeys(int(header.alike[row]) for row in header.states[low].running)
    installed = [
        (
            Column(f"flow_lowest {case.installed[row].tag}", f"{case.installed[row].tag} at {lowest}", flow),
            row,
        )
        for row in kinds
    ]
    stopped = [worst_criterion(candidates.findings, row) for row in range(len(candidates))]
    return [
        (Column("flow_rated", f"new at {rated}", flow), flows(header.rated, 0)),
        (Column("flow_lowest", f"new at {lowest}", flow), flows(low, 0)),
        *((column, flows(low, 1 + row)) for column, row in installed),
        (Column("lowest", "lowest header flow", flow), limit(result.band.lowest)),
        (Column("highest", "highest header flow", flow), limit(result.band.highest)),
        (
            Column("shutoff_match", "shutoff head match", "%"),
            lambda row: percent(float(f.shutoff[row]), 1, sign=True),
        ),
        (Column("load_share", "load share, points"), lambda row: percent(float(f.share[row]), 1)),
        (Column("npsh_ratio", "NPSHa/NPSHr, lowest"), lambda row: plain(float(candidates.npsh[row]), 2)),
        (Column("motor", "motor", power), lambda row: display.nameplate(candidates.motor[row])),
        (Column("efficiency", "system efficiency", "%"), lambda row: percent(float(f.efficiency[row]), 1)),
        (Column("score", "score"), lambda row: plain(float(f.score[row]), 1)),
        (Column("worst", "stopped by", left=True), lambda row: word(stopped[row])),
    ]


def _side_by_side(result: Trims, display: Display, shown: Any) -> Table:
    """One column a diameter; where there is no room, those far from the best go first."""
    candidates = result.judged.candidates
    far = {
        int(row): abs(number - int(np.flatnonzero(shown == result.best)[0]))
        for number, row in enumerate(shown)
    }
    columns = [Column("measure", f"diameter, {display.unit('length')}", left=True)]
    for row in shown:
        text = display.text("length", candidates.diameter[row])
        columns.append(Column(text, f">{text}<" if row == result.best else text, rank=min(far[int(row)], 8)))
    rows = []
    for column, cell in _measures(result, display):
        if column.key != "worst":
            label = f"{column.title}, {column.unit}" if column.unit else column.title
            rows.append([Cell(label), *(cell(int(row)) for row in shown)])
    rows.append([Cell("verdict"), *(_verdict(result, int(row)) for row in shown)])
    return Table(columns, rows)


def _verdict(result: Trims, row: int) -> Cell:
    verdict = Verdict(int(result.judged.candidates.verdict[row]))
    best = row == result.best and verdict != Verdict.REJECTED
    return Cell("BEST" if best else WORDS[verdict], data.VERDICTS[verdict], VERDICT_TONES[verdict])


def _flat(result: Trims, display: Display) -> Table:
    measures = _measures(result, display)
    columns = [
        Column("diameter", "diameter", display.unit("length")),
        *(column for column, _ in measures),
        Column("verdict", "verdict", left=True),
    ]
    candidates = result.judged.candidates
    rows = [
        [
            display.cell("length", candidates.diameter[row]),
            *(cell(row) for _, cell in measures),
            Cell(
                data.VERDICTS[Verdict(int(candidates.verdict[row]))],
                data.VERDICTS[Verdict(int(candidates.verdict[row]))],
            ),
        ]
        for row in range(len(candidates))
    ]
    return Table(columns, rows)


def _data(result: Trims, display: Display, origin: Origin, accepted: Floats) -> dict[str, Any]:
    candidates = result.judged.candidates
    flat = _flat(result, display)
    return {
        **data.head(result.bench, "pump-trims", origin),
        "pump": result.table.ids[result.model],
        "best_diameter": display.number("length", candidates.diameter[result.best]),
        "passing_diameters": [display.number("length", value) for value in accepted],
        "trims": [
            {column.key: cell.value for column, cell in zip(flat.columns, row, strict=True)}
            for row in flat.rows
        ],
        "limits": data.limits(result.bench, display),
    }
