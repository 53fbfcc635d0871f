"""Running the command line inside the test, on a plant small enough to be quick."""

from __future__ import annotations

import contextlib
import io
import shutil
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from pathlib import Path

import pytest

from screener.case.load import load
from screener.changes.closer import look_closer
from screener.changes.laws import by_law
from screener.cli import run
from screener.files import shipped
from screener.screening.one import explain, trims
from screener.screening.shortlist import shortlist
from screener.screening.today import header_report
from screener.view import explain as explain_view
from screener.view import header as header_view
from screener.view import shortlist as shortlist_view
from screener.view import trims as trims_view
from screener.view.blocks import Screen
from screener.view.data import Origin

PLANT = Path(__file__).parent / "plant"


@dataclass(frozen=True)
class Result:
    """What a command left behind."""

    code: int
    out: str
    err: str


@pytest.fixture(autouse=True)
def _plain_environment(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("COLUMNS", "LINES", "NO_COLOR", "FORCE_COLOR", "TTY_COMPATIBLE", "TTY_INTERACTIVE"):
        monkeypatch.delenv(name, raising=False)


@pytest.fixture
def screener(capsys: pytest.CaptureFixture[str]) -> Callable[..., Result]:
    """The command line, in this process: arguments in, exit code and both streams out."""

    def call(*arguments: object) -> Result:
        capsys.readouterr()
        code = run([str(argument) for argument in arguments])
        captured = capsys.readouterr()
        return Result(code, captured.out, captured.err)

    return call


@pytest.fixture
def plant(tmp_path: Path) -> Path:
    """Folder with a case that accepts pump A, rejects C, leaves D and E open, and finds B too weak."""
    return Path(shutil.copytree(PLANT, tmp_path / "plant"))


@pytest.fixture(scope="session")
def shown(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str, str], str]:
    """What a command, such as "explain A", says about the plant in a format; each is run once."""
    case = Path(shutil.copytree(PLANT, tmp_path_factory.mktemp("plant"), dirs_exist_ok=True)) / "case.toml"

    @lru_cache
    def say(command: str, format: str) -> str:
        name, *pump = command.split()
        out, err = io.StringIO(), io.StringIO()
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = run([name, str(case), *pump, "--format", format])
        assert (code, err.getvalue()) == (1 if pump == ["E"] else 0, "")  # no diameter of E passes
        return out.getvalue()

    return say


@pytest.fixture(scope="session")
def screens_of() -> Callable[..., dict[str, Screen]]:
    """Every screen of a case by the command that shows it: "header", "trims A"."""

    def make(case: Path, pump: str, names: Sequence[str] = ()) -> dict[str, Screen]:
        """Make them, those of one pump also under other names for it."""
        loaded = load(case)
        origin = Origin(loaded.files)
        result = shortlist(loaded.case, loaded.catalog)
        screens = {
            "shortlist": shortlist_view.screen(result, origin),
            "shortlist --all": shortlist_view.screen(result, origin, everything=True),
            "header": header_view.screen(header_report(loaded.case), origin),
        }
        row = loaded.catalog.ids.index(pump)
        several = trims(loaded.case, loaded.catalog, row)
        steps = several.judged.candidates.diameter
        under = by_law(several.bench, loaded.entries[row], steps=steps, chosen=several.best)
        one = look_closer(explain(loaded.case, loaded.catalog, row))
        for name in names or (pump,):
            table = replace(loaded.catalog, ids=(name,) * len(loaded.catalog))
            screens[f"explain {name}"] = explain_view.screen(
                replace(one, explained=replace(one.explained, table=table)), origin
            )
            screens[f"trims {name}"] = trims_view.screen(replace(several, table=table), under, origin)
        return screens

    return make


@pytest.fixture(scope="session")
def demo_screens(screens_of: Callable[..., dict[str, Screen]]) -> dict[str, Screen]:
    """Screens of the demo plant, with the pump that its check valve holds shut."""
    return screens_of(shipped.demo("osier-bank", "case.toml"), "200-400-4 K")
