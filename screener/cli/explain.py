"""screener explain: every state and every criterion of one pump."""

from __future__ import annotations

from typing import Annotated

import typer

from screener.cli import common
from screener.errors import ExitCode, UsageError

app = common.new_app()


@app.command()
def explain(
    case: common.CaseFile,
    pump: common.Pump,
    diameter: Annotated[
        str | None, typer.Option("--diameter", help='Impeller, such as "395 mm"; the best one by default.')
    ] = None,
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Show every state and every criterion of one pump, and the diameters at which it passes.

    Leaves with 1 where no diameter passes.
    """
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.changes.closer import look_closer
    from screener.screening.one import explain as look_at
    from screener.view import explain as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    model = common.row_of(loaded.catalog, pump)
    try:
        wanted = None if diameter is None else common.length(diameter, loaded.case.display["length"])
        result = look_at(loaded.case, loaded.catalog, model, wanted)
    except ValueError as error:
        if diameter is None:
            raise
        raise UsageError(f"--diameter: {error}") from error
    common.emit(view.screen(look_closer(result), Origin(loaded.files)), format, output, force)
    if not result.passing.size:
        raise typer.Exit(ExitCode.NOTHING_PASSED)
