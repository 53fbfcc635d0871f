"""The ranked table as a pandas data frame."""

from __future__ import annotations

from typing import TYPE_CHECKING

from screener.view import shortlist as view
from screener.view.data import Origin

if TYPE_CHECKING:
    import pandas as pd

    from screener.screening.shortlist import Shortlist


def to_frame(result: Shortlist) -> pd.DataFrame:
    """Every model that can reach the duties at its best diameter, one row each, best first.

    Returns b rows in the units of the case (`result.bench.header.case.display`); percent as 0 to 100,
    missing figures as NaN. Needs pandas.
    """
    import pandas as pd

    table = view.screen(result, Origin()).table
    return pd.DataFrame(
        [[cell.value for cell in row] for row in table.rows], columns=[column.key for column in table.columns]
    )
