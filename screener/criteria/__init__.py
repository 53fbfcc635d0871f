"""Acceptance criteria: one file each, found by looking into this folder.

A criterion observes one thing in a run and says what is outside its limits; `judge` alone makes
outcomes from that. A new file with a `CRITERION` is listed, documented, limited and tested at once.
"""

from __future__ import annotations

import difflib
import importlib
import pkgutil
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from screener import units
from screener.model.arrays import Bools, Floats
from screener.model.run import Kind, Run

Array = TypeVar("Array", bound="NDArray[Any]")


@dataclass(frozen=True, slots=True)
class Limit:
    """One limit of a criterion: its default in SI (a fraction where the unit is %), and its source."""

    default: float
    source: str
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Observed:
    """What was observed, and where it would be outside. Everything broadcasts to (c, s, 1 + p).

    value   : NaN where an input is missing
    applies : where the criterion has something to say
    fail_below, fail_above, caution_below, caution_above : bounds in the unit of `value`
    scale   : what a shortfall is relative to; the size of the limit where 0
    """

    value: Floats
    applies: Bools
    fail_below: Floats | float = -np.inf
    fail_above: Floats | float = np.inf
    caution_below: Floats | float = -np.inf
    caution_above: Floats | float = np.inf
    scale: float = 0.0


@dataclass(frozen=True, slots=True)
class Criterion:
    """One acceptance criterion.

    name     : stable, in the trade's words
    title    : what is observed, for the head of a column
    unit     : of the value and its limits: a unit of the unit table, "%" or "-"
    limits   : by name; a bound of `Observed` or a figure that the observation needs
    gates    : whether a missing input keeps a pump from being accepted
    every_pump : whether installed pumps are judged too
    needs    : what is missing when it is not assessed
    sentence : for a finding, with {pump}, {is}, {limit} and {where}
    observe  : (run, limits in SI) -> Observed
    """

    name: str
    title: str
    unit: str
    gates: bool
    every_pump: bool
    needs: str
    sentence: str
    observe: Callable[[Run, Mapping[str, float]], Observed]
    limits: Mapping[str, Limit] = field(default_factory=dict)


def everywhere(values: Array) -> Array:
    """Bring figures of pumps, (c, 1 + p), to the shape of states, (c, 1, 1 + p)."""
    return values[:, None, :]  # type: ignore[return-value]


def once(values: Array) -> Array:
    """Bring figures of candidates, (c,), to the shape of states, (c, 1, 1)."""
    return values[:, None, None]  # type: ignore[return-value]


def per_state(values: Array) -> Array:
    """Bring figures of states, (s,), to the shape of states and pumps, (s, 1)."""
    return values[:, None]  # type: ignore[return-value]


def per_duty_pump(run: Run) -> Bools:
    """Where a pump runs in a duty beside a new one, (s, 1 + p)."""
    runs = run.conditions.runs
    return np.asarray(runs & runs[:, :1] & per_state(run.conditions.kind == Kind.DUTY))


def beside(run: Run) -> Bools:
    """Installed pumps that run in a duty beside the new one, for each candidate, (c, 1 + p)."""
    pumps = np.asarray(per_duty_pump(run).any(axis=0))
    pumps[0] = False
    return np.tile(pumps, (len(run.pumps), 1))


@lru_cache(maxsize=1)
def criteria() -> tuple[Criterion, ...]:
    """Every criterion, in alphabetical order of name."""
    found = []
    for module in pkgutil.iter_modules(__path__):
        found.append(importlib.import_module(f"{__name__}.{module.name}").CRITERION)
    return tuple(sorted(found, key=lambda criterion: criterion.name))


def default_limits() -> dict[str, dict[str, float]]:
    """The default limits of every criterion, in SI."""
    return {c.name: {name: limit.default for name, limit in c.limits.items()} for c in criteria()}


def read_limits(
    raw: Mapping[str, Any],
) -> tuple[dict[str, dict[str, float]], list[tuple[tuple[str, ...], str, str]]]:
    """Limits as written in a case to SI, over the defaults.

    Returns the limits, and problems as (path below "limits", what is wrong, what is allowed).
    """
    limits = default_limits()
    known = {criterion.name: criterion for criterion in criteria()}
    problems: list[tuple[tuple[str, ...], str, str]] = []
    for name, given in raw.items():
        if name not in known:
            problems.append(((name,), f'there is no criterion "{name}"', _nearest(name, list(known))))
        elif not isinstance(given, Mapping):
            problems.append(((name,), "expected a table of limits", f"for example {_example(known[name])}"))
        else:
            for key, value in given.items():
                if key not in known[name].limits:
                    hint = _nearest(key, list(known[name].limits))
                    problems.append(((name, key), f'{name} has no limit "{key}"', hint))
                    continue
                try:
                    limit = known[name].limits[key]
                    limits[name][key] = _limit(value, limit.unit or known[name].unit)
                    if limit.default > 0 and limits[name][key] <= 0:
                        problems.append(((name, key), f"{value} is not above 0", "a positive limit"))
                except ValueError as error:
                    problems.append(
                        ((name, key), getattr(error, "what", str(error)), getattr(error, "hint", ""))
                    )
    return limits, problems


def _limit(value: object, unit: str) -> float:
    dimension = units.dimension_of(unit)
    if isinstance(value, str):
        if dimension is None:
            raise ValueError(
                f"a bare number is expected here, in {unit}" if unit != "-" else "a bare number is expected"
            )
        if unit == "K" and not value.endswith("K"):
            raise ValueError("a difference of temperature is expected, in K")
        return units.parse(value, dimension).value
    if not isinstance(value, int | float) or isinstance(value, bool):
        raise ValueError(
            "expected a number" if dimension is None else f"expected a number with its unit, in {unit}"
        )
    if dimension is not None:
        return float(units.to_si(float(value), unit, dimension))
    return value / 100 if unit == "%" else float(value)


def _nearest(name: str, allowed: list[str]) -> str:
    near = difflib.get_close_matches(name, allowed, 1)
    return f'did you mean "{near[0]}"?' if near else "one of " + ", ".join(allowed)


def _example(criterion: Criterion) -> str:
    name, limit = next(iter(criterion.limits.items()))
    factor = {"%": 100, "kW": 1e-3}.get(limit.unit or criterion.unit, 1)
    return f"{{ {name} = {limit.default * factor:g} }}"
