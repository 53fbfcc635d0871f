"""Where the files that travel with the tool are: in the checkout, else inside the installed package."""

from __future__ import annotations

import hashlib
from pathlib import Path

_PACKAGE = Path(__file__).resolve().parents[1]


def path(*parts: str) -> Path:
    """Path of a shipped file or folder, as in path("catalog_schema", "case.schema.json").

    A checkout is known by its pyproject.toml, so that a folder of the same name which another
    distribution left beside the installed package is never taken for ours.
    """
    checkout = _PACKAGE.parent
    if (checkout / "pyproject.toml").is_file() and checkout.joinpath(*parts).exists():
        return checkout.joinpath(*parts)
    return _PACKAGE.joinpath("_shipped", *parts)


def demo(*parts: str) -> Path:
    """Path of a demo plant that travels with the tool, as in demo("osier-bank", "case.toml")."""
    return path("catalogs", *parts)


def sha256(path: str | Path) -> str:
    """SHA-256 of a file's bytes, in hexadecimal."""
    with open(path, "rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()
