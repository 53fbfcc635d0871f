"""Checking a document against one of the shipped JSON Schemas, every difference in plain words."""

from __future__ import annotations

import difflib
import json
from collections.abc import Callable, Iterable, Iterator
from datetime import date, time
from functools import lru_cache
from pathlib import Path
from typing import Any

from screener.errors import Problem
from screener.files import shipped
from screener.files.document import Document
from screener.files.locate import KeyPath

_Difference = tuple[KeyPath, str, str]
_TYPES = {
    "object": "a table",
    "array": "a list",
    "string": "text",
    "number": "a number",
    "integer": "a whole number",
    "boolean": "true or false",
    "null": "null",
}


def check(document: Document, schema: str) -> list[Problem]:
    """Every way in which a document differs from a schema, in the order of the file; empty if it conforms.

    schema : name of a file in catalog_schema/, without .schema.json
    A quick validator may accept; whatever it does not accept is judged and put in words by a second one.
    """
    path = shipped.path("catalog_schema", f"{schema}.schema.json")
    if _quick(path)(document.data):
        return []
    found = {found for error in _thorough(path)(document.data) for found in _said(error)}
    return sorted(document.problem(*difference) for difference in found)


@lru_cache
def _quick(path: Path) -> Callable[[Any], bool]:
    import jsonschema_rs

    validator = jsonschema_rs.Draft202012Validator(json.loads(path.read_bytes()))

    def accepts(data: Any) -> bool:
        try:
            return validator.is_valid(data)
        except Exception:  # it has its own limits, of types and of depth; they decide nothing
            return False

    return accepts


@lru_cache
def _thorough(path: Path) -> Callable[[Any], Iterable[Any]]:
    from jsonschema import Draft202012Validator

    return Draft202012Validator(json.loads(path.read_bytes())).iter_errors


def _said(error: Any) -> Iterator[_Difference]:
    """Put one error of the validator in our words; an error of alternatives becomes those of the nearest one.

    Several errors may say the same difference: the caller keeps each once.
    """
    path, value, rule = tuple(error.absolute_path), error.instance, error.validator_value
    match error.validator:
        case "additionalProperties":
            known = list(error.schema.get("properties", ()))
            for key in value:
                if key not in known:
                    yield (*path, key), f"unknown key {key!r}", _near(key, known)
        case "required":
            for key in rule:
                if key not in value:
                    yield path, f"{key!r} is missing", ""
        case "oneOf" | "anyOf":
            yield from _alternatives(path, error)
        case "type":
            yield path, *_type(value, [rule] if isinstance(rule, str) else rule)
        case "enum":
            yield path, f"unknown value {_shown(value)}", _near(value, rule)
        case "pattern":
            yield (
                path,
                f"{_shown(value)} is not written as it should be",
                error.schema.get("description", rule),
            )
        case kind if kind in _SENTENCES:
            size = len(value) if isinstance(value, list | str) else 0
            yield path, _SENTENCES[kind].format(value=_shown(value), rule=_shown(rule), size=size), ""
        case _:
            yield path, error.message, ""


_SENTENCES = {
    "const": "must be {rule}, not {value}",
    "minimum": "must be at least {rule}, not {value}",
    "exclusiveMinimum": "must be above {rule}, not {value}",
    "maximum": "must be at most {rule}, not {value}",
    "exclusiveMaximum": "must be below {rule}, not {value}",
    "minItems": "needs a list of at least {rule}, has {size}",
    "maxItems": "needs a list of at most {rule}, has {size}",
    "minLength": "needs text of at least {rule} characters, has {size}",
}


def _alternatives(path: KeyPath, error: Any) -> Iterator[_Difference]:
    """Say what is wrong where one of several forms was expected: by the nearest form of the right type."""
    if not error.context:
        yield path, "fits more than one of the allowed forms", "give one"
        return
    forms = range(len(error.validator_value))
    branches = [[inner for inner in error.context if inner.schema_path[0] == form] for form in forms]
    misfits = [_wrong_type(branch) for branch in branches]
    fitting = [branch for branch, misfit in zip(branches, misfits, strict=True) if not misfit]
    if fitting:
        yield from min(([said for inner in branch for said in _said(inner)] for branch in fitting), key=len)
    else:
        yield path, *_type(error.instance, [kind for misfit in misfits for kind in misfit])


def _wrong_type(branch: list[Any]) -> list[str]:
    """Types that a form asks of the value itself, where the value has another; else empty."""
    rules = [
        error.validator_value for error in branch if error.validator == "type" and not error.relative_path
    ]
    return [kind for rule in rules for kind in ([rule] if isinstance(rule, str) else rule)]


def _type(value: Any, allowed: list[str]) -> tuple[str, str]:
    wanted = " or ".join(dict.fromkeys(_TYPES[kind] for kind in allowed))
    hint = "put it in quotes" if isinstance(value, date | time) and "string" in allowed else ""
    return f"must be {wanted}, not {_shown(value)}", hint


def _shown(value: Any) -> str:
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, date | time):
        return f"the date or time {value}"
    text = json.dumps(value, ensure_ascii=False)
    return text if len(text) <= 60 else text[:57] + "..."


def _near(value: Any, allowed: list[Any]) -> str:
    """Say what is allowed, the nearest first."""
    names = [str(name) for name in allowed]
    close = difflib.get_close_matches(str(value), names, n=1)
    listed = f"one of {', '.join(names)}" if names else "nothing is allowed here"
    return f"did you mean {close[0]!r}? {listed}" if close else listed
