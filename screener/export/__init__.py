"""Outputs: one file a format, found by looking into this folder. None computes.

A format is a module with NAME (for --format), SUFFIX (for --output) and render(screen) -> text or bytes.
"""

from __future__ import annotations

import importlib
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
