"""Numbers to text, in the units that the case asks for."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from screener import units
from screener.view.blocks import Cell, Tone

DASH = "-"
DECIMALS = {"flow": 0, "head": 2, "npsh": 2, "power": 0, "pressure": 2}
FINE = {"m3/s", "ML/d", "ft3/s", "MPa", "MW"}


class Display:
    """Values in SI to the units of a case, as numbers for data and as text for readers."""

    def __init__(self, shown: Mapping[str, str]) -> None:
        self._units = dict(shown)

    def unit(self, quantity: str) -> str:
        """Name of the unit that a quantity is shown in."""
        return self._units[quantity]

    def names(self) -> dict[str, str]:
        """Unit of every quantity."""
        return dict(self._units)

    def number(self, quantity: str, value: float) -> float | None:
        """The value in its unit, to seven significant digits; None where it is not a finite number."""
        value = float(value)
        return tidy(float(units.from_si(value, self._units[quantity]))) if math.isfinite(value) else None

    def text(self, quantity: str, value: float, decimals: int | None = None) -> str:
        """The value as text without its unit; a dash where there is none."""
        value = float(value)
        if not math.isfinite(value):
            return DASH
        number = units.from_si(value, self._units[quantity])
        if quantity == "length":
            return f"{number:.1f}".removesuffix(".0") if self._units[quantity] == "mm" else f"{number:.4g}"
        places = self._places(quantity) if decimals is None else decimals
        return f"{number:z.{places}f}"

    def full(self, quantity: str, value: float) -> str:
        """The value as text with its unit."""
        text = self.text(quantity, value)
        return text if text == DASH else f"{text} {self._units[quantity]}"

    def cell(self, quantity: str, value: float, tone: Tone = Tone.PLAIN, decimals: int | None = None) -> Cell:
        """A cell of a table."""
        return Cell(self.text(quantity, value, decimals), self.number(quantity, value), tone)

    def nameplate(self, value: float) -> Cell:
        """A motor's nameplate as a cell, as it is stamped: 18.5, 110."""
        number = self.number("power", value)
        return Cell(DASH if number is None else f"{number:.4g}", number)

    def _places(self, quantity: str) -> int:
        unit = self._units[quantity]
        if quantity in ("head", "npsh"):
            return 1 if unit == "ft" else 2
        if unit == "L/s":
            return 1
        return {"flow": 3, "pressure": 3, "power": 3}[quantity] if unit in FINE else DECIMALS[quantity]


def tidy(value: float) -> float | None:
    """Round to seven significant digits, so that outputs do not differ by last bits; else None."""
    return float(f"{value:.7g}") if math.isfinite(value) else None


def percent(value: float, decimals: int = 0, *, sign: bool = False) -> Cell:
    """A fraction as a cell in percent."""
    if not np.isfinite(value):
        return Cell(DASH)
    return Cell(f"{100 * value:{'+' if sign else ''}z.{decimals}f}", tidy(100 * float(value)))


def plain(value: float, decimals: int) -> Cell:
    """A number without a unit as a cell."""
    return Cell(f"{value:z.{decimals}f}", tidy(float(value))) if np.isfinite(value) else Cell(DASH)


def word(text: str, tone: Tone = Tone.PLAIN) -> Cell:
    """A word as a cell."""
    return Cell(text, text or None, tone)
