"""The screen of `screener explain`: every state and every criterion of one pump at one diameter."""

from __future__ import annotations

from typing import Any

import numpy as np

from screener.changes.closer import Closer
from screener.model.arrays import Floats
from screener.model.finding import Outcome, Verdict
from screener.model.run import Run, in_state
from screener.screening.assess import Bench
from screener.screening.one import Explained
from screener.screening.reach import Reason
from screener.view import bypass as view_bypass
from screener.view import closer as view_closer
from screener.view import data, names
from screener.view import liquids as view_liquids
from screener.view import sampling as view_sampling
from screener.view import speeds as view_speeds
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.display import DASH, Display, percent, plain, word
from screener.view.findings import NO_FIGURES, Found, found, unit_of
from screener.view.flows import NOTE, flow_cell

VERDICT_TONES = {
    Verdict.ACCEPTED: Tone.GOOD,
    Verdict.CONDITIONAL: Tone.WARNING,
    Verdict.REJECTED: Tone.BAD,
}


def screen(closer: Closer, origin: Origin) -> Screen:
    """One pump as blocks, its table of states, and all of it as data."""
    result = closer.explained
    bench, candidates = result.bench, result.judged.candidates
    case = bench.header.case
    display = Display(case.display)
    verdict = Verdict(int(candidates.verdict[0]))
    states = _states(bench, display, result.judged.run)
    items = found(bench, display, candidates.findings, 0)
    speeds = view_speeds.of_new(bench, result.judged.run)
    blocks: list[Block] = [
        Heading(case.title, f"{len(bench.header.states)} states"),
        Lines([_pump(result, display)]),
        Lines([f"{data.VERDICTS[verdict].upper()}: {_why(items)}"], VERDICT_TONES[verdict]),
        Lines(_reached(result, display)),
        Heading(
            "EVERY STATE",
            f"flows {display.unit('flow')}, heads {display.unit('head')}, powers {display.unit('power')}",
        ),
        states,
        *_as_set(result, display),
        *view_liquids.viscous(bench, result.judged.run.pumps),
        *view_speeds.speeds(bench, speeds),
        Heading("EVERY CRITERION", "worst place of each"),
        _criteria(bench, display, items),
        *view_closer.changes(bench, display, closer.changes, verdict),
        *view_bypass.bypasses(bench, display, closer.bypasses, closer.with_bypasses),
        *view_bypass.heating(bench, display, closer.warming),
        *view_closer.corners(bench, display, closer.corners),
        *view_closer.readings(bench, display, closer.readings, result.table.sources[result.model]),
        *view_sampling.sampling(bench, display, closer.sampled),
        Lines(_figures(result, display)),
        Lines(data.CAUTIONS, Tone.QUIET),
    ]
    more = {
        "viscous": view_liquids.viscous_data(bench, result.judged.run.pumps),
        "speeds": view_speeds.speeds_data(bench, speeds),
        "bypasses": view_bypass.bypasses_data(bench, display, closer.bypasses, closer.with_bypasses),
        "heating": view_bypass.heating_data(bench, display, closer.warming),
        "changes": view_closer.changes_data(bench, display, closer.changes),
        "tolerance": view_closer.corners_data(bench, display, closer.corners, 0),
        "probability": view_sampling.sampling_data(bench, display, closer.sampled, 0),
        "reading_error": view_closer.readings_data(bench, display, closer.readings, 0),
    }
    return Screen(
        blocks, states, {**_data(result, display, origin, items), **more}, charts=lambda: _charts(result)
    )


def _charts(result: Explained) -> list[Chart]:
    """The header with the pump, the pump by itself, and how the load is shared where that is known."""
    from screener.view.charts import load_share, pump, with_new

    shares = load_share.chart(result)
    return [with_new.chart(result), pump.chart(result), *([shares] if shares else [])]


def _pump(result: Explained, display: Display) -> str:
    table, model = result.table, result.model
    pumps = result.judged.run.pumps
    title = table.titles[model] if table.titles[model] != table.ids[model] else ""
    parts = [table.ids[model], title, table.constructions[model]]
    if np.isfinite(pumps.diameter[0]):
        parts.append(f"impeller {display.full('length', pumps.diameter[0])}")
        parts.append(_tested(float(pumps.from_test[0])))
    parts += [
        f"{pumps.speed[0]:.0f} rpm",
        f"curve: {table.sources[model]}" if table.sources[model] else "no source of the curve stated",
    ]
    return ", ".join(part for part in parts if part)


def _tested(distance: float) -> str:
    return "as tested" if distance < 1e-9 else f"trimmed, {100 * distance:.1f} % from the nearest test"


def _why(items: list[Found]) -> str:
    failed = [item.criterion.name for item in items if item.outcome == Outcome.FAIL]
    unknown = [
        item.criterion.name for item in items if item.outcome == Outcome.NOT_ASSESSED and item.criterion.gates
    ]
    if failed:
        return f"{len(failed)} of {len(items)} criteria fail: {', '.join(failed)}."
    if unknown:
        return f"nothing fails, but not assessed: {', '.join(unknown)}."
    cautions = [item.criterion.name for item in items if item.outcome == Outcome.CAUTION]
    return f"nothing fails; cautions: {', '.join(cautions)}." if cautions else "nothing fails, no caution."


def _reached(result: Explained, display: Display) -> list[str]:
    """From which diameter on the duties are met, and at which the pump passes."""
    wanted = float(result.reach.wanted[result.model])
    lines = []
    if Reason(int(result.reach.reason[result.model])) != Reason.REACHES:
        lines.append(_out_of_reach(result, display))
    elif np.isfinite(wanted):
        lines.append(f"From {display.full('length', wanted)} on it meets every duty.")
    if len(result.steps) > 1:
        least, most = display.text("length", result.steps[0]), display.full("length", result.steps[-1])
        lines.append(
            f"Offered from {least} to {most}; {passing(result.passing, result.steps, result.open, display)}."
        )
    if result.bench.others:
        lines.append(
            "Installed pumps are worn: criteria hold for both readings of that, states show the lower curves."
        )
    return lines


def _out_of_reach(result: Explained, display: Display) -> str:
    """Why the pump cannot reach the duties, at its largest impeller."""
    reach, model = result.reach, result.model
    text = f"It cannot reach the duties: {data.REASONS[Reason(int(reach.reason[model]))]}."
    flow, head, needed = (float(values[model]) for values in (reach.flow, reach.head, reach.needed))
    if not np.isfinite(flow):
        return text
    end = display.full("flow", float(reach.end[model]))
    gives = f"it gives {display.full('head', head)}" if np.isfinite(head) else f"its curve ends at {end}"
    need = f"At {display.full('flow', flow)} {display.full('head', needed)} are needed"
    return f"{text} {need}; at its largest impeller {gives}."


def passing(accepted: Floats, steps: Floats, conditional: int, display: Display) -> str:
    """The diameters that pass, as ranges: "395 to 400 mm pass"."""
    if not accepted.size:
        return (
            f"no diameter is accepted, {conditional} are conditional" if conditional else "no diameter passes"
        )
    inside = np.isin(steps, accepted)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], inside.astype(np.int64), [0]])))
    ranges = []
    for first, last in zip(edges[::2], edges[1::2] - 1, strict=True):
        low, high = display.text("length", steps[first]), display.text("length", steps[last])
        ranges.append(low if low == high else f"{low} to {high}")
    return f"{' and '.join(ranges)} {display.unit('length')} pass"


def _states(bench: Bench, display: Display, run: Run) -> Table:
    """One row for each state; flows of every pump, the new one first."""
    case = bench.header.case
    columns = [
        Column("state", "state", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("liquid", "liquid", left=True, rank=3 if len(case.liquids) > 1 else 9),
        Column("header_head", "header", display.unit("head")),
        Column("total_flow", "total", display.unit("flow"), rank=3),
        *(
            Column(
                f"flow {names.pump(case, c)}",
                names.pump(case, c),
                display.unit("flow"),
                rank=0 if c < 3 else 6,
            )
            for c in range(run.flow.shape[2])
        ),
        Column("flow_of_best", "% BEP", "%", rank=1),
        Column("npsh_ratio", "NPSH", rank=1),
        Column("lowest_npsh_ratio", "lowest", rank=5),
        Column("power", display.unit("power"), display.unit("power"), rank=2),
        Column("efficiency", "eff %", "%", rank=4),
    ]
    rows = []
    for place, state in enumerate(bench.header.states):
        flow = run.flow[0, place]
        margins = run.npsh_available[0, place] / run.npsh_required[0, place]
        rows.append(
            [
                word(names.situation(case, state)),
                word(names.level(case, state)),
                word(names.liquid(case, state)),
                display.cell("head", run.header[0, place]),
                display.cell("flow", run.total[0, place]),
                *(_flow(display, run, place, column) for column in range(len(flow))),
                percent(flow[0] / in_state(run.bounds.best, place)[0, 0])
                if np.isfinite(flow[0])
                else Cell(DASH),
                plain(margins[0], 2),
                plain(float(np.fmin.reduce(margins)), 2),
                display.cell("power", run.power[0, place, 0]),
                percent(run.efficiency[0, place, 0], 1),
            ]
        )
    note = [
        "% BEP, NPSH (available over required), power and efficiency are the new pump's; lowest: NPSH of any "
        f"pump. {NOTE}"
    ]
    return Table(columns, rows, note)


def _as_set(result: Explained, display: Display) -> list[Block]:
    """Trips with the users' valves left as the duty had set them."""
    if not result.as_set:
        return []
    header = result.bench.header
    case = header.case
    pumps = range(1 + len(case.installed))
    columns = [
        Column("state", "state", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("header_head", "header", display.unit("head")),
        Column("total_flow", "total", display.unit("flow")),
        *(Column(f"flow {names.pump(case, p)}", names.pump(case, p), rank=0 if p < 3 else 6) for p in pumps),
    ]
    rows = []
    for item in result.as_set:
        state = header.states[item.state]
        rows.append(
            [
                word(f"{names.situation(case, state)}, {case.installed[item.lost].tag} lost"),
                word(names.level(case, state)),
                display.cell("head", item.header),
                display.cell("flow", item.total),
                *(Cell("shut", 0.0) if value == 0 else display.cell("flow", value) for value in item.flow),
            ]
        )
    return [Heading("AFTER A TRIP, VALVES AS THEY WERE", "for information, no verdict"), Table(columns, rows)]


def _flow(display: Display, run: Run, place: int, column: int) -> Cell:
    """Flow of one pump, "off" where it does not run."""
    if not run.conditions.runs[place, column]:
        return Cell("off", None, Tone.QUIET)
    return flow_cell(display, run, place, column)


def _criteria(bench: Bench, display: Display, items: list[Found]) -> Table:
    columns = [
        Column("criterion", "criterion", left=True),
        Column("outcome", "verdict", left=True),
        Column("observed", "is"),
        Column("limit", "limit"),
        Column("pump", "of", left=True, rank=1),
        Column("where", "where", left=True),
        Column("source", "limit from", left=True, rank=4),
    ]
    rows = []
    for item in sorted(items, key=lambda item: (-item.outcome, _silent(item))):
        missing = item.outcome == Outcome.NOT_ASSESSED
        if _silent(item):
            rows.append([word(item.criterion.name), Cell("n/a", "pass", Tone.QUIET), *[word("")] * 5])
            continue
        rows.append(
            [
                word(item.criterion.name),
                Cell("unknown", item.verdict.value, item.verdict.tone) if missing else item.verdict,
                _with_unit(item, display),
                item.limit if not missing else Cell(DASH),
                word(item.pump),
                word(_missing(item) if missing else item.where + (", so today" if item.already else "")),
                word(_source(bench, item)),
            ]
        )
    return Table(columns, rows)


def _silent(item: Found) -> bool:
    """Whether a criterion has nothing to say about this pump on this header."""
    return item.outcome == Outcome.PASS and item.value.value is None


def _missing(item: Found) -> str:
    return f"no figures, {item.where}" if item.needs == NO_FIGURES else f"needs {item.needs}"


def _with_unit(item: Found, display: Display) -> Cell:
    unit = unit_of(item.criterion, display)
    said = item.value.value is None or not unit
    return Cell(item.value.text if said else f"{item.value.text} {unit}", item.value.value, item.value.tone)


def _source(bench: Bench, item: Found) -> str:
    """Where the limit that decided comes from."""
    used = bench.limits[item.criterion.name]
    changed = [name for name, limit in item.criterion.limits.items() if used[name] != limit.default]
    if changed:
        return "the case"
    bound = "fail" if item.outcome == Outcome.FAIL else "caution"
    named = [limit.source for name, limit in item.criterion.limits.items() if name.startswith(bound)]
    return (named or [limit.source for limit in item.criterion.limits.values()])[0]


def _figures(result: Explained, display: Display) -> list[str]:
    f = data.figures(result.bench, display, result.judged.candidates, 0)
    text, energy = [], data.energy_words(result.bench.header.case)
    if f["efficiency"] is not None:
        text.append(f"Useful head over {energy} of all pumps {f['efficiency']:.1f} %")
    if f["energy_mwh_per_year"] is not None:
        text.append(f"{f['energy_mwh_per_year']:.0f} MWh of {energy} a year")
        text.append(f"{f['energy_kwh_per_m3']:.4f} kWh/m3")
    if f["motor"] is not None:
        text.append(f"motor {f['motor']:g} {display.unit('power')}")
    trips = [
        f"{trip['delivered']:.0f} % at {trip['state']}"
        for trip in f["firm_flow"]
        if trip["delivered"] is not None
    ]
    lines = [text[0][0].upper() + ", ".join(text)[1:] + "."] if text else []
    return lines + ([f"Firm flow, of what the duty asks: {'; '.join(trips)}."] if trips else [])


def _data(result: Explained, display: Display, origin: Origin, items: list[Found]) -> dict[str, Any]:
    bench, table, model = result.bench, result.table, result.model
    candidates = result.judged.candidates
    reason = Reason(int(result.reach.reason[model]))
    return {
        **data.head(bench, "pump-explanation", origin),
        "pump": table.ids[model],
        "construction": table.constructions[model],
        "source": table.sources[model],
        "diameter": display.number("length", candidates.diameter[0]),
        "speed": float(result.judged.run.pumps.speed[0]),
        "verdict": data.VERDICTS[Verdict(int(candidates.verdict[0]))],
        "cannot_reach": None if reason == Reason.REACHES else data.REASONS[reason],
        "wanted_diameter": display.number("length", float(result.reach.wanted[model])),
        "passing_diameters": [display.number("length", value) for value in result.passing],
        **data.figures(bench, display, candidates, 0),
        "states": data.states(bench, display, result.judged.run),
        "findings": [data.finding(item, display) for item in items],
        "limits": data.limits(bench, display),
    }
