"""Screens a catalog of pumps for one more place on a header where others already run in parallel.

>>> import screener
>>> case = screener.load_case(screener.demo("osier-bank", "case.toml"))
>>> catalog = screener.load_catalog(screener.demo("osier-bank", "pumps"))
>>> result = screener.shortlist(case, catalog)
>>> frame = screener.to_frame(result)
>>> frame.loc[frame["verdict"] == "accepted", "pump"].iloc[0]
'250-500-6 M'

Figures in results are in SI and stay as numpy arrays; a frame is in the units of the case.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

from screener.version import __version__

if TYPE_CHECKING:
    from screener.case.load import load, load_case
    from screener.catalog.load import load_catalog
    from screener.changes.closer import look_closer
    from screener.changes.datasheet import compare, datasheet
    from screener.changes.operation import operation
    from screener.errors import InputError, OutputError, Problem, ScreenerError, UsageError
    from screener.export.frame import to_frame
    from screener.files.shipped import demo
    from screener.screening.one import explain, trims
    from screener.screening.shortlist import Shortlist, shortlist
    from screener.screening.today import header_report

_HOMES = {
    "load": "screener.case.load",
    "look_closer": "screener.changes.closer",
    "compare": "screener.changes.datasheet",
    "datasheet": "screener.changes.datasheet",
    "operation": "screener.changes.operation",
    "load_case": "screener.case.load",
    "load_catalog": "screener.catalog.load",
    "InputError": "screener.errors",
    "OutputError": "screener.errors",
    "Problem": "screener.errors",
    "ScreenerError": "screener.errors",
    "UsageError": "screener.errors",
    "to_frame": "screener.export.frame",
    "demo": "screener.files.shipped",
    "explain": "screener.screening.one",
    "trims": "screener.screening.one",
    "Shortlist": "screener.screening.shortlist",
    "shortlist": "screener.screening.shortlist",
    "header_report": "screener.screening.today",
}

__all__ = [
    "InputError",
    "OutputError",
    "Problem",
    "ScreenerError",
    "Shortlist",
    "UsageError",
    "__version__",
    "compare",
    "datasheet",
    "demo",
    "explain",
    "header_report",
    "load",
    "load_case",
    "load_catalog",
    "look_closer",
    "operation",
    "shortlist",
    "to_frame",
    "trims",
]


def __getattr__(name: str) -> Any:
    """Import a public name where it is first used, so that `import screener` stays quick."""
    if name not in _HOMES:
        raise AttributeError(f"module 'screener' has no attribute {name!r}")
    return getattr(importlib.import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return __all__
