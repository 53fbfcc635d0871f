"""The charts of a screen as PNG, one under another."""

from __future__ import annotations

from screener.export._draw import NEEDS as NEEDS
from screener.export._draw import charts_of, draw, settings, told
from screener.view.blocks import Screen

NAME = "png"
SUFFIX = ".png"
FILE_ONLY = True

DOTS = 200
"""Per inch."""


def render(screen: Screen) -> bytes:
    """The charts of a screen; the same bytes for the same input."""
    import io

    charts = charts_of(screen)
    out = io.BytesIO()
    with settings():
        draw(charts).savefig(out, format="png", dpi=DOTS, metadata={"Description": told(charts)})
    return out.getvalue()
