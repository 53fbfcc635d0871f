"""One table of units; reading and writing quantities. Nothing else in the package knows a unit's name."""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterable
from typing import TYPE_CHECKING, NamedTuple, TypeVar

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

Value = TypeVar("Value", float, "NDArray[np.float64]")


class UnitError(ValueError):
    """A quantity that cannot be read: `what` is wrong, and a `hint` at what would be right."""

    def __init__(self, what: str, hint: str = "") -> None:
        self.what = what
        self.hint = hint
        super().__init__(f"{what} ({hint})" if hint else what)


class Quantity(NamedTuple):
    """A value in SI; `gauge` is None unless the text itself said gauge (True) or absolute (False)."""

    value: float
    gauge: bool | None


class Unit(NamedTuple):
    """One row of the table: SI value = number * scale + offset.

    any_case: the name and its aliases may be written in any case, because no other unit differs from them
    by case alone. It stays off where a prefix is at stake (mW and MW, mbar and Mbar, mm and Mm).
    """

    name: str
    dimension: str
    scale: float
    offset: float = 0.0
    aliases: tuple[str, ...] = ()
    any_case: bool = False


# Exact by definition unless a line says otherwise. Sources:
#   inch 0.0254 m, foot 0.3048 m, pound 0.45359237 kg: international yard and pound agreement, 1959
#   US gallon 231 in3 = 3.785411784 L; kgf 9.80665 N; degF: NIST SP 811 (2008), appendix B.8
#   imperial gallon 4.54609 L: UK Units of Measurement Regulations 1995
#   hp 550 ft lbf/s = 550 * 0.3048 * 4.4482216152605 W = 745.699871582... W, rounded to a float here
#   PS (metric horsepower) 75 kgf m/s = 735.49875 W
#   psi = 4.4482216152605 N / (0.0254 m)2 = 6894.757293168361... Pa, rounded to a float here
TABLE = (
    Unit("m3/h", "flow", 1 / 3600, aliases=("m3/hr", "m3h", "cmh"), any_case=True),
    Unit("m3/s", "flow", 1.0, aliases=("cumec",), any_case=True),
    Unit("L/s", "flow", 1e-3, aliases=("lps",), any_case=True),
    Unit("L/min", "flow", 1 / 60000, aliases=("lpm",), any_case=True),
    Unit("US gpm", "flow", 3.785411784 / 60000, aliases=("USgpm", "US gal/min"), any_case=True),
    Unit("imp gpm", "flow", 4.54609 / 60000, aliases=("igpm", "UK gpm", "imp gal/min"), any_case=True),
    Unit("ML/d", "flow", 1000 / 86400, aliases=("Ml/d", "ML/day", "Ml/day", "MLD")),
    Unit("ft3/s", "flow", 0.028316846592, aliases=("cfs",), any_case=True),
    Unit("m", "head", 1.0),
    Unit("ft", "head", 0.3048, any_case=True),
    Unit("W", "power", 1.0),
    Unit("kW", "power", 1e3, any_case=True),
    Unit("MW", "power", 1e6),
    Unit("hp", "power", 745.6998715822702, aliases=("bhp",), any_case=True),
    Unit("PS", "power", 735.49875),
    Unit("mm", "length", 1e-3),
    Unit("cm", "length", 1e-2),
    Unit("m", "length", 1.0),
    Unit("in", "length", 0.0254, aliases=("inch", '"'), any_case=True),
    Unit("ft", "length", 0.3048, any_case=True),
    Unit("Pa", "pressure", 1.0, any_case=True),
    Unit("kPa", "pressure", 1e3, any_case=True),
    Unit("MPa", "pressure", 1e6),
    Unit("mbar", "pressure", 1e2),
    Unit("bar", "pressure", 1e5, any_case=True),
    Unit("kgf/cm2", "pressure", 98066.5, aliases=("kg/cm2",), any_case=True),
    Unit("psi", "pressure", 6894.757293168361, any_case=True),
    Unit("K", "temperature", 1.0),
    Unit("degC", "temperature", 1.0, 273.15, aliases=("C",), any_case=True),
    Unit("degF", "temperature", 5 / 9, 459.67 * 5 / 9, aliases=("F",), any_case=True),
    Unit("kg/m3", "density", 1.0, any_case=True),
    Unit("kg/L", "density", 1e3, aliases=("g/cm3",), any_case=True),
    Unit("lb/ft3", "density", 0.45359237 / 0.028316846592, any_case=True),
    Unit("m2/s", "viscosity", 1.0, any_case=True),
    Unit("mm2/s", "viscosity", 1e-6),
    Unit("cSt", "viscosity", 1e-6, any_case=True),
    Unit("m3", "volume", 1.0, any_case=True),
    Unit("L", "volume", 1e-3, any_case=True),
    Unit("ft3", "volume", 0.028316846592, any_case=True),
    Unit("US gal", "volume", 3.785411784e-3, any_case=True),
    Unit("imp gal", "volume", 4.54609e-3, any_case=True),
    Unit("J/(kg K)", "heat_capacity", 1.0, aliases=("J/kg/K", "J/kgK", "J/kg K")),
    Unit("kJ/(kg K)", "heat_capacity", 1e3, aliases=("kJ/kg/K", "kJ/kgK", "kJ/kg K")),
    Unit("J", "energy", 1.0),
    Unit("kWh", "energy", 3.6e6, any_case=True),
    Unit("MWh", "energy", 3.6e9),
)

SI = {unit.dimension: unit.name for unit in TABLE if unit.scale == 1.0 and unit.offset == 0.0}
"""The SI unit of each dimension, by its name in the table."""

_PLAIN = str.maketrans({"²": "2", "³": "3", "−": "-", "·": " ", "⋅": " ", "°": "deg", "^": None})
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_REFERENCE = re.compile(
    r"(?P<unit>.+?) ?(?:\((?P<inner>g|a|gauge|abs|absolute)\)|(?P<outer>gauge|absolute|abs|g|a))", re.I
)


def _names(unit: Unit) -> Iterable[str]:
    return (unit.name, *unit.aliases)


_EXACT = {(unit.dimension, name): unit for unit in TABLE for name in _names(unit)}
_FOLDED = {(unit.dimension, name.lower()): unit for unit in TABLE if unit.any_case for name in _names(unit)}
_BY_NAME = {name: unit for unit in TABLE for name in _names(unit)}


def parse(text: str, dimension: str) -> Quantity:
    """Read a number with its unit, as in "750 m3/h", "2.5 bar gauge" or "12 degC", into SI.

    text      : number, then a unit of `dimension`; a pressure may say gauge or absolute, (g) or (a), g or a
    dimension : a key of `SI`
    Returns the value in SI, and whether the text said gauge; the value is not shifted by the atmosphere.
    Raises UnitError: no number, no unit, a decimal comma, a unit unknown or of another dimension,
    no finite value.

    >>> parse("2.5 bar(g)", "pressure")
    Quantity(value=250000.0, gauge=True)
    """
    plain = " ".join(text.translate(_PLAIN).split())
    number = _NUMBER.match(plain)
    example = f'for example "45 {SI[dimension]}"'
    if not number:
        raise UnitError(f"{text!r} is not a quantity", f"a number and a unit, {example}")
    rest = plain[number.end() :].strip()
    if rest.startswith(","):
        raise UnitError(
            f"{text!r} has a comma in its number",
            "no decimal comma: write a point for decimals, and nothing between thousands",
        )
    if not rest:
        raise UnitError(f"{text!r} has no unit", f"say {example}; one of {', '.join(unit_names(dimension))}")
    if rest[0] in "0123456789.":
        raise UnitError(f"{text!r} is not one number and a unit", "nothing between thousands: 1000")
    name, gauge = _reference(rest) if dimension == "pressure" else (rest, None)
    value = to_si(float(number.group()), name, dimension)
    if not math.isfinite(value):
        raise UnitError(f"{text!r} is too large to compute with")
    return Quantity(value, gauge)


def _reference(name: str) -> tuple[str, bool | None]:
    """Take gauge or absolute off the end of a pressure unit."""
    found = None if _find(name, "pressure") else _REFERENCE.fullmatch(name)
    if found and _find(found["unit"], "pressure"):
        return found["unit"], (found["inner"] or found["outer"])[0] in "gG"
    return name, None


def to_si(value: Value, unit: str, dimension: str) -> Value:
    """Value in SI of a number, or an array of them, in `unit`. Raises UnitError as `check_unit` does.

    >>> round(to_si(3600.0, "m3/h", "flow"), 12)
    1.0
    """
    row = _row(unit, dimension)
    return value * row.scale + row.offset


def from_si(value: Value, unit: str) -> Value:
    """Number in `unit` of a value in SI, or of an array of them. Raises UnitError for an unknown unit.

    >>> from_si(0.3048, "ft")
    1.0
    """
    row = next((row for d in SI if (row := _find(unit, d))), None)
    if row is None:
        raise UnitError(f"unknown unit {unit!r}", _near(unit, _BY_NAME))
    return (value - row.offset) / row.scale


def format_value(value_si: float, unit: str, decimals: int) -> str:
    """Write a value in SI as a number and its unit.

    >>> format_value(0.2, "m3/h", 1)
    '720.0 m3/h'
    """
    return f"{from_si(value_si, unit):z.{decimals}f} {unit}"


def unit_names(dimension: str) -> list[str]:
    """Names of the units of a dimension, as they are written by the tool."""
    return [unit.name for unit in TABLE if unit.dimension == dimension]


def dimension_of(name: str) -> str | None:
    """Dimension of a unit by its name in the table, None for what is no unit; the first of several.

    >>> dimension_of("m3/h"), dimension_of("%")
    ('flow', None)
    """
    return next((unit.dimension for unit in TABLE if unit.name == name), None)


def check_unit(name: str, dimension: str) -> str:
    """Name in the table of a unit that may be written as an alias.

    Raises UnitError: not known, or of another dimension; the hint says which units there are.

    >>> check_unit("m³/h", "flow")
    'm3/h'
    """
    return _row(name, dimension).name


def _row(name: str, dimension: str) -> Unit:
    row = _find(name, dimension)
    if row:
        return row
    words = dimension.replace("_", " ")
    if dimension == "flow" and _plain(name).lower() == "gpm":
        raise UnitError(f"{name!r} is not one unit", "say US gpm or imp gpm")
    allowed = f"one of {', '.join(unit_names(dimension))}"
    other = next((d for d in SI if _find(name, d)), None)
    if other:
        raise UnitError(f"{name!r} is a unit of {other.replace('_', ' ')}, not of {words}", allowed)
    near = _near(name, [known for d, known in _EXACT if d == dimension])
    raise UnitError(f"unknown unit of {words} {name!r}", f"{near}; {allowed}" if near else allowed)


def _find(name: str, dimension: str) -> Unit | None:
    plain = _plain(name)
    return _EXACT.get((dimension, plain)) or _FOLDED.get((dimension, plain.lower()))


def _plain(name: str) -> str:
    """Spell superscripts out, and take the spaces from around slashes and inside brackets."""
    return re.sub(
        r" ?/ ?|(?<=\() | (?=\))", lambda m: m.group().strip(), " ".join(name.translate(_PLAIN).split())
    )


def _near(name: str, known: Iterable[str]) -> str:
    spelled = {unit.lower(): unit for unit in known}
    close = difflib.get_close_matches(name.lower(), spelled, n=1)
    return f"did you mean {spelled[close[0]]!r}?" if close else ""
