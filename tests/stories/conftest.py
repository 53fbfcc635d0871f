"""Plants written as files, the public commands run on them, and parallel pumps in closed form."""

from __future__ import annotations

import io
import json
import subprocess
import sys
import warnings
from collections.abc import Callable, Mapping, Sequence
from contextlib import redirect_stdout
from copy import copy
from functools import cache
from pathlib import Path
from typing import Any

import pytest
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq

from screener.cli import run

POINTS = 31
"""Points of each curve. Ten, or straight lines between them, move the small flows by several m3/h."""

CATALOGS = Path(__file__).parents[2] / "catalogs"

Json = dict[str, Any]
Quadratic = tuple[float, float, float]
"""H = first - second (Q / third)^2 [m, m, m3/h]."""


class Plant:
    """A case file, and what the commands say about it. Each command runs once, in this process."""

    def __init__(self, case: Path) -> None:
        self.case = case
        self.codes: dict[tuple[str, ...], int] = {}
        self.warnings: dict[tuple[str, ...], list[str]] = {}
        self._answers: dict[tuple[str, ...], Json] = {}

    def __call__(self, *command: str) -> Json:
        """The json of "header", or of "explain", "some pump"."""
        if command not in self._answers:
            with (
                redirect_stdout(io.StringIO()) as out,
                warnings.catch_warnings(record=True) as caught,
            ):
                warnings.simplefilter("always")
                self.codes[command] = run([command[0], str(self.case), *command[1:], "--format", "json"])
            self.warnings[command] = [str(warning.message) for warning in caught]
            self._answers[command] = json.loads(out.getvalue())
        return self._answers[command]

    def process(self, *command: str) -> subprocess.CompletedProcess[str]:
        """The same as a process of its own."""
        arguments = [sys.executable, "-m", "screener", command[0], str(self.case), *command[1:]]
        return subprocess.run(
            [*arguments, "--format", "json"], capture_output=True, text=True, encoding="utf-8", check=False
        )


def _pump(
    name: str,
    curve: Quadratic,
    *,
    end: float,
    best_flow: float,
    best_efficiency: float,
    npsh_required: Callable[[float], float],
    **more: Any,
) -> Json:
    shutoff, drop, at = curve
    flows = [end * point / (POINTS - 1) for point in range(POINTS)]
    columns = {
        "bep_flow": best_flow,
        "flow": flows,
        "head": [shutoff - drop * (flow / at) ** 2 for flow in flows],
        "efficiency": [best_efficiency * (1 - 0.75 * (1 - flow / best_flow) ** 2) for flow in flows],
        "npsh_required": [npsh_required(flow) for flow in flows],
    }
    return {"id": name, "curves": [columns], **more}


def _plant(folder: Path, case: str, pumps: Sequence[Json]) -> Plant:
    units = {"flow": "m3/h", "head": "m", "npsh": "m"}
    catalog = {"format": "pump-catalog/1", "units": units, "pumps": pumps}
    (folder / "pumps.json").write_text(json.dumps(catalog), encoding="utf-8")
    (folder / "case.toml").write_text(case, encoding="utf-8")
    return Plant(folder / "case.toml")


def _reads(value: float, printed: str) -> bool:
    places = len(printed.partition(".")[2])
    if f"{value:.{places}f}" == printed:
        return True
    raise AssertionError(f"{value} does not round to {printed}")


def _state(answer: Mapping[str, Any], name: str, *, of: str = "states") -> Json:
    (found,) = (state for state in answer[of] if state["state"] == name)
    pumps = {pump["pump"]: pump for pump in found["pumps"]}
    return {**found, "pumps": pumps, "flows": {tag: pump["flow"] for tag, pump in pumps.items()}}


def _findings(answer: Mapping[str, Any], outcome: str) -> dict[str, Json]:
    return {item["criterion"]: item for item in answer["findings"] if item["outcome"] == outcome}


def _share(curves: Sequence[Quadratic], demand: Callable[[float], float]) -> list[float]:
    low, high = 0.0, max(shutoff for shutoff, _, _ in curves)
    for _ in range(100):
        head = (low + high) / 2
        flows = [at * (max(shutoff - head, 0) / drop) ** 0.5 for shutoff, drop, at in curves]
        low, high = (head, high) if sum(flows) > demand(head) else (low, head)
    return flows


@pytest.fixture(scope="session")
def pump_of() -> Callable[..., Json]:
    """A pump of a catalog in m3/h and m, sampled from a quadratic; efficiency in percent."""
    return _pump


@pytest.fixture(scope="session")
def plant_of() -> Callable[..., Plant]:
    """Write case (TOML) and catalog into a folder."""
    return _plant


@pytest.fixture(scope="session")
def reads() -> Callable[[float, str], bool]:
    """Whether a figure rounds to what is printed, with just as many places."""
    return _reads


@pytest.fixture(scope="session")
def state_of() -> Callable[..., Json]:
    """One state of an answer by its name, its pumps and their `flows` by tag."""
    return _state


@pytest.fixture(scope="session")
def findings_of() -> Callable[..., dict[str, Json]]:
    """Findings of one outcome, by criterion."""
    return _findings


@pytest.fixture(scope="session")
def share() -> Callable[..., list[float]]:
    """Flows of parallel quadratics that give what is demanded at their common head, by bisection."""
    return _share


class Printed:
    """A pump of a demo's catalog in m3/h and m, read from its file with a spline of scipy.

    cut, ratio : of the diameter and of the speed; by the affinity laws flows go with both, heads with their
                 squares. NPSH required goes with speed alone: a trim leaves the inlet as it is.
    loss       : [m per (m3/h)^2] of its branch
    """

    def __init__(
        self, demo: str, name: str, diameter: float, *, cut: float = 1, ratio: float = 1, loss: float = 0
    ) -> None:
        files = (CATALOGS / demo / "pumps").glob("*.json")
        (pump,) = (
            pump
            for file in files
            for pump in json.loads(file.read_text(encoding="utf-8"))["pumps"]
            if pump["id"] == name
        )
        (curve,) = (curve for curve in pump["curves"] if curve["diameter"] == diameter)
        self.speed, self.ratio, self.loss = pump["speed"], ratio, loss
        self.factor = cut * ratio
        self.minimum = pump["limits"]["minimum_flow"]
        self.end = self.factor * curve["flow"][-1]
        self._columns = {}
        largest = pump["curves"][-1]  # often the only one with NPSH required
        for test, column in ((curve, "head"), (curve, "efficiency"), (largest, "npsh_required")):
            points = [(q, y) for q, y in zip(test["flow"], test[column], strict=True) if y is not None]
            self._columns[column] = CubicSpline(*zip(*points, strict=True))

    def turned(self, ratio: float) -> Printed:
        """The same pump at another speed."""
        other = copy(self)
        other.factor, other.ratio, other.end = self.factor * ratio, self.ratio * ratio, self.end * ratio
        return other

    def head(self, flow: float) -> float:
        return float(self.factor**2 * self._columns["head"](flow / self.factor))

    def efficiency(self, flow: float) -> float:
        return float(self._columns["efficiency"](flow / self.factor)) / 100

    def npsh_required(self, flow: float) -> float:
        return float(self.ratio**2 * self._columns["npsh_required"](flow / self.ratio))

    def flow(self, header: float) -> float:
        """Flow at a header head, 0 behind a check valve that is shut."""

        def spare(flow: float) -> float:
            return self.head(flow) - self.loss * flow**2 - header

        return brentq(spare, 0, self.end) if spare(0) > 0 else 0.0


def _meet(pumps: Sequence[Printed], demand: Callable[[float], float], *, top: float) -> float:
    ends = [pump.head(pump.end) - pump.loss * pump.end**2 for pump in pumps]
    return brentq(lambda header: sum(pump.flow(header) for pump in pumps) - demand(header), max(ends), top)


@pytest.fixture(scope="session")
def demo_of() -> Callable[[str], Plant]:
    """A demo plant by its name, and what the commands say about it."""
    return cache(lambda name: Plant(CATALOGS / name / "case.toml"))


@pytest.fixture(scope="session")
def printed() -> type[Printed]:
    """A pump of a demo's catalog, read independently of the tool."""
    return Printed


@pytest.fixture(scope="session")
def meet() -> Callable[..., float]:
    """Header head of parallel `Printed` pumps that give what is demanded there, at most `top`."""
    return _meet
