"""The charts of a screen as PDF, one on a page."""

from __future__ import annotations

from screener.export._draw import NEEDS as NEEDS
from screener.export._draw import charts_of, draw, settings, told
from screener.view.blocks import Screen

NAME = "pdf"
SUFFIX = ".pdf"
FILE_ONLY = True


def render(screen: Screen) -> bytes:
    """The charts of a screen; the same bytes for the same input."""
    import io

    from matplotlib.backends.backend_pdf import PdfPages

    charts = charts_of(screen)
    out = io.BytesIO()
    with settings(), PdfPages(out, metadata={"CreationDate": None, "Subject": told(charts)}) as pages:
        for chart in charts:
            pages.savefig(draw([chart]))
    return out.getvalue()
