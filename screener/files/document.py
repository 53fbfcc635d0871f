"""Reading a TOML or JSON file into plain data, with every problem at its place."""

from __future__ import annotations

import gc
import json
import re
import sys
import tomllib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from screener.errors import InputError, Problem
from screener.files import locate
from screener.files.locate import KeyPath as KeyPath

_DEPTH = 100
"""Levels of nesting that are read: far more than the formats have, far fewer than Python recurses."""


@dataclass(frozen=True, slots=True)
class Document:
    """A file that was read: its path as the user gave it, its text, and its data."""

    path: str
    text: str
    data: Any

    def problem(self, path: KeyPath, what: str, hint: str = "") -> Problem:
        """Make a problem at the value of a key path, or of its nearest parent that is there."""
        line, column = locate.position(self.text, _suffix(self.path), path)
        return Problem(self.path, line, column, what, hint)


def load(path: str | Path) -> Document:
    """Read a file by its suffix, .toml or .json.

    Raises InputError: no such file, not UTF-8, empty, bad syntax, a key given twice, a number that is not
    finite in float64, text with half a character, nesting too deep, or a top level that is not a table.
    """
    path = str(path)
    text = _text(path)
    data, repeated = _parsed(path, text)
    document = Document(path, text, data)
    if not isinstance(data, dict):
        raise InputError([document.problem((), "the top level is not an object", "{ ... }")])
    problems = [document.problem(*unusable) for unusable in _unusable(data)]
    if repeated:
        places = locate.repeated_keys(text)
        problems += [Problem(path, *place, f"{key!r} is given twice", "keep one") for key, place in places]
    if problems:
        raise InputError(sorted(problems))
    return document


def _suffix(path: str) -> str:
    return Path(path).suffix.lower()


def _text(path: str) -> str:
    def refuse(what: str, hint: str = "") -> InputError:
        return InputError([Problem(path, 0, 0, what, hint)])

    if _suffix(path) not in (".toml", ".json"):
        raise refuse("is neither TOML nor JSON by its name", "a file that ends in .toml or .json")
    try:
        content = Path(path).read_bytes()
    except OSError as error:
        raise refuse(f"cannot be read: {error.strerror}") from error
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = error.object[: error.start].decode()
        position = _at(before, len(before))
        raise InputError([Problem(path, *position, "is not UTF-8 text", "save it as UTF-8")]) from error
    if not text.strip():
        raise refuse("is empty")
    return text


def _parsed(path: str, text: str) -> tuple[Any, bool]:
    """Data of a text, and whether a key in it is given twice."""

    def refuse(position: tuple[int, int], what: str) -> InputError:
        return InputError([Problem(path, *position, what)])

    try:
        return _json(text) if _suffix(path) == ".json" else (tomllib.loads(text), False)
    except json.JSONDecodeError as error:
        raise refuse((error.lineno, error.colno), f"not JSON: {error.msg}") from error
    except tomllib.TOMLDecodeError as error:
        place = re.search(r" \(at line (\d+), column (\d+)\)$", str(error))
        position = (int(place[1]), int(place[2])) if place else _at(text, len(text))
        raise refuse(position, f"not TOML: {str(error).split(' (at ')[0]}") from error
    except RecursionError as error:
        raise refuse((0, 0), "is nested too deeply") from error
    except ValueError as error:  # an integer longer than Python converts
        digits = re.search(r"[0-9_]{4000,}", text)
        raise refuse(_at(text, digits.start() if digits else 0), "a number has too many digits") from error


def _json(text: str) -> tuple[Any, bool]:
    repeated = False

    def table(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        nonlocal repeated
        found = dict(pairs)
        repeated = repeated or len(found) < len(pairs)
        return found

    collecting = gc.isenabled()
    gc.disable()  # millions of small objects without one cycle among them: half the time of the parse
    try:
        return json.loads(text, object_pairs_hook=table), repeated
    finally:
        if collecting:
            gc.enable()


def _unusable(data: dict[str, Any]) -> list[tuple[KeyPath, str, str]]:
    """Find what the formats allow and we cannot use: key path, what it is, what is allowed."""
    found: list[tuple[KeyPath, str, str]] = []
    waiting: list[tuple[KeyPath, Any]] = [((), data)]
    while waiting:
        path, container = waiting.pop()
        for key, value in container.items() if type(container) is dict else enumerate(container):
            kind = type(value)
            if kind is float or kind is int:
                if not abs(value) <= sys.float_info.max:
                    what = "NaN is not a value" if value != value else "the number is too large"
                    found.append(((*path, key), what, "at most 1.8e308"))
            elif kind is dict or kind is list:
                if len(path) < _DEPTH:
                    waiting.append(((*path, key), value))
                else:
                    found.append(((*path, key), "is nested too deeply", f"at most {_DEPTH} levels"))
            elif kind is str and not value.isascii() and re.search("[\ud800-\udfff]", value):
                found.append(((*path, key), "the text has half a character", "write surrogates in pairs"))
    return found


def _at(text: str, offset: int) -> tuple[int, int]:
    """Line and column of an offset, both from 1."""
    return text.count("\n", 0, offset) + 1, offset - text.rfind("\n", 0, offset)
