"""Charts from the command line: files only, each command its own, refused early where they cannot be made."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest

Screener = Callable[..., Any]


@pytest.mark.parametrize(
    ("command", "said"),
    [
        ("shortlist", "Efficiency against how well a new pump matches"),
        ("header", "The header today, and what it asks of a new pump"),
        ("explain A", "The header with A, "),
        ("trims A", "A at its diameters"),
        ("operation A", "Header flows at which each combination may run"),
    ],
)
def test_a_command_draws_its_charts(command: str, said: str, screener: Screener, plant: Path) -> None:
    name, *pump = command.split()
    result = screener(name, plant / "case.toml", *pump, "--output", plant / "a.svg")
    assert (result.code, result.err) == (0, f"wrote {plant / 'a.svg'}\n")
    written = ["".join(text.itertext()) for text in ElementTree.parse(plant / "a.svg").iter()]
    assert any(said in text for text in written)


def test_pdf_and_png_too(screener: Screener, plant: Path) -> None:
    result = screener("header", plant / "case.toml", "--output", plant / "a.PDF", "--output", plant / "a.png")
    assert result.code == 0
    assert (plant / "a.PDF").read_bytes().startswith(b"%PDF-")
    assert (plant / "a.png").read_bytes().startswith(b"\x89PNG")


@pytest.mark.parametrize("format", ["svg", "pdf", "png"])
def test_not_on_stdout(format: str, screener: Screener, plant: Path) -> None:
    result = screener("header", plant / "case.toml", "--format", format)
    assert (result.code, result.out) == (2, "")
    assert result.err == f'"{format}" goes to files only (--output FILE.{format})\n'


def test_a_missing_extra_is_told_before_any_work(
    screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, "matplotlib", None)
    monkeypatch.delattr("screener.screening.today.header_report")
    result = screener(
        "header", plant / "case.toml", "--output", plant / "a.svg", "--output", plant / "a.json"
    )
    assert (result.code, result.out) == (2, "")
    assert result.err.endswith("needs the extra 'report': pip install 'pump-header-screener[report]'\n")
    assert not (plant / "a.json").exists()
