"""The command line: one file a command, no computation. `main` alone decides the exit code."""

from __future__ import annotations

import io
import os
import sys
from collections.abc import Sequence

from screener.errors import ExitCode, ScreenerError


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and leave with one of `ExitCode`."""
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(errors="backslashreplace")  # a name that this terminal cannot show is no fault
    sys.exit(run(arguments))


def run(arguments: Sequence[str] | None = None) -> int:
    """Run one command; returns its exit code."""
    try:
        from screener.cli.app import app

        code = app(
            args=list(arguments) if arguments is not None else None,
            prog_name="screener",
            standalone_mode=False,
        )
        if code == ExitCode.INTERRUPTED:  # what typer makes of Ctrl-C
            raise KeyboardInterrupt
        sys.stdout.flush()
        return int(code or ExitCode.DONE)
    except ScreenerError as error:
        from screener.export.clean import clean

        for problem in error.problems:
            print(clean(str(problem)), file=sys.stderr)
        return int(error.exit_code)
    except SystemExit:  # what typer makes of a closed pipe
        return int(ExitCode.DONE)
    except KeyboardInterrupt:
        print("interrupted; nothing was half-written", file=sys.stderr)
        return int(ExitCode.INTERRUPTED)
    except Exception as error:
        return int(_failed(error))


def _failed(error: Exception) -> ExitCode:
    """Say what happened where it is none of our own errors."""
    if hasattr(error, "show") and hasattr(error, "exit_code"):  # typer's own: a wrong command line
        error.show()
        return ExitCode.COMMAND_LINE
    if isinstance(error, OSError) and error.filename is None:  # it happened to an open stream: to stdout
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        if isinstance(error, BrokenPipeError):
            return ExitCode.DONE
        print(f"the output could not be written: {error.strerror}", file=sys.stderr)
        return ExitCode.NOT_WRITTEN
    import traceback

    traceback.print_exception(error)
    print(
        "this is a fault of screener, not of your input; please report it with the lines above",
        file=sys.stderr,
    )
    return ExitCode.OUR_FAULT
