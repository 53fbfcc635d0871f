"""Outcomes: the one place where an observation is held against its limits."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from screener.criteria import Criterion, Observed, criteria
from screener.model.arrays import Bools, Codes, Floats, Ints
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


def worse(one: Findings, other: Findings) -> Findings:
    """Of two sets of findings on the same candidates and states, the worse of each criterion."""
    failed = (one.outcome == Outcome.FAIL) & (other.outcome == Outcome.FAIL)
    takes = (other.outcome > one.outcome) | failed & (other.shortfall > one.shortfall)
    return Findings(
        *(np.where(takes, getattr(other, f.name), getattr(one, f.name)) for f in fields(Findings))
    )


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
    """Shortfalls of the installed pumps today, (2, 1, s, 1 + p); None where there are none."""
    if not criterion.every_pump:
        return None
    observed = criterion.observe(today, limits[criterion.name])
    with np.errstate(invalid="ignore"):
        sides = _sides(observed)
    sides = np.where(observed.applies & ~np.isnan(sides), sides, -np.inf)
    return sides if (sides > 0).any() else None


def _sides(observed: Observed) -> Floats:
    """Shortfall below the lower and above the upper fail bound apart, (2, c, s, 1 + p)."""
    below = _shortfall(observed, observed.fail_below, np.inf)
    above = _shortfall(observed, -np.inf, observed.fail_above)
    return np.stack(np.broadcast_arrays(below, above, observed.value)[:2])


def _judged(
    criterion: Criterion, observed: Observed, run: Run, before: Floats | None
) -> Sequence[NDArray[Any]]:
    """One criterion, as the columns of `Findings`, (c,) each.

    What fails most governs, then what is not known, then what is nearest to a caution; of places that
    are alike the first.
    """
    with np.errstate(invalid="ignore"):
        return _governing(criterion, observed, run.header, before)


def _governing(
    criterion: Criterion, observed: Observed, header: Floats, before: Floats | None
) -> Sequence[NDArray[Any]]:
    count, all_states = header.shape
    states, observed, before = _speaking(observed, all_states, before)
    fail = _shortfall(observed, observed.fail_below, observed.fail_above)
    caution = _shortfall(observed, observed.caution_below, observed.caution_above)
    value, applies = observed.value, observed.applies
    shape = np.broadcast_shapes(fail.shape, caution.shape, value.shape, applies.shape, (count, 1, 1))
    unknown = applies & np.isnan(value)
    missing = _highest(unknown)
    judged = applies & ~unknown if missing.any() else applies
    fail, caution = _where(judged, fail), _where(judged, caution)
    already = np.zeros((1, 1, 1), bool)
    if before is not None:
        sides = _sides(observed)
        already = ((before > 0) & (sides <= before + _SLACK) & (sides > 0)).any(axis=0) & (fail > 0)
        caution = np.where(already, np.maximum(caution, fail), caution)
        fail = np.where(already, -np.inf, fail)
    most_fail, most_caution = _highest(fail), _highest(caution)
    failed, warned = most_fail > _SLACK, most_caution > _SLACK
    by_fail = failed | ~np.isfinite(most_caution)
    open_ = missing & ~failed
    least_fail = np.where(by_fail & ~open_, most_fail - _SLACK, np.inf)[..., None, None]
    least_caution = np.where(by_fail | open_, np.inf, most_caution - _SLACK)[..., None, None]
    governs = (fail >= least_fail) | (caution >= least_caution)
    if open_.any():
        governs = governs | unknown & open_[..., None, None]
    place = np.broadcast_to(governs, shape).reshape(count, shape[1] * shape[2]).argmax(axis=1)
    state, pump = np.divmod(place, shape[2])
    at, by_state = (np.arange(count), state, pump), shape[1] > 1 or len(states) < all_states

    def there(values: Any) -> Any:
        if np.ndim(values) == 0:
            return values
        return values[tuple(i if size != 1 else 0 for i, size in zip(at, values.shape, strict=True))]

    seen = np.where(there(applies), there(value), np.nan)
    limit = _bound(
        np.where(by_fail, there(observed.fail_below), there(observed.caution_below)),
        np.where(by_fail, there(observed.fail_above), there(observed.caution_above)),
        seen,
    )
    outcome = np.full(count, Outcome.PASS.value, np.int8)
    for found, worse in ((warned, Outcome.CAUTION), (missing, Outcome.NOT_ASSESSED), (failed, Outcome.FAIL)):
        np.copyto(outcome, worse.value, where=found)
    blank = (outcome == Outcome.NOT_ASSESSED) & by_state & np.isnan(header[at[0], states[state]])
    columns = (
        outcome,
        seen,
        limit,
        there(fail),
        states[state] if by_state else -1,
        pump if shape[2] > 1 else -1 if criterion.every_pump else 0,
        there(already),
        blank,
    )
    return [np.broadcast_to(column, count) for column in columns]


def _speaking(observed: Observed, count: int, before: Floats | None) -> tuple[Ints, Observed, Floats | None]:
    """Leave out the states in which a criterion has nothing to say.

    Returns the states kept, and the observation with arrays of three axes (or single figures) throughout.
    """
    columns = {f.name: _three_axes(getattr(observed, f.name)) for f in fields(observed)}
    states = np.flatnonzero(columns["applies"].any(axis=(0, 2)))
    if columns["applies"].shape[1] == 1 or not 0 < len(states) < count:
        return np.arange(count), replace(observed, **columns), before

    def kept(values: Any) -> Any:
        return values if np.ndim(values) < 3 or values.shape[1] == 1 else values.T.take(states, axis=1).T

    kept_columns = {name: kept(values) for name, values in columns.items()}
    if before is not None and before.shape[2] > 1:
        before = before[:, :, states]
    return states, replace(observed, **kept_columns), before


def _three_axes(values: Any) -> Any:
    return values.reshape((1,) * (3 - values.ndim) + values.shape) if np.ndim(values) else values


def _where(judged: Bools, shortfall: Floats) -> Floats:
    return np.where(judged, shortfall, -np.inf) if shortfall.ndim else shortfall


def _highest(values: Any) -> Any:
    """Highest over states and pumps, (c,) or one for all."""
    return values.max(axis=(1, 2)) if values.ndim else values


def _shortfall(observed: Observed, low: Floats | float, high: Floats | float) -> Floats:
    """How far a value lies outside its bounds, relative to the bound; below 0 inside, -inf without any."""
    parts = []
    for bound, sign in ((low, -1.0), (high, 1.0)):
        if np.ndim(bound) or np.isfinite(bound):
            size = observed.scale or np.abs(bound)
            scale = np.where((size > 0) & np.isfinite(size), size, 1.0)
            parts.append((observed.value - bound) * (sign / scale))
    if not parts:
        return np.asarray(-np.inf)
    return np.asarray(parts[0] if len(parts) == 1 else np.maximum(*parts))


def _bound(low: Floats | float, high: Floats | float, seen: Floats) -> Floats:
    """The bound nearer to being broken at the governing place, (c,); NaN where there is none."""
    nearer_low = np.isfinite(low) & ~(np.isfinite(high) & (seen - low > high - seen))
    bound = np.where(nearer_low, low, high)
    return np.where(np.isfinite(bound), bound, np.nan)


def worst_criterion(findings: Findings, row: int) -> str:
    """Name of the criterion that a candidate fails by most, "" where it fails none."""
    failed = findings.outcome[row] == Outcome.FAIL
    if not failed.any():
        return ""
    return criteria()[int(np.where(failed, findings.shortfall[row], -np.inf).argmax())].name
