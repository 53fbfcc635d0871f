"""What was found, as columns; words are made elsewhere, for the rows that are shown."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

from screener.model.arrays import Bools, Codes, Floats, Ints
from screener.model.run import Run


class Outcome(IntEnum):
    """Of one criterion, the worse the higher."""

    PASS = 0
    CAUTION = 1
    NOT_ASSESSED = 2
    FAIL = 3


class Verdict(IntEnum):
    """Of one candidate over all criteria."""

    ACCEPTED = 0
    CONDITIONAL = 1
    REJECTED = 2


@dataclass(frozen=True, slots=True)
class Findings:
    """k criteria over c candidates, each array (c, k), at the place that governs.

    outcome   : `Outcome`
    observed  : in the unit of the criterion (a fraction for %), NaN where not assessed
    limit     : the bound that it was held against
    shortfall : relative to the limit, above 0 outside the fail bounds
    state, pump : where it governs, pump 0 being the new one; -1 where no state or pump is meant
    already   : outside the fail bounds, but no worse than today without the new pump
    blank     : not assessed because the state has no figures, a pump being past its data
    """

    outcome: Codes
    observed: Floats
    limit: Floats
    shortfall: Floats
    state: Ints
    pump: Ints
    already: Bools
    blank: Bools


@dataclass(frozen=True, slots=True)
class Figures:
    """What a candidate costs and gives, (c,) each but `firm`.

    efficiency : [-] useful head of the system over shaft power, all pumps, weighted by hours
    power      : [W] mean shaft power of all pumps, weighted by hours
    energy     : [J] shaft energy per year, NaN where a duty has no hours
    volume     : [m3] delivered per year, NaN where a duty has no hours
    shutoff    : [-] worst shutoff mismatch, signed;  share : [-] worst load-share difference
    score      : [points]
    firm       : (c, t) [-] share of the duty delivered after each of the t trips
    """

    efficiency: Floats
    power: Floats
    energy: Floats
    volume: Floats
    shutoff: Floats
    share: Floats
    score: Floats
    firm: Floats


@dataclass(frozen=True, slots=True)
class Candidates:
    """c judged candidates.

    model, diameter : rows of the table, [m]
    verdict  : `Verdict`
    worst    : [-] largest shortfall of the criteria that failed, 0 where none did
    lowest_share : [-] lowest flow over best efficiency, any pump, any duty
    npsh     : [-] lowest NPSH available over required, any pump, any state
    motor    : [W] nameplate chosen for the new pump
    """

    model: Ints
    diameter: Floats
    verdict: Codes
    worst: Floats
    lowest_share: Floats
    npsh: Floats
    motor: Floats
    findings: Findings
    figures: Figures

    def __len__(self) -> int:
        return len(self.model)


@dataclass(frozen=True, slots=True)
class Judged:
    """Candidates with the run they were judged on."""

    candidates: Candidates
    run: Run
