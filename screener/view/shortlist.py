"""The screen of `screener shortlist`: the requirement, the ranked table, and why the rest does not pass."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from screener.model.finding import Outcome, Verdict
from screener.screening.reach import Reason
from screener.screening.shortlist import RestoredAlone, Shortlist
from screener.screening.today import naive
from screener.view import data, names, requirement, why_not
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.display import DASH, Display, percent, plain, tidy, word
from screener.view.findings import found, sentence, worst_first
from screener.view.why_not import ranked_cells

if TYPE_CHECKING:
    from screener.changes.near import Near
    from screener.view.closer import Nearer

TOP = 10
RANKED = "ACCEPTED, BY SCORE"


def screen(
    result: Shortlist,
    origin: Origin,
    *,
    top: int = TOP,
    everything: bool = False,
    near: Near | None = None,
) -> Screen:
    """The shortlist as blocks, its ranked table, and all of it as data.

    top  : rows shown of each group;  everything : all rows, and every model that cannot reach the duty
    near : a closer look at the rows shown
    """
    case = result.bench.header.case
    display = Display(case.display)
    groups = {verdict: np.flatnonzero(result.best.verdict == verdict) for verdict in Verdict}
    shown = len(result.best) if everything else top
    words = _nearer(result, display, near)
    accepted = groups[Verdict.ACCEPTED]
    blocks: list[Block] = [
        Heading(case.title, f"{len(result.table)} models, {len(result.bench.header.states)} states"),
        Lines([_requirement(result, display), _counts(result, groups)]),
    ]
    if accepted.size:
        blocks += [
            Heading(RANKED, _more(accepted, shown)),
            _ranked(result, display, accepted[:shown], words),
        ]
    else:
        blocks += [Heading("NOTHING IS ACCEPTED"), _ranked(result, display, accepted, words)]
    blocks += why_not.most_efficient(result, display, groups)
    conditional = groups[Verdict.CONDITIONAL]
    if conditional.size:
        blocks += [
            Heading("CONDITIONAL: NOTHING FAILED, SOMETHING IS NOT KNOWN", _more(conditional, shown)),
            why_not.conditional(result, display, conditional[:shown], words),
        ]
    rejected = groups[Verdict.REJECTED]
    if rejected.size:
        blocks += [
            Heading("REJECTED, NEAREST FIRST", _more(rejected, shown)),
            why_not.rejected(result, display, rejected[:shown], everything, words),
        ]
    blocks += why_not.out_of_reach(result, display, everything)
    blocks.append(Lines(_notes(result, display), Tone.QUIET))
    blocks.append(Lines(data.CAUTIONS, Tone.QUIET))
    flat = _flat(result, display, words)
    content = _data(result, display, origin, groups, words, everything=everything)
    return Screen(
        blocks,
        flat,
        content,
        charts=lambda: _charts(result),
        sheets=lambda: _sheets(result, display, origin, words),
    )


def _sheets(
    result: Shortlist, display: Display, origin: Origin, words: Mapping[int, Nearer]
) -> list[tuple[str, Table]]:
    """Further tables, under their heading where they hold more rows of a table; loaded only here."""
    from screener.view.sheets import sheets

    accepted = np.flatnonzero(result.best.verdict == Verdict.ACCEPTED)
    ranked = [(RANKED, _ranked(result, display, accepted, words))] if accepted.size else []
    return [*ranked, *sheets(result, origin)]


def _charts(result: Shortlist) -> list[Chart]:
    from screener.view.charts import trade_off

    found = trade_off.chart(result)
    return [found] if found else []


def _nearer(result: Shortlist, display: Display, near: Near | None) -> Mapping[int, Nearer]:
    """The closer look by row of the best candidates; nothing of it is loaded where there was none."""
    if near is None:
        return {}
    from screener.view.closer import nearer

    return nearer(result.bench, display, near, result.best.verdict)


def _requirement(result: Shortlist, display: Display) -> str:
    header = result.bench.header
    need, simple = result.needs[header.rated], naive(result.bench, header.rated)
    where = names.where(header.case, header.states[header.rated])
    if np.isnan(need.flow):
        return f"Required of the new pump: not known at {where}: an installed pump would run past its data."
    missing = ""
    if np.isfinite(simple.missing_flow):
        missing = f" (the flow missing today is {display.text('flow', simple.missing_flow)})"
    return (
        f"Required of the new pump: {display.full('flow', need.flow)} at {display.full('head', need.head)}, "
        f"{where}{missing}."
    )


def _counts(result: Shortlist, groups: dict[Verdict, Any]) -> str:
    beyond = int((result.reach.reason != Reason.REACHES).sum())
    return (
        f"{groups[Verdict.ACCEPTED].size} accepted, {groups[Verdict.CONDITIONAL].size} conditional, "
        f"{groups[Verdict.REJECTED].size} near misses, {beyond} cannot reach the duties."
    )


def _more(rows: Any, shown: int) -> str:
    return f"{len(rows) - shown} more: --top or --all" if len(rows) > shown else ""


def _ranked(result: Shortlist, display: Display, rows: Any, words: Mapping[int, Nearer]) -> Table:
    """The ranked table, with one more of each kind of installed pump under it."""
    columns = [
        Column("rank", ""),
        Column("pump", "pump", left=True),
        Column("diameter", display.unit("length")),
        Column("score", "score"),
        Column("efficiency", "eff %", "%"),
        Column("energy_mwh_per_year", "MWh/y", rank=2),
        Column("shutoff_match", "shutoff %", "%"),
        Column("load_share", "share", "%", rank=1),
        Column("lowest_flow_of_best", "% BEP", "%", rank=3),
        Column("npsh_ratio", "NPSH", rank=4),
        Column("motor", display.unit("power"), display.unit("power"), rank=5),
        Column("energy_kwh_per_m3", "kWh/m3", rank=6),
        Column("firm_flow", "firm %", "%", rank=7),
        Column("cautions", "cautions", rank=8),
        Column("restored", "installed as new", left=True, rank=1 if result.restored is not None else 9),
        *(why_not.HOLDS if words else ()),
    ]
    table = [
        [
            plain(number + 1, 0),
            word(result.table.ids[int(result.best.model[row])]),
            *ranked_cells(result.best, display, row),
            _as_new(result, int(row)),
            *why_not.holds(words, row),
        ]
        for number, row in enumerate(rows)
    ]
    case = result.bench.header.case
    for row, installed in enumerate(result.same_as):
        failed = result.references.verdict[row] == Verdict.REJECTED
        label = f"one more {case.installed[installed].tag}" + (" (fails)" if failed else "")
        cells = [word("="), word(label), *ranked_cells(result.references, display, row)]
        cells += [word("")] * (len(columns) - len(cells))
        table.append([Cell(cell.text, cell.value, Tone.QUIET) for cell in cells])
    if result.alone is not None:
        cells = [word("="), word(_restored_alone(result.alone)), *_alone_cells(result.alone)]
        cells += [word("")] * (len(columns) - len(cells))
        table.append([Cell(cell.text, cell.value, Tone.QUIET) for cell in cells])
    note = [
        *_references_fail(result, display),
        f"eff: useful head of the system over {data.energy_words(case)}, all pumps. share: load-share "
        "difference, points. % BEP: lowest flow over best efficiency, any pump in any duty. NPSH: lowest "
        "NPSHa/NPSHr, trips included.",
        *([why_not.HOLDS_NOTE] if words else []),
    ]
    return Table(columns, table, note)


def _as_new(result: Shortlist, row: int) -> Cell:
    """Verdict and score of a candidate beside installed pumps as new."""
    if result.restored is None:
        return word("")
    verdict = data.VERDICTS[Verdict(int(result.restored.verdict[row]))]
    figures = result.restored.figures
    match = percent(figures.shutoff[row], 1, sign=True).text
    return word(f"{verdict} {plain(float(figures.score[row]), 1).text}, shutoff {match} %")


def _restored_alone(alone: RestoredAlone) -> str:
    return "all restored, no new" + ("" if alone.meets else " (short)")


def _alone_cells(alone: RestoredAlone) -> list[Cell]:
    """Efficiency and energy, where every duty gets what it asks; else they compare with nothing."""
    efficiency = float(alone.figures.efficiency[0]) if alone.meets else np.nan
    energy = float(alone.figures.energy[0]) if alone.meets else np.nan
    return [Cell(DASH), Cell(DASH), percent(efficiency, 1), plain(energy / 3.6e9, 0)]


def _worn(result: Shortlist, display: Display) -> list[str]:
    """What the installed pumps have lost, how that was read, and what restoring them alone would give."""
    header = result.bench.header
    worn = [f"{pump.tag} {100 * pump.head_loss:.3g} %" for pump in header.case.installed if pump.head_loss]
    if not worn:
        return []
    state = header.states[header.rated]
    gives = display.full("flow", np.nan if result.alone is None else result.alone.total)
    return [
        f"Head lost since new: {', '.join(worn)}. Every verdict holds for the whole curve lower and for "
        "leakage inside the pump, the worse of the two shown; ranked figures are those of the lower curve.",
        f"Restored, and without a new pump, the installed pumps give {gives} at "
        f"{names.where(header.case, state)}, of {display.text('flow', state.asked)} asked.",
    ]


def _references_fail(result: Shortlist, display: Display) -> list[str]:
    """Why one more of an installed pump would not pass."""
    lines = []
    for row, installed in enumerate(result.same_as):
        reasons = worst_first(found(result.bench, display, result.references.findings, row))
        if reasons:
            tag = result.bench.header.case.installed[installed].tag
            text = "; ".join(sentence(reason, display, "it") for reason in reasons[:3])
            lines.append(f"One more {tag} would fail: {text}.")
    return lines


def _notes(result: Shortlist, display: Display) -> list[str]:
    """What a reader must know about the basis of the ranking."""
    case = result.bench.header.case
    notes = [*_worn(result, display), *data.trim_law_in_force(result.table)]
    if any(np.isnan(duty.hours) for duty in case.duties):
        notes.append(
            "Not every duty states its hours: duties are weighted equally, and no energy per year is given."
        )
    items = found(result.bench, display, result.inherited, 0)
    outside = [item for item in items if item.outcome == Outcome.FAIL]
    if outside:
        listed = "; ".join(f"{item.criterion.name} of {item.pump} at {item.where}" for item in outside)
        notes.append(f"Outside a limit today already, and no reason to reject a pump: {listed}.")
    if np.isfinite(case.system.fit_deviation):
        off = display.full("head", case.system.fit_deviation)
        notes.append(f"The system curve is fitted to measured points; the farthest is {off} off.")
    return notes


def _flat(result: Shortlist, display: Display, words: Mapping[int, Nearer]) -> Table:
    """Every candidate, one row each, every figure: what the csv holds."""
    items = [data.candidate(result, display, row) for row in range(len(result.best))]
    keys = data.CANDIDATE_KEYS
    columns = [
        Column("rank", "rank"),
        *(Column(key, key, FLAT_UNITS.get(key, "")) for key in keys),
        Column("reasons", "reasons", left=True),
        *((Column("would_pass_with", "would pass with", left=True), *why_not.HOLDS) if words else ()),
    ]
    rows = []
    for number, item in enumerate(items):
        failed = [f["criterion"] for f in item["findings"] if f["outcome"] == "fail"]
        cells = [Cell(_reads(key, item[key]), item[key]) for key in keys]
        change = [word(words[number].change if number in words else "")] if words else []
        more = [*change, *why_not.holds(words, number)]
        rows.append([Cell(str(number + 1), number + 1), *cells, word(" ".join(failed)), *more])
    named = {"diameter": "length", "wanted_diameter": "length", "power": "power", "motor": "power"}
    columns = [
        Column(c.key, c.title, display.unit(named[c.key]), c.left) if c.key in named else c for c in columns
    ]
    return Table(columns, rows)


def _reads(key: str, value: str | float | None) -> str:
    """A figure of one row as it is read; to as many decimals as in the ranked table."""
    if isinstance(value, float):
        decimals = FLAT_DECIMALS.get(FLAT_UNITS.get(key, key))
        return f"{value:.5g}" if decimals is None else f"{value:z.{decimals}f}"
    return value or ""


FLAT_DECIMALS = {"%": 1, "MWh/y": 0, "kWh/m3": 4, "score": 1, "restored_score": 1, "npsh_ratio": 2}
"""By unit, or by key where there is none."""

FLAT_UNITS = {
    "speed": "rpm",
    "efficiency_at_duty": "%",
    "efficiency": "%",
    "energy_mwh_per_year": "MWh/y",
    "energy_kwh_per_m3": "kWh/m3",
    "shutoff_match": "%",
    "load_share": "%",
    "lowest_flow_of_best": "%",
}


def _data(
    result: Shortlist,
    display: Display,
    origin: Origin,
    groups: dict[Verdict, Any],
    words: Mapping[int, Nearer],
    *,
    everything: bool,
) -> dict[str, Any]:
    bench, reason = result.bench, result.reach.reason
    case = bench.header.case
    listed = {
        data.VERDICTS[verdict]: [
            data.candidate(result, display, int(row))
            | ({"closer": words[int(row)].data} if int(row) in words else {})
            for row in rows
        ]
        for verdict, rows in groups.items()
    }
    return {
        **data.head(bench, "pump-shortlist", origin),
        "requirement": requirement.rows(
            bench, display, result.needs, {place: naive(bench, place) for place in result.needs}
        ),
        "counts": {
            "models": len(result.table),
            "states": len(bench.header.states),
            "candidates_run": result.screened,
            **{name: len(items) for name, items in listed.items()},
            "cannot_reach": {
                name: int((reason == code).sum())
                for code, name in data.REASONS.items()
                if (reason == code).any()
            },
        },
        **listed,
        "out_of_reach": why_not.unreached_data(result, display) if everything else [],
        "restored_alone": None
        if result.alone is None
        else {
            "total_flow": display.number("flow", result.alone.total),
            "meets_every_duty": result.alone.meets,
            "efficiency": percent(float(result.alone.figures.efficiency[0])).value,
            "energy_mwh_per_year": tidy(float(result.alone.figures.energy[0]) / 3.6e9),
        },
        "references": [
            {
                "same_as": case.installed[installed].tag,
                "verdict": data.VERDICTS[Verdict(int(result.references.verdict[row]))],
                "diameter": display.number("length", result.references.diameter[row]),
                **data.figures(bench, display, result.references, row),
            }
            for row, installed in enumerate(result.same_as)
        ],
        "inherited": [
            data.finding(item, display)
            for item in found(bench, display, result.inherited, 0)
            if item.outcome in (Outcome.FAIL, Outcome.CAUTION)
        ],
        "today": data.states(bench, display, bench.today, today=True),
        "limits": data.limits(bench, display),
        "notes": _notes(result, display),
    }
