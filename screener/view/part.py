"""A part of a report: a heading over other headings."""

from __future__ import annotations

from dataclasses import dataclass

from screener.view.blocks import Heading


@dataclass(frozen=True, slots=True)
class Part(Heading):
    """Begins a part; the headings after it stand beneath it, up to the next part.

    key : charts whose key begins with it and a hyphen belong here
    """

    key: str = ""
