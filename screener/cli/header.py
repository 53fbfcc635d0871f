"""screener header: the header today, and what it asks of the new pump."""

from __future__ import annotations

from screener.cli import common

app = common.new_app()


@app.command()
def header(
    case: common.CaseFile,
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Show how the installed pumps run today in every duty, wide open and after a trip; the permitted
    band of each combination; and what the new pump must do, beside what is commonly taken for it."""
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.screening.today import header_report
    from screener.view import header as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    screen = view.screen(header_report(loaded.case), Origin(loaded.files))
    common.emit(screen, format, output, force)
