"""What the commands share: their options, and how a screen leaves the process."""

from __future__ import annotations

import difflib
import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, TypeVar

import typer

from screener.errors import UsageError

if TYPE_CHECKING:
    from screener.case.load import Loaded
    from screener.model.curves import PumpTable
    from screener.view.blocks import Screen

CaseFile = Annotated[Path, typer.Argument(metavar="CASE", help="The case file, .toml or .json.")]
Pump = Annotated[str, typer.Argument(metavar="PUMP", help="Id of the pump in the catalog.")]
Diameter = Annotated[
    str | None, typer.Option("--diameter", help='Impeller, such as "395 mm"; the best one by default.')
]
Catalogs = Annotated[
    list[Path] | None,
    typer.Option(
        "--catalog", metavar="PATH", help="Catalog file or folder, instead of those in the case; repeatable."
    ),
]
Format = Annotated[
    str, typer.Option("--format", help="What goes to stdout: table, json, csv, markdown or html.")
]
Outputs = Annotated[
    list[Path] | None,
    typer.Option(
        "--output",
        metavar="FILE",
        help="Write a file too, format by suffix (.json .csv .md .html .xlsx, charts as .svg .pdf .png); "
        "repeatable.",
    ),
]
Force = Annotated[bool, typer.Option("--force", help="Replace files that exist.")]


Result = TypeVar("Result")

PIPED_WIDTH = 120
"""Characters of a line where the screen goes to a file or another command, and COLUMNS says nothing."""


def new_app() -> typer.Typer:
    """An app for one command or one group of commands."""
    return typer.Typer(
        add_completion=False, rich_markup_mode=None, pretty_exceptions_enable=False, no_args_is_help=True
    )


def check_outputs(name: str, outputs: list[Path] | None, force: bool) -> None:
    """Refuse unknown formats, and files that cannot be written, before any work is done."""
    from screener.export import formats, missing
    from screener.files import atomic

    printed = ["table", *(module.NAME for module in formats() if not getattr(module, "FILE_ONLY", False))]
    by_suffix = {module.SUFFIX: module for module in formats()}
    if name not in printed:
        only = [module.SUFFIX for module in formats() if name == module.NAME]
        if only:
            raise UsageError(f'"{name}" goes to files only (--output FILE{only[0]})')
        raise UsageError(f'unknown format "{name}" (one of {", ".join(printed)})')
    for path in outputs or []:
        if path.suffix.lower() not in by_suffix:
            raise UsageError(f'{path}: unknown suffix "{path.suffix}" (one of {", ".join(by_suffix)})')
        if needed := missing(getattr(by_suffix[path.suffix.lower()], "NEEDS", "")):
            raise UsageError(f"{path}: {needed}")
    atomic.check(outputs or [], force=force)


def emit(screen: Screen, name: str, outputs: list[Path] | None, force: bool, *, shown: bool = True) -> None:
    """Write the files asked for, then the screen to stdout where it is to be shown."""
    from screener.export import formats
    from screener.files import atomic

    by_suffix = {module.SUFFIX: module for module in formats()}
    if outputs:
        atomic.write_all(
            {path: by_suffix[path.suffix.lower()].render(screen) for path in outputs}, force=force
        )
        for path in outputs:
            print(f"wrote {path}", file=sys.stderr)
    if not shown:
        return
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


def at_diameter(loaded: Loaded, pump: str, diameter: str | None, work: Callable[..., Result]) -> Result:
    """Do some work on one pump: work(case, catalog, row of the pump, diameter in m or None for the best).

    A diameter that cannot be read, or is not on offer, is an error of the command line.
    """
    model = row_of(loaded.catalog, pump)
    try:
        wanted = None if diameter is None else length(diameter, loaded.case.display["length"])
        return work(loaded.case, loaded.catalog, model, wanted)
    except ValueError as error:
        if diameter is None:
            raise
        raise UsageError(f"--diameter: {error}") from error


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
