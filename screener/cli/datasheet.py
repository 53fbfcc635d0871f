"""screener datasheet: one pump field by field, with where each figure came from."""

from __future__ import annotations

from screener.cli import common

app = common.new_app()


@app.command()
def datasheet(
    case: common.CaseFile,
    pump: common.Pump,
    diameter: common.Diameter = None,
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Write the data sheet of one pump: duty, header, suction, machine, driver, liquid, tolerances.

    Every field says where it came from; what is not known stays blank. A rejected pump gets one too.
    """
    common.check_outputs(format, output, force)
    from screener.case.load import load
    from screener.changes.datasheet import datasheet as fill_in
    from screener.view import datasheet as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    sheet = common.at_diameter(loaded, pump, diameter, fill_in)
    common.emit(view.screen(sheet, Origin(loaded.files)), format, output, force)
