"""The permitted band of header flows, in closed form, against sweeps over the header head and over demand."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest

from screener.header.branch import BranchCurves, branch_curves
from screener.header.left import flow_left
from screener.header.meet import meet
from screener.header.system import SystemCurve
from screener.header.turndown import Band, band
from screener.model.arrays import Floats
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps

HEADERS = 300
STEPS = 2000
COUNTS = (1, 1, 2)  # of each of three pumps


@dataclass(frozen=True)
class Parabolas:
    """One pump in each of n headers: shutoff + rise Q - (fall + loss) Q^2, allowed from least to most."""

    shutoff: Floats
    rise: Floats
    fall: Floats
    end: Floats
    loss: Floats
    least: Floats
    most: Floats

    def at_header(self, flow: Floats) -> Floats:
        return self.shutoff + self.rise * flow - (self.fall + self.loss) * flow**2

    @property
    def peak(self) -> Floats:
        return np.maximum(self.rise / (2 * (self.fall + self.loss)), 0)

    def flow(self, header: Floats) -> Floats:
        bend = self.fall + self.loss
        square = self.rise**2 + 4 * bend * (self.shutoff - header)
        flow = (self.rise + np.sqrt(np.maximum(square, 0))) / (2 * bend)
        return np.where(header > self.at_header(self.peak), 0.0, flow)


def random_pumps(rng: np.random.Generator, number: int) -> Parabolas:
    """Every other one droops."""
    shutoff, end = rng.uniform(48, 56, number), rng.uniform(0.03, 0.12, number)
    peak = np.where(rng.random(number) < 0.5, rng.uniform(0.15, 0.35, number), -0.2) * end
    fall = rng.uniform(0.5, 0.75, number) * shutoff / (end - peak) ** 2
    most = np.where(rng.random(number) < 0.3, np.nan, rng.uniform(0.8, 1.0, number) * end)
    least = rng.uniform(0.0, 0.35, number) * end
    return Parabolas(shutoff, 2 * fall * peak, fall, end, rng.uniform(0.5, 3, number) / end**2, least, most)


@pytest.fixture(scope="module")
def headers() -> list[Parabolas]:
    rng = np.random.default_rng(21)
    return [random_pumps(rng, HEADERS) for _ in COUNTS]


@pytest.fixture(scope="module")
def parts(headers: list[Parabolas], pumps_of: Callable[..., Pumps]) -> list[BranchCurves]:
    result = []
    for p in headers:
        flow = np.linspace(0, 1, 65) * p.end[:, None]
        head = p.shutoff[:, None] + p.rise[:, None] * flow - p.fall[:, None] * flow**2
        places = [Branch(discharge=Loss((loss,), (2.0,))) for loss in p.loss]
        result.append(branch_curves(pumps_of(list(zip(flow, head, strict=True))).curves, places))
    return result


@pytest.fixture(scope="module")
def found(headers: list[Parabolas], parts: list[BranchCurves]) -> Band:
    return band(
        list(zip(parts, COUNTS, strict=True)),
        minimum=[p.least for p in headers],
        maximum=[p.most for p in headers],
    )


def last_good(
    header: Floats, good: list[Floats], total: Floats
) -> tuple[Floats, Floats, Floats, Floats, Floats]:
    """Along the first axis, from good to bad: last good and first bad head, total flows, and who is bad."""
    all_good = np.logical_and.reduce(good)
    bad = np.argmin(all_good, axis=0)
    assert np.all(bad > 0)
    assert not np.any(all_good[-1])
    columns = np.arange(header.shape[1])
    blame = np.array([~g[bad, columns] for g in good])
    return header[bad - 1, columns], header[bad, columns], total[bad - 1, columns], total[bad, columns], blame


def test_lowest_and_highest_flow_against_a_sweep_of_the_header_head(
    headers: list[Parabolas], found: Band
) -> None:
    bottom = np.max([p.at_header(p.end) for p in headers], axis=0)
    top = np.max([p.at_header(p.peak) for p in headers], axis=0)
    header = bottom + (top - bottom) * np.linspace(0, 1, STEPS)[:, None]
    flows = [p.flow(header) for p in headers]
    total = np.sum([n * q for n, q in zip(COUNTS, flows, strict=True)], axis=0)
    known = found.lowest_head > bottom * (1 + 1e-6)
    assert known.sum() > 0.9 * HEADERS
    good = [q >= np.maximum(p.least, p.peak) * (1 - 1e-9) for p, q in zip(headers, flows, strict=True)]
    good = [(g | (header < bottom + 1e-9))[:, known] for g in good]
    safe_head, bad_head, safe_flow, bad_flow, blame = last_good(header[:, known], good, total[:, known])
    slack = 1e-4  # of the head: the cubic flattens the very peak
    assert np.all(found.lowest_head[known] >= safe_head * (1 - slack))
    assert np.all(found.lowest_head[known] <= bad_head * (1 + slack))
    assert np.all(found.lowest[known] <= safe_flow * (1 + 1e-3))
    assert np.all(found.lowest[known] >= bad_flow * (1 - 1e-3))
    clear = (blame.sum(axis=0) == 1) & ((bad_head - safe_head) > 0)
    assert clear.sum() > 0.8 * HEADERS
    assert np.array_equal(found.lowest_by[known][clear], blame[:, clear].argmax(axis=0))

    # the other way round for the largest flow: from the top down
    limits = [np.fmin(p.most, p.end) for p in headers]
    good = [(q <= m)[::-1] for q, m in zip(flows, limits, strict=True)]
    low = np.max([p.at_header(m) for p, m in zip(headers, limits, strict=True)], axis=0)
    inside = low > bottom * (1 + 1e-6)  # else the end of a curve sets the limit, at the first station
    assert 0.3 * HEADERS < inside.sum() < HEADERS
    safe_head, bad_head, safe_flow, bad_flow, _ = last_good(
        header[::-1][:, inside], [g[:, inside] for g in good], total[::-1][:, inside]
    )
    assert np.all(found.highest_head[inside] <= safe_head * (1 + 1e-9))
    assert np.all(found.highest_head[inside] >= bad_head * (1 - 1e-9))
    assert np.all(found.highest[inside] >= safe_flow * (1 - 1e-9))
    assert np.all(found.highest[inside] <= bad_flow * (1 + 1e-9))
    assert found.highest_head[~inside] == pytest.approx(bottom[~inside], rel=1e-9)
    assert found.highest[~inside] == pytest.approx(total[0][~inside], rel=1e-6)


def one(branches: BranchCurves, row: int) -> BranchCurves:
    return BranchCurves(*(getattr(branches, name)[row : row + 1] for name in BranchCurves.__slots__))


def test_lowest_flow_against_a_sweep_of_demand(
    headers: list[Parabolas], parts: list[BranchCurves], found: Band, system_of: Callable[..., SystemCurve]
) -> None:
    """Throttled, every pump keeps its minimum just above the limit and one of them misses it just below."""
    curve = system_of(-100.0, [(1.0, 2.0)])  # users always have to throttle
    limits = np.array([np.maximum(p.least, p.peak) for p in headers])
    by_peak = np.array([p.peak > p.least for p in headers])[found.lowest_by, np.arange(HEADERS)]
    for row in (*np.flatnonzero(by_peak)[:4], *np.flatnonzero(~by_peak)[:4]):
        installed = BranchCurves(
            *(
                np.concatenate([getattr(one(part, row), name) for part in parts[:2]])
                for name in BranchCurves.__slots__
            )
        )
        for share in (0.9, 0.999, 1.001, 1.1):
            left = flow_left(
                installed,
                running=[0, 1],
                curve=curve,
                asked=share * found.lowest[row],
                throttled=True,
                count=COUNTS[2],
            )
            met = meet(one(parts[2], row), left, installed)
            flows = np.array([*met.installed[0], met.flow[0]])
            assert np.all(flows >= limits[:, row]) == (share > 1), (row, share, flows)


def test_by_hand(pumps_of: Callable[..., Pumps]) -> None:
    """Drooping 44 - 400 (Q - 0.1)^2, minimum 0.06, beside 50 - 1000 Q^2, minimum 0.05, maximum 0.09 m3/s."""
    flow = np.linspace(0, 1, 65)
    wide, narrow = 0.2 * flow, 0.1 * flow
    pumps = pumps_of([(wide, 44 - 400 * (wide - 0.1) ** 2), (narrow, 50 - 1000 * narrow**2)])
    rows = branch_curves(pumps.curves, [Branch()])
    found = band(
        [(one(rows, 0), 1), (one(rows, 1), 2)],
        minimum=[np.array([0.06]), np.array([0.05])],
        maximum=[np.array([np.nan]), np.array([0.09])],
    )
    assert found.lowest_head == pytest.approx([44.0], rel=1e-5)  # its peak, not its head at 0.06
    assert found.lowest_by == 0
    assert found.lowest == pytest.approx([0.1 + 2 * np.sqrt(6 / 1000)], rel=1e-4)
    assert found.highest_head == pytest.approx([41.9])
    assert found.highest_by == 1
    assert found.highest == pytest.approx([0.1 + np.sqrt(2.1 / 400) + 2 * 0.09])


def test_no_lowest_flow_where_another_pump_is_past_its_data_there(pumps_of: Callable[..., Pumps]) -> None:
    """50 - 1000 Q^2 ends at 40 m; the other comes to its minimum at 34 m only."""
    flow = 0.1 * np.linspace(0, 1, 65)
    rows = branch_curves(
        pumps_of([(flow, 50 - 1000 * flow**2), (flow, 35 - 1000 * flow**2)]).curves, [Branch()]
    )
    found = band(
        [(one(rows, 0), 1), (one(rows, 1), 1)],
        minimum=[np.array([0.0]), np.array([np.sqrt(1 / 1000)])],
        maximum=[np.array([np.nan])] * 2,
    )
    assert found.lowest_head == pytest.approx([34.0])
    assert not np.isfinite(found.lowest[0])
