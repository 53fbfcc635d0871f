"""One model looked at closely: every state and criterion, and its diameters side by side."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.header.turndown import Band
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import Floats
from screener.model.case import Case
from screener.model.curves import PumpTable
from screener.model.finding import Candidates, Judged, Verdict
from screener.screening.as_set import AsSet, valves_as_set
from screener.screening.assess import Bench, judged, set_up, take
from screener.screening.reach import Reach, reach, smallest_diameters
from screener.screening.shortlist import asked, best_of, requirements
from screener.screening.today import combined_band


@dataclass(frozen=True, slots=True)
class Explained:
    """One pump at one diameter, and the diameters at which it would pass.

    judged  : one candidate and its run
    passing : (d,) [m] trim steps that are accepted, out of `steps` (t,) [m]
    open    : number of steps that are conditional
    as_set  : trips with the users' valves left as they were, for information
    """

    bench: Bench
    table: PumpTable
    reach: Reach
    model: int
    judged: Judged
    passing: Floats
    open: int
    steps: Floats
    as_set: tuple[AsSet, ...]


@dataclass(frozen=True, slots=True)
class Trims:
    """One model at d diameters.

    judged : d candidates in rising diameter, and their run
    best   : the one to take;  band : permitted header flow with all pumps of the lowest common duty, (d,)
    """

    bench: Bench
    table: PumpTable
    model: int
    judged: Judged
    best: int
    band: Band


def explain(case: Case, catalog: PumpTable, model: int, diameter: float | None = None) -> Explained:
    """Look at one model, at a diameter [m] or at its best one.

    model : row of the catalog.  ValueError where the diameter is not on offer.
    """
    bench = set_up(case)
    found = _reach(bench, catalog)
    steps = trim_steps(catalog, model, case.new_pump.trim_step)
    every = _at(bench, catalog, found, model, steps)
    if diameter is None:
        chosen = float(steps[_best(found, model, every.candidates)])
    else:
        chosen = _on_offer(catalog, model, diameter)
    one = _at(bench, catalog, found, model, np.array([chosen]))
    return Explained(
        bench=bench,
        table=catalog,
        reach=found,
        model=model,
        judged=one,
        passing=steps[every.candidates.verdict == Verdict.ACCEPTED],
        open=int((every.candidates.verdict == Verdict.CONDITIONAL).sum()),
        steps=steps,
        as_set=valves_as_set(bench.header, one),
    )


def trims(case: Case, catalog: PumpTable, model: int) -> Trims:
    """Every trim step of one model on offer. model : row of the catalog."""
    bench = set_up(case)
    steps = trim_steps(catalog, model, case.new_pump.trim_step)
    found = _reach(bench, catalog)
    every = _at(bench, catalog, found, model, steps)
    state = bench.header.states[bench.header.lowest]
    return Trims(
        bench=bench,
        table=catalog,
        model=model,
        judged=every,
        best=_best(found, model, every.candidates),
        band=combined_band(bench.header, state.running, every.run.pumps, state.new),
    )


def trim_steps(catalog: PumpTable, model: int, step: float) -> Floats:
    """Every diameter on offer, smallest to largest, at whole steps and at both ends, (d,) [m].

    One NaN for a model that states no diameter.
    """
    least, most = float(smallest_diameters(catalog)[model]), float(catalog.maximum[model])
    if np.isnan(most):
        return np.array([np.nan])
    whole = np.arange(np.ceil(least / step - 1e-6), np.floor(most / step + 1e-6) + 1) * step
    return np.unique(np.round(np.concatenate([[least], whole, [most]]), 9))


def _reach(bench: Bench, catalog: PumpTable) -> Reach:
    return reach(catalog, asked(bench, requirements(bench)), bench.header.case.new_pump)


def _at(bench: Bench, catalog: PumpTable, found: Reach, model: int, diameters: Floats) -> Judged:
    rows = np.full(len(diameters), model)
    pumps = trimmed(catalog, model=rows, diameter=diameters, speed_ratio=found.speed_ratio[rows])
    return judged(bench, pumps)


def _best(found: Reach, model: int, candidates: Candidates) -> int:
    """The row to take: the best of those that meet every duty, where any does."""
    wanted = found.wanted[model]
    large = (
        np.flatnonzero(candidates.diameter >= wanted - 1e-9)
        if np.isfinite(wanted)
        else np.arange(len(candidates))
    )
    return int(large[best_of(take(candidates, large))])


def _on_offer(catalog: PumpTable, model: int, diameter: float) -> float:
    least, most = float(smallest_diameters(catalog)[model]), float(catalog.maximum[model])
    if np.isnan(most):
        raise ValueError(f"{catalog.ids[model]} states no diameter")
    if not least * (1 - 1e-6) <= diameter <= most * (1 + 1e-6):
        raise ValueError(f"{catalog.ids[model]} is offered from {1000 * least:g} to {1000 * most:g} mm")
    return float(np.clip(diameter, least, most))
