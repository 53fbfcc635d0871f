"""Bypasses against a whole network solved by scipy, with pumps, valves and branches in closed form."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from scipy.optimize import brentq

from screener.header.bypass import Bypassed, Part, bypass_flows
from screener.header.system import SystemCurve
from screener.model.case import Branch, Loss
from screener.model.curves import Curves, Pumps

HOUR = 3600


@dataclass(frozen=True)
class Pump:
    """Head shutoff + rise q - fall q^2 [m, m3/s] to `end`; losses coefficient, exponent; how many run."""

    shutoff: float
    rise: float
    fall: float
    end: float
    suction: float
    discharge: tuple[tuple[float, float], ...]
    least: float
    number: int
    lift: float = 0.0

    def own(self, flow: Any) -> Any:
        return self.shutoff + self.rise * flow - self.fall * flow**2

    def at_header(self, delivered: Any, bypass: float) -> Any:
        flow = delivered + bypass
        lost = self.suction * flow**2 + sum(c * delivered**n for c, n in self.discharge)
        return self.lift + self.own(flow) - lost

    def delivers(self, header: float, bypass: float) -> float:
        """On the falling side, behind a check valve."""
        grid = np.linspace(0, self.end - bypass, 400)
        peak = float(grid[np.argmax(self.at_header(grid, bypass))])
        if header >= self.at_header(peak, bypass):
            return 0.0
        return float(brentq(lambda d: self.at_header(d, bypass) - header, peak, 10 * self.end, xtol=1e-15))

    def curves(self, pumps_of: Callable[..., Pumps]) -> Curves:
        flow = np.linspace(0, self.end, 65)
        return pumps_of([(flow, self.own(flow))]).curves

    def part(self, pumps_of: Callable[..., Pumps]) -> Part:
        discharge = Loss(*(zip(*self.discharge, strict=True))) if self.discharge else Loss()
        branch = Branch(Loss((self.suction,), (2.0,)), discharge, self.lift)
        return Part(self.curves(pumps_of), branch, self.number)


def network(
    pumps: list[Pump], bypass: list[float], asked: float, static: float, friction: float
) -> list[float]:
    """Flow through each pump with bypasses of one size, the users holding `asked` where they can."""

    def over(header: float) -> float:
        users = min(asked, np.sqrt(max(header - static, 0) / friction))
        return sum(p.number * p.delivers(header, b) for p, b in zip(pumps, bypass, strict=True)) - users

    header = brentq(over, 5.0, 80.0, xtol=1e-13)
    return [p.delivers(header, b) + b for p, b in zip(pumps, bypass, strict=True)]


def found(pumps: list[Pump], asked: float, pumps_of: Callable[..., Pumps], curve: SystemCurve) -> Bypassed:
    least = [np.array([p.least]) for p in pumps]
    return bypass_flows([p.part(pumps_of) for p in pumps], minimum=least, asked=asked, curve=curve)


def random_pump(rng: np.random.Generator) -> Pump:
    shutoff, end = rng.uniform(48, 56), rng.uniform(0.03, 0.12)
    return Pump(
        shutoff=shutoff,
        rise=0.0,
        fall=rng.uniform(0.4, 0.7) * shutoff / end**2,
        end=end,
        suction=rng.uniform(0, 1) / end**2,
        discharge=((rng.uniform(0.5, 3) / end**2, 2.0), (rng.uniform(0.5, 2) / end**1.85, 1.85)),
        least=rng.uniform(0.1, 0.4) * end,
        number=int(rng.integers(1, 3)),
        lift=rng.uniform(-1, 1),
    )


@pytest.mark.parametrize("seed", range(24))
def test_just_enough_in_the_whole_network(seed, pumps_of, system_of) -> None:
    """With the bypasses found every pump has its minimum; with 3 % less of one, that pump has not."""
    rng = np.random.default_rng(seed)
    pumps = [random_pump(rng) for _ in range(3)]
    asked = rng.uniform(0.05, 0.35) * sum(p.number * p.end for p in pumps)
    static, friction = rng.uniform(10, 25), rng.uniform(10, 20) / asked**2
    answer = found(pumps, asked, pumps_of, system_of(static, [(friction, 2.0)]))
    bypass = answer.bypass[0]
    flows = network(pumps, list(bypass), asked, static, friction)
    assert np.allclose(flows, answer.bypass[0] + answer.delivered[0], rtol=1e-6)
    assert all(flow >= p.least * (1 - 1e-6) for flow, p in zip(flows, pumps, strict=True))
    for place in np.flatnonzero(bypass > 0):
        less = bypass.copy()
        less[place] *= 0.97
        short = network(pumps, list(less), asked, static, friction)[place]
        assert short < pumps[place].least * (1 - 1e-5)
        assert bypass[place] <= pumps[place].least
        assert answer.idle[0, place] == (answer.delivered[0, place] == 0)
        assert answer.kept[0, place] == pytest.approx(pumps[place].least)
        assert answer.head[0, place] == pytest.approx(pumps[place].own(pumps[place].least), rel=1e-6)


def test_the_random_headers_show_every_situation(pumps_of, system_of) -> None:
    """None, one, two bypasses; idle pumps and pumps that deliver besides: else the test above says little."""
    rng = np.random.default_rng(5)
    pumps = [random_pump(rng) for _ in range(3)]
    everything = sum(p.number * p.end for p in pumps)
    curve = system_of(0.0, [(1.0, 2.0)])
    counts = set()
    for share in np.linspace(0.01, 0.6, 30):
        answer = found(pumps, share * everything, pumps_of, curve)
        counts.add((int((answer.bypass > 0).sum()), int(answer.idle.sum())))
    assert {needing for needing, _ in counts} == {0, 1, 2, 3}
    assert any(needing > idle for needing, idle in counts)
    assert any(idle for _, idle in counts)


def test_by_hand_a_weak_suction(pumps_of, system_of) -> None:
    """Two of H = 720 - 100 (Q/120)^2 and one of 655 - 35 (Q/120)^2, all with 40 m3/h as minimum [D].

    At 40 the last stands at 655 - 35/9 = 651.11; the others give 120 sqrt(68.89/100) = 99.60 each there.
    200 - 2 x 99.60 = 0.80 is left for it: 39.20 go round. At 160 and 120 the header is above 651.11.
    """
    strong = Pump(720, 0, 100 * (HOUR / 120) ** 2, 180 / HOUR, 0, (), 40 / HOUR, 2)
    weak = Pump(655, 0, 35 * (HOUR / 120) ** 2, 180 / HOUR, 0, (), 40 / HOUR, 1)
    curve = system_of(520.0, [(70 * (HOUR / 360) ** 2, 2.0)])
    for asked, bypass, header in ((200, 39.20, 651.11), (160, 40.0, 720 - 100 / 2.25), (120, 40.0, 695.0)):
        answer = found([strong, weak], asked / HOUR, pumps_of, curve)
        assert answer.bypass[0] * HOUR == pytest.approx([0.0, bypass], abs=0.005)
        assert answer.header == pytest.approx([header], abs=0.005)
        assert answer.idle[0].tolist() == [False, asked < 200]
        assert answer.head[0] == pytest.approx([720 - 100 / 9, 651.11], abs=0.005)


def test_identical_pumps_share_and_then_all_are_idle(pumps_of, system_of) -> None:
    """Minimum 0.04: with 0.02 asked of two, each delivers 0.01; with 0.01 asked of none, nothing is known."""
    pump = Pump(50, 0, 1000, 0.1, 0, (), 0.04, 1)
    curve = system_of(0.0, [(1.0, 2.0)])
    answer = found([pump, pump], 0.02, pumps_of, curve)
    assert answer.bypass[0] == pytest.approx([0.03, 0.03])
    assert answer.delivered[0] == pytest.approx([0.01, 0.01])
    assert not answer.idle.any()
    answer = found([pump, pump], 0.02, pumps_of, system_of(60.0, [(1.0, 2.0)]))
    assert answer.bypass[0] == pytest.approx([0.04, 0.04])
    assert answer.idle.all()


def test_a_drooping_curve_is_kept_on_its_falling_side(pumps_of, system_of) -> None:
    """44 - 400 (Q - 0.1)^2 peaks at 0.1, over its minimum of 0.06; a discharge branch does not help it."""
    droops = Pump(40, 80, 400, 0.2, 0, ((300.0, 2.0),), 0.06, 1)
    steady = Pump(50, 0, 1000, 0.1, 0, (), 0.02, 1)
    answer = found([droops, steady], 0.06, pumps_of, system_of(0.0, [(1.0, 2.0)]))
    assert answer.kept[0] == pytest.approx([0.1, 0.02], rel=1e-6)
    assert answer.head[0, 0] == pytest.approx(44.0, rel=1e-5)
    assert answer.idle[0].tolist() == [True, False]
    flows = network([droops, steady], list(answer.bypass[0]), 0.06, 0.0, 1.0)
    assert flows == pytest.approx([0.1, 0.06], rel=1e-5)


def test_candidates_side_by_side_are_as_one_by_one(pumps_of, system_of) -> None:
    rng = np.random.default_rng(8)
    beside, curve = random_pump(rng), system_of(10.0, [(3000.0, 2.0)])
    several = [Pump(h, 0, 3000, 0.06, 0, ((200.0, 2.0),), 0.02, 1) for h in (45, 50, 55)]
    flow = np.linspace(0, 0.06, 65)
    curves = pumps_of([(flow, p.own(flow)) for p in several]).curves
    branch = Branch(Loss((0.0,), (2.0,)), Loss((200.0,), (2.0,)))
    together = bypass_flows(
        [Part(curves, branch), beside.part(pumps_of)],
        minimum=[np.full(3, 0.02), np.array([beside.least])],
        asked=0.03,
        curve=curve,
    )
    for row, pump in enumerate(several):
        alone = found([pump, beside], 0.03, pumps_of, curve)
        assert together.bypass[row] == pytest.approx(alone.bypass[0], rel=1e-9, abs=1e-15)
        assert together.header[row] == pytest.approx(alone.header[0], rel=1e-9)


def test_nothing_is_known_past_the_data(pumps_of, system_of) -> None:
    """50 - 1000 Q^2 ends at 0.1 m3/s, 40 m: no figures where more is asked, or its minimum lies past that."""
    pump, curve = Pump(50, 0, 1000, 0.1, 0, (), 0.02, 1), system_of(0.0, [(1.0, 2.0)])
    assert np.isnan(found([pump], 0.11, pumps_of, curve).bypass).all()
    assert not np.isnan(found([pump], 0.09, pumps_of, curve).bypass).any()
    beyond = Pump(50, 0, 1000, 0.1, 0, (), 0.12, 1)
    answer = found([beyond], 0.09, pumps_of, curve)
    assert np.isnan([answer.bypass, answer.delivered, answer.kept, answer.head]).all()
    assert not answer.idle.any()


def test_without_a_minimum_a_pump_is_held_shut_and_needs_nothing(pumps_of, system_of) -> None:
    weak, strong = Pump(40, 0, 1000, 0.1, 0, (), 0.0, 1), Pump(50, 0, 1000, 0.1, 0, (), 0.02, 1)
    answer = found([weak, strong], 0.05, pumps_of, system_of(0.0, [(1.0, 2.0)]))
    assert answer.bypass[0].tolist() == [0.0, 0.0]
    assert answer.delivered[0] == pytest.approx([0.0, 0.05])
    assert not answer.idle.any()


def test_wide_open_the_system_sets_the_flow(pumps_of, system_of) -> None:
    """50 - 1000 Q^2, minimum 0.05, on 45 + 3700 Q^2: it stands at 47.5 then, where 0.026 pass."""
    pump = Pump(50, 0, 1000, 0.1, 0, (), 0.05, 1)
    answer = found([pump], np.inf, pumps_of, system_of(45.0, [(3700.0, 2.0)]))
    assert answer.delivered[0] == pytest.approx([np.sqrt(2.5 / 3700)])
    assert answer.bypass[0] == pytest.approx([0.05 - np.sqrt(2.5 / 3700)])
