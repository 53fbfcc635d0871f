"""Random headers against a network solver (EPANET through `owa-epanet`), solved here and now.

Both get the same curves as 200 points; between them the solver draws straight lines, we a cubic.
Flow is ill-conditioned where a check valve has just opened, hence a looser tolerance on flow.
"""

from __future__ import annotations

import os
import warnings
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from epanet import toolkit as net

from screener.header.branch import branch_curves
from screener.header.held import Varying, hold
from screener.header.left import flow_left
from screener.header.meet import Mark, meet
from screener.header.system import SystemCurve
from screener.hydraulics.similarity import take
from screener.model.arrays import Floats
from screener.model.case import Branch, Loss
from screener.model.curves import Pumps

HEADERS = 320
POINTS = 200
OF_SHUTOFF = 1e-4
OF_CURVE_END = 3e-3

FOOT = 0.3048
MINOR_LOSS = 0.02517  # the solver's 8 / (g pi^2) in feet and seconds, for a pipe of one foot


@dataclass(frozen=True)
class Pump:
    """Points [m3/s, m], suction head [m], branch loss [m per (m3/s)^2], speed over that of the points."""

    flow: Floats
    head: Floats
    suction: float
    loss: float
    speed: float = 1.0


@dataclass(frozen=True)
class Header:
    """Pumps, the last one new, on a system static + friction Q^2, or on a demand [m3/s] if that is given."""

    pumps: list[Pump]
    static: float
    friction: float
    demand: float


def random_header(rng: np.random.Generator, *, fixed: bool) -> Header:
    """A header whose head lies above the end of every curve, and as often as not above some shutoff heads."""
    pumps = []
    for _ in range(rng.integers(2, 7)):
        x = np.linspace(0, 1, POINTS)
        shutoff, end = rng.uniform(40, 70), rng.uniform(0.02, 0.2)
        fall = rng.uniform(0.15, 0.7)
        mix = rng.uniform(0, 1)
        head = shutoff * (1 - fall * (mix * x ** rng.uniform(1.6, 2) + (1 - mix) * x ** rng.uniform(2, 4)))
        loss = rng.uniform(0.2, 4) / end**2
        pumps.append(Pump(end * x, head, float(rng.choice([0.0, rng.uniform(-3, 3)])), loss))
    lowest = max(p.suction + p.head[-1] - p.loss * p.flow[-1] ** 2 for p in pumps)
    highest = max(p.suction + p.head[0] for p in pumps)
    header = lowest + rng.uniform(0.05, 0.97) * (highest - lowest)
    total = 0.0
    for p in pumps:
        at_header = p.suction + p.head - p.loss * p.flow**2
        total += np.interp(-header, -at_header, p.flow, left=0.0)
    if fixed:
        return Header(pumps, 0.0, 1.0 / total**2, total)
    static = header * rng.uniform(0.3, 0.98)
    return Header(pumps, static, (header - static) / total**2, np.inf)


def _doubles(values: Floats) -> net.doubleArray:
    array = net.doubleArray(len(values))
    for place, value in enumerate(values):
        array[place] = float(value)
    return array


def network(header: Header) -> tuple[float, list[float]] | None:
    """Header head [m] and flow of each pump [m3/s], of the network solver; None where it did not converge."""
    project = net.createproject()
    net.init(project, os.devnull, "", net.CFS, net.HW)
    net.setoption(project, net.ACCURACY, 1e-8)  # a file's own accuracy stops at 1e-5
    net.setoption(project, net.TRIALS, 500)

    def node(name: str, kind: int, elevation: float = 0.0) -> int:
        index: int = net.addnode(project, name, kind)
        net.setnodevalue(project, index, net.ELEVATION, elevation / FOOT)
        return index

    def pipe(kind: int, start: str, stop: str, loss: float) -> None:
        index = net.addlink(project, f"{start}-{stop}", kind, start, stop)
        net.setpipedata(project, index, 1e-3, 12.0, 1e3, loss * FOOT**5 / MINOR_LOSS)

    main = node("header", net.JUNCTION)
    links = []
    for number, pump in enumerate(header.pumps):
        node(f"suction-{number}", net.RESERVOIR, pump.suction)
        node(f"branch-{number}", net.JUNCTION)
        links.append(
            net.addlink(project, f"pump-{number}", net.PUMP, f"suction-{number}", f"branch-{number}")
        )
        net.addcurve(project, f"curve-{number}")
        curve = net.getcurveindex(project, f"curve-{number}")
        net.setcurve(
            project, curve, _doubles(pump.flow / FOOT**3), _doubles(pump.head / FOOT), len(pump.flow)
        )
        net.setheadcurveindex(project, links[-1], curve)
        net.setlinkvalue(project, links[-1], net.INITSETTING, pump.speed)
        pipe(net.CVPIPE, f"branch-{number}", "header", pump.loss)
    if np.isinf(header.demand):
        node("users", net.RESERVOIR, header.static)
        pipe(net.PIPE, "header", "users", header.friction)
    else:
        net.setnodevalue(project, main, net.BASEDEMAND, header.demand / FOOT**3)
    net.openH(project)
    net.initH(project, net.NOSAVE)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # it warns of every pump held shut
        net.runH(project)
    head = net.getnodevalue(project, main, net.HEAD) * FOOT
    flows = [net.getlinkvalue(project, link, net.FLOW) * FOOT**3 for link in links]
    converged = net.getstatistic(project, net.RELATIVEERROR) <= 1e-8
    net.close(project)
    net.deleteproject(project)
    return (head, flows) if converged else None


def test_random_headers(pumps_of: Callable[..., Pumps], system_of: Callable[..., SystemCurve]) -> None:
    rng = np.random.default_rng(20240917)
    headers = [random_header(rng, fixed=bool(number % 2)) for number in range(HEADERS)]
    everyone = pumps_of([(pump.flow, pump.head) for header in headers for pump in header.pumps])
    first = solved = installed_shut = new_shut = 0
    sizes = set()
    for header in headers:
        count = len(header.pumps)
        rows = np.arange(first, first + count)
        first += count
        places = [Branch(discharge=Loss((p.loss,), (2.0,)), suction_head=p.suction) for p in header.pumps]
        installed = branch_curves(take(everyone, rows[:-1]).curves, places[:-1])
        new = branch_curves(take(everyone, rows[-1:]).curves, places[-1:])
        left = flow_left(
            installed,
            running=range(count - 1),
            curve=system_of(header.static, [(header.friction, 2.0)]),
            asked=header.demand if np.isfinite(header.demand) else 1.0,
            throttled=bool(np.isfinite(header.demand)),
            count=1,
        )
        met = meet(new, left, installed)
        solution = network(header)
        if solution is None:  # now and then it goes on opening and closing one check valve
            continue
        head, flows = solution
        solved += 1
        ends = np.array([pump.flow[-1] for pump in header.pumps])
        shutoff = max(pump.head[0] for pump in header.pumps)
        got = np.array([*met.installed[0], met.flow[0]])
        assert met.mark[0] == (Mark.RUNS if got[-1] > 0 else Mark.SHUT)
        assert abs(met.header[0] - head) <= OF_SHUTOFF * shutoff
        assert np.all(np.abs(got - flows) <= OF_CURVE_END * ends), (got, flows)
        shut = np.array(flows) < 1e-3 * ends
        installed_shut += bool(shut[:-1].any())
        new_shut += bool(shut[-1])
        sizes.add(count)
    assert solved >= 300
    assert installed_shut > HEADERS / 4
    assert new_shut > HEADERS / 10
    assert sizes == {2, 3, 4, 5, 6}


def test_random_headers_held_by_speed(pumps_of: Callable[..., Pumps]) -> None:
    """The speed that holds a flow, given to the solver as its own setting of the pumps' speed.

    One pump, or two that share one speed, vary; the solver finds the flows on its own, nothing throttled.
    """
    rng = np.random.default_rng(7)
    solved = 0
    for _ in range(60):
        header = random_header(rng, fixed=False)
        many = int(rng.integers(1, 3))
        varying, fixed = header.pumps[-many:], header.pumps[:-many]
        ends_at = [p.suction + p.head[-1] - p.loss * p.flow[-1] ** 2 for p in header.pumps]
        low, high = max(header.static, *ends_at), max(p.suction + p.head[0] for p in varying)
        if high <= low:
            continue
        head = low + rng.uniform(0.1, 0.95) * (high - low)
        asked = float(np.sqrt((head - header.static) / header.friction))
        flows = [_flow(p, head) for p in fixed]
        kinds = [_kind(p, pumps_of) for p in varying]
        found = hold(kinds, head=head, wanted=np.array([asked - sum(flows)]))
        if found.short[0] or found.over[0] or not np.isfinite(found.flow).all():
            continue
        ratio = float(found.ratio[0])
        turned = [replace(p, speed=ratio) for p in varying]
        solution = network(Header([*fixed, *turned], header.static, header.friction, np.inf))
        if solution is None:
            continue
        solved += 1
        ends = np.array([p.flow[-1] for p in header.pumps])
        assert abs(solution[0] - head) <= OF_SHUTOFF * max(p.head[0] for p in header.pumps)
        got = np.array([*flows, *found.flow[0]])
        assert np.all(np.abs(got - solution[1]) <= OF_CURVE_END * ends), (got, solution[1])
    assert solved >= 20


def _kind(pump: Pump, pumps_of: Callable[..., Pumps]) -> Varying:
    branch = Branch(discharge=Loss((pump.loss,), (2.0,)), suction_head=pump.suction)
    return Varying(pumps_of([(pump.flow, pump.head)]), branch, np.array([0.5]), np.array([1.1]), 1, 0.0, 0.0)


def _flow(pump: Pump, head: float) -> float:
    """Flow of one pump at a header head, by straight lines between its points."""
    at_header = pump.suction + pump.head - pump.loss * pump.flow**2
    return float(np.interp(-head, -at_header, pump.flow, left=0.0))
