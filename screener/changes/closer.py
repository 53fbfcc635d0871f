"""One pump looked at closer: what would make it pass, and whether its verdict holds within the tolerance."""

from __future__ import annotations

from dataclasses import dataclass

from screener.changes.smallest import Change, smallest_changes
from screener.changes.tolerance import Corner, corners
from screener.screening.one import Explained


@dataclass(frozen=True, slots=True)
class Closer:
    """One explained pump, with the re-runs that belong to it.

    changes : single changes that would let it pass; empty where it passes, or where none does
    corners : of the acceptance tolerance
    """

    explained: Explained
    changes: tuple[Change, ...]
    corners: tuple[Corner, ...]


def look_closer(explained: Explained) -> Closer:
    """Re-run one explained pump with what could be changed, and in the corners of its tolerance."""
    judged, bench = explained.judged, explained.bench
    findings = judged.candidates.findings
    return Closer(
        explained,
        tuple(smallest_changes(bench, judged.run.pumps, findings)[0]),
        corners(bench, judged.run.pumps, findings),
    )
