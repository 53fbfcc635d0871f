"""Catalog files to a table in one call."""

from __future__ import annotations

from pathlib import Path

from screener.catalog.compile import compile_table
from screener.catalog.read import read
from screener.model.curves import PumpTable


def load_catalog(*paths: str | Path, trim_law: str = "") -> PumpTable:
    """Read catalogs of pump curves: files, or folders of files.

    trim_law : name of the law that replaces those of the models, `case.new_pump.trim_law` for a case
    Returns a table of n models, in SI. Raises InputError with every problem of every file, ValueError for a
    trim law that there is none of.
    """
    return compile_table(read(paths)[0], trim_law=trim_law)
