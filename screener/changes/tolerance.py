"""Corners of the acceptance tolerance: would the verdict hold for curves as high or as low as they may come?

With n pumps beside the new one, 2n + 4 corners are run: all low, all high, and each pump in turn low with the
rest high and high with the rest low. A tolerance holds at the guarantee point; applying it to the whole curve
is an assumption of ours. Identical installed pumps are taken as one. A trim of the new pump that no test is
near may lower its head further, never raise it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from screener.model.arrays import Bools, Floats
from screener.model.curves import Pumps
from screener.model.finding import Findings, Outcome
from screener.model.run import Kind
from screener.screening.assess import Bench, judged, set_up


@dataclass(frozen=True, slots=True)
class Corner:
    """One corner, and what c candidates do there.

    odd      : the pump that differs from the rest: -1 for none, 0 the new one, else 1 + installed row
    high     : whether that pump (or all of them) is high
    bench    : the header of the corner: its pumps are no longer alike, so its states may be others
    findings : of the candidates in the corner
    fails    : (c, k) criteria that fail here and not for the curves as given
    shut     : (c, s, 1 + p) pumps held shut in a duty that the new pump shares, new pump first
    """

    odd: int
    high: bool
    bench: Bench
    findings: Findings
    fails: Bools
    shut: Bools


def corners(bench: Bench, pumps: Pumps, findings: Findings) -> tuple[Corner, ...]:
    """Run c candidates through every corner. findings : of the curves as given, on that bench."""
    case = bench.header.case
    unknown = bench.limits["start"]["unknown_tolerance"]
    own = np.where(np.isnan(pumps.head_tolerance), unknown, pumps.head_tolerance)
    low = own + pumps.trim_uncertainty
    others = np.where(np.isnan(case.pumps.head_tolerance), unknown, case.pumps.head_tolerance)
    alike = bench.header.alike
    found = []
    for odd in (-1, 0, *(1 + int(row) for row in dict.fromkeys(alike.tolist()))):
        for high in (False, True):
            rest = 1.0 if high == (odd < 0) else -1.0
            sign = 1.0 if high else -1.0
            installed = np.where(np.arange(len(alike)) == odd - 1, sign, rest)
            changed = set_up(replace(case, pumps=scaled(case.pumps, 1 + installed * others), as_new=None))
            raised = (sign if odd == 0 else rest) > 0
            there = judged(changed, scaled(pumps, 1 + own if raised else 1 - low))
            fails = (there.candidates.findings.outcome == Outcome.FAIL) & (findings.outcome != Outcome.FAIL)
            conditions = there.run.conditions
            together = (conditions.kind == Kind.DUTY) & conditions.runs[:, 0]
            shut = (there.run.flow == 0) & together[:, None]
            found.append(Corner(odd, high, changed, there.candidates.findings, fails, shut))
    return tuple(found)


def scaled(pumps: Pumps, factor: Floats) -> Pumps:
    """Pumps whose heads, and with them their powers, are a factor (c,) or (c, k) of what they were."""
    column = factor.reshape(len(pumps), -1)
    curves = replace(pumps.curves, head=pumps.curves.head * column, power=pumps.curves.power * column)
    return replace(pumps, curves=curves)
