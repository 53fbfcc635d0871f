"""Every catalog in valid/ is read; every one in invalid/ gives exactly the problems written beside it."""

from __future__ import annotations

from pathlib import Path

import pytest

from screener.catalog.read import read
from screener.errors import InputError

HERE = Path(__file__).parent
VALID = sorted(path.name for path in HERE.glob("valid/catalog-*.json"))
INVALID = sorted(path.name for path in HERE.glob("invalid/catalog-*") if path.suffix != ".txt")


@pytest.mark.parametrize("name", VALID)
def test_valid(name):
    entries, files = read([HERE / "valid" / name])
    assert entries
    assert files == [HERE / "valid" / name]


@pytest.mark.parametrize("name", INVALID)
def test_invalid(name, monkeypatch):
    monkeypatch.chdir(HERE / "invalid")
    with pytest.raises(InputError) as caught:
        read([name])
    expected = Path(name).with_suffix(".txt").read_text(encoding="utf-8")
    assert str(caught.value) + "\n" == expected


def test_there_is_something_to_read():
    assert len(VALID) >= 3
    assert len(INVALID) >= 20
