"""Files that commands write: --output, --force, and the case that `case new` starts."""

from __future__ import annotations

import errno
import json
import os
import shutil
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

Screener = Callable[..., Any]


@pytest.fixture
def case(plant: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The case of the plant, with the folder of the plant as the current one."""
    monkeypatch.chdir(plant)
    return Path("case.toml")


def _files() -> set[str]:
    return {str(path) for path in Path().rglob("*")}


def test_several_outputs_at_once_hold_what_stdout_would_and_do_not_change_it(
    screener: Screener, case: Path, shown: Callable[[str, str], str]
) -> None:
    result = screener("header", case, "--output", "a.json", "--output", "a.csv", "--output", "a.MD")
    assert (result.code, result.out) == (0, shown("header", "table"))
    assert result.err.splitlines() == ["wrote a.json", "wrote a.csv", "wrote a.MD"]
    for name, format in (("a.json", "json"), ("a.csv", "csv"), ("a.MD", "markdown")):
        assert Path(name).read_text(encoding="utf-8") == shown("header", format)


@pytest.mark.parametrize(
    ("refused", "said"),
    [
        ("old.csv", "old.csv  exists already  (--force replaces it)"),
        ("none/new.csv", "none/new.csv  there is no folder none  (make it first)"),
        ("folder.csv", "folder.csv  is not a file  (name a file)"),
        ("case.toml/new.csv", "case.toml/new.csv  there is no folder case.toml  (make it first)"),
    ],
)
def test_one_refused_output_and_none_is_written(
    refused: str, said: str, screener: Screener, case: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    Path("old.csv").write_text("mine")
    Path("folder.csv").mkdir()
    before = _files()
    monkeypatch.delattr("screener.screening.today.header_report")  # refused before any work is done
    result = screener("header", case, "--output", "new.json", "--output", refused)
    assert (result.code, result.out, result.err) == (4, "", f"{said}\n")
    assert _files() == before
    assert Path("old.csv").read_text() == "mine"


def test_every_refused_output_is_told(screener: Screener, case: Path) -> None:
    Path("old.csv").write_text("mine")
    result = screener("header", case, "--output", "old.csv", "--output", "none/a.json")
    assert result.code == 4
    assert [line.split("  ")[0] for line in result.err.splitlines()] == ["old.csv", "none/a.json"]


def test_force_replaces_a_file_but_no_folder(screener: Screener, case: Path) -> None:
    Path("a.json").write_text("mine")
    assert screener("header", case, "--output", "a.json", "--force").code == 0
    assert json.loads(Path("a.json").read_text())["format"] == "pump-header/1"
    Path("b.json").mkdir()
    assert screener("header", case, "--output", "b.json", "--force").code == 4
    assert list(Path("b.json").iterdir()) == []


def test_an_unknown_suffix_among_outputs_and_none_is_written(screener: Screener, case: Path) -> None:
    before = _files()
    result = screener("header", case, "--output", "a.json", "--output", "a.docx")
    assert (result.code, result.out) == (2, "")
    assert _files() == before


@pytest.mark.skipif(os.geteuid() == 0, reason="everything may be written by root")
def test_a_read_only_folder_is_4(screener: Screener, case: Path) -> None:
    Path("shut").mkdir(mode=0o555)
    result = screener("header", case, "--output", "new.csv", "--output", "shut/a.json")
    assert (result.code, result.err) == (4, "shut/a.json  could not be written: Permission denied\n")
    assert not Path("new.csv").exists()


def test_a_folder_that_refuses_is_4_and_nothing_is_left(
    screener: Screener, case: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    make = tempfile.mkstemp

    def refuse(*arguments: Any, **options: Any) -> tuple[int, str]:
        if Path(options["dir"]).name == "shut":
            raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
        return make(*arguments, **options)

    monkeypatch.setattr(tempfile, "mkstemp", refuse)
    Path("shut").mkdir()
    before = _files()
    result = screener("header", case, "--output", "new.csv", "--output", "shut/a.json")
    assert (result.code, result.out) == (4, "")
    assert result.err == "shut/a.json  could not be written: Permission denied\n"
    assert _files() == before


def test_nothing_accepted_is_written_all_the_same(screener: Screener, case: Path) -> None:
    case.write_text(f"{case.read_text()}\n[limits]\nnpsh-margin = {{ ratio = 9 }}\n")
    result = screener("shortlist", case, "--output", "a.json", "--format", "csv")
    assert (result.code, result.err) == (1, "wrote a.json\n")
    assert json.loads(Path("a.json").read_text())["accepted"] == []
    assert "accepted" not in result.out


@pytest.fixture
def started(screener: Screener, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A case just started, with the current folder somewhere else."""
    monkeypatch.chdir("/")
    folder = tmp_path / "my plants" / "one"
    result = screener("case", "new", folder)
    assert (result.code, result.err) == (0, "")
    wrote = [folder / "case.toml", folder / "pumps" / "pumps.json"]
    assert result.out.splitlines()[:-1] == [f"wrote {path}" for path in wrote]
    assert result.out.splitlines()[-1] == f"try: screener shortlist '{folder}/case.toml'"
    assert sorted(path for path in folder.rglob("*") if path.is_file()) == sorted(wrote)
    return folder


@pytest.mark.parametrize(
    "command", ["shortlist", "header", "explain 80-200-2_V", "trims 80-200-2_V", "case check"]
)
def test_a_new_case_runs_as_it_is_from_any_folder(command: str, screener: Screener, started: Path) -> None:
    words = [word.replace("_", " ") for word in command.split()]
    place = 2 if words[0] == "case" else 1
    result = screener(*words[:place], started / "case.toml", *words[place:])
    assert (result.code, result.err) == (0, "")
    assert result.out


def test_a_new_case_overwrites_nothing_unless_forced(screener: Screener, started: Path) -> None:
    (started / "case.toml").write_text("mine")
    shutil.rmtree(started / "pumps")
    result = screener("case", "new", started)
    assert (result.code, result.out) == (4, "")
    assert result.err == f"{started / 'case.toml'}  exists already  (--force replaces it)\n"
    assert (started / "case.toml").read_text() == "mine"
    assert list(started.iterdir()) == [started / "case.toml"]
    assert screener("case", "new", started, "--force").code == 0
    assert screener("case", "check", started / "case.toml").code == 0


def test_a_new_case_inside_a_file_is_4(screener: Screener, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("mine")
    for folder in (tmp_path / "file", tmp_path / "file" / "plant"):
        result = screener("case", "new", folder)
        assert (result.code, result.out) == (4, "")
        assert result.err.startswith(f"{folder}  could not be made: ")


def test_catalog_check_reads_good_folders_and_reports_every_problem_of_bad_ones(
    screener: Screener, plant: Path
) -> None:
    bad = plant / "bad"
    bad.mkdir()
    text = (plant / "pumps" / "pumps.json").read_text()
    (bad / "a.json").write_text(text.replace('"speed": 1480', '"speed": -1', 1))
    (bad / "b.json").write_text(text.replace('"id": "B"', '"id": "A"').replace("[0, 20", "[0, 0", 1))
    (bad / "other.json").write_text('{"format": "something else"}')
    assert screener("catalog", "check", plant / "pumps").code == 0
    result = screener("catalog", "check", plant / "pumps", bad)
    assert (result.code, result.out) == (3, "")
    files = [line.split(":")[0] for line in result.err.splitlines()]
    assert set(files) == {str(bad / "a.json"), str(bad / "b.json")}
    assert f"{bad / 'a.json'}:9:16  " in result.err
