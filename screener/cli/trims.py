"""screener trims: the diameters of one pump side by side."""

from __future__ import annotations

import typer

from screener.cli import common
from screener.errors import ExitCode

app = common.new_app()


@app.command()
def trims(
    case: common.CaseFile,
    pump: common.Pump,
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Compare the diameters of one pump: which pass, what stops the others, the best marked.

    Leaves with 1 where no diameter passes.
    """
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.changes.laws import by_law
    from screener.model.finding import Verdict
    from screener.screening.one import trims as compare
    from screener.view import trims as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    row = common.row_of(loaded.catalog, pump)
    result = compare(loaded.case, loaded.catalog, row)
    candidates = result.judged.candidates
    laws = by_law(result.bench, loaded.entries[row], steps=candidates.diameter, chosen=result.best)
    common.emit(view.screen(result, laws, Origin(loaded.files)), format, output, force)
    if not (candidates.verdict == Verdict.ACCEPTED).any():
        raise typer.Exit(ExitCode.NOTHING_PASSED)
