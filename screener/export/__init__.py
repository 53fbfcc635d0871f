"""Outputs: one file a format, found by looking into this folder. None computes.

A format is a module with NAME (for --format), SUFFIX (for --output) and render(screen) -> text or bytes.
It may say FILE_ONLY, where it is not for stdout, and NEEDS, a package that only the extra 'report' brings.
"""

from __future__ import annotations

import importlib
import importlib.util
import pkgutil
from functools import lru_cache
from types import ModuleType


@lru_cache(maxsize=1)
def formats() -> tuple[ModuleType, ...]:
    """Every format that can be written to a file."""
    modules = [
        importlib.import_module(f"{__name__}.{found.name}") for found in pkgutil.iter_modules(__path__)
    ]
    return tuple(module for module in modules if hasattr(module, "render"))


def missing(package: str) -> str:
    """How to get a package that is not installed; "" where it is, or where none is named."""
    if not package or importlib.util.find_spec(package):
        return ""
    return "needs the extra 'report': pip install 'pump-header-screener[report]'"
