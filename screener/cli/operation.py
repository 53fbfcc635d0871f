"""screener operation: which pumps to run in each duty, and which may run at which header flow."""

from __future__ import annotations

from typing import Annotated

import typer

from screener.cli import common
from screener.errors import UsageError

app = common.new_app()


@app.command()
def operation(
    case: common.CaseFile,
    pump: Annotated[
        str | None,
        typer.Argument(
            metavar="PUMP", help="Id of a new pump in the catalog; without it the header as it is."
        ),
    ] = None,
    diameter: common.Diameter = None,
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Show the cheapest combination of pumps in each duty beside the one asked for, and the header flows
    at which each combination may run. Nothing is controlled: which pumps run is the operator's to decide.
    """
    common.check_outputs(format, output, force)
    if diameter is not None and pump is None:
        raise UsageError("--diameter is of a new pump: name it after the case")
    from screener.case.load import load
    from screener.changes.operation import operation as find
    from screener.view import operation as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    result = find(loaded.case) if pump is None else common.at_diameter(loaded, pump, diameter, find)
    common.emit(view.screen(result, Origin(loaded.files)), format, output, force)
