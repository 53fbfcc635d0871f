"""screener shortlist: the whole job."""

from __future__ import annotations

from typing import Annotated

import typer

from screener.cli import common
from screener.errors import ExitCode

app = common.new_app()


@app.command()
def shortlist(
    case: common.CaseFile,
    catalog: common.Catalogs = None,
    top: Annotated[int, typer.Option("--top", min=1, help="Rows shown of each group.")] = 10,
    everything: Annotated[
        bool, typer.Option("--all", help="Show every model, those out of reach too.")
    ] = False,
    closer: Annotated[
        bool,
        typer.Option(
            "--closer", help="Look closer at the rows shown: what would make a pump pass, what holds. Slower."
        ),
    ] = False,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Work out what the header asks of the new pump, trim every pump of the catalog to it, run each
    through every duty and trip, rank what passes, and say with numbers why the rest does not.

    Leaves with 1 where nothing is accepted.
    """
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.model.finding import Verdict
    from screener.screening.shortlist import shortlist as screen_catalog
    from screener.view import shortlist as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    with common.progress() as progress:
        result = screen_catalog(loaded.case, loaded.catalog, progress=progress)
    near = None
    if closer:
        from screener.changes.near import look_nearer

        near = look_nearer(result, top=len(result.best) if everything else top)
    screen = view.screen(result, Origin(loaded.files), top=top, everything=everything, near=near)
    common.emit(screen, format, output, force)
    if not (result.best.verdict == Verdict.ACCEPTED).any():
        raise typer.Exit(ExitCode.NOTHING_PASSED)
