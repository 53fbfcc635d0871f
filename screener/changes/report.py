"""What a report tells: the header today, the shortlist, and a few of its pumps looked at closer."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.changes.closer import Closer, look_closer
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Verdict
from screener.screening.one import explain
from screener.screening.shortlist import Progress, Shortlist, shortlist
from screener.screening.today import HeaderReport, header_report


@dataclass(frozen=True, slots=True)
class Report:
    """One case as a whole.

    today     : the header as it is;  shortlist : the catalog screened for it
    explained : the first accepted pumps, and the most efficient of the rejected ones
    """

    today: HeaderReport
    shortlist: Shortlist
    explained: tuple[Closer, ...]


def report(case: Case, catalog: PumpTable, *, accepted: int = 2, progress: Progress | None = None) -> Report:
    """Screen a catalog, and look closer at the first `accepted` pumps and the most efficient rejected one."""
    result = shortlist(case, catalog, progress=progress)
    return Report(
        today=header_report(case),
        shortlist=result,
        explained=tuple(_closer(case, result, row) for row in _worth_explaining(result, accepted)),
    )


def _worth_explaining(result: Shortlist, accepted: int) -> list[int]:
    """Rows of `Shortlist.best`: the first accepted, then the rejected one that is the most efficient."""
    best = result.best
    rows = np.flatnonzero(best.verdict == Verdict.ACCEPTED)[:accepted].tolist()
    rejected = np.flatnonzero((best.verdict == Verdict.REJECTED) & ~np.isnan(result.duty_efficiency))
    return [*rows, *([int(rejected[result.duty_efficiency[rejected].argmax()])] if rejected.size else [])]


def _closer(case: Case, result: Shortlist, row: int) -> Closer:
    diameter = float(result.best.diameter[row])
    known = np.isfinite(diameter)
    return look_closer(explain(case, result.table, int(result.best.model[row]), diameter if known else None))
