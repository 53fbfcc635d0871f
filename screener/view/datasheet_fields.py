"""One field of a data sheet: its value, its unit, and where that came from."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from screener.changes.datasheet import DataSheet
from screener.model.arrays import Floats
from screener.view import names
from screener.view.blocks import Cell
from screener.view.display import Display

RATED = "rated duty"
CASE = "case"
CATALOG = "catalog"
HI = "ANSI/HI 9.6.7"
NOWHERE = "not known in every state"
NO_SHUTOFF = "no shutoff head measured"
MISSING = {CASE: "not in the case", CATALOG: "not in the catalog", NOWHERE: NOWHERE, "": ""}


@dataclass(frozen=True, slots=True)
class Field:
    """One field: `cell` is blank where nothing is known, and `source` then says what is missing.

    key  : the same for the field in every sheet;  of : the liquid, state or criterion that it is of, else ""
    long : words that may be too long for a column
    """

    key: str
    label: str
    cell: Cell
    unit: str
    source: str
    of: str = ""
    long: bool = False


class Writer:
    """Writes the fields of one sheet, in the units of its case."""

    def __init__(self, sheet: DataSheet, display: Display) -> None:
        self.sheet, self.display = sheet, display
        self.explained = sheet.explained
        self.bench = sheet.explained.bench
        self.case = self.bench.header.case
        self.run = sheet.explained.judged.run
        self.pumps = self.run.pumps
        self.rated = self.bench.header.rated
        self.state = self.bench.header.states[self.rated]

    def number(
        self, key: str, label: str, cell: Cell, unit: str, source: str, missing: str = "", *, of: str = ""
    ) -> Field:
        """A field; `missing` says why it is blank, where the source alone does not."""
        if cell.value is None:
            cell, source = Cell(""), missing or MISSING.get(source, f"not known: {source}")
        return Field(key, label, cell, unit, source, of)

    def amount(
        self, key: str, label: str, quantity: str, value: float, source: str, missing: str = ""
    ) -> Field:
        """A quantity [SI] that the case has a unit for."""
        cell, unit = self.display.cell(quantity, value), self.display.unit(quantity)
        return self.number(key, label, cell, unit, source, missing)

    def pressure(
        self, key: str, label: str, value: float, source: str, missing: str = "", *, kind: str = "gauge"
    ) -> Field:
        """A pressure [Pa] above the atmosphere, or absolute."""
        unit = f"{self.display.unit('pressure')} {kind}"
        return self.number(key, label, self.display.cell("pressure", value), unit, source, missing)

    def word(
        self, key: str, label: str, text: str | int, source: str, missing: str = "", *, long: bool = False
    ) -> Field:
        """A word or a count."""
        cell = Cell(str(text), text) if text else Cell("")
        return replace(self.number(key, label, cell, "", source, missing), long=long)

    def place(self, place: int, missing: str = NOWHERE, *, before: str = "") -> str:
        """Name of a state, or what to say where there is none."""
        return before + names.where(self.case, self.bench.header.states[place]) if place >= 0 else missing

    def curve(self) -> str:
        """Where a figure read off the curve comes from: the catalog, or the method that corrects it."""
        viscous = self.case.liquids[self.state.liquid].viscous
        return self.trim().replace(CATALOG, HI) if viscous else self.trim()

    def trim(self) -> str:
        """How the diameter lies to the tests."""
        tested, distance = self.nearest()
        if np.isnan(tested):
            return CATALOG
        at = self.display.full("length", tested)
        return f"catalog, tested at {at}" if distance == 0 else f"catalog, {100 * distance:.1f} % from {at}"

    def nearest(self) -> tuple[float, float]:
        """The tested diameter nearest to the pump's [m], NaN where none is stated, and the distance [-]."""
        table, model, diameter = self.explained.table, self.explained.model, float(self.pumps.diameter[0])
        tested = table.diameter[table.first[model] : table.first[model + 1]]
        if np.isnan(diameter) or np.isnan(tested).all():
            return np.nan, np.nan
        return float(tested[np.nanargmin(np.abs(tested - diameter))]), float(self.pumps.from_test[0])


def at(values: Floats, place: int) -> float:
    """A figure of the new pump in one state, of (1, s, 1 + p); NaN where there is no such state."""
    return float(values[0, place, 0]) if place >= 0 else np.nan
