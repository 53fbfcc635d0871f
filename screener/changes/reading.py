"""Reading error: would the verdict hold if the new pump's curve had been read a little wrong?

Points digitised from a chart are off by a share of head. Four runs tell whether that matters: the whole curve
higher or lower, and turned about half its flow, so that it is steeper or flatter. Power follows the head.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.changes.tolerance import scaled
from screener.hydraulics.similarity import stack
from screener.model.arrays import STATIONS, Bools, Floats
from screener.model.curves import Pumps
from screener.model.finding import Findings, Outcome
from screener.screening.assess import Bench, judged, take


class Misread(IntEnum):
    """How the curve truly runs, beside how it was read."""

    HIGHER = 0
    LOWER = 1
    STEEPER = 2
    FLATTER = 3


@dataclass(frozen=True, slots=True)
class Reading:
    """One run, and what c candidates do in it.

    findings : of the candidates
    flips    : (c, k) criteria that fail here and not as read, or the other way round
    turns    : (c,) candidates that are rejected here and not as read, or the other way round
    """

    misread: Misread
    findings: Findings
    flips: Bools
    turns: Bools


def readings(bench: Bench, pumps: Pumps, findings: Findings) -> tuple[Reading, ...]:
    """Run c candidates with each way of misreading them. findings : of the curves as read, on that bench."""
    count = len(pumps)
    changed = stack([scaled(pumps, factors(pumps, misread, error(bench))) for misread in Misread])
    every = judged(bench, changed).candidates
    failed = findings.outcome == Outcome.FAIL
    found = []
    for misread in Misread:
        there = take(every, misread * count + np.arange(count)).findings
        fails = there.outcome == Outcome.FAIL
        turns = fails.any(axis=1) != failed.any(axis=1)
        found.append(Reading(misread, there, fails != failed, turns))
    return tuple(found)


def error(bench: Bench) -> float:
    """The reading error of the case, as a share of head."""
    return bench.header.case.tolerance.reading


def factors(pumps: Pumps, misread: Misread, share: float) -> Floats:
    """What the heads of c pumps are multiplied with at each of k stations, (c, k)."""
    curves = pumps.curves
    along = np.linspace(0, 1, STATIONS) * (curves.span / curves.end)[:, None]
    tilt = {
        Misread.HIGHER: np.ones_like(along),
        Misread.LOWER: -np.ones_like(along),
        Misread.STEEPER: 1 - 2 * along,
        Misread.FLATTER: 2 * along - 1,
    }
    return 1 + share * tilt[misread]
