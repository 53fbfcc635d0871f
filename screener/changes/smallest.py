"""The smallest changes that would let a rejected pump pass, each found by running everything again with it.

A change is another case: one duty run with one installed pump fewer or without the new one, a duty that is
not to fall under some flow, a larger motor on an installed pump, worn pumps restored. Nothing is inferred: a
change is told only with the verdict of the whole evaluation that contains it.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from screener.criteria import criteria
from screener.hydraulics.similarity import take
from screener.model.arrays import Ints
from screener.model.case import Case, Duty
from screener.model.curves import Pumps
from screener.model.finding import Findings, Outcome, Verdict
from screener.model.run import Kind
from screener.model.tables.motors import nameplates
from screener.screening.assess import Bench, judged, restored, set_up
from screener.screening.judge import inherited
from screener.screening.states import classes

STEPS = 8
"""Places between the flow of a duty and the largest one at which its lowest safe flow is first sought."""

HALVINGS = 4


class ChangeKind(IntEnum):
    """What is changed, the easiest first."""

    FEWER_INSTALLED = 0
    WITHOUT_NEW = 1
    LOWEST_FLOW = 2
    MOTOR = 3
    RESTORED = 4


@dataclass(frozen=True, slots=True)
class Change:
    """One change with which a candidate passes.

    duty    : row of the duty changed, -1 where none is
    pump    : row of the installed pump it touches, -1 where none is
    value   : [m3/s] flow under which the duty must not fall, or [W] nameplate; NaN for the others
    verdict : of the candidate, with the change
    """

    kind: ChangeKind
    duty: int
    pump: int
    value: float
    verdict: Verdict


def smallest_changes(bench: Bench, pumps: Pumps, findings: Findings) -> list[list[Change]]:
    """Single changes that would let each of c candidates pass, the easiest first.

    bench : the case as it is;  pumps : the c candidates;  findings : theirs on that bench
    Returns one list a candidate: empty for one that failed nothing, or that no single change helps.
    """
    case = bench.header.case
    result: list[list[Change]] = [[] for _ in range(len(pumps))]
    duties = _duty_at_fault(bench, findings)
    for number in np.unique(duties[duties >= 0]):
        rows = np.flatnonzero(duties == number)
        for change, changed in _combinations(case, int(number)):
            _tell(change, changed, pumps, rows, result)
        _lowest_flows(case, int(number), pumps, rows, result)
    if case.as_new is not None:
        rows = np.flatnonzero((findings.outcome == Outcome.FAIL).any(axis=1))
        restore = Change(ChangeKind.RESTORED, -1, -1, np.nan, Verdict.REJECTED)
        _tell(restore, restored(case), pumps, rows, result)
    for change, changed, rows in _motors(bench, findings):
        _tell(change, changed, pumps, rows, result)
    return [sorted(changes, key=lambda change: (change.verdict, change.kind)) for changes in result]


def _tell(change: Change, changed: Case, pumps: Pumps, rows: Ints, result: list[list[Change]]) -> None:
    """Judge some candidates in a changed case, and note the change with those that are not rejected."""
    if rows.size:
        for row, verdict in zip(rows, _verdicts(changed, pumps, rows), strict=True):
            if verdict != Verdict.REJECTED:
                result[row].append(replace(change, verdict=Verdict(int(verdict))))


def _verdicts(case: Case, pumps: Pumps, rows: Ints) -> Ints:
    return judged(set_up(case), take(pumps, rows)).candidates.verdict.astype(np.int64)


def _duty_at_fault(bench: Bench, findings: Findings) -> Ints:
    """The one duty in which everything failed that failed, for each candidate; -1 where there is none."""
    states = bench.header.states
    duty = np.array([state.duty if state.kind == Kind.DUTY else -1 for state in states] + [-1])
    rated = np.array([duty.rated for duty in bench.header.case.duties] + [False])
    failed = findings.outcome == Outcome.FAIL
    where = duty[np.where(failed, findings.state, -1)]
    last = np.where(failed, where, -1).max(axis=1)
    one = failed.any(axis=1) & ((where == last[:, None]) | ~failed).all(axis=1) & ~rated[last]
    return np.where(one, last, -1)


def _motors(bench: Bench, findings: Findings) -> Iterator[tuple[Change, Case, Ints]]:
    """Larger nameplates on the installed pumps of one kind, and the candidates that failed nothing else."""
    case, alike = bench.header.case, bench.header.alike
    sizes = nameplates(case.new_pump.motor_series)
    column = [criterion.name for criterion in criteria()].index("motor-installed")
    failed = findings.outcome == Outcome.FAIL
    only = failed[:, column] & (failed.sum(axis=1) == 1)
    kind = alike[np.maximum(findings.pump[:, column] - 1, 0)]
    nameplate = np.array([pump.motor for pump in case.installed])[kind]
    needed = np.searchsorted(sizes, findings.observed[:, column] * nameplate)
    for first, size in {(int(k), int(n)) for k, n in zip(kind[only], needed[only], strict=True)}:
        if size < len(sizes):
            motor = float(sizes[size])
            installed = tuple(
                replace(pump, motor=motor) if alike[row] == first else pump
                for row, pump in enumerate(case.installed)
            )
            change = Change(ChangeKind.MOTOR, -1, first, motor, Verdict.REJECTED)
            rows = np.flatnonzero(only & (kind == first) & (needed == size))
            yield change, replace(case, installed=installed), rows


def _combinations(case: Case, number: int) -> Iterator[tuple[Change, Case]]:
    """One duty with one installed pump fewer, or without the new pump where the others meet it."""
    duty = case.duties[number]
    nothing = Change(ChangeKind.FEWER_INSTALLED, number, -1, np.nan, Verdict.REJECTED)
    alike = classes(case)
    for kind in dict.fromkeys(int(alike[row]) for running in duty.running for row in running):
        running = tuple(_less(combination, kind, alike) for combination in duty.running)
        yield replace(nothing, pump=kind), _with(case, number, replace(duty, running=running))
    alone = replace(duty, new=(False,) * len(duty.new))
    if all(duty.running) and _met_alone(case, alone):
        yield replace(nothing, kind=ChangeKind.WITHOUT_NEW), _with(case, number, alone)


def _less(running: tuple[int, ...], kind: int, alike: Ints) -> tuple[int, ...]:
    lost = next((row for row in running if alike[row] == kind), None)
    return tuple(row for row in running if row != lost)


def _with(case: Case, number: int, duty: Duty) -> Case:
    return replace(case, duties=(*case.duties[:number], duty, *case.duties[number + 1 :]))


def _met_alone(case: Case, duty: Duty) -> bool:
    """Whether the installed pumps meet a duty within every limit that judges them."""
    only = replace(duty, new=(True,) * len(duty.new), rated=True)
    bench = set_up(replace(case, duties=(only,)))
    duties = bench.header.conditions.kind == Kind.DUTY
    if not (bench.today.total[0, duties] >= 0.999 * duty.flow).all():
        return False
    findings = inherited(bench.today, bench.limits)
    failed = (findings.outcome[0] == Outcome.FAIL) & duties[findings.state[0]]
    return not failed.any()


def _lowest_flows(case: Case, number: int, pumps: Pumps, rows: Ints, result: list[list[Change]]) -> None:
    """Seek the flow from which on a duty lets each candidate pass, and note it where there is one."""
    duty = case.duties[number]
    most = max(other.flow for other in case.duties if any(other.new))
    flows = duty.flow + (most - duty.flow) * np.arange(1, STEPS + 1) / STEPS
    passing = np.full((len(rows), STEPS), Verdict.REJECTED, np.int64)
    for step, flow in enumerate(flows if most > duty.flow else ()):
        passing[:, step] = _verdicts(_with(case, number, replace(duty, flow=float(flow))), pumps, rows)
    good = passing != Verdict.REJECTED
    for place, row in enumerate(rows):
        if good[place].any():
            first = int(good[place].argmax())
            low, high = (flows[first - 1] if first else duty.flow), float(flows[first])
            verdict = int(passing[place, first])
            for _ in range(HALVINGS):
                middle = (low + high) / 2
                tried = int(
                    _verdicts(_with(case, number, replace(duty, flow=middle)), pumps, np.array([row]))[0]
                )
                low, high = (middle, high) if tried == Verdict.REJECTED else (low, middle)
                verdict = verdict if tried == Verdict.REJECTED else tried
            result[row].append(Change(ChangeKind.LOWEST_FLOW, number, -1, high, Verdict(verdict)))
