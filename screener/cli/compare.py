"""screener compare: several pumps side by side."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from screener.cli import common
from screener.errors import ExitCode, UsageError

if TYPE_CHECKING:
    from screener.model.curves import PumpTable

MOST = 8

app = common.new_app()


@app.command()
def compare(
    case: common.CaseFile,
    pumps: Annotated[
        list[str],
        typer.Argument(
            metavar="PUMP PUMP ...",
            help='Ids in the catalog, "ID@395mm" to fix the impeller; 2 to 8 of them.',
        ),
    ],
    catalog: common.Catalogs = None,
    format: common.Format = "table",
    output: common.Outputs = None,
    force: common.Force = False,
) -> None:
    """Hold two to eight pumps against the same requirements: asked, offered, deviation, verdict.

    Each stands at its best diameter unless one is given. Leaves with 1 where none of them is accepted.
    """
    common.check_outputs(format, output, force)
    if not 2 <= len(pumps) <= MOST:
        raise UsageError(f"{len(pumps)} pump{'s'[: len(pumps) != 1]} to compare (2 to {MOST})")
    from screener.case.load import load
    from screener.changes.datasheet import compare as work_out
    from screener.model.finding import Verdict
    from screener.view import compare as view
    from screener.view.data import Origin

    loaded = load(case, catalog or ())
    picks = [_pick(loaded.catalog, text, loaded.case.display["length"]) for text in pumps]
    try:
        sheets = work_out(loaded.case, loaded.catalog, picks)
    except ValueError as error:
        if all(diameter is None for _, diameter in picks):
            raise
        raise UsageError(str(error)) from error
    common.emit(view.screen(sheets, Origin(loaded.files)), format, output, force)
    if not any(sheet.explained.judged.candidates.verdict[0] == Verdict.ACCEPTED for sheet in sheets):
        raise typer.Exit(ExitCode.NOTHING_PASSED)


def _pick(catalog: PumpTable, text: str, unit: str) -> tuple[int, float | None]:
    """Row of a pump, and the impeller [m] that stands after the last @, unless that belongs to its id."""
    name, at, size = text.rpartition("@")
    if not at or text in catalog.ids:
        return common.row_of(catalog, text), None
    row = common.row_of(catalog, name)
    try:
        return row, common.length(size, unit)
    except ValueError as error:
        raise UsageError(f"{text}: {error}") from error
