"""The header against a brute-force solution of the whole network, and laws that any header obeys.

The brute force knows formulas (parabolas, drooping ones among them) and solves for the one header head at
which supply is demand; the code under test gets 65 points of each curve.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields, replace
from math import inf, sqrt

import numpy as np
import pytest
from scipy.optimize import brentq

from screener.header.branch import BranchCurves, branch_curves
from screener.header.left import Left, flow_left
from screener.header.meet import Mark, Meeting, meet
from screener.header.system import SystemCurve
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps

NETWORKS = 32
CANDIDATES = 12
HAS_FIGURES = (Mark.RUNS, Mark.SHUT)


@dataclass(frozen=True)
class Parabola:
    """A pump H = shutoff + rise Q - fall Q^2 from `start` to `end`, behind a branch lift - loss Q^2."""

    shutoff: float
    rise: float
    fall: float
    end: float
    start: float = 0.0
    lift: float = 0.0
    loss: float = 0.0

    def at_header(self, flow: float) -> float:
        return self.lift + self.shutoff + self.rise * flow - (self.fall + self.loss) * flow**2

    @property
    def peak(self) -> float:
        return max(self.rise / (2 * (self.fall + self.loss)), self.start)

    def flow(self, header: float) -> float:
        """On the falling side; 0 from the peak's head on."""
        if header >= self.at_header(self.peak):
            return 0.0
        bend = self.fall + self.loss
        square = self.rise**2 + 4 * bend * (self.lift + self.shutoff - header)
        return (self.rise + sqrt(max(square, 0.0))) / (2 * bend)


@dataclass(frozen=True)
class Network:
    """Installed pumps, static + friction Q^2, and users who take at most `demand`."""

    installed: tuple[Parabola, ...]
    static: float
    friction: float
    demand: float = inf
    count: int = 1
    taken: float = 0.0

    def users(self, header: float) -> float:
        return min(self.demand, sqrt(max(header - self.static, 0.0) / self.friction))


@dataclass
class Answer:
    mark: Mark
    header: float = np.nan
    new: float = np.nan
    installed: dict[int, float] | None = None
    culprit: int = -1


class OnTheEdge(Exception):
    """So near a jump or an end of data that rounding may decide."""


def brute_force(net: Network, new: Parabola | None) -> Answer:
    """Walk up the header head until supply falls below demand; `new` is known as pump -1."""
    running = dict(enumerate(net.installed)) | ({-1: new} if new else {})
    return _walk(net, {number: pump for number, pump in running.items() if pump})


def _walk(net: Network, running: dict[int, Parabola]) -> Answer:
    times = {number: net.count if number == -1 else 1 for number in running}
    tops = {number: pump.at_header(pump.peak) for number, pump in running.items()}
    size = sum(pump.end for pump in running.values()) + 1e-9

    def surplus(header: float, just_below: bool = False) -> float:
        total = net.taken - net.users(header)
        for number, pump in running.items():
            at_top = just_below and header == tops[number]
            total += times[number] * (pump.peak if at_top else pump.flow(header))
        return total

    def decided(value: float) -> bool:
        if 0 < abs(value) < 4e-3 * size:
            raise OnTheEdge
        return value > 0

    ends = {number: pump.at_header(pump.end) for number, pump in running.items()}
    bottom = max(ends.values(), default=net.static)
    unknown = [number for number, pump in running.items() if pump.start > 0]
    if any(tops[number] < bottom for number in unknown):
        if len(unknown) > 1 or -1 in unknown or bottom == ends.get(-1):
            raise OnTheEdge
        return Answer(Mark.INSTALLED_NOT_MEASURED, culprit=unknown[0])
    if running and not decided(surplus(bottom)):
        past = max(ends, key=lambda number: ends[number])
        return Answer(Mark.NEW_PAST_END if past == -1 else Mark.INSTALLED_PAST_END, culprit=past)
    special = {*tops.values(), net.static, max(net.static, bottom) + net.friction * (5 * size) ** 2 + 500}
    low = bottom
    for high in sorted(head for head in special if head > bottom):
        below = surplus(high, just_below=True)
        if below < 0:
            header = brentq(surplus, low, np.nextafter(high, -inf), xtol=1e-13, rtol=1e-14)
            flows = {number: pump.flow(header) for number, pump in running.items()}
            new = flows.pop(-1, 0.0)
            return Answer(Mark.RUNS if new > 0 else Mark.SHUT, header, new, flows)
        there = [number for number, top in tops.items() if top == high and running[number].peak > 0]
        if there and decided(below):
            if there[0] in unknown:
                not_measured = Mark.NEW_NOT_MEASURED if there[0] == -1 else Mark.INSTALLED_NOT_MEASURED
                return Answer(not_measured, culprit=there[0])
            if not decided(surplus(high)):
                answer = _walk(net, {n: other for n, other in running.items() if n != there[0]})
                if there[0] >= 0 and answer.installed is not None:
                    answer.installed[there[0]] = 0.0
                return answer
        low = high
    raise AssertionError("no header head found")


class Solver:
    """The code under test, fed with points."""

    def __init__(self, pumps_of: Callable[..., Pumps], system_of: Callable[..., SystemCurve]) -> None:
        self.pumps_of, self.system_of = pumps_of, system_of

    def branches(self, pumps: Sequence[Parabola]) -> BranchCurves:
        points = []
        for p in pumps:
            flow = np.linspace(p.start, p.end, 65)
            points.append((flow, p.shutoff + p.rise * flow - p.fall * flow**2))
        places = [Branch(discharge=Loss((p.loss,), (2.0,)), suction_head=p.lift) for p in pumps]
        return branch_curves(self.pumps_of(points).curves, places)

    def left(self, net: Network) -> tuple[BranchCurves, Left]:
        installed = self.branches(net.installed)
        left = flow_left(
            installed,
            running=range(len(net.installed)),
            curve=self.system_of(net.static, [(net.friction, 2.0)]),
            asked=net.demand if np.isfinite(net.demand) else 1.0,
            throttled=bool(np.isfinite(net.demand)),
            count=net.count,
            taken=net.taken,
        )
        return installed, left

    def __call__(self, net: Network, new: Sequence[Parabola]) -> Meeting:
        installed, left = self.left(net)
        return meet(self.branches(new), left, installed)


@pytest.fixture(scope="session")
def solve(pumps_of: Callable[..., Pumps], system_of: Callable[..., SystemCurve]) -> Solver:
    return Solver(pumps_of, system_of)


def random_pump(rng: np.random.Generator, *, droops: float, unmeasured: float = 0.0) -> Parabola:
    shutoff, end = rng.uniform(40, 62), rng.uniform(0.03, 0.12)
    peak = rng.uniform(0.15, 0.4) * end if rng.random() < droops else -rng.uniform(0, 0.5) * end
    fall = rng.uniform(0.25, 0.7) * shutoff / (end - peak) ** 2
    return Parabola(
        shutoff=shutoff,
        rise=2 * fall * peak,
        fall=fall,
        end=end,
        start=rng.uniform(0.05, 0.5) * end if rng.random() < unmeasured else 0.0,
        lift=rng.uniform(-2, 2),
        loss=rng.uniform(0.3, 4) / end**2,
    )


def random_network(rng: np.random.Generator, *, droops: float, unmeasured: float = 0.0) -> Network:
    installed = tuple(
        random_pump(rng, droops=droops, unmeasured=unmeasured) for _ in range(rng.integers(1, 5))
    )
    size = sum(pump.end for pump in installed) + 0.07
    static = rng.uniform(5, 45)
    demand = rng.uniform(0.05, 1.0) * size if rng.random() < 0.6 else inf
    return Network(
        installed=installed,
        static=static,
        friction=(55 - static) / (rng.uniform(0.4, 1.7) * size) ** 2,
        demand=demand,
        count=int(rng.integers(1, 3)),
        taken=rng.uniform(0, 0.3) * min(demand, size) if rng.random() < 0.3 else 0.0,
    )


def check_sound(met: Meeting, net: Network, new: Sequence[Parabola]) -> None:
    """Figures in all arrays or in none; none on a left branch, none past the end of a curve."""
    known = np.isin(met.mark, HAS_FIGURES)
    assert np.array_equal(np.isfinite(met.header), known)
    assert np.array_equal(np.isfinite(met.flow), known)
    assert np.all(np.isfinite(met.installed) == known[:, None])
    assert np.array_equal(met.flow > 0, met.mark == Mark.RUNS)
    columns = [(met.flow[row : row + 1], pump) for row, pump in enumerate(new)]
    columns += [(met.installed[:, row], pump) for row, pump in enumerate(net.installed)]
    for flows, pump in columns:
        flows = flows[np.isfinite(flows) & (flows != 0)]
        assert np.all(flows <= pump.end)
        assert np.all(flows >= pump.peak * (1 - 1e-9))


@pytest.mark.parametrize(
    ("seed", "droops", "unmeasured", "of_head", "of_flow", "least"),
    [
        pytest.param(1, 0.0, 0.0, 1e-10, 1e-8, 10, id="falling"),
        pytest.param(2, 0.5, 0.0, 1e-4, 1e-3, 10, id="drooping"),  # the cubic flattens the very peak
        pytest.param(3, 0.3, 0.3, 1e-4, 1e-3, 5, id="shutoff not measured"),
    ],
)
def test_against_brute_force(
    solve: Solver, seed: int, droops: float, unmeasured: float, of_head: float, of_flow: float, least: int
) -> None:
    rng = np.random.default_rng(seed)
    marks: Counter[Mark] = Counter()
    for _ in range(NETWORKS):
        net = random_network(rng, droops=droops, unmeasured=unmeasured)
        new = [random_pump(rng, droops=droops, unmeasured=unmeasured) for _ in range(CANDIDATES)]
        met = solve(net, new)
        check_sound(met, net, new)
        for row, pump in enumerate(new):
            try:
                expected = brute_force(net, pump)
            except OnTheEdge:
                continue
            context = (net, pump, expected, met.header[row])
            assert met.mark[row] == expected.mark, context
            if expected.mark in (Mark.INSTALLED_PAST_END, Mark.INSTALLED_NOT_MEASURED):
                assert met.culprit[row] == expected.culprit, context
            marks[expected.mark] += 1
            if expected.installed is not None:
                flows = [expected.installed[i] for i in range(len(net.installed))]
                assert met.header[row] == pytest.approx(expected.header, rel=of_head), context
                assert met.flow[row] == pytest.approx(expected.new, abs=of_flow * pump.end), context
                smallest = min(p.end for p in net.installed)
                assert met.installed[row] == pytest.approx(flows, abs=of_flow * smallest), context
    seen = set(Mark) - {Mark.SYSTEM_NOT_KNOWN}
    if not unmeasured:
        seen -= {Mark.NEW_NOT_MEASURED, Mark.INSTALLED_NOT_MEASURED}
    assert marks.total() > 0.9 * NETWORKS * CANDIDATES
    assert all(marks[mark] >= least for mark in seen), marks


def three_networks(seed: int) -> list[tuple[Network, list[Parabola]]]:
    """One wide open, one throttled and one with two new pumps, of drooping and falling curves."""
    rng = np.random.default_rng(seed)
    pairs = []
    for demand, count in ((inf, 1), (0.1, 1), (0.12, 2)):
        net = Network(
            installed=tuple(random_pump(rng, droops=0.3) for _ in range(4)),
            static=30.0,
            friction=500.0,
            demand=demand,
            count=count,
        )
        pairs.append((net, [random_pump(rng, droops=0.3) for _ in range(40)]))
    return pairs


def assert_same(one: Meeting, other: Meeting, rel: float = 1e-9) -> None:
    assert np.array_equal(one.mark, other.mark)
    assert one.header == pytest.approx(other.header, rel=rel, nan_ok=True)
    assert one.flow == pytest.approx(other.flow, rel=rel, abs=1e-12, nan_ok=True)
    assert one.installed == pytest.approx(other.installed, rel=rel, abs=1e-12, nan_ok=True)


def test_order_of_the_installed_pumps_does_not_matter(solve: Solver) -> None:
    for net, new in three_networks(11):
        order = np.array([2, 0, 3, 1])
        turned = solve(replace(net, installed=tuple(net.installed[i] for i in order)), new)
        met = solve(net, new)
        assert (met.mark == Mark.RUNS).sum() > 10
        assert_same(replace(met, installed=met.installed[:, order]), turned)
        past = met.culprit >= 0
        assert np.array_equal(met.culprit[past], order[turned.culprit[past]])


def test_pumps_that_do_not_run_do_not_matter(solve: Solver) -> None:
    net, new = three_networks(12)[0]
    installed = solve.branches(net.installed)
    left = flow_left(
        installed,
        running=[3, 1],
        curve=solve.system_of(net.static, [(net.friction, 2.0)]),
        asked=1.0,
        throttled=False,
        count=1,
    )
    met = meet(solve.branches(new), left, installed)
    alone = solve(replace(net, installed=(net.installed[3], net.installed[1])), new)
    assert np.isnan(met.installed[:, [0, 2]]).all()
    assert_same(replace(met, installed=met.installed[:, [3, 1]]), alone)


def test_doubling_every_flow_scale_doubles_every_flow(solve: Solver) -> None:
    def wide(pump: Parabola) -> Parabola:
        return replace(pump, rise=pump.rise / 2, fall=pump.fall / 4, end=2 * pump.end, loss=pump.loss / 4)

    for net, new in three_networks(13):
        double = Network(
            installed=tuple(map(wide, net.installed)),
            static=net.static,
            friction=net.friction / 4,
            demand=2 * net.demand,
            count=net.count,
        )
        met, twice = solve(net, new), solve(double, [wide(pump) for pump in new])
        assert_same(replace(met, flow=2 * met.flow, installed=2 * met.installed), twice)


def test_multiplying_every_head_multiplies_the_header_head(solve: Solver) -> None:
    def tall(pump: Parabola) -> Parabola:
        grown = {name: 1.7 * getattr(pump, name) for name in ("shutoff", "rise", "fall", "lift", "loss")}
        return replace(pump, **grown)

    for net, new in three_networks(14):
        higher = replace(
            net,
            installed=tuple(map(tall, net.installed)),
            static=1.7 * net.static,
            friction=1.7 * net.friction,
        )
        met, raised = solve(net, new), solve(higher, [tall(pump) for pump in new])
        assert_same(replace(met, header=1.7 * met.header), raised)


def test_one_candidate_alone_is_as_among_many(solve: Solver) -> None:
    for net, new in three_networks(15):
        installed, left = solve.left(net)
        many = meet(solve.branches(new), left, installed)
        for row, pump in enumerate(new):
            alone = meet(solve.branches([pump]), left, installed)
            assert alone.culprit[0] == many.culprit[row]
            assert_same(
                alone, Meeting(*(getattr(many, f.name)[row : row + 1] for f in fields(Meeting))), 1e-12
            )


def test_two_new_pumps_share_what_is_left(solve: Solver) -> None:
    def as_one(pump: Parabola) -> Parabola:
        """One pump that gives what two of these give together."""
        return replace(pump, rise=pump.rise / 2, fall=pump.fall / 4, end=2 * pump.end, loss=pump.loss / 4)

    net, new = three_networks(16)[2]
    two = solve(net, new)
    one = solve(replace(net, count=1), [as_one(pump) for pump in new])
    assert (two.mark == Mark.RUNS).sum() > 10
    assert_same(replace(two, flow=2 * two.flow), one)


def test_flow_supplied_by_something_else_comes_off_a_held_demand(solve: Solver) -> None:
    net, new = three_networks(17)[1]
    given = solve(replace(net, taken=0.02, friction=1.0), new)
    less = solve(replace(net, demand=net.demand - 0.02, friction=1.0), new)
    assert (given.mark == Mark.RUNS).sum() > 10
    assert_same(given, less)


INSTALLED = Parabola(50.0, 0.0, 2000.0, 0.1)


@pytest.mark.parametrize(
    ("net", "new", "mark", "culprit"),
    [
        # at 30 m, its end, the installed pump gives 0.1 and the new one 0, the users take 0.45 m3/s
        (Network((INSTALLED,), 10.0, 100.0), Parabola(25.0, 0.0, 1000.0, 0.1), Mark.INSTALLED_PAST_END, 0),
        # at 40 m, the end of the new pump, both give 0.17 and the users take 0.194 m3/s
        (Network((INSTALLED,), 10.0, 800.0), Parabola(60.0, 0.0, 2000.0, 0.1), Mark.NEW_PAST_END, None),
        # the same where a longer curve of the new pump would have the installed one past its end as well
        (Network((INSTALLED,), 10.0, 100.0), Parabola(60.0, 0.0, 2000.0, 0.1), Mark.NEW_PAST_END, None),
        # both measured from 0.03 m3/s on, and 0.02 m3/s are wanted of the stronger one
        (
            Network((INSTALLED,), 10.0, 100.0, demand=0.02),
            Parabola(60.0, 0.0, 2000.0, 0.1, start=0.03),
            Mark.NEW_NOT_MEASURED,
            None,
        ),
        (
            Network((replace(INSTALLED, start=0.03),), 10.0, 100.0, demand=0.02),
            Parabola(40.0, 0.0, 2000.0, 0.1),
            Mark.INSTALLED_NOT_MEASURED,
            0,
        ),
    ],
)
def test_past_the_data_there_are_no_figures(
    solve: Solver, net: Network, new: Parabola, mark: Mark, culprit: int | None
) -> None:
    met = solve(net, [new])
    assert met.mark[0] == mark
    assert culprit in (None, met.culprit[0])
    check_sound(met, net, [new])


def test_past_the_last_point_of_the_system(solve: Solver, system_of: Callable[..., SystemCurve]) -> None:
    # measured to 0.12 m3/s, 34.4 m; one pump of 60 - 2000 Q^2 brings more, one of 20 m stays shut
    flow = np.linspace(0, 0.12, 9)
    curve = system_of(20.0, table=(flow, 1000 * flow**2))
    installed = solve.branches([INSTALLED])
    left = flow_left(installed, running=[0], curve=curve, asked=1.0, throttled=False, count=1)
    new = solve.branches([Parabola(60.0, 0.0, 2000.0, 0.13), Parabola(20.0, 0.0, 2000.0, 0.1)])
    met = meet(new, left, installed)
    assert list(met.mark) == [Mark.SYSTEM_NOT_KNOWN, Mark.SHUT]
    assert np.isnan(met.header[0])
    assert np.isnan(met.installed[0]).all()
    assert met.header[1] == pytest.approx(30.0)  # 50 - 2000 Q^2 = 20 + 1000 Q^2 at 0.1 m3/s
    assert met.installed[1] == pytest.approx([0.1])


def test_wall_of_a_held_demand_with_every_installed_pump_shut(solve: Solver) -> None:
    net = Network((INSTALLED, replace(INSTALLED, shutoff=45.0)), 10.0, 100.0, demand=0.05)
    met = solve(net, [Parabola(70.0, 0.0, 1000.0, 0.1), Parabola(53.0, 0.0, 1000.0, 0.1)])
    assert list(met.mark) == [Mark.RUNS, Mark.RUNS]
    assert met.flow == pytest.approx(0.05)
    assert met.header == pytest.approx([67.5, 50.5])
    assert np.array_equal(met.installed, np.zeros((2, 2)))


def test_static_head_above_every_shutoff_head(solve: Solver) -> None:
    for demand in (inf, 0.05):
        net = Network((INSTALLED,), 80.0, 100.0, demand=demand)
        met = solve(net, [Parabola(70.0, 0.0, 1000.0, 0.1), Parabola(60.0, 400.0, 4000.0, 0.12)])
        assert list(met.mark) == [Mark.SHUT, Mark.SHUT]
        assert met.header == pytest.approx(80.0)
        assert np.array_equal(met.flow, np.zeros(2))
        assert np.array_equal(met.installed, np.zeros((2, 1)))


DROOPS = Parabola(40.0, 80.0, 400.0, 0.2)  # peaks with 44 m at 0.1 m3/s


def test_demand_in_the_jump_of_a_drooping_installed_pump(solve: Solver) -> None:
    # 0.08 m3/s are wanted: at 44 m the new pumps bring 0.024 and 0, so that DROOPS would have to give
    # less than at its peak; with it held shut the new pump gives all, at 44.6 and 38 less 1000 Q^2
    net = Network((DROOPS,), 10.0, 100.0, demand=0.08)
    met = solve(net, [Parabola(44.6, 0.0, 1000.0, 0.1), Parabola(38.0, 0.0, 1000.0, 0.1)])
    assert list(met.mark) == [Mark.RUNS, Mark.RUNS]
    assert met.flow == pytest.approx(0.08)
    assert met.header == pytest.approx([38.2, 31.6])
    assert np.array_equal(met.installed, np.zeros((2, 1)))


def test_drooping_candidate_past_its_peak_is_shut(solve: Solver) -> None:
    # 0.06 m3/s are wanted. At 44 m the installed pump gives 0.04 and DROOPS at least 0.1 or nothing;
    # alone the installed pump, which droops as well (46.4 m at 0.02 m3/s), gives all at 36.8 m
    net = Network((Parabola(44.0, 240.0, 6000.0, 0.12),), 10.0, 100.0, demand=0.06)
    met = solve(net, [DROOPS])
    assert met.mark[0] == Mark.SHUT
    assert met.flow[0] == 0.0
    assert met.installed[0] == pytest.approx([0.06])
    assert met.header[0] == pytest.approx(36.8)
