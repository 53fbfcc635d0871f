"""What a result rests on: what the case says, what was assumed, and every limit that was used."""

from __future__ import annotations

from typing import Any

import numpy as np

from screener.model.case import Control
from screener.screening.assess import Bench
from screener.view import data, names
from screener.view.blocks import Block, Cell, Column, Heading, Pairs, Table
from screener.view.display import DASH, Display, tidy, word

CONTROLS = {
    Control.THROTTLED: "throttled by the users",
    Control.OPEN: "open",
    Control.SPEED: "held by speed",
}


def blocks(bench: Bench, display: Display) -> list[Block]:
    """Duties, levels, liquids and installed pumps; assumptions in words; limits with their sources."""
    said = basis(bench, display)
    flow, head = display.unit("flow"), display.unit("head")
    duties = [
        Column("duty", "duty", left=True),
        Column("flow", "flow", flow),
        Column("control", "control", left=True),
        Column("running", "running", left=True),
        Column("levels", "levels", left=True),
        Column("liquid", "liquid", left=True, rank=1),
        Column("hours", "hours a year", "h"),
    ]
    levels = [
        Column("level", "level", left=True),
        Column("static_head", "static head", head),
        Column("suction_head", "suction head", head),
        Column("vessel_pressure", "on its surface", f"{display.unit('pressure')} gauge"),
    ]
    liquids = [
        Column("liquid", "liquid", left=True),
        Column("temperature", "temperature", "degC"),
        Column("density", "density", "kg/m3"),
        Column("viscosity_cst", "viscosity", "cSt"),
        Column("vapour_pressure_kpa", "vapour pressure", "kPa absolute"),
    ]
    pumps = [
        Column("pump", "pump", left=True),
        Column("title", "curve", left=True),
        Column("rated_flow", "rated flow", flow),
        Column("motor", "motor", display.unit("power")),
        Column("head_loss", "head lost", "%"),
    ]
    limits = [
        Column("criterion", "criterion", left=True),
        Column("limit", "limit", left=True),
        Column("value", "value"),
        Column("unit", "unit", left=True),
        Column("source", "from", left=True),
    ]
    return [
        Heading("DUTIES"),
        _table(duties, said["duties"]),
        Heading("LEVELS"),
        _table(levels, said["levels"]),
        Heading("LIQUIDS"),
        _table(liquids, said["liquids"]),
        Heading("INSTALLED PUMPS"),
        _table(pumps, said["installed"]),
        Heading("ASSUMPTIONS"),
        Pairs(_assumptions(bench, display)),
        Heading("LIMITS USED", "each from its source, or as set in the case"),
        _table(limits, data.limits(bench, display)),
    ]


def basis(bench: Bench, display: Display) -> dict[str, Any]:
    """What the case says, as data."""
    case = bench.header.case
    return {
        "duties": [
            {
                "duty": duty.name,
                "flow": display.number("flow", duty.flow),
                "control": CONTROLS[duty.control],
                "running": " or ".join(
                    names.combination(case, running, case.new_pump.count if new else 0)
                    for running, new in zip(duty.running, duty.new, strict=True)
                ),
                "levels": ", ".join(case.levels[row].name for row in duty.levels),
                "liquid": case.liquids[duty.liquid].name,
                "hours": tidy(duty.hours),
                "rated": duty.rated,
            }
            for duty in case.duties
        ],
        "levels": [
            {
                "level": level.name,
                "static_head": display.number("head", level.static_head),
                "suction_head": display.number("head", level.suction_head),
                "vessel_pressure": display.number("pressure", level.vessel_pressure),
            }
            for level in case.levels
        ],
        "liquids": [
            {
                "liquid": liquid.name,
                "temperature": tidy(liquid.temperature),
                "density": tidy(liquid.density),
                "viscosity_cst": tidy(1e6 * liquid.viscosity),
                "vapour_pressure_kpa": tidy(liquid.vapour_pressure / 1000),
            }
            for liquid in case.liquids
        ],
        "installed": [
            {
                "pump": pump.tag,
                "title": pump.title,
                "rated_flow": display.number("flow", pump.rated_flow),
                "motor": display.number("power", pump.motor),
                "head_loss": tidy(100 * pump.head_loss),
            }
            for pump in case.installed
        ],
        "atmospheric_pressure_kpa": tidy(case.atmospheric_pressure / 1000),
        "tolerance": {
            "system_curve": tidy(100 * case.tolerance.system_curve),
            "trim": display.number("length", case.tolerance.trim),
            "reading": tidy(100 * case.tolerance.reading),
        },
        "weights": dict(case.weights),
    }


def _table(columns: list[Column], rows: list[dict[str, Any]]) -> Table:
    return Table(columns, [[_cell(column, row[column.key]) for column in columns] for row in rows])


def _cell(column: Column, value: Any) -> Cell:
    if column.left:
        return word(value)
    return Cell(DASH) if value is None else Cell(f"{value:.5g}", value)


def _assumptions(bench: Bench, display: Display) -> list[tuple[str, str]]:
    """What holds for every figure, in the trade's words."""
    case = bench.header.case
    new, tolerance, weights = case.new_pump, case.tolerance, case.weights
    hours = any(np.isnan(duty.hours) for duty in case.duties)
    return [
        (
            "curves",
            "read between measured points only; past the last one a state has no figures, and no verdict",
        ),
        (
            "states",
            "every duty at each of its levels; the same pumps wide open, and with each running pump lost in "
            "turn, at the levels of lowest static and lowest suction head",
        ),
        ("air", f"{case.atmospheric_pressure / 1000:.1f} kPa absolute at the site"),
        (
            "trims",
            f"in steps of {display.full('length', new.trim_step)}, by "
            + (f"the law of the case: {new.trim_law}" if new.trim_law else "the law of each model"),
        ),
        (
            "speed",
            "that of each curve"
            if np.isnan(new.frequency)
            else f"near a synchronous speed of {new.frequency:g} Hz, else the model is refused",
        ),
        ("motors", f"{new.motor_series} series"),
        (
            "tolerance",
            f"system curve {100 * tolerance.system_curve:g} % of friction, trim "
            f"{display.full('length', tolerance.trim)}, reading {100 * tolerance.reading:g} % of head",
        ),
        (
            "score",
            f"{weights['efficiency']:g} for each percent of system efficiency, less "
            f"{weights['shutoff_match']:g} for each percent of shutoff mismatch and "
            f"{weights['load_share']:g} for each point of load share",
        ),
        ("hours", "not stated for every duty: all weigh alike" if hours else "the weight of each duty"),
    ]
