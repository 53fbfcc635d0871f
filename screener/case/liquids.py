"""The site and the liquids of a case."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from screener import units
from screener.case.parts import Node, names
from screener.files.quantities import Quantities
from screener.hydraulics.liquids.water import water
from screener.hydraulics.suction import atmospheric_pressure
from screener.model.case import Liquid

WATER_LIKE = 4.3e-6
"""[m2/s] viscosity up to which a pump runs as with water: common practice, no source."""


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


def liquids(q: Quantities, nodes: Sequence[Node]) -> tuple[Liquid, ...]:
    """Return the liquids; a viscous one is a problem, as curves are not corrected for viscosity."""
    names(q, nodes, "name", "liquid")
    return tuple(
        _water(q, node, row) if "kind" in node else _given(q, node, row) for row, node in enumerate(nodes)
    )


def _water(q: Quantities, node: Node, row: int) -> Liquid:
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
    if viscosity > WATER_LIKE:
        highest = units.format_value(WATER_LIKE, "cSt", 1)
        q.bad(
            (*path, "viscosity"),
            f"viscosity is {node['viscosity']}",
            f"at most {highest}: viscosity correction is not made in this version",
        )
    return Liquid(
        name=node["name"],
        temperature=math.nan,
        density=q.positive(node["density"], "density", (*path, "density")),
        viscosity=viscosity,
        vapour_pressure=q.pressure(
            node["vapour_pressure"], (*path, "vapour_pressure"), absolute=True, positive=True
        ),
        heat_capacity=q.positive(node["heat_capacity"], "heat_capacity", (*path, "heat_capacity")),
    )
