"""Names are data: what a pump, a tag, a duty or a title is called acts on nothing that shows it."""

from __future__ import annotations

import csv
import io
import json
import re
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from rich.console import Console

from screener.export import formats, terminal
from screener.view.blocks import Screen

NAMES = (
    "=1+1",
    "<script>alert(1)</script>",
    "[/red]",
    "two\nlines",
    "\x1b[2J\x1b[31mred\x07",
    "long" * 75,
    "a|b",
    "\t@SUM(1)",
    "\x9b31m \u202egnp.exe",
    "- `code` **bold** &lt; [x](http://x)",
    "揚水ポンプ" * 20,
)
WIDTHS = (80, 100, 160)
Screens = dict[str, Screen]


def _case(folder: Path) -> Path:
    """A plant in which everything that has a name is called one of them."""
    plant = Path(__file__).parent / "plant"
    catalog = json.loads((plant / "pumps" / "pumps.json").read_text())
    accepted, _, rejected, conditional, _ = catalog["pumps"]
    catalog["pumps"] = [{**accepted, "id": name, "construction": name} for name in NAMES]
    catalog["pumps"] += [{**rejected, "id": f"{name} C"} for name in NAMES[3:6]]
    catalog["pumps"] += [{**conditional, "id": f"{name} D"} for name in NAMES[3:6]]
    (folder / "pumps.json").write_text(json.dumps(catalog))
    case = tomllib.loads((plant / "case.toml").read_text())
    case |= {"catalog": ["pumps.json"], "title": " ".join(NAMES)}
    case["liquid"][0]["name"] = NAMES[4]
    case["level"].append({**case["level"][0], "name": NAMES[1]})
    case["level"][0]["name"] = NAMES[10]
    first, second = case["installed"][0] | {"tag": NAMES[0]}, case["installed"][0] | {"tag": NAMES[5]}
    first["curve"] = second["curve"] = {"pump": NAMES[2], "diameter": 210}
    case["installed"] = [first, second | {"motor": 30}]
    case["duty"][0] |= {"name": NAMES[4], "running": [NAMES[0], "new"]}
    case["duty"][1] |= {"name": NAMES[6], "flow": 250, "running": [NAMES[0], NAMES[5], "new"]}
    (folder / "case.json").write_text(json.dumps(case))
    return folder / "case.json"


@pytest.fixture(scope="module")
def case(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return _case(tmp_path_factory.mktemp("hostile"))


@pytest.fixture(scope="module")
def screens(case: Path, screens_of: Callable[..., Screens]) -> Screens:
    return screens_of(case, NAMES[0], NAMES)


def _render(name: str, screen: Screen) -> str:
    text: str = next(module.render for module in formats() if name == module.NAME)(screen)
    return text


def _printed(screen: Screen, width: int) -> str:
    console = Console(file=io.StringIO(), width=width, highlight=False, soft_wrap=True)
    terminal.show(screen, console)
    text: str = console.file.getvalue()  # type: ignore[attr-defined]
    return text


def _acting(text: str) -> set[str]:
    """Characters that could act on a terminal."""
    return {character for character in text if not character.isprintable()} - {"\n"}


def _harmless(name: str) -> str:
    """A name as it may be shown: blanks for breaks, a mark for what would act."""
    return "".join(" " if c in "\n\t" else "\N{REPLACEMENT CHARACTER}" if _acting(c) else c for c in name)


def _strings(node: object) -> set[str]:
    if isinstance(node, str):
        return {node}
    inner = node.values() if isinstance(node, dict) else node if isinstance(node, list) else ()
    return set().union(*map(_strings, inner))


def test_the_names_get_through(screens: Screens) -> None:
    """Each stands in the results at all, or nothing would be tested here."""
    assert {item["pump"] for item in screens["shortlist"].data["accepted"]} == set(NAMES)  # type: ignore[attr-defined]
    for verdict in ("rejected", "conditional"):
        assert len(screens["shortlist"].data[verdict]) == 3  # type: ignore[arg-type]
    assert {NAMES[0], NAMES[5]} <= _strings(screens["header"].data)


@pytest.mark.parametrize("format", ["json", "csv", "markdown"])
def test_no_format_lets_a_character_act(format: str, screens: Screens) -> None:
    for command, screen in screens.items():
        assert _acting(_render(format, screen)) == set(), command


def test_json_keeps_every_name_as_it_is(screens: Screens) -> None:
    for screen in screens.values():
        assert json.loads(_render("json", screen)) == json.loads(json.dumps(screen.data))


def test_csv_starts_no_formula_and_breaks_no_row(screens: Screens) -> None:
    for command, screen in screens.items():
        text = _render("csv", screen)
        header, *rows = csv.reader(io.StringIO(text))
        assert len(text.splitlines()) == 1 + len(rows) == 1 + len(screen.table.rows), command
        assert {len(row) for row in rows} == {len(header)}
        cells = [cell for row in (header, *rows) for cell in row]
        assert not [cell for cell in cells if re.match(r"\s*[=+@]|\s*-[^0-9]", cell)]
    named = {row[1] for row in csv.reader(io.StringIO(_render("csv", screens["shortlist"])))}
    for name in NAMES:
        shown = _harmless(name)
        assert (f"'{shown}" if shown.strip()[0] in "=@-" else shown) in named


def test_markdown_breaks_no_table_and_marks_nothing_up(screens: Screens) -> None:
    for screen in screens.values():
        text = _render("markdown", screen)
        bare = re.sub(r"\\[^\w\s]", "", text)  # without all that is escaped
        assert not re.search(r"[<>`\[\]_&~]", bare)
        for line in bare.splitlines():
            assert re.match(r"#{1,2} \S|\*[^*]+\*$|- \*\*[^*]+\*\*: [^*]+$|\||[^-+=#*|][^*|]*$|$", line), line
        for block in text.split("\n\n"):
            if block.startswith("|"):
                assert len({len(re.findall(r"(?<!\\)\|", line)) for line in block.splitlines()}) == 1
    rows = [
        line for line in _render("markdown", screens["shortlist"]).splitlines() if line.startswith("| 1 |")
    ]
    assert len(rows) == 1


@pytest.mark.parametrize("width", WIDTHS)
def test_the_terminal_keeps_its_width_and_its_settings(width: int, screens: Screens) -> None:
    for command, screen in screens.items():
        text = _printed(screen, width)
        assert _acting(text) == set(), command
        wide = [line for line in text.splitlines() if terminal._length(line) > width]
        assert wide == [], command
        assert all(line == line.rstrip() for line in text.splitlines()), command
        assert "[/red]" in text or command != "shortlist"


@pytest.mark.parametrize("width", WIDTHS)
def test_a_long_name_costs_no_number(width: int, screens: Screens) -> None:
    text = _printed(screens["shortlist"], width)
    data: Any = screens["shortlist"].data["accepted"]
    for number, item in enumerate(data[:10], start=1):
        row = next(line for line in text.splitlines() if re.match(rf" *{number}  ", line))
        words = row.split()
        for figure in (f"{item['diameter']:.0f}", f"{item['score']:.1f}", f"{item['efficiency']:.1f}"):
            assert figure in words


@pytest.mark.parametrize("command", ["explain", "trims"])
def test_the_command_line_takes_and_shows_such_names(
    command: str, case: Path, screener: Callable[..., Any]
) -> None:
    result = screener(command, case, NAMES[4], "--format", "csv")
    assert (result.code, result.err) == (0, "")
    assert _acting(result.out) == set()


def test_problems_stay_on_their_line(case: Path, screener: Callable[..., Any], tmp_path: Path) -> None:
    wrong = screener("explain", case, "two\nlines\x1b[2J")
    assert wrong.code == 2
    data = json.loads((case.parent / "pumps.json").read_text())
    (tmp_path / "pumps.json").write_text(json.dumps(data | {"pumps": data["pumps"][:11] * 2}))
    twice = screener("catalog", "check", tmp_path)
    assert twice.code == 3
    assert len(twice.err.splitlines()) == len(NAMES)
    data["pumps"][4]["speed"] = "\x1b[2J\nforged.json:1:1  nothing"
    (tmp_path / "pumps.json").write_text(json.dumps(data))
    typed = screener("catalog", "check", tmp_path)
    assert (typed.code, len(typed.err.splitlines())) == (3, 1)
    for result in (wrong, twice, typed):
        assert _acting(result.err) == set()
        assert result.out == ""
