"""The bypass that each pump needs, and how warm pumps get at low flow: to blocks and data."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from screener.changes.bypass import Governs, Need, Warming
from screener.model.finding import Verdict
from screener.screening.assess import Bench
from screener.view import names
from screener.view.blocks import Block, Cell, Column, Heading, Lines, Table, Tone
from screener.view.data import VERDICTS
from screener.view.display import DASH, Display, percent, plain, tidy, word

GOVERNS = {Governs.STABLE: "stable", Governs.THERMAL: "thermal", Governs.CURVE: "curve"}

_MEGAWATT_HOUR = 3.6e9  # J


def bypasses(bench: Bench, display: Display, needs: Sequence[Need], verdict: Verdict | None) -> list[Block]:
    """What each pump must take back where it gets too little; nothing where no pump does.

    verdict : of the pump with all of these bypasses, by running it again; None where that was not done
    """
    if not needs:
        return []
    blocks: list[Block] = [
        Heading("BYPASS THAT EACH PUMP NEEDS", "at the pump, upstream of its check valve"),
        _bypass_table(bench, display, needs),
    ]
    lines = [
        f"{names.pump(bench.header.case, need.pump)} would deliver nothing at {_where(bench, need.state)}: "
        "better run fewer pumps there."
        for need in needs
        if need.idle
    ]
    if verdict is not None:
        lines.append(f"With these bypasses, run again in full, it is {VERDICTS[verdict]}.")
    return [*blocks, Lines(lines)] if lines else blocks


def _bypass_table(bench: Bench, display: Display, needs: Sequence[Need]) -> Table:
    case = bench.header.case
    flow, bores = display.unit("flow"), any(need.bore is not None for need in needs)
    columns = [
        Column("state", "duty", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("pump", "pump", left=True),
        Column("flow", "flow now", flow),
        Column("minimum", "kept at", flow),
        Column("governs", "by", left=True, rank=3),
        Column("bypass", "bypass", flow),
        Column("head", "head to burn", display.unit("head")),
        Column("power", display.unit("power"), display.unit("power"), rank=1),
        Column("energy", "MWh/y", "MWh/y", rank=2),
        *([Column("bore", "bore", display.unit("length"), rank=4)] if bores else []),
    ]
    rows = []
    for need in needs:
        state, known = bench.header.states[need.state], np.isfinite(need.bypass)
        row = [
            word(names.situation(case, state)),
            word(names.level(case, state)),
            word(names.pump(case, need.pump)),
            Cell("shut", 0.0, Tone.BAD) if need.flow == 0 else display.cell("flow", need.flow, Tone.BAD),
            display.cell("flow", need.minimum),
            word(GOVERNS[need.governs] if known else "not stated"),
            display.cell("flow", need.bypass, Tone.WARNING if need.idle else Tone.PLAIN),
            display.cell("head", need.head),
            display.cell("power", need.power, decimals=1),
            plain(need.energy / _MEGAWATT_HOUR, 1),
        ]
        if bores:
            row.append(Cell(DASH) if need.bore is None else display.cell("length", need.bore))
        rows.append(row)
    return Table(columns, rows, _bypass_note(display, needs, bores))


def _bypass_note(display: Display, needs: Sequence[Need], bores: bool) -> list[str]:
    note = [
        "Tap it at the pump, upstream of its check valve: a bypass on the header does nothing for a pump "
        "that is held shut. Taken back to the suction vessel it comes through the common suction line again "
        "and counts in NPSH available, as it does in these figures; taken back behind that line it does not.",
        "By: the stable or the thermal minimum flow, whichever is larger; curve where the falling side or "
        "the data of its curve begin later. Head to burn: the pump's own at that flow; the return line "
        "burns some of it. Power: the bypass's share of the shaft power at that flow.",
    ]
    if bores:
        sizes = {display.text("length", need.pipe) for need in needs if need.bore is not None}
        note.append(
            "Bore: of one sharp-edged plate whose permanent loss is that head, by ISO 5167-2, in a pipe of "
            f"{' or '.join(sorted(sizes, key=float))} {display.unit('length')} inside; a dash where the "
            "standard does not reach. Flashing and cavitation in the plate are not checked."
        )
    elif any(np.isfinite(need.bypass) for need in needs):
        note.append("For the bore of an orifice plate: pip install 'pump-header-screener[orifice]'.")
    return note


def bypasses_data(
    bench: Bench, display: Display, needs: Sequence[Need], verdict: Verdict | None
) -> dict[str, Any]:
    """The same as data: the verdict with all bypasses (None where not tried), and one row a pump and duty."""
    case = bench.header.case
    return {
        "verdict": None if verdict is None else VERDICTS[verdict],
        "pumps": [
            {
                "state": _where(bench, need.state),
                "duty": case.duties[bench.header.states[need.state].duty].name,
                "level": names.level(case, bench.header.states[need.state]),
                "pump": names.pump(case, need.pump),
                "flow": display.number("flow", need.flow),
                "kept_at": display.number("flow", need.minimum),
                "governs": GOVERNS[need.governs] if np.isfinite(need.bypass) else None,
                "bypass": display.number("flow", need.bypass),
                "delivers_nothing": need.idle,
                "head": display.number("head", need.head),
                "power": display.number("power", need.power),
                "energy_mwh_per_year": tidy(need.energy / _MEGAWATT_HOUR),
                "pipe": display.number("length", need.pipe),
                "bore": None if need.bore is None else display.number("length", need.bore),
            }
            for need in needs
        ],
    }


def heating(bench: Bench, display: Display, items: Sequence[Warming]) -> list[Block]:
    """How warm pumps get that have little more than their minimum flow, or none; nothing where all have."""
    if not items:
        return []
    case = bench.header.case
    columns = [
        Column("state", "state", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("pump", "pump", left=True),
        Column("flow", "flow", display.unit("flow")),
        Column("share", "% of minimum", "%"),
        Column("rise", "warmer by", "K"),
        Column("eye", "boils, eye", "min"),
        Column("casing", "boils, casing", "min"),
        Column("needs", "", left=True, rank=1),
    ]
    rows = [
        [
            word(names.situation(case, bench.header.states[item.state])),
            word(names.level(case, bench.header.states[item.state])),
            word(names.pump(case, item.pump)),
            Cell("shut", 0.0, Tone.BAD) if item.flow == 0 else display.cell("flow", item.flow),
            percent(item.share),
            plain(item.rise, 1),
            plain(item.eye / 60, 1),
            plain(item.casing / 60, 1),
            word(f"needs {', '.join(item.needs)}" if item.needs else ""),
        ]
        for item in items
    ]
    note = [
        "Warmer by: of the liquid that passes, from head and efficiency at that flow. Boils: how long a pump "
        "that is held shut may run dead-headed before its water boils, at the pressure of the suction (eye "
        "of the impeller) and of shutoff (casing); only the liquid in the casing is warmed, which is on the "
        "safe side. A dash where that is not known, or where water would boil above 200 degC only."
    ]
    return [
        Heading("HOW WARM PUMPS GET AT LOW FLOW", "in every state, as it is run"),
        Table(columns, rows, note),
    ]


def heating_data(bench: Bench, display: Display, items: Sequence[Warming]) -> list[dict[str, Any]]:
    """The same as data."""
    case = bench.header.case
    return [
        {
            "state": _where(bench, item.state),
            "pump": names.pump(case, item.pump),
            "flow": display.number("flow", item.flow),
            "flow_of_minimum": percent(item.share).value,
            "temperature_rise_k": tidy(item.rise),
            "boils_at_suction_pressure_s": tidy(item.eye),
            "boils_at_shutoff_pressure_s": tidy(item.casing),
            "needs": list(item.needs),
        }
        for item in items
    ]


def _where(bench: Bench, state: int) -> str:
    return names.where(bench.header.case, bench.header.states[state])
