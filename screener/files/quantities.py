"""Numbers with units, as a file writes them, into SI; what is wrong is collected, with its place."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from screener import units
from screener.errors import Problem
from screener.files.locate import KeyPath

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from screener.files.document import Document


class Quantities:
    """Reads the quantities of one document.

    A text carries its own unit ("750 m3/h"); a bare number takes the unit that the file declares for its
    quantity ("flow", "head", "npsh", "power", ...: the dimensions of `units`, and NPSH apart from head).
    Whatever is bad or missing reads as NaN, so that it takes no part in later comparisons; what is bad is
    added to `problems` as well, a missing declaration once for each quantity.

    document : for the places of problems
    declared : {quantity: name of a unit}, as the file says under its key `units`
    """

    def __init__(self, document: Document, declared: Mapping[str, str]) -> None:
        self.problems: list[Problem] = []
        self._document = document
        self._units: dict[str, str] = {}  # canonical; "" after a problem, so that it is not said again
        for quantity, name in declared.items():
            try:
                self._units[quantity] = units.check_unit(name, dimension(quantity))
            except units.UnitError as error:
                self._units[quantity] = ""
                self.bad(("units", quantity), error.what, error.hint)

    def bad(self, path: KeyPath, what: str, hint: str = "") -> None:
        """Add a problem with the value at `path`."""
        self.problems.append(self._document.problem(path, what, hint))

    def value(self, node: float | str | None, quantity: str, path: KeyPath) -> float:
        """Return one value in SI; for a pressure call `pressure`."""
        return self._read(node, quantity, path)[0]

    def positive(self, node: float | str | None, quantity: str, path: KeyPath) -> float:
        """Return one value in SI that must be above 0."""
        return self._positive(self.value(node, quantity, path), node, path)

    def pressure(
        self, node: float | str | None, path: KeyPath, *, absolute: bool = False, positive: bool = False
    ) -> float:
        """Return a pressure [Pa], gauge or `absolute`: a text that does not say which is meant as that."""
        value, gauge = self._read(node, "pressure", path)
        if gauge is not None and gauge == absolute:
            wanted, given = ("absolute", "gauge") if absolute else ("gauge", "absolute")
            self.bad(path, f"{_name(path)} is given as {given} pressure", f"give it as {wanted} pressure")
            return math.nan
        return self._positive(value, node, path) if positive else value

    def array(
        self, nodes: Sequence[float | str | None] | None, quantity: str, path: KeyPath
    ) -> NDArray[np.float64]:
        """Return values in SI, NaN where a node is null; empty where the list itself is missing."""
        import numpy as np

        if nodes and str in set(map(type, nodes)):
            return np.array([self.value(node, quantity, (*path, i)) for i, node in enumerate(nodes)])
        values = np.array(nodes or [], dtype=np.float64)
        if np.isnan(values).all():
            return values
        unit = self._unit(quantity, path, f"declare units.{quantity}")
        return units.to_si(values, unit, dimension(quantity)) if unit else np.full_like(values, np.nan)

    def percent(self, node: float | None) -> float:
        """Return a bare number of percent as a fraction."""
        return math.nan if node is None else node / 100.0

    def percents(self, nodes: Sequence[float | None] | None) -> NDArray[np.float64]:
        """Return bare numbers of percent as fractions, as `array` does."""
        import numpy as np

        return np.array(nodes or [], dtype=np.float64) / 100.0

    def _positive(self, value: float, node: float | str | None, path: KeyPath) -> float:
        if value <= 0:
            self.bad(path, f"{_name(path)} is {node}", "must be above 0; leave it out where it is not known")
            return math.nan
        return value

    def _read(self, node: float | str | None, quantity: str, path: KeyPath) -> tuple[float, bool | None]:
        """Return the value in SI, and whether its text says gauge (True), absolute (False) or nothing."""
        if node is None:
            return math.nan, None
        if isinstance(node, str):
            try:
                return units.parse(node, dimension(quantity))
            except units.UnitError as error:
                self.bad(path, error.what, error.hint)
                return math.nan, None
        unit = self._unit(quantity, path, f"declare units.{quantity}, or write the unit behind the number")
        return (units.to_si(node, unit, dimension(quantity)) if unit else math.nan), None

    def _unit(self, quantity: str, path: KeyPath, hint: str) -> str:
        """Return the declared unit, "" where there is none: said at the first value that needs it."""
        if quantity not in self._units:
            self._units[quantity] = ""
            self.bad(path, f"{_name(path)} has no unit", hint)
        return self._units[quantity]


def dimension(quantity: str) -> str:
    """Return the dimension of a quantity: NPSH is a head that may have a unit of its own."""
    return "head" if quantity == "npsh" else quantity


def _name(path: KeyPath) -> str:
    return next((step for step in reversed(path) if isinstance(step, str)), "value")
