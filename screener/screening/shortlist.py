"""The whole job: a case and a table to a ranked, explained shortlist."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np

from screener import ranking
from screener.header.requirement import Requirement, requirement
from screener.hydraulics.similarity import take as take_pumps
from screener.hydraulics.similarity import trimmed
from screener.hydraulics.viscosity import corrected
from screener.model.arrays import Bools, Floats, Ints
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Candidates, Figures, Findings, Verdict
from screener.model.run import Kind, Speed
from screener.screening.assess import Bench, assess, join, judged, restored, set_up, take
from screener.screening.judge import inherited
from screener.screening.ratings import efficiency_at
from screener.screening.reach import Need, Reach, Reason, reach
from screener.screening.states import classes

LADDER = 12
"""Diameters of each model looked at first, from the smallest that meets the duties to the largest."""

Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class RestoredAlone:
    """What restoring the worn pumps would give without any new pump.

    total   : [m3/s] at the rated duty;  meets : whether every duty gets what it asks
    figures : of one row; those of match are not known
    """

    total: float
    meets: bool
    figures: Figures


@dataclass(frozen=True, slots=True)
class Shortlist:
    """The result over n models; everything an output shows is drawn from here.

    bench      : the header, the same today, and the limits
    table      : the n models
    needs      : state -> what it asks of the new pump, for every duty with a new pump
    reach      : (n,) which models can meet the duties, and from which diameter on
    best       : each model that can, at its best diameter: accepted by score, conditional by score, then
                 rejected, nearest first
    duty_efficiency : (b,) [-] efficiency of each of `best` at the flow that the rated duty asks of the new
                 pump, as a search pump by pump would see it; NaN where not known
    restored   : (b) the same rows of `best`, judged with the installed pumps as new; None where none is worn
    alone      : the installed pumps as new, without a new one; None likewise
    screened   : candidates that were run
    references : one more of each kind of installed pump
    same_as    : for each reference the row of the installed pump
    inherited  : what is outside its limits today, one row
    """

    bench: Bench
    table: PumpTable
    needs: dict[int, Requirement]
    reach: Reach
    best: Candidates
    duty_efficiency: Floats
    restored: Candidates | None
    alone: RestoredAlone | None
    screened: int
    references: Candidates
    same_as: tuple[int, ...]
    inherited: Findings


def shortlist(case: Case, catalog: PumpTable, *, progress: Progress | None = None) -> Shortlist:
    """Screen a catalog for the free place on a header.

    case : as read by `load_case`;  catalog : n models, as read by `load_catalog`
    progress : called with the candidates done and the number in all, per pass
    """
    bench = set_up(case)
    needs = requirements(bench)
    found = reach(catalog, asked(bench, needs), case.new_pump)
    rows, diameters = _ladder(catalog, found, case.new_pump.trim_step)
    first = _assess(bench, catalog, found, rows, diameters, progress)
    rows, diameters = _between(first, case.new_pump.trim_step)
    second = _assess(bench, catalog, found, rows, diameters, progress)
    finalists = join([take(first, _best(first)), take(second, _best(second))])
    best = take(finalists, _best(finalists))
    best = take(best, np.lexsort((best.model, _merit(best), best.verdict)))
    restored_best, alone = _restored(case, catalog, found, best)
    same_as = tuple(dict.fromkeys(int(row) for row in classes(restored(case))))
    return Shortlist(
        bench=bench,
        table=catalog,
        needs=needs,
        reach=found,
        best=best,
        duty_efficiency=_duty_efficiency(bench, catalog, found, best, needs[bench.header.rated].flow),
        restored=restored_best,
        alone=alone,
        screened=len(first) + len(second),
        references=judged(bench, take_pumps(case.as_new or case.pumps, np.array(same_as))).candidates,
        same_as=same_as,
        inherited=inherited(bench.today, bench.limits),
    )


def requirements(bench: Bench) -> dict[int, Requirement]:
    """What each duty with a new pump asks of it, by state."""
    header = bench.header
    return {
        place: requirement(
            header.standing[place].branches,
            running=state.running,
            curve=header.left[place].curve,
            asked=state.asked,
            count=state.new,
            place=header.case.new_pump.branch,
            bypass=state.bypass[0] if state.bypass else 0.0,
        )
        for place, state in enumerate(header.states)
        if state.kind == Kind.DUTY and state.new
    }


def asked(bench: Bench, needs: Mapping[int, Requirement]) -> list[Need]:
    """What the duties ask of a model, for the first look at a catalog."""
    header = bench.header
    return [
        Need(
            flow=need.flow + need.bypass if need.flow > 0 else need.flow,
            head=need.head,
            viscosity=header.standing[place].setting.viscosity,
            held=header.states[place].speed == Speed.HELD,
        )
        for place, need in needs.items()
    ]


def best_of(candidates: Candidates) -> int:
    """The row to show of the candidates of one model."""
    return int(_best(candidates)[0])


def _restored(
    case: Case, catalog: PumpTable, found: Reach, best: Candidates
) -> tuple[Candidates | None, RestoredAlone | None]:
    """The best candidates with the installed pumps as new, and what those give then without a new one."""
    if case.as_new is None:
        return None, None
    bench = set_up(restored(case))
    speed_ratio = found.speed_ratio[best.model]
    again = assess(bench, catalog, model=best.model, diameter=best.diameter, speed_ratio=speed_ratio)
    return again, _alone(bench)


def _alone(bench: Bench) -> RestoredAlone:
    """The installed pumps of a bench without a new one, over all duties."""
    case, conditions = bench.header.case, bench.today.conditions
    runs = conditions.runs & (np.arange(conditions.runs.shape[1]) > 0)
    run = replace(bench.today, conditions=replace(conditions, runs=runs))
    duties = conditions.kind == Kind.DUTY
    drives = [case.new_pump.drive, *(pump.drive for pump in case.installed)]
    return RestoredAlone(
        total=float(run.total[0, bench.header.rated]),
        meets=bool((run.total[0, duties] >= 0.999 * conditions.asked[duties]).all()),
        figures=ranking.figures(run, bench.without, count=0, drives=drives, weights=case.weights),
    )


def _duty_efficiency(bench: Bench, catalog: PumpTable, found: Reach, best: Candidates, flow: float) -> Floats:
    speed_ratio = found.speed_ratio[best.model]
    pumps = trimmed(catalog, model=best.model, diameter=best.diameter, speed_ratio=speed_ratio)
    viscosity = bench.header.base.setting.viscosity
    return efficiency_at(corrected(pumps, viscosity=viscosity) if viscosity else pumps, flow)


def _assess(
    bench: Bench, catalog: PumpTable, found: Reach, rows: Ints, diameters: Floats, progress: Progress | None
) -> Candidates:
    return assess(
        bench,
        catalog,
        model=rows,
        diameter=diameters,
        speed_ratio=found.speed_ratio[rows],
        progress=progress,
    )


def _ladder(catalog: PumpTable, found: Reach, step: float) -> tuple[Ints, Floats]:
    """Up to `LADDER` diameters of each model that reaches the duties, spread over what is on offer."""
    models = np.flatnonzero(found.reason == Reason.REACHES)
    least = np.minimum(np.ceil(found.wanted[models] / step - 1e-6) * step, found.at_most[models])
    steps = np.ceil(np.nan_to_num((found.at_most[models] - least) / step) - 1e-6)
    rungs = np.linspace(0, 1, LADDER) * np.maximum(steps, 0)[:, None]
    diameters = np.minimum(least[:, None] + np.rint(rungs) * step, found.at_most[models, None])
    diameters = np.asarray(np.round(diameters, 9), np.float64)
    new = np.ones(diameters.shape, bool)
    new[:, 1:] = diameters[:, 1:] > diameters[:, :-1]
    return np.repeat(models, new.sum(axis=1)), diameters[new]


def _between(candidates: Candidates, step: float) -> tuple[Ints, Floats]:
    """Every trim step next to the best diameter of a model, and where its verdict changes."""
    model, diameter = candidates.model, candidates.diameter
    if len(model) < 2:
        return np.empty(0, np.int64), np.empty(0)
    best = np.zeros(len(model), bool)
    best[_best(candidates)] = True
    same = model[1:] == model[:-1]
    wanted = same & ((candidates.verdict[1:] != candidates.verdict[:-1]) | best[1:] | best[:-1])
    low, high = diameter[:-1][wanted], diameter[1:][wanted]
    count = np.maximum(np.ceil((high - low) / step - 1e-6).astype(np.int64) - 1, 0)
    number = np.arange(count.sum()) - np.repeat(np.cumsum(count) - count, count) + 1
    diameters: Floats = np.round(np.repeat(low, count) + number * step, 9)
    return np.repeat(model[:-1][wanted], count), diameters


def _best(candidates: Candidates) -> Ints:
    """Row of the best candidate of each model, in the order of models."""
    order = np.lexsort((candidates.diameter, _merit(candidates), candidates.verdict, candidates.model))
    first: Bools = np.ones(len(order), bool)
    first[1:] = candidates.model[order][1:] != candidates.model[order][:-1]
    return order[first]


def _merit(candidates: Candidates) -> Floats:
    """What orders candidates of one verdict, the smaller the better."""
    score = np.where(np.isnan(candidates.figures.score), -np.inf, candidates.figures.score)
    return np.where(candidates.verdict == Verdict.REJECTED, candidates.worst, -score)
