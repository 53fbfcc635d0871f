"""The commands, in a table: a command's module is imported when it is called."""

from __future__ import annotations

import importlib
from collections.abc import Mapping
from typing import Any

import typer
from typer.core import TyperGroup

COMMANDS: Mapping[str, tuple[str, str]] = {
    "header": ("screener.cli.header", "How the installed pumps run today, and what the new pump must do."),
    "shortlist": (
        "screener.cli.shortlist",
        "Trim, run and rank every pump of the catalog; say why the rest fails.",
    ),
    "explain": ("screener.cli.explain", "Every state and every criterion of one pump."),
    "trims": ("screener.cli.trims", "The diameters of one pump side by side."),
    "datasheet": ("screener.cli.datasheet", "The data sheet of one pump, with where each figure came from."),
    "compare": ("screener.cli.compare", "Two to eight pumps side by side: asked, offered, verdict."),
    "operation": (
        "screener.cli.operation",
        "Which pumps to run in each duty, and which may run at which header flow.",
    ),
    "report": ("screener.cli.report", "The whole case in one file, for filing, review and defence."),
    "catalog": ("screener.cli.catalog", "Check catalogs of pump curves."),
    "case": ("screener.cli.case", "Check a case, or start a new one."),
}


class Commands(TyperGroup):
    """The group of all commands, each imported when it is needed."""

    def list_commands(self, ctx: Any) -> list[str]:
        """Return the names in the order of the table."""
        return list(COMMANDS)

    def get_command(self, ctx: Any, cmd_name: str) -> Any:
        """Import one command."""
        if cmd_name not in COMMANDS:
            return None
        command = typer.main.get_command(importlib.import_module(COMMANDS[cmd_name][0]).app)
        command.name = cmd_name
        return command

    def format_commands(self, ctx: Any, formatter: Any) -> None:
        """Write the list of commands from the table, without importing them."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, text) for name, (_, text) in COMMANDS.items()])


app = typer.Typer(
    cls=Commands,
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    no_args_is_help=True,
)


def _version(wanted: bool) -> None:
    if wanted:
        from screener.version import __version__

        typer.echo(f"screener {__version__}")
        raise typer.Exit


@app.callback()
def screener(
    version: bool = typer.Option(
        False, "--version", callback=_version, is_eager=True, help="Show the version."
    ),
) -> None:
    """Screen a catalog of pumps for one more place on a header where others already run in parallel.

    Screening only: confirm with the manufacturer's certified curve.
    """
