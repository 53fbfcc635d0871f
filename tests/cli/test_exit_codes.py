"""One exit code, one meaning; results to stdout, talk to stderr."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from screener.cli import run
from screener.errors import ExitCode

Screener = Callable[..., Any]


@pytest.mark.parametrize("command", ["shortlist", "header", "explain A", "trims A"])
def test_done_is_0_and_only_the_result_is_on_stdout(command: str, shown: Callable[[str, str], str]) -> None:
    """The fixture looks at the code and at stderr."""
    assert len(shown(command, "table").splitlines()) > 10


def test_checks_say_what_they_read(screener: Screener, plant: Path) -> None:
    case = screener("case", "check", plant / "case.toml")
    assert (case.code, case.err) == (0, "")
    assert re.match(r"1 pumps? installed, 2 duties, 1 levels?, 5 pumps in the catalog: ", case.out)
    catalog = screener("catalog", "check", plant / "pumps")
    assert (catalog.code, catalog.err) == (0, "")
    assert re.match(r"1 files?, 5 pumps, 5 curves: ", catalog.out)


@pytest.mark.parametrize("command", ["--version", "--help", "shortlist --help", "case new --help"])
def test_questions_are_0(command: str, screener: Screener) -> None:
    result = screener(*command.split())
    assert (result.code, result.err) == (0, "")
    assert result.out


def test_nothing_accepted_is_1(screener: Screener, plant: Path) -> None:
    case = plant / "case.toml"
    case.write_text(f"{case.read_text()}\n[limits]\nnpsh-margin = {{ ratio = 9 }}\n")
    for command in (("shortlist", case), ("explain", case, "A"), ("trims", case, "A")):
        result = screener(*command)
        assert (result.code, result.err) == (1, ""), command
        assert "npsh" in result.out.lower()
    assert screener("header", case).code == 0


def test_a_diameter_that_fails_is_0_where_another_passes(screener: Screener, plant: Path) -> None:
    result = screener("explain", plant / "case.toml", "A", "--diameter", "210")
    assert result.code == 0
    assert "REJECTED" in result.out


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("explain", "CASE", "AB"), 'there is no pump "AB" in the catalog'),
        (("trims", "CASE", "a"), 'there is no pump "a" in the catalog'),
        (("explain", "CASE", "A", "--diameter", "500"), "180 to 210 mm"),
        (("explain", "CASE", "A", "--diameter", "wide"), "--diameter"),
        (("explain", "CASE", "A", "--diameter", ""), "--diameter"),
        (("explain", "CASE", "A", "--diameter", "nan"), "--diameter"),
        (("explain", "CASE", "A", "--diameter", "20 kg"), "--diameter"),
        (("explain", "CASE", "E", "--diameter", "200"), "E states no diameter"),
        (
            ("shortlist", "CASE", "--format", "yaml"),
            'unknown format "yaml" (one of table, csv, html, json, markdown)',
        ),
        (
            ("shortlist", "CASE", "--output", "list.xls"),
            'unknown suffix ".xls" (one of .csv, .html, .json, .md, .pdf, .png, .svg, .xlsx)',
        ),
        (("header", "CASE", "--output", "list"), 'unknown suffix ""'),
        (("shortlist", "CASE", "--tops", "3"), "--tops"),
        (("shortlist", "CASE", "--top", "0"), "--top"),
        (("shortlist",), "CASE"),
        (("explain", "CASE"), "PUMP"),
        (("header", "CASE", "A"), "A"),
        (("screen", "CASE"), "screen"),
        (("case", "make"), "make"),
        ((), "Usage"),
    ],
)
def test_a_wrong_command_line_is_2(
    arguments: tuple[str, ...], said: str, screener: Screener, plant: Path
) -> None:
    result = screener(*(plant / "case.toml" if word == "CASE" else word for word in arguments))
    assert (result.code, result.out) == (2, "")
    assert said in result.err


def test_near_names_are_offered(screener: Screener, plant: Path) -> None:
    text = (plant / "pumps" / "pumps.json").read_text()
    (plant / "pumps" / "pumps.json").write_text(text.replace('"id": "C"', '"id": "80-200 C"'))
    result = screener("explain", plant / "case.toml", "80-200 V")
    assert result.code == 2
    assert "did you mean 80-200 C?" in result.err


@pytest.mark.parametrize("command", ["shortlist", "header", "explain A", "trims A", "case check"])
def test_a_missing_case_is_3(command: str, screener: Screener, tmp_path: Path) -> None:
    words = command.split()
    place = 2 if words[0] == "case" else 1
    result = screener(*words[:place], tmp_path / "no.toml", *words[place:])
    assert (result.code, result.out) == (3, "")
    assert result.err == f"{tmp_path / 'no.toml'}  cannot be read: No such file or directory\n"


def test_a_missing_catalog_is_3(screener: Screener, plant: Path, tmp_path: Path) -> None:
    result = screener("shortlist", plant / "case.toml", "--catalog", tmp_path / "none")
    assert (result.code, result.out) == (3, "")
    assert str(tmp_path / "none") in result.err
    (plant / "pumps").rename(plant / "curves")
    result = screener("shortlist", plant / "case.toml")
    assert (result.code, result.out) == (3, "")
    assert f"{plant / 'case.toml'}:3:12  " in result.err
    assert screener("header", plant / "case.toml", "--catalog", plant / "curves").code == 0


def test_a_fault_of_ours_is_70_with_all_that_a_report_needs(
    screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*arguments: object) -> None:
        raise ZeroDivisionError("ours")

    monkeypatch.setattr("screener.case.load.load", broken)
    result = screener("shortlist", plant / "case.toml")
    assert (result.code, result.out) == (70, "")
    assert "Traceback" in result.err
    assert "ZeroDivisionError: ours" in result.err
    assert "this is a fault of screener" in result.err


def test_a_fault_in_the_work_is_not_put_down_to_the_diameter(
    screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*arguments: object) -> None:
        raise ValueError("shapes do not match")

    monkeypatch.setattr("screener.screening.one.explain", broken)
    assert screener("explain", plant / "case.toml", "A").code == 70


def test_interrupted_is_130(plant: Path) -> None:
    """A signal that arrives while the case is read."""
    driver = (
        "import os, signal, sys, time, screener.case.load\n"
        "def load(*_):\n"
        "    os.kill(os.getpid(), signal.SIGINT)\n"
        "    time.sleep(60)\n"
        "screener.case.load.load = load\n"
        "from screener.cli import main\n"
        "main(sys.argv[1:])\n"
    )
    command = [sys.executable, "-c", driver, "shortlist", plant / "case.toml", "--output", plant / "a.json"]
    done = subprocess.run(command, capture_output=True, text=True, timeout=50)
    assert (done.returncode, done.stdout) == (130, "")
    assert done.stderr == "interrupted; nothing was half-written\n"
    assert not (plant / "a.json").exists()
    assert ExitCode.INTERRUPTED == 128 + signal.SIGINT


@pytest.mark.parametrize("unbuffered", ["", "1"])
def test_a_closed_pipe_is_0(unbuffered: str, plant: Path) -> None:
    """Found out when the buffer goes out at the end, or as soon as something is written."""
    reading, writing = os.pipe()
    os.close(reading)
    command = [sys.executable, "-m", "screener", "header", plant / "case.toml"]
    environment = os.environ | {"PYTHONUNBUFFERED": unbuffered}
    done = subprocess.run(command, stdout=writing, stderr=subprocess.PIPE, text=True, env=environment)
    os.close(writing)
    assert (done.returncode, done.stderr) == (0, "")


def test_head_takes_what_it_wants(plant: Path) -> None:
    command = f"'{sys.executable}' -m screener header '{plant}/case.toml' --format json | head -1"
    done = subprocess.run(["bash", "-o", "pipefail", "-c", command], capture_output=True, text=True)
    assert (done.returncode, done.stdout, done.stderr) == (0, "{\n", "")


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="needs a device that is always full")
def test_a_full_disk_behind_stdout_is_4(plant: Path) -> None:
    with open("/dev/full", "w") as full:
        command = [sys.executable, "-m", "screener", "catalog", "check", plant / "pumps"]
        environment = os.environ | {"PYTHONUNBUFFERED": ""}
        done = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, env=environment)
    assert (done.returncode, done.stderr) == (4, "the output could not be written: No space left on device\n")


def test_a_terminal_without_the_letters_of_a_name_is_no_fault(plant: Path) -> None:
    case = plant / "case.toml"
    case.write_text(case.read_text().replace("a small plant", "Λίμνη"), encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-m", "screener", "header", case],
        capture_output=True,
        env=os.environ | {"PYTHONIOENCODING": "ascii"},
    )
    assert (done.returncode, done.stderr) == (0, b"")
    assert done.stdout.startswith(rb"Second pump for \u039b\u03af")


def test_every_exit_code_is_told_to_the_process(monkeypatch: pytest.MonkeyPatch) -> None:
    from screener import cli

    for code in ExitCode:
        monkeypatch.setattr(cli, "run", lambda arguments, code=code: int(code))
        with pytest.raises(SystemExit) as left:
            cli.main([])
        assert left.value.code == code
    monkeypatch.undo()
    assert run(["--version"]) == 0
