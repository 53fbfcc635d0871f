"""Candidates judged: run them through the header, hold them against the criteria, score them."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np

from screener import ranking
from screener.hydraulics.similarity import trimmed
from screener.hydraulics.wear import leaking, leaks
from screener.model.arrays import Floats, Ints
from screener.model.case import Case
from screener.model.curves import Pumps, PumpTable
from screener.model.finding import Candidates, Figures, Findings, Judged
from screener.model.run import Kind, Run
from screener.model.tables.motors import nameplates
from screener.screening import evaluate
from screener.screening.header import Header, prepare
from screener.screening.judge import judge, verdicts, worse

CHUNK = 8192
"""Candidates taken at a time: so many that calls cost little beside the work they do."""

Limits = Mapping[str, Mapping[str, float]]


@dataclass(frozen=True, slots=True)
class Bench:
    """A case ready to judge candidates on: its header, the same today, and the limits that hold.

    without : the same with a new pump that has come and is lost: other than `today` where it replaces one
    others : other readings of the installed pumps' wear, in which a candidate must pass too
    """

    header: Header
    today: Run
    without: Run
    limits: Limits
    others: tuple[Bench, ...] = ()


def set_up(case: Case) -> Bench:
    """Make a case ready for candidates, in each reading of the installed pumps' wear."""
    limits = {name: dict(values) for name, values in case.limits.items()}
    limits["shutoff-pressure"]["header"] = case.system.allowable_pressure
    motor = limits["motor-new"]
    motor["fail_above"] = min(motor["fail_above"], float(nameplates(case.new_pump.motor_series)[-1]))
    header = prepare(case, temperature_rise=limits["minimum-flow"]["temperature_rise"])
    others = (set_up(_leaking(case, case.as_new)),) if case.as_new is not None else ()
    today = evaluate.today(header)
    lost = today if case.new_pump.replaces < 0 else evaluate.today(header, replaced=False)
    return Bench(header, today, lost, limits, others)


def restored(case: Case) -> Case:
    """The same case with its installed pumps as new."""
    as_new = case.pumps if case.as_new is None else case.as_new
    installed = tuple(replace(pump, head_loss=0.0, wear=None) for pump in case.installed)
    return replace(case, pumps=as_new, as_new=None, installed=installed)


def _leaking(case: Case, as_new: Pumps) -> Case:
    """The head lost by the installed pumps, read as leakage inside them."""
    return replace(case, pumps=leaking(as_new, leak=leaks(as_new, installed=case.installed)), as_new=None)


def judged(bench: Bench, pumps: Pumps) -> Judged:
    """Judge c candidates, keeping the run; for a few. Of several readings the worse finding governs."""
    run = evaluate.run(bench.header, pumps)
    findings = judge(run, bench.today, bench.limits)
    for other in bench.others:
        read = evaluate.run(other.header, pumps)
        findings = worse(findings, judge(read, other.today, other.limits))
    verdict, worst = verdicts(findings)
    with np.errstate(invalid="ignore"):
        shares = np.where(np.isfinite(run.flow), run.flow, np.nan) / run.bounds.best
        margins = run.npsh_available / run.npsh_required
    duty = run.conditions.kind == Kind.DUTY
    candidates = Candidates(
        model=pumps.model,
        diameter=pumps.diameter,
        verdict=verdict,
        worst=worst,
        lowest_share=_smallest(shares[:, duty]),
        npsh=_smallest(margins),
        motor=run.ratings.motor[:, 0],
        findings=findings,
        figures=ranking.figures(
            run,
            bench.without,
            count=bench.header.case.new_pump.count,
            drives=[bench.header.case.new_pump.drive, *(p.drive for p in bench.header.case.installed)],
            weights=bench.header.case.weights,
        ),
    )
    return Judged(candidates, run)


def assess(
    bench: Bench,
    table: PumpTable,
    *,
    model: Ints,
    diameter: Floats,
    speed_ratio: Floats,
    progress: Callable[[int, int], None] | None = None,
) -> Candidates:
    """Judge many candidates, in chunks. progress : called with the number done and the number in all."""
    parts = []
    for start in range(0, len(model), CHUNK):
        part = slice(start, start + CHUNK)
        pumps = trimmed(table, model=model[part], diameter=diameter[part], speed_ratio=speed_ratio[part])
        parts.append(judged(bench, pumps).candidates)
        if progress:
            progress(min(start + CHUNK, len(model)), len(model))
    return (
        join(parts)
        if parts
        else judged(bench, trimmed(table, model=model, diameter=diameter, speed_ratio=speed_ratio)).candidates
    )


def join(parts: Sequence[Candidates]) -> Candidates:
    """Candidates one after another."""

    def joined(kind: type, items: Sequence[object]) -> dict[str, Any]:
        names = [f.name for f in fields(kind) if f.name not in ("findings", "figures")]
        return {name: np.concatenate([getattr(item, name) for item in items]) for name in names}

    return Candidates(
        findings=Findings(**joined(Findings, [part.findings for part in parts])),
        figures=Figures(**joined(Figures, [part.figures for part in parts])),
        **joined(Candidates, parts),
    )


def take(candidates: Candidates, rows: Ints) -> Candidates:
    """Some of the candidates, in the order of `rows`."""

    def taken(item: Candidates | Findings | Figures) -> dict[str, Any]:
        names = [f.name for f in fields(type(item)) if f.name not in ("findings", "figures")]
        return {name: getattr(item, name)[rows] for name in names}

    return Candidates(
        findings=Findings(**taken(candidates.findings)),
        figures=Figures(**taken(candidates.figures)),
        **taken(candidates),
    )


def _smallest(values: Floats) -> Floats:
    """Smallest over all but the first axis, NaN ignored."""
    return np.asarray(np.fmin.reduce(values, axis=tuple(range(1, values.ndim))))
