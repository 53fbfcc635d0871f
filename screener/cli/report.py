"""screener report: one file for filing, review and defence."""

from __future__ import annotations

from typing import Annotated

import typer

from screener.cli import common
from screener.errors import ExitCode

app = common.new_app()


@app.command()
def report(
    case: common.CaseFile,
    catalog: common.Catalogs = None,
    pumps: Annotated[
        int, typer.Option("--pumps", min=0, help="Accepted pumps that are shown in every state.")
    ] = 2,
    top: Annotated[int, typer.Option("--top", min=1, help="Rows shown of each group.")] = 50,
    everything: Annotated[
        bool, typer.Option("--all", help="Show every model, those out of reach too.")
    ] = False,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Put a case in one report: what the header asks, the shortlist, the best pumps and the most efficient
    rejected one in every state, what was not assessed, assumptions, limits with sources, files read.

    Leaves with 1 where nothing is accepted.
    """
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.changes.report import report as put_together
    from screener.model.finding import Verdict
    from screener.view import report as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    with common.progress() as progress:
        result = put_together(loaded.case, loaded.catalog, accepted=pumps, progress=progress)
    screen = view.screen(result, Origin(loaded.files), top=top, everything=everything)
    common.emit(screen, format, output, force, shown=not output or format != "table")
    if not (result.shortlist.best.verdict == Verdict.ACCEPTED).any():
        raise typer.Exit(ExitCode.NOTHING_PASSED)
