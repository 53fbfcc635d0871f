"""Every example case: a valid one is read, an invalid one has exactly the problems written beside it."""

from __future__ import annotations

from pathlib import Path

import pytest

from screener.case.read import catalog_paths, read_case
from screener.catalog.compile import compile_table
from screener.catalog.read import read as read_catalogs
from screener.errors import InputError
from screener.files.document import load
from screener.model.case import Case

HERE = Path(__file__).parent


def cases(folder: str) -> list[Path]:
    return sorted(path for path in (HERE / folder).glob("case-*") if path.suffix in (".toml", ".json"))


def read(path: Path) -> Case:
    document = load(path)
    entries, _ = read_catalogs(catalog_paths(document) or [HERE / "pumps"])
    return read_case(document, compile_table(entries))


@pytest.mark.parametrize("path", cases("valid"), ids=lambda path: path.name)
def test_valid_case_is_read(path: Path) -> None:
    assert read(path).duties


@pytest.mark.parametrize("path", cases("invalid"), ids=lambda path: path.name)
def test_invalid_case_has_exactly_these_problems(path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read(path)
    found = str(caught.value).replace(f"{path.parent}/", "")
    assert found + "\n" == path.with_suffix(".txt").read_text(encoding="utf-8")


def test_there_is_an_example_of_each_kind() -> None:
    assert len(cases("valid")) >= 5
    assert len(cases("invalid")) >= 20
