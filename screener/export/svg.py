"""The charts of a screen as SVG, one under another, text as text."""

from __future__ import annotations

from screener.export._draw import NEEDS as NEEDS
from screener.export._draw import charts_of, draw, settings, told
from screener.view.blocks import Screen

NAME = "svg"
SUFFIX = ".svg"
FILE_ONLY = True


def render(screen: Screen) -> bytes:
    """The charts of a screen; the same bytes for the same input."""
    import io

    charts = charts_of(screen)
    out = io.BytesIO()
    with settings():
        draw(charts).savefig(out, format="svg", metadata={"Date": None, "Description": told(charts)})
    return out.getvalue()
