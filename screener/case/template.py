"""The case that a newcomer starts from: a commented case file, and a small catalog beside it."""

from __future__ import annotations

from pathlib import Path

FOLDER = Path(__file__).parent / "template_files"
NAMES = ("case.toml", "pumps/pumps.json")


def files() -> dict[str, str]:
    """Return the text of each file of the template, by its name relative to the folder of the case.

    >>> sorted(files())
    ['case.toml', 'pumps/pumps.json']
    """
    return {name: (FOLDER / name).read_text(encoding="utf-8") for name in NAMES}
