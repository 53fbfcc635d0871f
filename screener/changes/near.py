"""What a shortlist shows looked at closer: what would make a pump pass, and whether its verdict holds."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.changes.reading import Reading, readings
from screener.changes.sampling import Sampled, probability
from screener.changes.smallest import Change, smallest_changes
from screener.changes.tolerance import Corner, corners
from screener.hydraulics.similarity import take as take_pumps
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import Ints
from screener.model.finding import Verdict
from screener.screening.assess import take
from screener.screening.shortlist import Shortlist


@dataclass(frozen=True, slots=True)
class Near:
    """A closer look at n candidates of a shortlist, side by side.

    rows     : (n,) which of `Shortlist.best`
    changes  : n times the smallest single change that lets it pass; None where it passes, or where none does
    corners  : of the acceptance tolerance, each over the n candidates
    readings : ways in which the points of their curves may have been misread, each over the n candidates
    sampled  : how likely those are to pass that are not rejected, which come first in `rows`
    """

    rows: Ints
    changes: tuple[Change | None, ...]
    corners: tuple[Corner, ...]
    readings: tuple[Reading, ...]
    sampled: Sampled


def look_nearer(result: Shortlist, *, top: int) -> Near:
    """Look closer at the first `top` accepted, conditional and rejected candidates of a shortlist."""
    best, table, bench = result.best, result.table, result.bench
    rows = np.concatenate([np.flatnonzero(best.verdict == verdict)[:top] for verdict in Verdict])
    model = best.model[rows]
    pumps = trimmed(
        table, model=model, diameter=best.diameter[rows], speed_ratio=result.reach.speed_ratio[model]
    )
    findings = take(best, rows).findings
    passing = np.flatnonzero(best.verdict[rows] != Verdict.REJECTED)
    changes = smallest_changes(bench, table, pumps, findings, first=True)
    return Near(
        rows,
        tuple(found[0] if found else None for found in changes),
        corners(bench, pumps, findings),
        readings(bench, pumps, findings),
        probability(bench, table, take_pumps(pumps, passing)),
    )
