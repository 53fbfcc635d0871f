"""Outcomes: the one place where an observation is held against its limits."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from screener.criteria import Criterion, Observed, criteria
from screener.model.arrays import Codes, Floats, Ints
from screener.model.finding import Findings, Outcome, Verdict
from screener.model.run import Run

Limits = Mapping[str, Mapping[str, float]]
_SLACK = 1e-9


def judge(run: Run, today: Run, limits: Limits) -> Findings:
    """Hold c candidates against every criterion.

    today  : the same states without the new pump. An installed pump that is outside a limit there too,
             and not made worse, is a caution.
    limits : {criterion: {limit: value in SI}}
    """
    columns = []
    for criterion in criteria():
        observed = criterion.observe(run, limits[criterion.name])
        columns.append(_judged(criterion, observed, run, _before(criterion, today, limits)))
    return _columns(columns)


def verdicts(findings: Findings) -> tuple[Codes, Floats]:
    """Verdict (c,) `Verdict`, and the largest shortfall of what failed, (c,), 0 where nothing did."""
    gates = np.array([criterion.gates for criterion in criteria()])
    failed = findings.outcome == Outcome.FAIL
    open_ = ((findings.outcome == Outcome.NOT_ASSESSED) & gates).any(axis=1)
    verdict = np.where(
        failed.any(axis=1), Verdict.REJECTED, np.where(open_, Verdict.CONDITIONAL, Verdict.ACCEPTED)
    )
    worst = np.where(failed, findings.shortfall, 0.0).max(axis=1)
    return verdict.astype(np.int8), worst


def inherited(today: Run, limits: Limits) -> Findings:
    """What is outside its limits today already, over the criteria that judge every pump; one row."""
    runs = today.conditions.runs.copy()
    runs[:, 0] = True  # judged as beside a pump that gives nothing, so that no duty is left out
    run = replace(today, conditions=replace(today.conditions, runs=runs))
    installed = np.arange(runs.shape[1]) > 0
    columns = []
    for criterion in criteria():
        observed = criterion.observe(run, limits[criterion.name])
        applies = observed.applies & installed & criterion.every_pump
        columns.append(_judged(criterion, replace(observed, applies=applies), run, None))
    return _columns(columns)


def _columns(columns: Sequence[Sequence[Floats]]) -> Findings:
    return Findings(*(np.stack(values, axis=1) for values in zip(*columns, strict=True)))


def _before(criterion: Criterion, today: Run, limits: Limits) -> Floats | None:
    """Shortfalls of the installed pumps today, (1, s, 1 + p); None where there are none."""
    if not criterion.every_pump:
        return None
    observed = criterion.observe(today, limits[criterion.name])
    sides = _sides(observed)
    sides = np.where(observed.applies & ~np.isnan(sides), sides, -np.inf)
    return sides if (sides > 0).any() else None


def _sides(observed: Observed) -> Floats:
    """Shortfall below the lower and above the upper fail bound apart, (2, c, s, 1 + p)."""
    below = _shortfall(observed, observed.fail_below, np.inf)
    above = _shortfall(observed, -np.inf, observed.fail_above)
    return np.stack(np.broadcast_arrays(below, above))


def _judged(criterion: Criterion, observed: Observed, run: Run, before: Floats | None) -> Sequence[Floats]:
    """One criterion, as the columns of `Findings`, (c,) each."""
    count = len(run.pumps) if run.header.shape[0] == len(run.pumps) else run.header.shape[0]
    fail = _shortfall(observed, observed.fail_below, observed.fail_above)
    caution = _shortfall(observed, observed.caution_below, observed.caution_above)
    shape = np.broadcast_shapes(fail.shape, caution.shape, np.shape(observed.applies), (count, 1, 1))
    applies = np.broadcast_to(observed.applies, shape)
    value = np.broadcast_to(observed.value, shape)
    unknown = applies & np.isnan(value)
    judged = applies & ~unknown
    fail = np.where(judged, fail, -np.inf)
    caution = np.where(judged, caution, -np.inf)
    already = np.zeros(shape, bool)
    if before is not None:
        sides = _sides(observed)
        already = ((before > 0) & (sides <= before + _SLACK) & (sides > 0)).any(axis=0) & (fail > 0)
        caution = np.where(already, np.maximum(caution, fail), caution)
        fail = np.where(already, -np.inf, fail)

    def flat(values: NDArray[Any]) -> NDArray[Any]:
        return values.reshape(count, shape[1] * shape[2])

    rows = np.arange(count)
    at_fail, at_caution = flat(fail).argmax(axis=1), flat(caution).argmax(axis=1)
    failed, warned = flat(fail)[rows, at_fail] > _SLACK, flat(caution)[rows, at_caution] > _SLACK
    missing = flat(unknown).any(axis=1)
    has_caution = np.isfinite(flat(caution)[rows, at_caution])
    place = np.where(failed | ~has_caution, at_fail, at_caution)
    place = np.where(missing & ~failed, flat(unknown).argmax(axis=1), place)
    outcome = np.where(
        failed,
        Outcome.FAIL,
        np.where(missing, Outcome.NOT_ASSESSED, np.where(warned, Outcome.CAUTION, Outcome.PASS)),
    )
    seen = np.where(flat(applies)[rows, place], flat(value)[rows, place], np.nan)
    limit = np.where(
        failed | ~has_caution,
        _bound(observed, observed.fail_below, observed.fail_above, shape, rows, place, seen),
        _bound(observed, observed.caution_below, observed.caution_above, shape, rows, place, seen),
    )
    state, pump = np.divmod(place, shape[2])
    blank = (outcome == Outcome.NOT_ASSESSED) & (shape[1] > 1) & np.isnan(run.header[rows, state])
    return (
        outcome.astype(np.int8),
        seen,
        limit,
        flat(fail)[rows, place],
        np.where(shape[1] > 1, state, -1),
        np.where(shape[2] > 1, pump, 0 if not criterion.every_pump else -1),
        flat(already)[rows, place],
        blank,
    )


def _shortfall(observed: Observed, low: Floats | float, high: Floats | float) -> Floats:
    """How far a value lies outside its bounds, relative to the bound; below 0 inside."""
    parts = []
    for bound, sign in ((low, -1.0), (high, 1.0)):
        if np.ndim(bound) or np.isfinite(bound):
            size = observed.scale or np.abs(bound)
            scale = np.where((size > 0) & np.isfinite(size), size, 1.0)
            with np.errstate(invalid="ignore"):  # past the end of a curve against a bound that is not set
                parts.append(sign * (observed.value - bound) / scale)
    if not parts:
        return np.where(np.isnan(observed.value), np.nan, -np.inf)
    return np.asarray(parts[0] if len(parts) == 1 else np.maximum(*parts))


def _bound(
    observed: Observed,
    low: Floats | float,
    high: Floats | float,
    shape: tuple[int, ...],
    rows: Ints,
    place: Ints,
    seen: Floats,
) -> Floats:
    """The bound nearer to being broken at the governing place, (c,); NaN where there is none."""
    low_at, high_at = (
        np.broadcast_to(b, shape).reshape(shape[0], shape[1] * shape[2])[rows, place] for b in (low, high)
    )
    with np.errstate(invalid="ignore"):
        nearer_low = np.isfinite(low_at) & ~(np.isfinite(high_at) & (seen - low_at > high_at - seen))
    bound = np.where(nearer_low, low_at, high_at)
    return np.where(np.isfinite(bound), bound, np.nan)


def worst_criterion(findings: Findings, row: int) -> str:
    """Name of the criterion that a candidate fails by most, "" where it fails none."""
    failed = findings.outcome[row] == Outcome.FAIL
    if not failed.any():
        return ""
    return criteria()[int(np.where(failed, findings.shortfall[row], -np.inf).argmax())].name
