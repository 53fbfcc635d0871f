"""Which combination of pumps should run in each duty, and which may run at which header flow.

A combination is a duty of a modified case, run through the whole pipeline like any other. Nothing here
controls pumps: it tells what the pumps that are there, and one that may come, could do.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from screener.changes.combination import Combination, Plant, Ran, every_run, key_of, run_as
from screener.changes.operating_map import OperatingMap, operating_map
from screener.model.case import Case, Duty
from screener.model.curves import PumpTable
from screener.screening.assess import Bench, set_up
from screener.screening.one import Explained, explain
from screener.screening.states import classes

MOST = 500
"""Combinations tried in one duty: those that differ least from the ones asked for."""

SECONDS_PER_HOUR = 3600.0


@dataclass(frozen=True, slots=True)
class Choice:
    """One duty at one level, beside one of the combinations asked for.

    duty, level : rows of the case
    asked   : that combination, None where it holds no pump that is there
    best    : the cheapest within limits, or, where none is, the one least outside
    without : the same of the pumps installed now, None where none is there
    hours   : [h] per year, NaN where not stated
    """

    duty: int
    level: int
    asked: Ran | None
    best: Ran
    without: Ran | None
    hours: float

    @property
    def saved(self) -> float:
        """[J] per year between the combination asked for and the cheapest; NaN where they do not compare."""
        if self.asked is None or not self.asked.met or not self.best.within:
            return np.nan
        return (self.asked.power - self.best.power) * self.hours * SECONDS_PER_HOUR


@dataclass(frozen=True, slots=True)
class Operation:
    """How a header may be run. explained : the new pump, None for the header as it is."""

    bench: Bench
    explained: Explained | None
    motor: float
    choices: tuple[Choice, ...]
    tried: int
    map: OperatingMap


def operation(
    case: Case, catalog: PumpTable | None = None, model: int = -1, diameter: float | None = None
) -> Operation:
    """Find the combinations to run, of the installed pumps alone or with one pump of a catalog.

    catalog, model : the new pump, a row of the catalog; left out, the header is taken as it is
    diameter       : [m], the best one where None.  ValueError where it is not on offer.
    """
    explained = None if catalog is None else explain(case, catalog, model, diameter)
    bench = set_up(case) if explained is None else explained.bench
    pumps, motor = None, np.nan
    if explained is not None:
        pumps = explained.judged.run.pumps
        largest = bench.limits["motor-new"]["fail_above"]
        motor = float(np.minimum(explained.judged.candidates.motor[0], largest))
    plant = Plant(case, pumps, motor)
    tried = [_combinations(plant, duty) for duty in case.duties]
    choices = _choices(plant, tried)
    shown = [ran for c in choices for ran in (c.asked, c.best, c.without)]
    return Operation(
        bench=bench,
        explained=explained,
        motor=motor,
        choices=choices,
        tried=max(map(len, tried)),
        map=operating_map(plant, bench, tried, [(ran.running, ran.new > 0) for ran in shown if ran]),
    )


def _combinations(plant: Plant, duty: Duty) -> list[Combination]:
    """Combinations for a duty, those asked for first, then by how many pumps they differ from those."""
    case = plant.case
    alike = [int(row) for row in classes(case)]
    found = {key_of(alike, asked): asked for asked, _ in _asked(plant, duty)}
    queue = list(found.values())
    for running, new in queue:
        for other in _neighbours(case, alike, running, new, plant.pumps is not None):
            key = key_of(alike, other)
            if key not in found and len(found) < MOST:
                found[key] = other
                queue.append(other)
    return [combination for combination in queue if combination[0] or combination[1]]


def _asked(plant: Plant, duty: Duty) -> list[tuple[Combination, float]]:
    """The combinations that a duty asks for, each with its share of the hours.

    While the new pump is not there, one that it would replace runs in its stead.
    """
    alike = [int(row) for row in classes(plant.case)]
    gone = plant.case.new_pump.replaces
    share: dict[object, tuple[Combination, float]] = {}
    for running, new in zip(duty.running, duty.new, strict=True):
        if new and plant.pumps is None:
            running, new = tuple(sorted({*running, gone} - {-1})), False
        combination = (running, new)
        key = key_of(alike, combination)
        first, so_far = share.get(key, (combination, 0.0))
        share[key] = (first, so_far + 1 / len(duty.running))
    return list(share.values())


def _neighbours(
    case: Case, alike: Sequence[int], running: tuple[int, ...], new: bool, may_come: bool
) -> Iterator[Combination]:
    """Combinations with one pump more or less; the new pump and the one it replaces never together."""
    for kind in dict.fromkeys(alike):
        rows = [row for row in range(len(alike)) if alike[row] == kind]
        stopped = [row for row in rows if row not in running and not (new and row == case.new_pump.replaces)]
        ran = [row for row in rows if row in running]
        if stopped:
            yield tuple(sorted([*running, stopped[0]])), new
        if ran:
            yield tuple(row for row in running if row != ran[-1]), new
    if new:
        yield running, False
    elif may_come:
        yield tuple(row for row in running if row != case.new_pump.replaces), True


def _choices(plant: Plant, tried: Sequence[Sequence[Combination]]) -> tuple[Choice, ...]:
    """The cheapest combination of each duty and level, beside each one asked for."""
    case = plant.case
    alike = [int(row) for row in classes(case)]
    duties = [
        run_as(duty, combination)
        for duty, combinations in zip(case.duties, tried, strict=True)
        for combination in combinations
    ]
    found = iter(every_run(plant, duties))
    gone = case.new_pump.replaces
    choices = []
    for number, (duty, combinations) in enumerate(zip(case.duties, tried, strict=True)):
        by_key = {key_of(alike, combination): next(found) for combination in combinations}
        for place in range(len(duty.levels)):
            rans = [by_level[place] for by_level in by_key.values()]
            installed = [ran for ran in rans if not ran.new]
            there = [ran for ran in rans if plant.pumps is None or gone not in ran.running]
            for asked, share in _asked(plant, duty):
                as_asked = by_key.get(key_of(alike, asked))
                choices.append(
                    Choice(
                        duty=number,
                        level=duty.levels[place],
                        asked=as_asked[place] if as_asked else None,
                        best=cheapest(there),
                        without=cheapest(installed) if installed else None,
                        hours=duty.hours * share / len(duty.levels),
                    )
                )
    return tuple(choices)


def cheapest(rans: Sequence[Ran]) -> Ran:
    """The one of least power within limits; where none is within, the one least outside."""
    within = [ran for ran in rans if ran.within]
    if not within:
        return min(rans, key=lambda ran: ran.shortfall)
    return min(within, key=lambda ran: (np.isnan(ran.power), np.nan_to_num(ran.power), len(ran.running)))
