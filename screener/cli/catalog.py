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
    typer.echo(f"{len(files)} files, {len(entries)} pumps, {curves} curves: no problem found")
