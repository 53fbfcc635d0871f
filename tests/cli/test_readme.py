"""The README: what it shows runs, and every command, criterion, unit, format and exit code is in it."""

from __future__ import annotations

import re
import shlex
import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from screener import units
from screener.cli.app import COMMANDS
from screener.criteria import criteria
from screener.errors import ExitCode
from screener.export import formats
from screener.files import shipped

TEXT = (Path(__file__).parents[2] / "README.md").read_text(encoding="utf-8")
GROUPS = {"catalog": ("check",), "case": ("check", "new")}
PROMPT = "$ screener "


def _commands() -> list[str]:
    """Every command shown, once, in order; one that ends in a backslash goes on in the next line."""
    blocks = re.findall(r"^```console\n(.*?)^```", TEXT.replace("\\\n", " "), re.M | re.S)
    lines = [line for block in blocks for line in block.splitlines()]
    return list(dict.fromkeys(line.removeprefix("$ ") for line in lines if line.startswith(PROMPT)))


def _words() -> set[str]:
    """What stands in code spans and between the commas and bars of tables and lists."""
    return {word.strip(" `.;:") for word in re.split(r"[,|\n]|`|\bor\b|\band\b", TEXT)}


def test_commands_are_shown() -> None:
    assert len(_commands()) >= 5
    assert {command.split()[1] for command in _commands()} == set(COMMANDS)


def test_the_commands_shown_run(
    screener: Callable[..., Any], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """One after the other, in a folder that holds the demo plants as the checkout does."""
    shutil.copytree(shipped.path("catalogs"), tmp_path / "catalogs")
    monkeypatch.chdir(tmp_path)
    for command in _commands():
        _, *arguments = shlex.split(command, comments=True)
        result = screener(*arguments)
        may_find_none = arguments[0] in ("explain", "trims")  # it shows a pump of which no diameter passes
        assert result.code in ((0, 1) if may_find_none else (0,)), command
        assert all(line.startswith("wrote ") for line in result.err.splitlines()), command
        assert result.out or "--output" in arguments, command


def test_the_python_shown_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    shutil.copytree(shipped.path("catalogs"), tmp_path / "catalogs")
    monkeypatch.chdir(tmp_path)
    (block,) = re.findall(r"^```python\n(.*?)^```", TEXT, re.M | re.S)
    exec(compile(block, "README.md", "exec"), {})
    assert "[5 rows" in capsys.readouterr().out


def test_every_command_is_listed() -> None:
    for name in COMMANDS:
        for part in GROUPS.get(name, ("",)):
            assert re.search(rf"\b{f'{name} {part}'.strip()}\b", TEXT), f"{name} {part}"


def test_every_criterion_is_listed() -> None:
    missing = {criterion.name for criterion in criteria()} - set(re.findall(r"`([^`\n]+)`", TEXT))
    assert missing == set()


def test_every_unit_is_listed() -> None:
    assert {unit.name for unit in units.TABLE} - _words() == set()


def test_every_format_and_exit_code_is_listed() -> None:
    for module in formats():
        assert re.search(rf"\b{module.NAME}\b", TEXT)
        assert f"`{module.SUFFIX}`" in TEXT
    assert set(re.findall(r"^\| (\d+) \|", TEXT, re.M)) == {str(int(code)) for code in ExitCode}
