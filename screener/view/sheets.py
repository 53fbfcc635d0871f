"""Further tables of the shortlist, for outputs that have room for them; made only when asked for."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from screener.hydraulics.similarity import trimmed
from screener.model.finding import Candidates, Judged, Outcome, Verdict
from screener.model.run import Kind, in_state
from screener.screening.assess import Bench, judged
from screener.screening.judge import worst_criterion
from screener.screening.one import trims
from screener.screening.shortlist import Shortlist
from screener.screening.today import naive
from screener.view import data, names
from screener.view.blocks import Cell, Column, Table, Tone
from screener.view.data import Origin
from screener.view.display import DASH, Display, percent, plain, word
from screener.view.explain import VERDICT_TONES
from screener.view.findings import found, unit_of
from screener.view.flows import NOTE, flow_cell
from screener.view.why_not import ranked_cells

BEST = 3
"""Candidates looked at closer: the first ones in order of rank."""

LISTED = (
    ("CONDITIONAL: NOTHING FAILED, SOMETHING IS NOT KNOWN", Verdict.CONDITIONAL),
    ("REJECTED, NEAREST FIRST", Verdict.REJECTED),
)
"""Headings of the shortlist whose tables are given here with every finding."""


def sheets(result: Shortlist, origin: Origin) -> list[tuple[str, Table]]:
    """Requirement, rejected pumps, trims, states and energy of the best, limits, and inputs."""
    bench = result.bench
    display = Display(bench.header.case.display)
    best = np.arange(min(BEST, len(result.best)))
    model, diameter = result.best.model[best], result.best.diameter[best]
    speed_ratio = result.reach.speed_ratio[model]
    again = judged(bench, trimmed(result.table, model=model, diameter=diameter, speed_ratio=speed_ratio))
    called = [result.table.ids[int(row)] for row in model]
    listed = [(name, _findings(result, display, verdict)) for name, verdict in LISTED]
    return [
        *((name, table) for name, table in listed if table.rows),
        ("REQUIREMENT", _requirement(result, display)),
        ("TRIMS OF THE BEST", _trims(result, display, called)),
        ("STATES OF THE BEST", _states(bench, display, again, called)),
        ("ENERGY OF THE BEST", _energy(bench, display, again, called)),
        ("LIMITS", _limits(bench, display)),
        ("INPUTS", _inputs(origin)),
    ]


def _requirement(result: Shortlist, display: Display) -> Table:
    """What every duty asks of the new pump, and what is commonly taken for it."""
    header = result.bench.header
    flow, head = display.unit("flow"), display.unit("head")
    columns = [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True),
        Column("running", "running", left=True),
        Column("rated", "rated duty", left=True),
        Column("asked", "asked of the header", flow),
        Column("header_head", "header stands at", head),
        Column("supplied", "others give then", flow),
        Column("flow", "flow of the new pump", flow),
        Column("head", "head of the new pump", head),
        Column("missing_flow_today", "flow missing today", flow),
        Column("header_head_today", "header today", head),
        Column("flow_by_rated", "duty less rated flows", flow),
        Column("head_by_rated", "head by rated flows", head),
    ]
    rows = []
    for place, need in result.needs.items():
        state, simple = header.states[place], naive(result.bench, place)
        rated = place == header.rated
        rows.append(
            [
                word(header.case.duties[state.duty].name),
                word(names.level(header.case, state)),
                word(names.combination(header.case, state.running, state.new)),
                Cell("yes" if rated else "", rated),
                display.cell("flow", state.asked),
                display.cell("head", need.header),
                display.cell("flow", need.supplied),
                display.cell("flow", need.flow),
                display.cell("head", need.head),
                display.cell("flow", simple.missing_flow),
                display.cell("head", simple.missing_head),
                display.cell("flow", simple.rated_flow),
                display.cell("head", simple.rated_head),
            ]
        )
    note = [
        "The new pump must give what is left when the header stands at the head that the system takes for "
        "the duty. The flow missing today, and the duty less rated flows, do not see that the installed "
        "pumps fall back as the header rises."
    ]
    return Table(columns, rows, note)


def _findings(result: Shortlist, display: Display, verdict: Verdict) -> Table:
    """Every finding of every pump of a verdict but what passes, in order of rank."""
    columns = [
        Column("pump", "pump", left=True),
        Column("diameter", "diameter", display.unit("length")),
        Column("criterion", "criterion", left=True),
        Column("outcome", "outcome", left=True),
        Column("observed", "is"),
        Column("limit", "limit"),
        Column("unit", "unit", left=True),
        Column("shortfall", "short by, of the limit", "%"),
        Column("of", "of", left=True),
        Column("where", "where", left=True),
        Column("already_so_today", "so today already", left=True),
        Column("missing", "not assessed for want of", left=True),
    ]
    rows = []
    for row in np.flatnonzero(result.best.verdict == verdict):
        name = word(result.table.ids[int(result.best.model[row])])
        diameter = display.cell("length", result.best.diameter[row])
        for item in found(result.bench, display, result.best.findings, int(row)):
            if item.outcome == Outcome.PASS:
                continue
            fails, missing = item.outcome == Outcome.FAIL, item.outcome == Outcome.NOT_ASSESSED
            rows.append(
                [
                    name,
                    diameter,
                    word(item.criterion.name),
                    item.verdict,
                    Cell(item.value.text, item.value.value, Tone.BAD if fails else Tone.PLAIN),
                    item.limit,
                    word(unit_of(item.criterion, display)),
                    percent(item.shortfall, 1) if fails else word(""),
                    word(item.pump),
                    word(item.where),
                    Cell("yes" if item.already else "", item.already),
                    word(item.needs if missing else ""),
                ]
            )
    return Table(columns, rows, ["What passes is left out here; the json has it."])


def _trims(result: Shortlist, display: Display, called: Sequence[str]) -> Table:
    """Every trim step of the best candidates."""
    columns = [
        Column("pump", "pump", left=True),
        Column("verdict", "verdict", left=True),
        Column("worst", "fails by most", left=True),
        Column("diameter", "diameter", display.unit("length")),
        Column("score", "score"),
        Column("efficiency", "system efficiency", "%"),
        Column("energy_mwh_per_year", "energy, all pumps", "MWh/y"),
        Column("shutoff_match", "shutoff match", "%"),
        Column("load_share", "load share, points", "%"),
        Column("lowest_flow_of_best", "lowest % BEP", "%"),
        Column("npsh_ratio", "NPSHa/NPSHr, lowest"),
        Column("motor", "motor", display.unit("power")),
        Column("energy_kwh_per_m3", "energy per volume", "kWh/m3"),
        Column("firm_flow", "firm flow, lowest", "%"),
        Column("cautions", "cautions"),
        Column("lowest", "lowest header flow", display.unit("flow")),
        Column("highest", "highest header flow", display.unit("flow")),
    ]
    rows = []
    for name, model in zip(called, result.best.model, strict=False):
        several = trims(result.bench.header.case, result.table, int(model))
        candidates = several.judged.candidates
        rows += [
            [
                word(name),
                _verdict(candidates, row),
                word(worst_criterion(candidates.findings, row)),
                *ranked_cells(candidates, display, row),
                display.cell("flow", several.band.lowest[row]),
                display.cell("flow", several.band.highest[row]),
            ]
            for row in range(len(candidates))
        ]
    note = ["Lowest and highest header flow: permitted with all pumps of the lowest duty that they share."]
    return Table(columns, rows, note)


def _verdict(candidates: Candidates, row: int) -> Cell:
    verdict = Verdict(int(candidates.verdict[row]))
    return word(data.VERDICTS[verdict], VERDICT_TONES[verdict])


def _states(bench: Bench, display: Display, again: Judged, called: Sequence[str]) -> Table:
    """One row for each pump in each state of the best candidates."""
    case, run = bench.header.case, again.run
    flow, head, npsh = display.unit("flow"), display.unit("head"), display.unit("npsh")
    columns = [
        Column("pump", "candidate", left=True),
        Column("diameter", "diameter", display.unit("length")),
        Column("state", "state", left=True),
        Column("kind", "kind", left=True),
        Column("running", "running", left=True),
        Column("asked", "asked", flow),
        Column("header_head", "header", head),
        Column("total_flow", "total", flow),
        Column("of", "of", left=True),
        Column("flow", "flow", flow),
        Column("flow_of_best", "flow of best efficiency", "%"),
        Column("speed", "speed, of that at load", "%"),
        Column("head", "head", head),
        Column("power", "power", display.unit("power")),
        Column("efficiency", "efficiency", "%"),
        Column("npsh_available", "NPSHa", npsh),
        Column("npsh_required", "NPSHr", npsh),
    ]
    rows = []
    for row, name in enumerate(called):
        for place, state in enumerate(bench.header.states):
            first = [
                word(name),
                display.cell("length", again.candidates.diameter[row]),
                word(names.where(case, state)),
                word(Kind(state.kind).name.lower().replace("_", " ")),
                word(names.combination(case, state.running, state.new)),
                display.cell("flow", state.asked),
                display.cell("head", run.header[row, place]),
                display.cell("flow", run.total[row, place]),
            ]
            for column in np.flatnonzero(run.conditions.runs[place]):
                at = (row, place, int(column))
                rows.append(
                    [
                        *first,
                        word(names.pump(case, int(column))),
                        flow_cell(display, run, place, int(column), row),
                        percent(run.flow[at] / in_state(run.bounds.best, place)[row, column]),
                        percent(in_state(run.bounds.speed, place)[row, column], 1),
                        display.cell("head", run.head[at]),
                        display.cell("power", run.power[at]),
                        percent(run.efficiency[at], 1),
                        display.cell("npsh", run.npsh_available[at]),
                        display.cell("npsh", run.npsh_required[at]),
                    ]
                )
    return Table(columns, rows, [NOTE])


def _energy(bench: Bench, display: Display, again: Judged, called: Sequence[str]) -> Table:
    """Energy of each pump in each duty of the best candidates, and of all of them in a year."""
    case, run = bench.header.case, again.run
    columns = [
        Column("pump", "candidate", left=True),
        Column("diameter", "diameter", display.unit("length")),
        Column("duty", "duty", left=True),
        Column("hours", "hours", "h/y"),
        Column("of", "of", left=True),
        Column("pumps", "pumps"),
        Column("power", "power of each", display.unit("power")),
        Column("energy_mwh_per_year", "energy", "MWh/y"),
    ]
    drives = [case.new_pump.drive, *(pump.drive for pump in case.installed)]
    hours = run.conditions.hours * run.conditions.share_of_hours
    rows = []
    for row, name in enumerate(called):
        first = [word(name), display.cell("length", again.candidates.diameter[row])]
        for place, state in enumerate(bench.header.states):
            if state.kind != Kind.DUTY:
                continue
            for column in np.flatnonzero(run.conditions.runs[place]):
                count = 1 if column else case.new_pump.count
                loss = drives[column].motor_efficiency * drives[column].drive_efficiency
                power = float(run.power[row, place, column]) / loss
                rows.append(
                    [
                        *first,
                        word(names.where(case, state)),
                        plain(float(hours[place]), 0),
                        word(names.pump(case, int(column))),
                        plain(count, 0),
                        display.cell("power", power),
                        plain(count * power * float(hours[place]) / 1e6, 1),
                    ]
                )
        year = float(again.candidates.figures.energy[row]) / 3.6e9
        total = [*first, word("every duty"), word(""), word("all pumps"), word(""), word(""), plain(year, 1)]
        rows.append([Cell(cell.text, cell.value, Tone.QUIET) for cell in total])
    note = [
        "Power at the shaft, or taken from the supply by pumps whose motor or drive efficiency is stated."
    ]
    return Table(columns, rows, note)


def _limits(bench: Bench, display: Display) -> Table:
    """Every limit used."""
    columns = [
        Column("criterion", "criterion", left=True),
        Column("limit", "limit", left=True),
        Column("value", "value"),
        Column("unit", "unit", left=True),
        Column("source", "source", left=True),
    ]
    rows = []
    for item in data.limits(bench, display):
        value = item["value"]
        words = [word(item[key]) for key in ("criterion", "limit", "unit", "source")]
        rows.append([*words[:2], Cell(DASH if value is None else f"{value:g}", value), *words[2:]])
    return Table(columns, rows, [f"{DASH}: no such limit."])


def _inputs(origin: Origin) -> Table:
    """Files that were read."""
    columns = [Column("file", "file", left=True), Column("sha256", "sha256", left=True)]
    return Table(columns, [[word(file), word(digest)] for file, digest in origin.files])
