"""screener explain: every state and every criterion of one pump."""

from __future__ import annotations

import typer

from screener.cli import common
from screener.errors import ExitCode

app = common.new_app()


@app.command()
def explain(
    case: common.CaseFile,
    pump: common.Pump,
    diameter: common.Diameter = None,
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
    result = common.at_diameter(loaded, pump, diameter, look_at)
    common.emit(view.screen(look_closer(result), Origin(loaded.files)), format, output, force)
    if not result.passing.size:
        raise typer.Exit(ExitCode.NOTHING_PASSED)
