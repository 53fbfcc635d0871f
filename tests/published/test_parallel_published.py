"""Published figures of pumps in parallel, of parking, and of similarity.

[V] two sources or recomputed here, [1] one source, [D] derived here by independent arithmetic.
Quadratics are given as 33 points: our cubic runs through quadratics exactly.
"""

from __future__ import annotations

from collections.abc import Callable
from math import nan

import numpy as np
import pytest
from scipy.optimize import brentq

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.header import branch
from screener.header.branch import branch_curves
from screener.header.left import flow_left
from screener.header.meet import Mark, Meeting, meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import trimmed
from screener.model.arrays import Floats, frozen
from screener.model.case import Branch
from screener.model.curves import Pumps, PumpTable

LITRE_PER_SECOND = 1e-3
CUBIC_METRE_PER_HOUR = 1 / 3600
GALLON_PER_MINUTE = 6.309020e-5
FOOT = 0.3048
INCH = 0.0254

SystemOf = Callable[..., SystemCurve]
PumpsOf = Callable[..., Pumps]


def quadratic(
    shutoff: float, fall: float, end: float, flow_unit: float, head_unit: float
) -> tuple[Floats, Floats]:
    flow = end * np.linspace(0, 1, 33)
    return flow * flow_unit, (shutoff - fall * flow**2) * head_unit


def run_open(pumps: Pumps, curve: SystemCurve, *, installed: int = 0, new: int = 1) -> Meeting:
    """The last pump as `new` pumps beside the first `installed` ones, wide open."""
    rows = branch_curves(pumps.curves, [Branch()])
    left = flow_left(rows, running=range(installed), curve=curve, asked=0.01, throttled=False, count=new)
    return meet(rows, left, rows)


@pytest.mark.parametrize(("pumps", "total", "head"), [(1, 6.742, 16.36), (2, 10.0, 18.0)])
def test_identical_pumps(
    pumps_of: PumpsOf, system_of: SystemOf, pumps: int, total: float, head: float
) -> None:
    # pump 20 - 0.08 Q^2, system 15 + 0.03 Q^2 [m, L/s]: one 6.742 L/s at 16.36 m, two 10.0 at 18 m, 5.0
    # each [V: recomputed; textbook exercise]
    curve = system_of(15.0, [(0.03 / LITRE_PER_SECOND**2, 2.0)])
    points = quadratic(20, 0.08, 12, LITRE_PER_SECOND, 1.0)
    met = run_open(pumps_of([points, points]), curve, installed=pumps - 1)
    assert met.flow[1] / LITRE_PER_SECOND == pytest.approx(total / pumps, abs=1e-3)
    assert met.header[1] == pytest.approx(head, abs=5e-3)
    shared = run_open(pumps_of([points]), curve, new=pumps)
    assert shared.flow[0] / LITRE_PER_SECOND * pumps == pytest.approx(total, abs=1e-3)


@pytest.mark.parametrize(
    ("pumps", "total", "head", "of_flow", "of_head"),
    [(1, 600.0, 65.0, 0.05, 5e-3), (2, 800.0, 79.0, 0.05, 5e-3), (3, 864.7, 84.39, 0.05, 6e-3)],
)
def test_identical_pumps_in_us_units(
    pumps_of: PumpsOf,
    system_of: SystemOf,
    pumps: int,
    total: float,
    head: float,
    of_flow: float,
    of_head: float,
) -> None:
    # pump 90.2 - 7.0e-5 Q^2, static 47, friction 5.0e-5 Q^2 [ft, gpm]: one 600 gpm at 65 ft, two 800 at
    # about 79, three 864.7 at 84.39 [1: a textbook's figures; D: the quadratic is our fit to them]
    curve = system_of(47 * FOOT, [(5.0e-5 * FOOT / GALLON_PER_MINUTE**2, 2.0)])
    points = quadratic(90.2, 7.0e-5, 900, GALLON_PER_MINUTE, FOOT)
    met = run_open(pumps_of([points] * 3), curve, installed=pumps - 1)
    assert met.flow[2] / GALLON_PER_MINUTE * pumps == pytest.approx(total, abs=of_flow)
    assert met.header[2] / FOOT == pytest.approx(head, abs=of_head)


@pytest.mark.parametrize(
    ("pumps", "total", "head"), [(1, 155.68, 83.47), (2, 169.27, 92.31), (3, 172.86, 94.76)]
)
def test_tabulated_pumps(
    pumps_of: PumpsOf, system_of: SystemOf, pumps: int, total: float, head: float
) -> None:
    # Q 0 110 180 250 300 340 gpm, H 100 90 80 60 40 20 ft, system 35 + .002 Q^2 [inputs 1: a textbook's];
    # answers by straight lines between the points [D]. Our cubic would round the corners, so it gets the
    # straight lines at every 10 gpm: off the corners, as here, that leaves nothing to tolerate.
    flow = np.arange(0.0, 341.0, 10.0)
    lines = np.interp(flow, [0, 110, 180, 250, 300, 340], [100, 90, 80, 60, 40, 20])
    curve = system_of(35 * FOOT, [(0.002 * FOOT / GALLON_PER_MINUTE**2, 2.0)])
    met = run_open(pumps_of([(flow * GALLON_PER_MINUTE, lines * FOOT)]), curve, new=pumps)
    assert met.flow[0] / GALLON_PER_MINUTE * pumps == pytest.approx(total, abs=6e-3)
    assert met.header[0] / FOOT == pytest.approx(head, abs=6e-3)


@pytest.mark.parametrize(
    ("static", "friction", "head", "strong", "weak"),
    [(20.0, 0.0004, 43.5048, 128.434, 113.975), (45.0, 0.0016, 54.2308, 75.956, 0.0)],
)
@pytest.mark.parametrize("new", [0, 1])
def test_unequal_shutoff_heads_with_check_valves(
    pumps_of: PumpsOf,
    system_of: SystemOf,
    static: float,
    friction: float,
    head: float,
    strong: float,
    weak: float,
    new: int,
) -> None:
    # A 60 - .0010 Q^2, B 50 - .0005 Q^2 [m, m3/h]. Static 20, K .0004: H 43.5048, A 128.434, B 113.975.
    # Static 45, K .0016: H 54.2308, A 75.956, B 0, its valve shut [D]. Either of them as the new pump.
    both = [
        quadratic(60, 0.0010, 180, CUBIC_METRE_PER_HOUR, 1.0),
        quadratic(50, 0.0005, 220, CUBIC_METRE_PER_HOUR, 1.0),
    ]
    curve = system_of(static, [(friction / CUBIC_METRE_PER_HOUR**2, 2.0)])
    met = run_open(pumps_of([both[1 - new], both[new]]), curve, installed=1)
    assert met.header[1] == pytest.approx(head, abs=6e-5)
    expected = (strong, weak)
    assert met.flow[1] / CUBIC_METRE_PER_HOUR == pytest.approx(expected[new], abs=6e-4)
    assert met.installed[1, 0] / CUBIC_METRE_PER_HOUR == pytest.approx(expected[1 - new], abs=6e-4)
    assert met.mark[1] == (Mark.SHUT if new == 1 and weak == 0 else Mark.RUNS)


@pytest.mark.parametrize("total", [3.0, 9.0, 18.0])
def test_three_equal_pumps_combine(pumps_of: PumpsOf, system_of: SystemOf, total: float) -> None:
    # three pumps 12 - 0.1 Q^2 combine to 12 - 0.0111 Q^2 [V: Chin, Example 2.13]
    pump = pumps_of([quadratic(12, 0.1, 9, LITRE_PER_SECOND, 1.0)])
    rows = branch_curves(pump.curves, [Branch()])
    left = flow_left(
        rows,
        running=[],
        curve=system_of(0.0, [(1.0, 2.0)]),
        asked=total * LITRE_PER_SECOND,
        throttled=True,
        count=3,
    )
    met = meet(rows, left, rows)
    assert met.header[0] == pytest.approx(12 - 0.0111 * total**2, abs=5e-5 * total**2)


PARKING = [
    # x = r q^2 / (1 + r) in percent of the shutoff head, strong pump at the fraction q of rated flow [D]
    (0.04, 1.0, 3.8),
    (0.04, 0.6, 1.4),
    (0.10, 1.0, 9.1),
    (0.10, 0.6, 3.3),
    (0.15, 1.0, 13.0),
    (0.15, 0.6, 4.7),
    (0.20, 1.0, 16.7),
    (0.20, 0.6, 6.0),
    (0.30, 1.0, 23.1),
    (0.30, 0.6, 8.3),
]


@pytest.mark.parametrize(("rise", "fraction", "percent"), PARKING)
def test_parking_rule(
    pumps_of: PumpsOf, system_of: SystemOf, rise: float, fraction: float, percent: float
) -> None:
    """A pump that has lost the percentage, less or more a rounding, still delivers or does not."""
    flow = 1.5 * np.linspace(0, 1, 33)
    head = 1 + rise - rise * flow**2
    weak = [(flow * 0.1, 100 * head * (1 - (percent + off) / 100)) for off in (-0.06, 0.06)]
    strong = branch_curves(pumps_of([(flow * 0.1, 100 * head)]).curves, [Branch()])
    left = flow_left(
        strong, running=[0], curve=system_of(0.0, [(1.0, 2.0)]), asked=0.1 * fraction, throttled=True, count=1
    )
    met = meet(branch_curves(pumps_of(weak).curves, [Branch()]), left, strong)
    assert list(met.mark) == [Mark.RUNS, Mark.SHUT]


@pytest.mark.parametrize(
    ("lost", "fraction", "percent"),
    # flow of the weak pump in percent of the strong one's, rise 10 %, head lost in percent at every flow [D]
    [(1, 1.0, 95), (1, 0.6, 84), (3, 1.0, 83), (3, 0.6, 29), (5, 1.0, 69), (5, 0.6, 0)],
)
def test_flow_of_a_weakened_pump(pumps_of: PumpsOf, lost: float, fraction: float, percent: float) -> None:
    flow = 1.5 * np.linspace(0, 1, 33)
    head = 1.1 - 0.1 * flow**2
    weak = branch_curves(pumps_of([(flow, head * (1 - lost / 100))]).curves, [Branch()])
    header = np.array([1.1 - 0.1 * fraction**2])
    share = branch.flow_at(weak, np.array([0]), header)[0] / fraction
    assert 100 * share == pytest.approx(percent, abs=0.5)


def table(
    flow: Floats,
    head: Floats,
    *,
    speed: float = 1450.0,
    diameter: float = nan,
    power: Floats | None = None,
    bep_flow: float = nan,
    exponent: float | None = None,
) -> PumpTable:
    """One pump with one test; `exponent` for both flow and head in the trim law, else 1 and 2."""
    unknown = frozen(np.full(len(flow), nan))
    test = TestedCurve(
        diameter,
        frozen(flow),
        frozen(head),
        unknown,
        unknown if power is None else frozen(power),
        unknown,
        bep_flow,
    )
    entry = Entry(
        "pump", "", "", "", speed, (test,), flow_exponent=exponent or 1.0, head_exponent=exponent or 2.0
    )
    return compile_table([entry])


def scaled(of: PumpTable, *, speed_ratio: float = 1.0, diameter: float = nan) -> Pumps:
    return trimmed(
        of, model=np.array([0]), diameter=np.array([diameter]), speed_ratio=np.array([speed_ratio])
    )


def test_doubling_the_speed() -> None:
    # 1800 to 3600 rpm: 400 gpm, 48 ft, 45 kW become 800, 192, 360 [V: US DOE-HDBK-1012/3-92, centrifugal
    # pumps; the ratios only, its efficiency is 8 %]
    flow = np.linspace(0, 400, 9) * GALLON_PER_MINUTE
    head = (60 - 12 * np.linspace(0, 1, 9) ** 2) * FOOT
    of = table(flow, head, speed=1800.0, power=np.linspace(30e3, 45e3, 9))
    pumps = scaled(of, speed_ratio=2.0)
    assert pumps.speed[0] == 3600.0
    assert pumps.curves.end[0] / GALLON_PER_MINUTE == pytest.approx(800)
    assert pumps.curves.head[0, -1] / FOOT == pytest.approx(192)
    assert pumps.curves.power[0, -1] == pytest.approx(360e3)


def test_quadratic_at_another_speed() -> None:
    # 1170 to 1750 rpm: Q 300 to 448.7 gpm, H0 25 to 55.93 ft, H 21.9 to 48.99 ft; A of H = H0 - A Q^2
    # stays 3.444e-5 [V: Fox and McDonald, Introduction to Fluid Mechanics, Example 10.7]
    flow, head = quadratic(25, 3.444e-5, 400, GALLON_PER_MINUTE, FOOT)
    of = table(flow, head, speed=1170.0, bep_flow=300 * GALLON_PER_MINUTE)
    pumps = scaled(of, speed_ratio=1750 / 1170)
    best = pumps.bep_flow / GALLON_PER_MINUTE
    assert best == pytest.approx([448.7], abs=0.05)
    assert pumps.curves.head[0, 0] / FOOT == pytest.approx(55.93, abs=5e-3)
    rows = branch_curves(pumps.curves, [Branch()])
    at_best = branch.head_and_slope(rows, np.array([0]), pumps.bep_flow)[0] / FOOT
    assert at_best == pytest.approx([48.99], abs=1e-2)
    assert (pumps.curves.head[0, 0] / FOOT - at_best) / best**2 == pytest.approx([3.444e-5], rel=1e-6)


SCHASCHKE = (np.array([0, 2, 4, 6, 8, 10]) * 1e-3, np.array([40, 39.5, 38, 35, 30, 20]))


def test_speed_for_less_flow(pumps_of: PumpsOf, system_of: SystemOf) -> None:
    # Q 0 .002 .004 .006 .008 .010 m3/s, H 40 39.5 38 35 30 20 m at 1200 rpm, system 10 + 5.42e5 Q^2: 0.0066
    # m3/s at 34 m; 25 % less flow than unrounded takes 982 rpm [V: Schaschke, Example 9.10;
    # recomputed with two smooth interpolants: 982.1 and 982.2]. Scaling head at constant flow
    # gives 987 to 998 instead.
    curve = system_of(10.0, [(5.42e5, 2.0)])
    of = table(*SCHASCHKE, speed=1200.0)

    def duty(speed: float) -> tuple[float, float]:
        met = run_open(scaled(of, speed_ratio=speed / 1200), curve)
        return float(met.flow[0]), float(met.header[0])

    flow, head = duty(1200.0)
    assert flow == pytest.approx(0.0066, abs=5e-5)
    assert head == pytest.approx(34, abs=0.5)
    speed = brentq(lambda n: duty(n)[0] - 0.75 * flow, 900, 1100, xtol=0.01)
    assert speed == pytest.approx(982, abs=0.5)


def test_trim_by_the_affinity_law() -> None:
    # 7 in, 135 to 90 ft: 5.72 in by affinity [V: Lobanoff and Ross, Centrifugal Pumps: Design and
    # Application, 2nd edition, p. 19]. The book's corrected cut stops at 5.88 in: the law takes off too much.
    flow = np.linspace(0, 1000, 9) * GALLON_PER_MINUTE
    of = table(flow, np.linspace(135, 100, 9) * FOOT, diameter=7 * INCH)

    def head(diameter: float) -> float:
        return float(scaled(of, diameter=diameter * INCH).curves.head[0, 0]) / FOOT

    assert brentq(lambda d: head(d) - 90, 5, 7) == pytest.approx(5.72, abs=5e-3)


@pytest.mark.parametrize(
    ("cut", "exponent", "ratio"),
    # (D'/D)^m for m 2, 2.5, 3 [D]
    [
        (0.95, 2.0, 0.9025),
        (0.95, 2.5, 0.8796),
        (0.95, 3.0, 0.8574),
        (0.90, 2.0, 0.8100),
        (0.90, 2.5, 0.7684),
        (0.90, 3.0, 0.7290),
    ],
)
def test_trim_with_another_exponent(cut: float, exponent: float, ratio: float) -> None:
    # flow and head with one exponent between 2 and 3: Guelich, Centrifugal Pumps
    of = table(np.linspace(0, 0.1, 9), np.linspace(50, 40, 9), diameter=0.4, exponent=exponent)
    curves = scaled(of, diameter=0.4 * cut).curves
    assert curves.end / 0.1 == pytest.approx([ratio], abs=5.1e-5)
    assert curves.head[0, [0, -1]] / [50, 40] == pytest.approx([ratio, ratio], abs=5.1e-5)
