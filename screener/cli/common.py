"""What the commands share: their options, and how a screen leaves the process."""

from __future__ import annotations

import difflib
import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from screener.errors import UsageError

if TYPE_CHECKING:
    from screener.model.curves import PumpTable
    from screener.view.blocks import Screen

CaseFile = Annotated[Path, typer.Argument(metavar="CASE", help="The case file, .toml or .json.")]
Pump = Annotated[str, typer.Argument(metavar="PUMP", help="Id of the pump in the catalog.")]
Catalogs = Annotated[
    list[Path] | None,
    typer.Option(
        "--catalog", metavar="PATH", help="Catalog file or folder, instead of those in the case; repeatable."
    ),
]
Format = Annotated[str, typer.Option("--format", help="What goes to stdout: table, json, csv or markdown.")]
Outputs = Annotated[
    list[Path] | None,
    typer.Option(
        "--output", metavar="FILE", help="Write a file too, format by suffix (.json .csv .md); repeatable."
    ),
]
Force = Annotated[bool, typer.Option("--force", help="Replace files that exist.")]


PIPED_WIDTH = 120
"""Characters of a line where the screen goes to a file or another command, and COLUMNS says nothing."""


def new_app() -> typer.Typer:
    """An app for one command or one group of commands."""
    return typer.Typer(
        add_completion=False, rich_markup_mode=None, pretty_exceptions_enable=False, no_args_is_help=True
    )


def check_outputs(name: str, outputs: list[Path] | None, force: bool) -> None:
    """Refuse unknown formats, and files that cannot be written, before any work is done."""
    from screener.export import formats
    from screener.files import atomic

    names = ["table", *(module.NAME for module in formats())]
    if name not in names:
        raise UsageError(f'unknown format "{name}" (one of {", ".join(names)})')
    suffixes = [module.SUFFIX for module in formats()]
    for path in outputs or []:
        if path.suffix.lower() not in suffixes:
            raise UsageError(f'{path}: unknown suffix "{path.suffix}" (one of {", ".join(suffixes)})')
    atomic.check(outputs or [], force=force)


def emit(screen: Screen, name: str, outputs: list[Path] | None, force: bool) -> None:
    """Write the files asked for, then the screen to stdout."""
    from screener.export import formats
    from screener.files import atomic

    by_suffix = {module.SUFFIX: module for module in formats()}
    if outputs:
        atomic.write_all(
            {path: by_suffix[path.suffix.lower()].render(screen) for path in outputs}, force=force
        )
        for path in outputs:
            print(f"wrote {path}", file=sys.stderr)
    if name == "table":
        from rich.console import Console

        from screener.export import terminal

        piped = not sys.stdout.isatty() and "COLUMNS" not in os.environ
        console = Console(highlight=False, soft_wrap=True, width=PIPED_WIDTH if piped else None)
        with console.capture() as text:
            terminal.show(screen, console)
        sys.stdout.write(text.get())
    else:
        sys.stdout.write({module.NAME: module for module in formats()}[name].render(screen))


def row_of(catalog: PumpTable, pump: str) -> int:
    """Row of a pump in the catalog."""
    if pump in catalog.ids:
        return catalog.ids.index(pump)
    alike = [name for name in catalog.ids if name.casefold() == pump.casefold()]
    near = alike or difflib.get_close_matches(pump, catalog.ids, 3)
    hint = f"did you mean {' or '.join(near)}?" if near else f"the catalog holds {len(catalog)} pumps"
    raise UsageError(f'there is no pump "{pump}" in the catalog ({hint})')


@contextmanager
def progress() -> Iterator[Callable[[int, int], None]]:
    """A progress bar on stderr, on a terminal only."""
    if not sys.stderr.isatty():
        yield lambda done, total: None
        return
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (TextColumn("candidates"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task("", total=None)
        yield lambda done, total: bar.update(task, completed=done, total=total)


def length(text: str, unit: str) -> float:
    """A length [m] from the command line; a bare number is in the unit that the case shows lengths in."""
    from screener import units

    try:
        return float(units.to_si(float(text), unit, "length"))
    except ValueError:
        return units.parse(text, "length").value
