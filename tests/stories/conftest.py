"""Plants written as files, the public commands run on them, and parallel pumps in closed form."""

from __future__ import annotations

import io
import json
import subprocess
import sys
import warnings
from collections.abc import Callable, Mapping, Sequence
from contextlib import redirect_stdout
from pathlib import Path
from typing import Any

import pytest

from screener.cli import run

POINTS = 31
"""Points of each curve. Ten, or straight lines between them, move the small flows by several m3/h."""

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
