"""The site and the liquids of a case, and whether the pumps can be corrected for them."""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence

import numpy as np

from screener import units
from screener.case.parts import Node, names
from screener.files.quantities import Quantities
from screener.hydraulics.liquids.water import water
from screener.hydraulics.suction import atmospheric_pressure
from screener.hydraulics.viscosity import (
    HIGHEST_B,
    HIGHEST_SPECIFIC_SPEED,
    HIGHEST_VISCOSITY,
    Cover,
    factors,
)
from screener.model.case import Duty, Liquid
from screener.model.curves import Pumps

AS_WATER = 1e-6
"""[m2/s] viscosity up to which curves stand as measured, which is with water."""

PLAUSIBLE = {
    "density": (300.0, 3000.0, "kg/m3"),
    "heat_capacity": (0.5, 10.0, "kJ/(kg K)"),
    "temperature": (-273.0, 1000.0, "degC"),
}
"""Figures of a pumped liquid: outside of these there is a slip in the unit (ours)."""

PROPERTIES = ("density", "viscosity", "vapour_pressure", "heat_capacity")

ROUNDED = 1.01
"""A vapour pressure may be this many times the pressure above the liquid, as both are rounded figures."""


def atmosphere(q: Quantities, node: Node) -> float:
    """Return the atmospheric pressure of the site [Pa absolute], at sea level where nothing is stated."""
    path = ("site", "atmospheric_pressure")
    if "altitude" in node and "atmospheric_pressure" in node:
        q.bad(path, "altitude and atmospheric_pressure are both given", "keep one")
    if "atmospheric_pressure" in node:
        return q.pressure(node["atmospheric_pressure"], path, absolute=True, positive=True)
    text = node.get("altitude", "0 m")
    altitude = q.value(text, "length", ("site", "altitude"))
    if math.isnan(altitude):
        return math.nan
    try:
        return float(atmospheric_pressure(altitude=np.array(altitude)))
    except ValueError as error:
        q.bad(("site", "altitude"), f"altitude is {text}", str(error))
        return math.nan


def liquids(q: Quantities, nodes: Sequence[Node], *, surface: float, pressure: str) -> tuple[Liquid, ...]:
    """Return the liquids; one that boils in the suction vessel is a problem.

    surface  : [Pa absolute] highest pressure on the suction surface, NaN where it is not known
    pressure : unit to name pressures in
    """
    names(q, nodes, "name", "liquid")
    found = []
    for row, node in enumerate(nodes):
        liquid = _water(q, node, row) if "kind" in node else _given(q, node, row)
        if 0 < ROUNDED * surface < liquid.vapour_pressure:
            given, most = (
                f"{units.from_si(value, pressure):.4g} {pressure} absolute"
                for value in (liquid.vapour_pressure, surface)
            )
            q.bad(
                ("liquid", row, "temperature" if "kind" in node else "vapour_pressure"),
                f"{liquid.name!r} boils in the suction vessel: its vapour pressure is {given}",
                f"at most {most}, the highest pressure on the suction surface; vessel_pressure of a level",
            )
        found.append(liquid)
    return tuple(found)


def check_pumped(q: Quantities, liquids: Sequence[Liquid], pumped: Collection[int]) -> None:
    """A liquid that is not among the rows that are pumped is a problem, if all of those are known."""
    names = [liquid.name for liquid in liquids]
    for row, name in enumerate(names):
        if -1 not in pumped and names.index(name) not in pumped:
            q.bad(("liquid", row), f"no duty pumps {name!r}", f"liquid = {name!r} in a duty, or leave it out")


def check_viscous(
    q: Quantities,
    liquids: Sequence[Liquid],
    duties: Sequence[Duty],
    tags: Sequence[str],
    pumps: Pumps,
) -> None:
    """An installed pump that cannot be corrected for a viscous liquid that it pumps is a problem.

    tags, pumps : of the installed pumps, row for row, at their speed at load
    """
    for number, liquid in enumerate(liquids):
        running = {row for duty in duties if duty.liquid == number for rows in duty.running for row in rows}
        if not liquid.viscous or not running:
            continue
        factor = factors(pumps, viscosity=np.full(len(pumps), liquid.viscosity))
        for row in sorted(running):
            match Cover(factor.cover[row]):
                case Cover.COVERED:
                    continue
                case Cover.B_TOO_HIGH:
                    why, hint = f"its B is {factor.parameter[row]:.1f}", f"B below {HIGHEST_B:g}"
                case Cover.SPECIFIC_SPEED:
                    why, hint = (
                        f"its n_q is {pumps.specific_speed[row]:.1f}",
                        f"n_q of at most {HIGHEST_SPECIFIC_SPEED:g}",
                    )
                case Cover.NO_BEST_FLOW:
                    why, hint = (
                        "its flow of best efficiency is not known",
                        "efficiency or bep_flow of its curve",
                    )
            q.bad(
                ("liquid", number, "viscosity"),
                f"the curve of {tags[row]!r} cannot be corrected for {_cst(liquid.viscosity)}: {why}",
                f"ANSI/HI 9.6.7 needs {hint}",
            )


def _cst(viscosity: float) -> str:
    return f"{units.from_si(viscosity, 'cSt'):.4g} cSt"


def _water(q: Quantities, node: Node, row: int) -> Liquid:
    for key in PROPERTIES:
        if key in node:
            hint = f"water follows from its temperature: leave {key} out, or kind"
            q.bad(("liquid", row, key), f'kind = "water" and {key} are both given', hint)
    path = ("liquid", row, "temperature")
    kelvin = q.value(node["temperature"], "temperature", path)
    if not math.isnan(kelvin):
        try:
            return water(name=node["name"], temperature=round(units.from_si(kelvin, "degC"), 9))
        except ValueError as error:
            q.bad(path, f"temperature is {node['temperature']}", str(error))
    return Liquid(node["name"], math.nan, math.nan, math.nan, math.nan, math.nan)


def _given(q: Quantities, node: Node, row: int) -> Liquid:
    path = ("liquid", row)
    viscosity = q.positive(node["viscosity"], "viscosity", (*path, "viscosity"))
    if viscosity > HIGHEST_VISCOSITY:
        q.bad(
            (*path, "viscosity"),
            f"viscosity is {node['viscosity']}",
            f"at most {_cst(HIGHEST_VISCOSITY)}: ANSI/HI 9.6.7 corrects curves up to there",
        )
        viscosity = math.nan
    kelvin = _plausible(q, node, row, "temperature")
    return Liquid(
        name=node["name"],
        temperature=round(units.from_si(kelvin, "degC"), 9),
        density=_plausible(q, node, row, "density"),
        viscosity=viscosity,
        vapour_pressure=q.pressure(
            node["vapour_pressure"], (*path, "vapour_pressure"), absolute=True, positive=True
        ),
        heat_capacity=_plausible(q, node, row, "heat_capacity"),
        viscous=viscosity > AS_WATER,
    )


def _plausible(q: Quantities, node: Node, row: int, key: str) -> float:
    """Return a figure in SI, NaN where it is not stated; one that no liquid has is a problem."""
    path = ("liquid", row, key)
    value = q.value(node.get(key), key, path)
    low, high, unit = PLAUSIBLE[key]
    if not math.isnan(value) and not low <= units.from_si(value, unit) <= high:
        q.bad(path, f"{key} is {node[key]}", f"{low:g} to {high:g} {unit}: look at the unit")
    return value
