"""A case file, and the catalogs that it names, in one call."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from screener.case.read import catalog_paths, read_case
from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry
from screener.catalog.read import read
from screener.files import document, shipped
from screener.model.case import Case
from screener.model.curves import PumpTable


@dataclass(frozen=True, slots=True)
class Loaded:
    """A case with its catalog.

    catalog : under the trim law that the case names for the new pump, where it names one
    files   : every file read, with its sha256, the case first
    entries : the pumps of the catalog, row for row, each under its own trim law
    """

    case: Case
    catalog: PumpTable
    files: tuple[tuple[str, str], ...]
    entries: tuple[Entry, ...]


def load(path: str | Path, catalogs: Sequence[str | Path] = ()) -> Loaded:
    """Read a case and its catalogs.

    catalogs : files or folders that replace those named in the case
    Raises InputError with every problem.
    """
    text = document.load(path)
    entries, read_files = read(list(catalogs) or catalog_paths(text))
    table = compile_table(entries)
    case = read_case(text, table)
    if case.new_pump.trim_law:  # installed pumps keep their own laws
        table = compile_table(entries, trim_law=case.new_pump.trim_law)
    files = [(Path(path).name, shipped.sha256(path))]
    files += [(file.name, shipped.sha256(file)) for file in read_files]
    return Loaded(case, table, tuple(files), tuple(entries))


def load_case(path: str | Path, catalog: PumpTable | None = None) -> Case:
    """Read a case.

    catalog : holds the installed pumps that it names, each under its own trim law; the case's own catalogs
              where None. Where the case names a trim law for the new pump, the catalog to screen is another
              one: `load_catalog(..., trim_law=case.new_pump.trim_law)`, or the one that `load` gives.
    Returns a frozen case in SI. Raises InputError with every problem.
    """
    return read_case(document.load(path), catalog) if catalog is not None else load(path).case
