"""What viscous liquids make of the pumps, by ANSI/HI 9.6.7: to blocks and data."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from screener.hydraulics.viscosity import Cover, Factors, factors
from screener.model.curves import Pumps
from screener.screening.assess import Bench
from screener.units import from_si
from screener.view import names
from screener.view.blocks import Block, Cell, Column, Heading, Table
from screener.view.display import DASH, plain, tidy, word

COVERS = {
    Cover.COVERED: "",
    Cover.B_TOO_HIGH: "B of 40 or more: outside the method",
    Cover.SPECIFIC_SPEED: "specific speed above 60: outside the method",
    Cover.NO_BEST_FLOW: "flow of best efficiency not known: outside the method",
}

Row = tuple[str, float, str, Factors, int]
"""Liquid, its viscosity [m2/s], pump, the factors, and the row of the pump in them."""


def viscous(bench: Bench, new: Pumps | None) -> list[Block]:
    """Parameter B and the factors of each pump in each viscous liquid; `new` is one candidate at load."""
    found = list(_rows(bench, new))
    if not found:
        return []
    columns = [
        Column("liquid", "liquid", left=True),
        Column("viscosity", "cSt", "cSt"),
        Column("pump", "pump", left=True),
        Column("parameter", "B"),
        Column("flow_factor", "flow"),
        Column("head_factor", "head"),
        Column("efficiency_factor", "eff"),
        Column("npsh_factor", "NPSHr", rank=1),
        Column("cover", "", left=True, rank=2),
    ]
    rows = [
        [
            word(liquid),
            plain(float(from_si(viscosity, "cSt")), 1),
            word(pump),
            plain(factor.parameter[row], 2),
            *(_factor(values[row]) for values in (factor.flow, factor.head, factor.efficiency, factor.npsh)),
            word(COVERS[Cover(int(factor.cover[row]))]),
        ]
        for liquid, viscosity, pump, factor, row in found
    ]
    note = [
        "Factors by ANSI/HI 9.6.7 on what was measured with water, at load; head and NPSHr at best "
        "efficiency. B of 1 or less changes nothing. The factor on NPSHr is on the safe side."
    ]
    return [Heading("IN VISCOUS LIQUIDS", "factors on figures with water"), Table(columns, rows, note)]


def viscous_data(bench: Bench, new: Pumps | None) -> list[dict[str, Any]]:
    """The same as data."""
    return [
        {
            "liquid": liquid,
            "viscosity_cst": tidy(float(from_si(viscosity, "cSt"))),
            "pump": pump,
            "parameter_b": tidy(float(factor.parameter[row])),
            "flow_factor": tidy(float(factor.flow[row])),
            "head_factor": tidy(float(factor.head[row])),
            "efficiency_factor": tidy(float(factor.efficiency[row])),
            "npsh_factor": tidy(float(factor.npsh[row])),
            "covered": bool(factor.cover[row] == Cover.COVERED),
        }
        for liquid, viscosity, pump, factor, row in _rows(bench, new)
    ]


def _rows(bench: Bench, new: Pumps | None) -> Iterator[Row]:
    case, alike = bench.header.case, list(bench.header.alike)
    pumped = {state.liquid for state in bench.header.states}
    for number, liquid in enumerate(case.liquids):
        if liquid.viscous and number in pumped:
            if new is not None:
                yield liquid.name, liquid.viscosity, names.NEW, factors(new, viscosity=liquid.viscosity), 0
            installed = factors(case.pumps, viscosity=liquid.viscosity)
            for row in dict.fromkeys(int(first) for first in alike):
                yield liquid.name, liquid.viscosity, names.alike(case, alike, row), installed, row


def _factor(value: float) -> Cell:
    cell = plain(value, 3)
    return cell if cell.value is not None else Cell(DASH)
