"""Screens at 80, 100 and 160 columns, on a terminal and into a pipe."""

from __future__ import annotations

import io
import re
import sys
from collections.abc import Callable
from typing import Any

import pytest
from rich.console import Console

from screener.cli import common
from screener.export import terminal
from screener.view.blocks import Cell, Column, Lines, Screen, Table

WIDTHS = (80, 100, 160)
Screens = dict[str, Screen]


def _printed(screen: Screen, width: int) -> list[str]:
    out = io.StringIO()
    terminal.show(screen, Console(file=out, width=width, highlight=False, soft_wrap=True))
    return _without_last_word(out.getvalue().splitlines())


def _without_last_word(lines: list[str]) -> list[str]:
    """Lines of a screen less what it says at its end of columns that did not fit."""
    return lines[:-1] if lines[-1].endswith("shows more.") else lines


def _words(lines: list[str]) -> list[str]:
    return " ".join(lines).split()


@pytest.mark.parametrize("width", WIDTHS)
def test_no_line_is_too_long_or_ends_in_blanks(width: int, demo_screens: Screens) -> None:
    for command, screen in demo_screens.items():
        lines = _printed(screen, width)
        assert max(map(len, lines)) <= width, command
        assert [line for line in lines if line != line.rstrip()] == [], command
        assert "\x1b" not in "".join(lines), command


@pytest.mark.parametrize("width", WIDTHS)
def test_a_table_shows_whole_cells_and_breaks_no_number(width: int, demo_screens: Screens) -> None:
    seen = 0
    for screen in demo_screens.values():
        for table in (block for block in screen.blocks if isinstance(block, Table)):
            lines = _printed(Screen([Table(table.columns, table.rows)], table, {}), width)
            assert len(lines) == 1 + len(table.rows)
            for line, row in zip(lines[1:], table.rows, strict=True):
                words = {cell.text for cell, column in zip(row, table.columns, strict=True) if column.left}
                numbers = [cell.text for cell in row if cell.text not in words]
                for part in re.split(r"  +", line.strip()):
                    cut = part.endswith("…") and any(word.startswith(part[:-1]) for word in words)
                    assert cut or part in words or part in numbers, f"{part!r} in {line!r}"
                    seen += part in numbers
    assert seen > 500


@pytest.mark.parametrize("width", WIDTHS)
def test_numbers_stand_under_one_another(width: int, demo_screens: Screens) -> None:
    for screen in demo_screens.values():
        for table in (block for block in screen.blocks if isinstance(block, Table)):
            lines = _printed(Screen([Table(table.columns, table.rows)], table, {}), width)
            places = terminal.fitting(table.columns, table.rows, width)
            if not table.columns[places[-1]].left:
                assert len({len(line) for line in lines}) == 1


def test_more_room_shows_more_columns_and_never_fewer(demo_screens: Screens) -> None:
    wider = 0
    for screen in demo_screens.values():
        for table in (block for block in screen.blocks if isinstance(block, Table)):
            narrow, middle, wide = (set(terminal.fitting(table.columns, table.rows, w)) for w in WIDTHS)
            assert narrow <= middle <= wide
            assert all(place in narrow for place, column in enumerate(table.columns) if column.rank == 0)
            wider += len(wide - narrow)
    assert wider > 0


def test_a_long_title_is_cut_rather_than_lose_its_numbers() -> None:
    columns = [Column("pump", "pump", left=True), Column("flow", "each of a great many pumps " * 3, rank=5)]
    table = Table(columns, [[Cell("A", "A"), Cell("1234", 1234.0)]])
    title, row = _printed(Screen([table], table, {}), 80)
    assert title.startswith("pump  each of a great many pumps")
    assert (len(title), title[-1]) == (80, "…")
    assert (len(row), row.split()) == (80, ["A", "1234"])


@pytest.mark.parametrize("width", WIDTHS)
def test_wrapping_loses_no_word(width: int, demo_screens: Screens) -> None:
    for screen in demo_screens.values():
        text = " ".join(_words(_printed(screen, width)))
        for block in (block for block in screen.blocks if isinstance(block, Lines)):
            for line in block.lines:
                assert " ".join(line.split()) in text


@pytest.mark.parametrize("columns", ["80", "100", "160", None])
def test_piped_output_is_as_wide_as_columns_says_and_plain(
    columns: str | None,
    demo_screens: Screens,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    if columns:
        monkeypatch.setenv("COLUMNS", columns)
    for command, screen in demo_screens.items():
        common.emit(screen, "table", None, False)
        shown = capsys.readouterr()
        assert shown.err == ""
        assert _without_last_word(shown.out.splitlines()) == _printed(screen, int(columns or 120)), command


def _colours(text: str) -> set[str]:
    """Codes that set a colour, out of those that set how characters look."""
    codes = {code for found in re.findall(r"\x1b\[([0-9;]*)m", text) for code in found.split(";")}
    return {code for code in codes if re.fullmatch(r"[34][0-8]|9[0-7]|10[0-7]", code)}


@pytest.mark.parametrize("no_colour", [False, True])
def test_a_terminal_gets_colours_unless_no_color_is_set(
    no_colour: bool,
    demo_screens: Screens,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setenv("COLUMNS", "80")
    if no_colour:
        monkeypatch.setenv("NO_COLOR", "1")
    common.emit(demo_screens["shortlist"], "table", None, False)
    text = capsys.readouterr().out
    assert bool(_colours(text)) is not no_colour
    plain = re.sub(r"\x1b\[[0-9;]*m", "", text)
    assert "\x1b" not in plain
    assert _without_last_word(plain.splitlines()) == _printed(demo_screens["shortlist"], 80)
    assert all(line == line.rstrip() for line in plain.splitlines())


def test_other_formats_do_not_depend_on_the_width(
    demo_screens: Screens, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    shown = set()
    for columns in ("40", "160"):
        monkeypatch.setenv("COLUMNS", columns)
        common.emit(demo_screens["header"], "markdown", None, False)
        shown.add(capsys.readouterr().out)
    assert len(shown) == 1


def test_help_keeps_to_80_columns(screener: Callable[..., Any]) -> None:
    for command in ((), ("shortlist",), ("explain",), ("catalog", "check"), ("case", "new")):
        result = screener(*command, "--help")
        assert max(map(len, result.out.splitlines())) <= 80
