"""screener case: check a case, or start a new one."""

from __future__ import annotations

import shlex
from collections.abc import Sized
from pathlib import Path
from typing import Annotated

import typer

from screener.cli import common
from screener.errors import OutputError, Problem

app = common.new_app()


@app.callback()
def case() -> None:
    """Check a case, or start a new one."""


@app.command()
def check(
    file: common.CaseFile,
    catalog: common.Catalogs = None,
) -> None:
    """Read a case and its catalogs, and report every problem with its place.

    Leaves with 3 where there is one.
    """
    from screener.case.load import load

    loaded = load(file, catalog or ())
    found = loaded.case
    duties = "1 duty" if len(found.duties) == 1 else f"{len(found.duties)} duties"
    parts = [_many(found.installed, "pump") + " installed", duties, _many(found.levels, "level")]
    typer.echo(f"{', '.join(parts)}, {_many(loaded.catalog, 'pump')} in the catalog: no problem found")


@app.command()
def new(
    folder: Annotated[
        Path, typer.Argument(metavar="DIR", help="Folder to write into, made if it is not there.")
    ],
    force: common.Force = False,
) -> None:
    """Write a commented case and a small catalog that run as they are, to be turned into your own."""
    from screener.case.template import files
    from screener.files import atomic

    items: dict[str | Path, bytes | str] = {folder / name: text for name, text in files().items()}
    atomic.check([path for path in items if Path(path).exists()], force=force)
    try:
        for path in items:
            Path(path).parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise OutputError([Problem(str(folder), 0, 0, f"could not be made: {error.strerror}")]) from error
    atomic.write_all(items, force=force)
    for path in items:
        typer.echo(f"wrote {path}")
    typer.echo(f"try: screener shortlist {shlex.quote(str(folder / 'case.toml'))}")


def _many(items: Sized, word: str) -> str:
    return f"1 {word}" if len(items) == 1 else f"{len(items)} {word}s"
