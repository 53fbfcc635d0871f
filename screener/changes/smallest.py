"""The smallest changes that would let a rejected pump pass, each found by running everything again with it.

A change is another diameter, or another case: one duty run with one installed pump fewer or without the new
one, a duty that is not to fall under some flow, a bypass at one pump, a larger motor on an installed pump,
one worn pump or all of them restored. Nothing is inferred: a change is told only with the verdict of the
whole evaluation that contains it. There is none for the motor of the new pump, which is the one it needs.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from screener.criteria import criteria
from screener.hydraulics.similarity import stack, take
from screener.model.arrays import Bools, Floats, Ints
from screener.model.case import Case, Duty
from screener.model.curves import Pumps, PumpTable
from screener.model.finding import Findings, Outcome, Verdict
from screener.model.run import Kind
from screener.model.tables.motors import nameplates
from screener.screening.assess import Bench, assess, judged, restored, set_up
from screener.screening.judge import inherited
from screener.screening.one import trim_steps
from screener.screening.ratings import smallest_flow
from screener.screening.states import classes

STEPS = 8
"""Places of a range at which the smallest flow that passes is first sought."""

HALVINGS = 4

AT_LOWEST = ("load-share", "spare-head")
"""Criteria that name no state, and look at the lowest duty that the new pump shares."""


class ChangeKind(IntEnum):
    """What is changed, the easiest first."""

    DIAMETER = 0
    FEWER_INSTALLED = 1
    WITHOUT_NEW = 2
    LOWEST_FLOW = 3
    BYPASS = 4
    MOTOR = 5
    ONE_RESTORED = 6
    RESTORED = 7


@dataclass(frozen=True, slots=True)
class Change:
    """One change with which a candidate passes.

    duty    : row of the duty changed, -1 where none is
    pump    : 0 for the new pump, 1 + row for an installed one and those identical to it, -1 where none is
    value   : [m3/s] flow under which the duty must not fall, or that goes round at each such pump; [W]
              nameplate; [m] smallest diameter; NaN for the others
    verdict : of the candidate, with the change
    to      : [m] largest diameter: those of every trim step from `value` on pass; NaN for the others
    """

    kind: ChangeKind
    duty: int
    pump: int
    value: float
    verdict: Verdict
    to: float = np.nan


@dataclass(frozen=True, slots=True)
class _Notes:
    """The changes found so far, a list for each of c candidates; `first`: one that is accepted will do."""

    pumps: Pumps
    found: list[list[Change]]
    first: bool

    def sought(self, rows: Ints) -> Ints:
        """Those of some candidates for which more is sought."""
        if not self.first:
            return rows
        done = [any(change.verdict == Verdict.ACCEPTED for change in changes) for changes in self.found]
        return rows[~np.array(done, np.bool_)[rows]]

    def verdicts(self, case: Case, rows: Ints) -> Ints:
        """Verdicts of some candidates in a changed case."""
        return judged(set_up(case), take(self.pumps, rows)).candidates.verdict.astype(np.int64)

    def tell(self, change: Change, case: Case, rows: Ints) -> None:
        """Judge some candidates in a changed case, and note the change with those that are not rejected."""
        rows = self.sought(rows)
        if rows.size:
            for row, verdict in zip(rows, self.verdicts(case, rows), strict=True):
                self.note(row, change, int(verdict))

    def note(self, row: int, change: Change, verdict: int) -> None:
        """Note a change with a candidate, unless it is still rejected."""
        if verdict != Verdict.REJECTED:
            self.found[row].append(replace(change, verdict=Verdict(verdict)))


def smallest_changes(
    bench: Bench, table: PumpTable, pumps: Pumps, findings: Findings, *, first: bool = False
) -> list[list[Change]]:
    """Single changes that would let each of c candidates pass: accepted before conditional, then the easiest.

    bench : the case as it is;  table : the catalog of the c candidates `pumps`
    findings : theirs on that bench;  first : what is harder than one that is accepted is not sought
    Returns one list a candidate: empty for one that failed nothing, or that no single change helps.
    """
    case = bench.header.case
    notes = _Notes(pumps, [[] for _ in range(len(pumps))], first)
    failed = (findings.outcome == Outcome.FAIL).any(axis=1)
    _diameters(bench, table, notes, np.flatnonzero(failed))
    anywhere, in_duty = _duty_at_fault(bench, findings)
    for number, duty in enumerate(case.duties):
        rows = np.flatnonzero(anywhere == number)
        if notes.sought(rows).size and not duty.rated:
            for change, changed in _combinations(case, number):
                notes.tell(change, changed, rows)
        rows = np.flatnonzero(in_duty == number)
        if not duty.rated:
            _lowest_flows(case, number, notes, rows)
        _bypasses(bench, number, findings, notes, rows)
    for change, changed, rows in _motors(bench, findings):
        notes.tell(change, changed, rows)
    for change, changed in _restored(case):
        notes.tell(change, changed, np.flatnonzero(failed))
    return [sorted(changes, key=lambda change: (change.verdict, change.kind)) for changes in notes.found]


def _nothing(kind: ChangeKind, duty: int = -1, pump: int = -1, value: float = np.nan) -> Change:
    return Change(kind, duty, pump, value, Verdict.REJECTED)


def _diameters(bench: Bench, table: PumpTable, notes: _Notes, rows: Ints) -> None:
    """Every other trim step of the models: steps side by side of one verdict are one change."""
    pumps, step = notes.pumps, bench.header.case.new_pump.trim_step
    offers = [trim_steps(table, int(pumps.model[row]), step) for row in rows]
    lengths = [len(offer) for offer in offers]
    if not rows.size or max(lengths) < 2:
        return
    owner = np.repeat(rows, lengths)
    candidates = assess(
        bench,
        table,
        model=pumps.model[owner],
        diameter=np.concatenate(offers),
        speed_ratio=(pumps.speed / table.speed[pumps.model])[owner],
    )
    for row, offer in zip(rows, offers, strict=True):
        verdicts = candidates.verdict[owner == row]
        edges = np.flatnonzero(np.diff(verdicts)) + 1
        for start, end in zip([0, *edges], [*edges, len(offer)], strict=True):
            change = replace(
                _nothing(ChangeKind.DIAMETER, value=float(offer[start])), to=float(offer[end - 1])
            )
            notes.note(row, change, int(verdicts[start]))


def _duty_at_fault(bench: Bench, findings: Findings) -> tuple[Ints, Ints]:
    """The one duty in which everything failed that failed, for each candidate; -1 where there is none.

    First with the duty wide open and after trips, then as asked only.
    """
    header = bench.header
    names = np.array([criterion.name in AT_LOWEST for criterion in criteria()])
    state = np.where(names & (findings.state < 0), header.lowest, findings.state)
    failed = findings.outcome == Outcome.FAIL
    duty = np.array([state.duty for state in header.states] + [-1])
    asked = np.array([state.duty if state.kind == Kind.DUTY else -1 for state in header.states] + [-1])

    def one(of_state: Ints) -> Ints:
        where = of_state[np.where(failed, state, -1)]
        last = np.where(failed, where, -1).max(axis=1)
        return np.where(failed.any(axis=1) & ((where == last[:, None]) | ~failed).all(axis=1), last, -1)

    return one(duty), one(asked)


def _combinations(case: Case, number: int) -> Iterator[tuple[Change, Case]]:
    """One duty with one installed pump fewer, or without the new pump where the others meet it."""
    duty = case.duties[number]
    alike = classes(case)
    for kind in dict.fromkeys(int(alike[row]) for running in duty.running for row in running):
        running = tuple(_less(combination, kind, alike) for combination in duty.running)
        change = _nothing(ChangeKind.FEWER_INSTALLED, number, 1 + kind)
        yield change, _with(case, number, replace(duty, running=running))
    alone = replace(duty, new=(False,) * len(duty.new))
    if all(duty.running) and _met_alone(case, alone):
        yield _nothing(ChangeKind.WITHOUT_NEW, number, 0), _with(case, number, alone)


def _less(running: tuple[int, ...], kind: int, alike: Ints) -> tuple[int, ...]:
    lost = next((row for row in running if alike[row] == kind), None)
    return tuple(row for row in running if row != lost)


def _with(case: Case, number: int, duty: Duty) -> Case:
    return replace(case, duties=(*case.duties[:number], duty, *case.duties[number + 1 :]))


def _met_alone(case: Case, duty: Duty) -> bool:
    """Whether the installed pumps, less one that the new pump replaces, meet a duty within every limit."""
    only = replace(duty, new=(True,) * len(duty.new), rated=True)
    bench = set_up(replace(case, duties=(only,)))
    duties = bench.header.conditions.kind == Kind.DUTY
    if not (bench.without.total[0, duties] >= 0.999 * duty.flow).all():
        return False
    findings = inherited(bench.without, bench.limits)
    failed = (findings.outcome[0] == Outcome.FAIL) & duties[findings.state[0]]
    return not failed.any()


def _lowest_flows(case: Case, number: int, notes: _Notes, rows: Ints) -> None:
    """Seek the flow from which on a duty lets each candidate pass."""
    duty = case.duties[number]
    most = max(other.flow for other in case.duties if any(other.new))
    if most > duty.flow:
        change = _nothing(ChangeKind.LOWEST_FLOW, number)
        _seek(
            change, lambda flow: _with(case, number, replace(duty, flow=flow)), duty.flow, most, notes, rows
        )


def _bypasses(bench: Bench, number: int, findings: Findings, notes: _Notes, rows: Ints) -> None:
    """Seek the smallest bypass at the pump whose flow is too low, for candidates that fail in one duty.

    Sought up to the flow at which the pump would stand if it gave the header nothing: the larger of its
    minimum flow and the low end of its region. Pumps identical to it that run in the duty get the same.
    """
    header = bench.header
    case, duty = header.case, header.case.duties[number]
    names = [criterion.name for criterion in criteria()]
    low = (findings.outcome == Outcome.FAIL) & (findings.observed < findings.limit)
    shut, region = names.index("minimum-flow"), names.index("region")
    pump = np.where(low[:, shut], findings.pump[:, shut], findings.pump[:, region])
    rows = rows[low[rows, shut] | low[rows, region]]
    for column in np.unique(pump[rows]):
        here = notes.sought(rows[pump[rows] == column])
        if not here.size:
            continue
        kind = -1 if column == 0 else int(header.alike[column - 1])
        of = take(notes.pumps, here) if column == 0 else take(case.pumps, np.array([kind]))
        most = float(np.fmax(_smallest_flow(bench, of), of.region_low * of.bep_flow).max())
        if not most > 0:
            continue
        gets = np.concatenate([[column == 0], (header.alike == kind) & _runs(case, duty)])

        def with_bypass(flow: float, gets: Bools = gets) -> Case:
            before = np.array(duty.bypass or (0.0,) * len(gets))
            bypass = tuple(np.where(gets, np.maximum(before, flow), before).tolist())
            return _with(case, number, replace(duty, bypass=bypass))

        change = _nothing(ChangeKind.BYPASS, number, 1 + kind)
        _seek(change, with_bypass, 0.0, most, notes, here)


def _smallest_flow(bench: Bench, pumps: Pumps) -> Floats:
    header = bench.header
    return smallest_flow(pumps, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise)


def _runs(case: Case, duty: Duty) -> Bools:
    """Whether each installed pump runs in some combination of a duty, (p,)."""
    return np.isin(np.arange(len(case.installed)), [row for running in duty.running for row in running])


def _seek(
    change: Change, case_at: Callable[[float], Case], low: float, high: float, notes: _Notes, rows: Ints
) -> None:
    """Seek, above `low` up to `high`, the smallest value whose case lets each candidate pass, and note it.

    First at `STEPS` places from below, as more need not be better; then by halving before the first that
    passes. Candidates that ask for the same case share it.
    """
    count = len(notes.pumps)
    below, passing = np.full(count, low), np.full(count, np.nan)
    verdict = np.full(count, Verdict.REJECTED, np.int64)

    def attempt(tried: Ints, value: float) -> None:
        found = notes.verdicts(case_at(value), tried)
        good = tried[found != Verdict.REJECTED]
        passing[good], verdict[good] = value, found[found != Verdict.REJECTED]
        below[tried[found == Verdict.REJECTED]] = value

    left = notes.sought(rows)
    for value in low + (high - low) * np.arange(1, STEPS + 1) / STEPS:
        left = left[np.isnan(passing[left])]
        if left.size:
            attempt(left, float(value))
    found = rows[~np.isnan(passing[rows])]
    for _ in range(HALVINGS):
        middle = (below[found] + passing[found]) / 2
        for value in np.unique(middle):
            attempt(found[middle == value], float(value))
    for row in found:
        notes.note(row, replace(change, value=float(passing[row])), int(verdict[row]))


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
    for first, size in sorted({(int(k), int(n)) for k, n in zip(kind[only], needed[only], strict=True)}):
        if size < len(sizes):
            motor = float(sizes[size])
            installed = tuple(
                replace(pump, motor=motor) if alike[row] == first else pump
                for row, pump in enumerate(case.installed)
            )
            rows = np.flatnonzero(only & (kind == first) & (needed == size))
            yield (
                _nothing(ChangeKind.MOTOR, pump=1 + first, value=motor),
                replace(case, installed=installed),
                rows,
            )


def _restored(case: Case) -> Iterator[tuple[Change, Case]]:
    """Worn installed pumps as new: one of each kind alone, then all of them."""
    if case.as_new is None:
        return
    alike = classes(case)
    worn = [row for row, pump in enumerate(case.installed) if pump.head_loss]
    for row in dict.fromkeys(int(alike[row]) for row in worn):
        yield _nothing(ChangeKind.ONE_RESTORED, pump=1 + row), _one_restored(case, case.as_new, row)
    if len(worn) > 1:
        yield _nothing(ChangeKind.RESTORED), restored(case)


def _one_restored(case: Case, as_new: Pumps, row: int) -> Case:
    rows = np.arange(len(case.installed))
    pumps = take(stack([case.pumps, as_new]), np.where(rows == row, rows + len(rows), rows))
    installed = tuple(
        replace(pump, head_loss=0.0) if number == row else pump for number, pump in enumerate(case.installed)
    )
    worn = any(pump.head_loss for pump in installed)
    return replace(case, pumps=pumps, installed=installed, as_new=as_new if worn else None)
