"""Headers whose every row is another network, against `meet`, which settles them one by one."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import fields, replace
from math import inf, nan

import numpy as np
import pytest

from screener.header import balance as module
from screener.header.balance import balance
from screener.header.branch import BranchCurves, branch_curves, take
from screener.header.held import Varying, hold
from screener.header.left import flow_left, without_new
from screener.header.meet import Mark, Meeting, meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import take as take_pumps
from screener.model.arrays import Floats
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps

ROWS = 8
BRANCH = Branch(suction=Loss((20.0,), (2.0,)), discharge=Loss((60.0,), (2.0,)), suction_head=0.5)


@pytest.fixture(scope="module")
def rows_of(pumps_of: Callable[..., Pumps]) -> Callable[..., BranchCurves]:
    """A pump H = shutoff + rise Q - fall Q2 from `start` to `end`, its head times each of the factors."""

    def make(shutoff: float, fall: float, end: float, factors: Floats, *, rise=0.0, start=0.0):
        flow = np.linspace(start, end, 33)
        pumps = take_pumps(
            pumps_of([(flow, shutoff + rise * flow - fall * flow**2)]), np.zeros(len(factors), int)
        )
        return branch_curves(
            replace(pumps.curves, head=pumps.curves.head * np.reshape(factors, (-1, 1))), [BRANCH]
        )

    return make


def in_row(pumps: Sequence[BranchCurves], row: int) -> BranchCurves:
    """The pumps of one row, one behind the other."""
    some = [take(pump, np.array([row if len(pump) > 1 else 0])) for pump in pumps]
    return BranchCurves(
        **{f.name: np.concatenate([getattr(pump, f.name) for pump in some]) for f in fields(BranchCurves)}
    )


def one_by_one(pumps: Sequence[BranchCurves], curves: Sequence[SystemCurve], count: int, asked: float):
    """`meet` for each row: header head (c,), flows (c, k) with the marks of a run, and how each row ended."""
    header, flow, marks = np.full(len(curves), nan), np.full((len(curves), len(pumps)), nan), []
    for row, curve in enumerate(curves):
        installed = in_row(pumps[1:], row)
        left = flow_left(
            installed,
            running=range(len(installed)),
            curve=curve,
            asked=min(asked, 1.0),
            throttled=asked < inf,
            count=count,
        )
        met: Meeting = meet(in_row(pumps[:1], row), left, installed)
        header[row], flow[row] = met.header[0], np.append(met.flow, met.installed[0])
        mark, culprit = Mark(int(met.mark[0])), 1 + int(met.culprit[0])
        sign = {Mark.NEW_PAST_END: inf, Mark.INSTALLED_PAST_END: inf}.get(mark, -inf)
        if mark in (Mark.NEW_PAST_END, Mark.NEW_NOT_MEASURED):
            flow[row, 0] = sign
        elif mark in (Mark.INSTALLED_PAST_END, Mark.INSTALLED_NOT_MEASURED):
            flow[row, culprit] = sign
        marks.append(mark)
    return header, flow, marks


def random_header(rng: np.random.Generator, rows_of, system_of):
    """Installed pumps and a new one of every kind, on terms or on a table, throttled or open."""
    factors = rng.uniform(0.9, 1.1, (4, ROWS))
    pumps = []
    for number in range(2 + int(rng.integers(3))):
        shutoff, end = rng.uniform(35, 60), rng.uniform(0.1, 0.2)
        fall = rng.uniform(0.2, 0.75) * shutoff / end**2
        rise = rng.choice([0.0, 0.0, 0.6]) * fall * end
        start = rng.choice([0.0, 0.0, 0.0, 0.2]) * end
        each = factors[number] if rng.random() < 0.8 else np.ones(1)
        pumps.append(rows_of(shutoff, fall, end, each, rise=rise, start=start))
    if len(pumps[0]) == 1:
        pumps[0] = take(pumps[0], np.zeros(ROWS, int))
    static, friction = rng.uniform(5, 40), rng.uniform(10, 300)
    system = rng.uniform(0.8, 1.25, ROWS)
    flow = np.linspace(0, rng.uniform(0.25, 0.7), 9)

    def curve(factor: float) -> SystemCurve:
        if by_table:
            return system_of(static, table=(flow, factor * friction * flow**1.8))
        return system_of(static, [(factor * friction, 2.0), (factor * 3.0, 1.0)])

    open_ = rng.random() < 0.4
    by_table = rng.random() < 0.3
    top = flow[-1] if by_table else 0.5
    asked = inf if open_ else float(rng.uniform(0.02, 0.9 * min(top, 0.15 * len(pumps))))
    return pumps, curve, system, int(rng.integers(1, 3)), asked


def solve(pumps, curve, system, count: int, asked: float, start: Floats | None = None):
    number = [count] + [1] * (len(pumps) - 1)
    if start is None:
        start = np.full((len(system), len(pumps)), nan)
    return balance(pumps, number=number, curve=curve(1.0), friction=system, demand=asked, start=start)


def agree(pumps, found: tuple[Floats, Floats], header: Floats, flow: Floats) -> None:
    ends = np.array([np.broadcast_to(pump.end, len(header)) for pump in pumps]).T
    finite = np.isfinite(flow)
    assert np.array_equal(found[1][~finite], flow[~finite], equal_nan=True)
    assert found[1][finite] / ends[finite] == pytest.approx(flow[finite] / ends[finite], abs=1e-9, rel=0)
    assert np.array_equal(found[1] == 0, flow == 0)
    assert found[0] == pytest.approx(header, rel=1e-9, nan_ok=True)


def test_random_headers_as_met_one_by_one(rows_of, system_of, monkeypatch) -> None:
    """Held shut, past its end, not measured, drooping, on a table: whatever `meet` finds, by either way."""
    seen: Counter[Mark] = Counter()
    shut = 0
    for seed in range(30):
        pumps, curve, system, count, asked = random_header(np.random.default_rng(seed), rows_of, system_of)
        header, flow, marks = one_by_one(pumps, [curve(factor) for factor in system], count, asked)
        found = solve(pumps, curve, system, count, asked)
        agree(pumps, found, header, flow)
        agree(pumps, solve(pumps, curve, system, count, asked, found[1]), header, flow)
        with monkeypatch.context() as patch:
            patch.setattr(module, "_STEPS", 0)
            agree(pumps, solve(pumps, curve, system, count, asked), header, flow)
        seen.update(marks)
        shut += int((flow[:, 1:] == 0).sum())
    assert min(seen[mark] for mark in Mark) > 3
    assert shut > 20


@pytest.mark.parametrize("seed", [7, 28, 59])
def test_two_drooping_pumps_hold_each_other_shut(rows_of, system_of, seed: int) -> None:
    """Neither has a flow on its falling side, alone or beside the other: nothing flows."""
    rng = np.random.default_rng(seed)
    factors, pumps = rng.uniform(0.97, 1.03, (2, ROWS)), []
    for number in range(2):
        shutoff, end = rng.uniform(40, 50), rng.uniform(0.1, 0.2)
        fall = rng.uniform(0.4, 0.7) * shutoff / end**2
        pumps.append(rows_of(shutoff, fall, end, factors[number], rise=0.7 * fall * end))
    static, friction = rng.uniform(5, 30), rng.uniform(10, 300)
    system, asked = rng.uniform(0.8, 1.2, ROWS), float(rng.uniform(0.02, 0.2))

    def curve(factor: float) -> SystemCurve:
        return system_of(static, [(factor * friction, 2.0)])

    header, flow, _ = one_by_one(pumps, [curve(factor) for factor in system], 1, asked)
    assert ((flow == 0).all(axis=1) & (header < pumps[0].low_head) & (header < pumps[1].low_head)).any()
    agree(pumps, solve(pumps, curve, system, 1, asked), header, flow)


def test_each_row_as_by_hand(rows_of, system_of) -> None:
    """Users hold 0.1 m3/s: x + y = 0.1 and f (50 - 1000 x2) = 50 - 1000 y2. [D]"""
    factors = np.array([1.0, 1.03, 0.95])
    pumps = [plain(rows_of, factors), plain(rows_of, np.ones(1))]
    header, flow = solve(pumps, lambda factor: system_of(20.0, [(factor * 500, 2.0)]), np.ones(3), 1, 0.1)
    for row, factor in enumerate(factors):
        roots = np.roots([1000 * (1 - factor), -200, 10 - 50 + 50 * factor])
        x = roots[(roots > 0) & (roots < 0.1)][0]
        assert flow[row] == pytest.approx([x, 0.1 - x], rel=1e-9)
        assert header[row] == pytest.approx(factor * (50 - 1000 * x**2), rel=1e-9)


def plain(rows_of, factors: Floats) -> BranchCurves:
    """H = 50 - 1000 Q2 up to 0.16 m3/s, without branch losses."""
    curves = rows_of(50.0, 1000.0, 0.16, factors)
    head = factors[:, None] * (50 - 1000 * (np.linspace(0, 1, 65) * curves.span[:, None]) ** 2)
    return replace(
        curves,
        head=head,
        slope=np.gradient(head, axis=1, edge_order=2),
        low_head=head[:, 0],
        end_head=head[:, -1],
        shutoff=head[:, 0],
    )


def test_the_friction_of_a_row_moves_it_along_its_own_system_curve(rows_of, system_of) -> None:
    """One pump H = 50 - 1000 Q2 on 20 + f 2000 Q2, wide open: Q2 = 30 / (1000 + f 2000). [D]"""
    friction = np.array([0.8, 1.0, 1.2])
    found = balance(
        [plain(rows_of, np.ones(1))],
        number=[1],
        curve=system_of(20.0, [(2000.0, 2.0)]),
        friction=friction,
        demand=inf,
        start=np.full((3, 1), nan),
    )
    assert found[1][:, 0] == pytest.approx(np.sqrt(30 / (1000 + 2000 * friction)), rel=1e-9)


def test_an_ordinary_header_needs_no_search(rows_of, system_of, monkeypatch) -> None:
    monkeypatch.setattr(module, "_searched", None)
    factors = np.linspace(0.97, 1.03, 5)
    pumps = [plain(rows_of, factors), plain(rows_of, factors[::-1]), plain(rows_of, np.ones(1))]
    start = np.full((5, 3), 0.07)
    for asked in (0.2, inf):
        header, _ = solve(
            pumps, lambda factor: system_of(20.0, [(factor * 500, 2.0)]), factors, 1, asked, start
        )
        assert np.isfinite(header).all()


def test_while_the_new_pump_stands_still(rows_of, system_of) -> None:
    for seed in range(30, 36):
        pumps, curve, system, count, asked = random_header(np.random.default_rng(seed), rows_of, system_of)
        number = [0] + [1] * (len(pumps) - 1)
        start = np.full((ROWS, len(pumps)), nan)
        header, flow = balance(
            pumps, number=number, curve=curve(1.0), friction=system, demand=asked, start=start
        )
        assert np.isnan(flow[:, 0]).all()
        for row, factor in enumerate(system):
            installed = in_row(pumps[1:], row)
            left = flow_left(
                installed,
                running=range(len(installed)),
                curve=curve(factor),
                asked=min(asked, 1.0),
                throttled=asked < inf,
                count=count,
            )
            head, alone = without_new(left, len(installed))
            assert header[row] == pytest.approx(head, rel=1e-9, nan_ok=True)
            assert flow[row, 1:] == pytest.approx(alone, rel=1e-8, abs=1e-9, nan_ok=True)


def test_nothing_runs(rows_of, system_of) -> None:
    header, flow = balance(
        [plain(rows_of, np.ones(2))],
        number=[0],
        curve=system_of(20.0, [(500.0, 2.0)]),
        friction=np.ones(2),
        demand=0.1,
        start=np.full((2, 1), nan),
    )
    assert header.tolist() == [20.0, 20.0]
    assert np.isnan(flow).all()


@pytest.fixture(scope="module")
def kinds(pumps_of: Callable[..., Pumps]) -> Callable[..., list[Varying]]:
    """Two kinds of pumps that vary their speed from 0.6 of that at load on; one of them ends early."""

    def make(factors: Floats) -> list[Varying]:
        found = []
        for shutoff, end, number in ((50.0, 0.16, 1), (46.0, 0.11, 2)):
            flow = np.linspace(0, end, 33)
            pumps = take_pumps(pumps_of([(flow, shutoff - 1000 * flow**2)]), np.zeros(len(factors), int))
            curves = replace(pumps.curves, head=pumps.curves.head * factors[:, None])
            limits = np.full(1, 0.6), np.ones(1)
            found.append(Varying(replace(pumps, curves=curves), BRANCH, *limits, number, 0.0, 0.0))
        return found

    return make


def test_speeds_as_held_one_by_one(kinds) -> None:
    """Enough, too little, too much, and past the end of a curve."""
    factors = np.array([1.0, 0.97, 1.03, 1.0, 1.0, 1.02])
    head = np.array([30.0, 31.0, 29.0, 45.0, 10.0, 16.0])
    wanted = np.array([0.2, 0.15, 0.25, 0.3, 0.05, 0.3])
    every = hold(kinds(factors), head=head, wanted=wanted)
    assert every.short.any()
    assert every.over.any()
    assert np.isinf(every.flow).any()
    for row in range(len(factors)):
        one = hold(kinds(factors[row : row + 1]), head=float(head[row]), wanted=wanted[row : row + 1])
        assert every.ratio[row] == pytest.approx(one.ratio[0], rel=1e-9)
        assert every.flow[row] == pytest.approx(one.flow[0], rel=1e-8)
        assert (every.short[row], every.over[row]) == (one.short[0], one.over[0])
