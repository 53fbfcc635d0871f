"""screener catalog: check catalogs of pump curves."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from screener.cli import common

app = common.new_app()


@app.callback()
def catalog() -> None:
    """Check catalogs of pump curves."""


@app.command()
def check(
    paths: Annotated[list[Path], typer.Argument(metavar="PATH", help="Catalog files or folders.")],
) -> None:
    """Read catalogs and report every problem with its file, line and column.

    Leaves with 3 where there is one.
    """
    from screener.catalog.read import read

    entries, files = read(paths)
    curves = sum(len(entry.curves) for entry in entries)
    counts = ((len(files), "file"), (len(entries), "pump"), (curves, "curve"))
    typer.echo(", ".join(f"{n} {what}{'' if n == 1 else 's'}" for n, what in counts) + ": no problem found")
