"""Catalog files to a table in one call."""

from __future__ import annotations

from pathlib import Path

from screener.catalog.compile import compile_table
from screener.catalog.read import read
from screener.model.curves import PumpTable


def load_catalog(*paths: str | Path) -> PumpTable:
    """Read catalogs of pump curves: files, or folders of files.

    Returns a table of n models, in SI. Raises InputError with every problem of every file.
    """
    return compile_table(read(paths)[0])
