"""What can go wrong, in one shape, and what the process then answers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum


class ExitCode(IntEnum):
    """One meaning for each exit code."""

    DONE = 0
    NOTHING_PASSED = 1
    COMMAND_LINE = 2
    BAD_INPUT = 3
    NOT_WRITTEN = 4
    OUR_FAULT = 70
    INTERRUPTED = 130


@dataclass(frozen=True, slots=True, order=True)
class Problem:
    """One thing that is wrong with an input: where, what, and what would be right.

    file   : path as the user gave it, "" where there is no file
    line   : 1-based, 0 where it is not known
    column : 1-based, 0 where it is not known
    what   : what is wrong, one short clause
    hint   : what is allowed, or what to do; may be empty
    """

    file: str
    line: int
    column: int
    what: str
    hint: str = ""

    def __str__(self) -> str:
        where = self.file
        if self.line:
            where += f":{self.line}:{self.column}"
        text = f"{where}  {self.what}" if where else self.what
        return f"{text}  ({self.hint})" if self.hint else text


class ScreenerError(Exception):
    """Any failure that the user can mend; carries every problem found, and the exit code."""

    exit_code = ExitCode.BAD_INPUT

    def __init__(self, problems: Sequence[Problem] | str) -> None:
        self.problems: tuple[Problem, ...] = (
            (Problem("", 0, 0, problems),) if isinstance(problems, str) else tuple(problems)
        )
        super().__init__("\n".join(map(str, self.problems)))


class InputError(ScreenerError):
    """An input file is missing or bad."""


class UsageError(ScreenerError):
    """The command line asks for something that does not exist."""

    exit_code = ExitCode.COMMAND_LINE


class OutputError(ScreenerError):
    """An output could not be written."""

    exit_code = ExitCode.NOT_WRITTEN
