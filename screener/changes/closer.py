"""One pump looked at closer: what would make it pass, and whether its verdict holds."""

from __future__ import annotations

from dataclasses import dataclass

from screener.changes.bypass import Need, Warming, needed, settings, verified, warming
from screener.changes.reading import Reading, readings
from screener.changes.sampling import Sampled, probability
from screener.changes.smallest import Change, smallest_changes
from screener.changes.tolerance import Corner, corners
from screener.model.finding import Verdict
from screener.screening.one import Explained


@dataclass(frozen=True, slots=True)
class Closer:
    """One explained pump, with the re-runs that belong to it.

    changes  : single changes that would let it pass; empty where it passes, or where none does
    corners  : of the acceptance tolerance
    readings : ways in which the points of its curve may have been misread
    sampled  : how likely it is to pass, one row
    bypasses : that pumps need in duties as they are;  with_bypasses : the verdict with all of them
    warming  : pumps that get little more than their minimum flow, or none
    """

    explained: Explained
    changes: tuple[Change, ...]
    corners: tuple[Corner, ...]
    readings: tuple[Reading, ...]
    sampled: Sampled
    bypasses: tuple[Need, ...]
    with_bypasses: Verdict | None
    warming: tuple[Warming, ...]


def look_closer(explained: Explained) -> Closer:
    """Re-run one explained pump with what could be changed, and with what could be otherwise."""
    judged, bench = explained.judged, explained.bench
    findings, pumps = judged.candidates.findings, judged.run.pumps
    bypasses = needed(bench, judged.run)
    return Closer(
        explained,
        tuple(smallest_changes(bench, explained.table, pumps, findings)[0]),
        corners(bench, pumps, findings),
        readings(bench, pumps, findings),
        probability(bench, explained.table, pumps),
        bypasses,
        verified(bench, pumps, settings(bench, bypasses)) if bypasses else None,
        warming(bench, judged.run),
    )
