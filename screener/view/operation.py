"""The screen of `screener operation`: which pumps to run in each duty, and which may run at which flow."""

from __future__ import annotations

from typing import Any

import numpy as np

from screener.changes.combination import BREACHES, Ran
from screener.changes.operation import Choice, Operation
from screener.view import data, names, operating_map
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.display import DASH, Display, tidy, word

OPERATOR = (
    "Which pumps run is the operator's to decide: nothing here switches or controls a pump. Starts, wear and "
    "standby are not counted."
)


def screen(result: Operation, origin: Origin) -> Screen:
    """Combinations by duty and by header flow as blocks, the duties as the table, and all of it as data."""
    case = result.bench.header.case
    display = Display(case.display)
    blocks: list[Block] = [
        Heading(case.title, _subject(result, display)),
        Heading("CHEAPEST COMBINATION IN EACH DUTY", f"{result.tried} tried, within limits"),
        _choices(result, display),
        Lines(_remarks(result), Tone.WARNING),
        Lines(_saved(result), Tone.GOOD),
    ]
    if result.explained:
        blocks += [Heading("THE SAME WITHOUT THE NEW PUMP"), _without(result, display)]
    blocks += [
        Heading("HEADER FLOW THAT EACH COMBINATION MAY RUN AT", "throttled"),
        operating_map.ranges(result, display),
        Heading("OPERATING MAP", f"header flow in {display.unit('flow')}, throttled"),
        operating_map.table(result, display),
        Lines([OPERATOR, *data.CAUTIONS], Tone.QUIET),
    ]
    content = _data(result, display, origin)
    return Screen(blocks, _flat(result, display), content, charts=lambda: _charts(result))


def _charts(result: Operation) -> list[Chart]:
    """The operating map as a chart, made only when asked for."""
    from screener.view.charts import operating_map as chart

    return [chart.chart(result)]


def _subject(result: Operation, display: Display) -> str:
    if result.explained is None:
        return "as it is, without the new pump"
    pumps = result.explained.judged.run.pumps
    diameter = f", {display.full('length', pumps.diameter[0])}" if np.isfinite(pumps.diameter[0]) else ""
    count = result.bench.header.case.new_pump.count
    number = f"{count} x " if count > 1 else ""
    return f"new: {number}{result.explained.table.ids[result.explained.model]}{diameter}"


def _power_means(result: Operation) -> str:
    """What the power is, by the efficiencies that the case states."""
    kind = _power_kind(result)
    if kind == "shaft":
        return "shaft power of all pumps together, no efficiency of a motor or drive being stated"
    if kind == "supply":
        return "power of all pumps together that motors and drives take from the supply"
    return "power of all pumps together, from the supply where efficiencies are stated, else at the shaft"


def _power_kind(result: Operation) -> str:
    return data.power_is(result.bench.header.case, new=bool(result.explained))


def _together(result: Operation, ran: Ran | None) -> str:
    return "" if ran is None else names.combination(result.bench.header.case, ran.running, ran.new)


def _who(result: Operation, ran: Ran | None, *, tone: Tone = Tone.PLAIN) -> Cell:
    """A combination as a cell, without blanks to save room."""
    text = _together(result, ran)
    return Cell(text.replace(" + ", "+") or DASH, text or None, tone)


def _verdict(result: Operation, ran: Ran | None) -> Cell:
    if ran is None:
        return Cell(DASH)
    if not ran.within:
        return word(operating_map.why(result, ran), Tone.BAD)
    return word("within, open", Tone.WARNING) if ran.unknown else word("within", Tone.GOOD)


def _kw(display: Display, ran: Ran | None) -> Cell:
    return display.cell("power", np.nan if ran is None else ran.power)


def _energy(choice: Choice) -> Cell:
    kwh = choice.saved / 3.6e6
    return Cell(f"{kwh:z.0f}", tidy(kwh)) if np.isfinite(kwh) else Cell("")


def _place(result: Operation, display: Display, choice: Choice) -> list[Cell]:
    """Duty, level and flow."""
    case = result.bench.header.case
    duty = case.duties[choice.duty]
    return [word(duty.name), word(case.levels[choice.level].name), display.cell("flow", duty.flow)]


def _place_columns(result: Operation, display: Display) -> list[Column]:
    several = len(result.bench.header.case.levels) > 1
    return [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True, rank=0 if several else 9),
        Column("flow", "flow", display.unit("flow"), rank=1),
    ]


def _choices(result: Operation, display: Display) -> Table:
    power = display.unit("power")
    columns = [
        *_place_columns(result, display),
        Column("asked", "as asked", left=True),
        Column("asked_power", power, power),
        Column("asked_limits", "limits", left=True),
        Column("cheapest", "cheapest", left=True),
        Column("power", power, power),
        Column("saved", "kWh/y less", "kWh/y"),
    ]
    rows = []
    for choice in result.choices:
        best = choice.best if choice.best.within else None
        rows.append(
            [
                *_place(result, display, choice),
                _who(result, choice.asked),
                _kw(display, choice.asked),
                _verdict(result, choice.asked),
                _who(result, best) if best else word("none", Tone.BAD),
                _kw(display, best),
                _energy(choice),
            ]
        )
    note = [
        f"{power}: {_power_means(result)}. kWh/y less: than as asked, over the hours of the duty, split "
        "evenly over its levels; blank without hours, or where what is asked does not give the flow.",
        *operating_map.meanings({c.asked.breach for c in result.choices if c.asked}),
    ]
    return Table(columns, rows, note)


def _remarks(result: Operation) -> list[str]:
    """Duties for which nothing is within limits, and what could not be judged."""
    case = result.bench.header.case
    lines, unknown = [], {}
    for choice in result.choices:
        best = choice.best
        name = case.duties[choice.duty].name
        where = f"{name}, {case.levels[choice.level].name}" if len(case.levels) > 1 else name
        if not best.within:
            criterion = BREACHES[best.breach].criterion
            lines.append(
                f"No combination is within limits at {where}. The least outside is "
                f"{_together(result, best)}: {operating_map.why(result, best)} "
                f"({criterion}{_by_how_much(best)})."
            )
        elif best.unknown:
            unknown[_together(result, best)] = ", ".join(best.unknown)
    lines += [f"Not known, so not judged for {who}: {what}." for who, what in unknown.items()]
    return list(dict.fromkeys(lines))


def _by_how_much(ran: Ran) -> str:
    return f", {100 * ran.shortfall:.1f} % outside" if np.isfinite(ran.shortfall) else ""


def _saved(result: Operation) -> list[str]:
    known = [choice.saved for choice in result.choices if np.isfinite(choice.saved)]
    total = sum(known) / 3.6e6
    if total < 0.5:
        return []
    energy = "shaft energy" if _power_kind(result) == "shaft" else "energy"
    return [f"In all {total:.0f} kWh of {energy} a year less than as asked."]


def _without(result: Operation, display: Display) -> Table:
    power = display.unit("power")
    columns = [
        *_place_columns(result, display),
        Column("cheapest_without_new", "cheapest", left=True),
        Column("power_without_new", power, power),
        Column("limits_without_new", "limits", left=True),
    ]
    rows = [
        [
            *_place(result, display, choice),
            _who(result, choice.without),
            _kw(display, choice.without),
            _verdict(result, choice.without),
        ]
        for choice in result.choices
    ]
    note = operating_map.meanings({c.without.breach for c in result.choices if c.without})
    return Table(columns, list({tuple(cell.text for cell in row): row for row in rows}.values()), note)


def _flat(result: Operation, display: Display) -> Table:
    """Everything about each duty, for the csv; where nothing is within limits, the one least outside."""
    power = display.unit("power")
    columns = [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True),
        Column("flow", "flow", display.unit("flow")),
        Column("hours", "hours", "h/y"),
        *(
            column
            for key in ("asked", "cheapest", "without_new")
            for column in (
                Column(key, key, left=True),
                Column(f"{key}_power", power, power),
                Column(f"{key}_limits", "limits", left=True),
            )
        ),
        Column("saved", "saved", "kWh/y"),
    ]
    rows = []
    for choice in result.choices:
        rans = (choice.asked, choice.best, choice.without)
        hours = Cell(f"{choice.hours:.0f}", tidy(choice.hours)) if np.isfinite(choice.hours) else Cell("")
        figures = [
            cell for ran in rans for cell in (_who(result, ran), _kw(display, ran), _verdict(result, ran))
        ]
        rows.append([*_place(result, display, choice), hours, *figures, _energy(choice)])
    return Table(columns, rows)


def _data(result: Operation, display: Display, origin: Origin) -> dict[str, Any]:
    explained = result.explained
    return {
        **data.head(result.bench, "pump-operation", origin),
        "pump": explained.table.ids[explained.model] if explained else None,
        "diameter": display.number("length", explained.judged.run.pumps.diameter[0]) if explained else None,
        "motor": display.number("power", result.motor),
        "power_is": _power_kind(result),
        "tried": result.tried,
        "duties": [_choice(result, display, choice) for choice in result.choices],
        "map": operating_map.as_data(result, display),
        "limits": data.limits(result.bench, display),
    }


def _choice(result: Operation, display: Display, choice: Choice) -> dict[str, Any]:
    case = result.bench.header.case
    return {
        "duty": case.duties[choice.duty].name,
        "level": case.levels[choice.level].name,
        "flow": display.number("flow", case.duties[choice.duty].flow),
        "hours": tidy(choice.hours),
        "asked": _ran(result, display, choice.asked),
        "cheapest": _ran(result, display, choice.best if choice.best.within else None),
        "least_outside": _ran(result, display, None if choice.best.within else choice.best),
        "without_new": _ran(result, display, choice.without),
        "saved_kwh_per_year": tidy(choice.saved / 3.6e6),
    }


def _ran(result: Operation, display: Display, ran: Ran | None) -> dict[str, Any] | None:
    if ran is None:
        return None
    return {
        "running": _together(result, ran),
        "header_head": display.number("head", ran.header),
        "total_flow": display.number("flow", ran.total),
        "power": display.number("power", ran.power),
        "allowed": ran.within,
        "outside": None if ran.within else operating_map.broken(result, ran, None),
        "not_assessed": list(ran.unknown),
    }
