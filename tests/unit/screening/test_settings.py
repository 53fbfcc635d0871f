"""States with their own speed, liquid or bypass, against closed forms: H = 50 - 2000 Q^2 on 20 + 400 Q^2."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import sqrt

import numpy as np
import pytest
from scipy.optimize import brentq

from screener.criteria import criteria
from screener.model.case import Branch, Case, Control, Drive, Duty, Liquid, Loss
from screener.model.curves import Pumps
from screener.model.finding import Outcome
from screener.model.run import Kind, Speed, in_state
from screener.screening import evaluate
from screener.screening.assess import judged, set_up
from screener.screening.evaluate import run, today
from screener.screening.header import prepare
from screener.screening.today import header_report

Plant, MakeDuty = Callable[..., Case], Callable[..., Duty]

FLOW = np.linspace(0, 0.1, 9)


@pytest.fixture
def new(pumps_of: Callable[..., Pumps]) -> Pumps:
    """One candidate, H = 48 - 2000 Q^2 with a minimum flow of 0.02 m3/s."""
    return replace(pumps_of([(FLOW, 48 - 2000 * FLOW**2)]), minimum_flow=np.array([0.02]))


def with_drive(case: Case, drive: Drive, *rows: int) -> Case:
    """A drive on some installed pumps, or on the new one where no row is given."""
    if not rows:
        return replace(case, new_pump=replace(case.new_pump, drive=drive))
    installed = [replace(p, drive=drive) if row in rows else p for row, p in enumerate(case.installed)]
    return replace(case, installed=tuple(installed))


def of_installed(head: float, ratio: float = 1.0) -> float:
    return sqrt(max(50 * ratio**2 - head, 0) / 2000)


def test_the_new_pump_holds_the_flow(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.0))
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])
    # the system takes 0.2 at 36 m; the two installed pumps give sqrt(14 / 2000) each
    rest = 0.2 - 2 * of_installed(36.0)
    assert found.header[0, place] == pytest.approx(36.0)
    assert found.total[0, place] == pytest.approx(0.2, rel=1e-10)
    assert found.flow[0, place, 0] == pytest.approx(rest, rel=1e-8)
    assert in_state(found.bounds.speed, place)[0].tolist() == [
        pytest.approx(sqrt((36 + 2000 * rest**2) / 48), rel=1e-9),
        1.0,
        1.0,
    ]
    # what goes with speed
    ratio = in_state(found.bounds.speed, place)[0, 0]
    assert in_state(found.bounds.end, place)[0, 0] == pytest.approx(0.1 * ratio)
    assert in_state(found.bounds.minimum, place)[0, 0] == pytest.approx(0.02 * ratio)
    assert in_state(found.bounds.opening, place)[0, 0] == 48  # it may speed up to open its valve


def test_upsets_find_it_at_its_highest_speed(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.1))
    header = prepare(case, temperature_rise=8.0)
    found = run(header, new)
    upset = [place for place, state in enumerate(header.states) if state.kind == Kind.WIDE_OPEN]
    assert [header.states[place].speed for place in upset] == [Speed.HIGHEST]
    head = brentq(
        lambda h: sqrt((h - 20) / 400) - 2 * of_installed(h) - sqrt((48 * 1.21 - h) / 2000),
        36,
        50,
        xtol=1e-13,
    )
    assert found.header[0, upset[0]] == pytest.approx(head, rel=1e-9)


@pytest.mark.parametrize(
    ("flow", "speed", "total"),
    [
        pytest.param(0.25, 1.0, None, id="short even at the highest speed"),
        pytest.param(0.15, 0.8, 0.15, id="too much even at the lowest: the users throttle"),
    ],
)
def test_at_the_ends_of_the_range(
    plant: Plant, duty: MakeDuty, new: Pumps, flow: float, speed: float, total: float | None
) -> None:
    case = with_drive(plant(duty((0, 1), flow=flow, control=Control.SPEED, rated=True)), Drive(0.8, 1.0))
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])

    def given(head: float) -> float:
        return 2 * of_installed(head) + sqrt(max(48 * speed**2 - head, 0) / 2000)

    head = (
        brentq(lambda h: given(h) - sqrt((h - 20) / 400), 30, 49, xtol=1e-13)
        if total is None
        else brentq(lambda h: given(h) - total, 30, 49, xtol=1e-13)
    )
    assert in_state(found.bounds.speed, place)[0, 0] == speed
    assert found.header[0, place] == pytest.approx(head, rel=1e-9)
    assert found.total[0, place] == pytest.approx(given(head), rel=1e-9)


def test_installed_pumps_hold_it_beside_a_new_one_of_fixed_speed(
    plant: Plant, duty: MakeDuty, new: Pumps
) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.0), 1)
    header = prepare(case, temperature_rise=8.0)
    found = run(header, new)
    place = int(np.flatnonzero(found.conditions.held)[0])
    own = sqrt((48 - 36) / 2000)
    rest = 0.2 - own - of_installed(36.0)
    assert found.flow[0, place].tolist() == pytest.approx([own, of_installed(36.0), rest], rel=1e-8)
    assert in_state(found.bounds.speed, place)[0, 2] == pytest.approx(
        sqrt((36 + 2000 * rest**2) / 50), rel=1e-9
    )
    # without the new pump they cannot: both at full speed, the system open
    alone = header.alone[place]
    head = brentq(lambda h: 2 * of_installed(h) - sqrt((h - 20) / 400), 30, 49, xtol=1e-13)
    assert alone.header == pytest.approx(head, rel=1e-9)
    assert alone.ratio.tolist() == [1.0, 1.0]


def test_all_that_vary_share_one_speed(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.0))
    case = with_drive(case, Drive(0.5, 1.0), 0, 1)
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])

    def given(ratio: float) -> float:
        return 2 * of_installed(36.0, ratio) + sqrt(max(48 * ratio**2 - 36, 0) / 2000)

    ratio = brentq(lambda r: given(r) - 0.2, 0.8, 1, xtol=1e-14)
    assert in_state(found.bounds.speed, place)[0] == pytest.approx([ratio] * 3, rel=1e-9)
    assert found.flow[0, place, 1] == pytest.approx(of_installed(36.0, ratio), rel=1e-7)


def test_the_speed_that_opens_the_valve_and_reaches_the_minimum_flow(
    plant: Plant, duty: MakeDuty, new: Pumps
) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.0))
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])

    def open_header(flow: float) -> float:
        """Header head, nothing throttled, beside a flow from the new pump."""
        return brentq(lambda h: 2 * of_installed(h) + flow - sqrt((h - 20) / 400), 30, 50, xtol=1e-13)

    opening = sqrt(open_header(0.0) / 48)
    least = brentq(lambda r: r**2 * (48 - 2000 * 0.02**2) - open_header(0.02 * r), 0.5, 1.5)
    assert found.opening_speed[0, place] == pytest.approx(opening, rel=1e-9)
    assert found.least_speed[0, place] == pytest.approx(least, rel=1e-5)


def test_a_pump_that_starts_finds_the_header_that_the_others_hold(
    plant: Plant, duty: MakeDuty, new: Pumps
) -> None:
    case = with_drive(plant(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True)), Drive(0.5, 1.0))
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])
    alone = brentq(lambda h: 2 * of_installed(h) - sqrt((h - 20) / 400), 30, 49, xtol=1e-13)
    assert found.start_header[0, place, 0] == pytest.approx(alone, rel=1e-9)
    # P-1 starts while the new pump at full speed and P-2 cannot give all of it
    others = brentq(
        lambda h: of_installed(h) + sqrt(max(48 - h, 0) / 2000) - sqrt((h - 20) / 400), 25, 48, xtol=1e-13
    )
    assert found.start_header[0, place, 1:].tolist() == pytest.approx([others, others], rel=1e-9)


def test_each_duty_has_its_own_liquid(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    oil = Liquid("oil", np.nan, 900.0, 200e-6, 100.0, 1900.0, viscous=True)
    hot = Liquid("hot", np.nan, 850.0, 1e-6, 5e4, 2200.0)
    case = plant(
        duty((0, 1), flow=0.2, rated=True),
        replace(duty((0, 1), flow=0.15), liquid=1),
        replace(duty((0, 1), flow=0.12), liquid=2),
    )
    # best efficiency is known to the pumps of this case, B is not 1 for the oil
    eta = np.broadcast_to(0.8 * (1 - ((np.linspace(0, 0.1, 65) - 0.06) / 0.06) ** 2), (2, 65))

    def known(pumps: Pumps) -> Pumps:
        curves = replace(pumps.curves, efficiency=eta[: len(pumps)].copy())
        best, number = np.full(len(pumps), 0.06), np.full(len(pumps), 25.0)
        return replace(pumps, curves=curves, bep_flow=best, specific_speed=number)

    case = replace(case, liquids=(*case.liquids, oil, hot), pumps=known(case.pumps))
    found = run(prepare(case, temperature_rise=8.0), known(new))
    duties = {
        case.duties[d].liquid: p for p, d in enumerate(found.conditions.duty) if found.conditions.kind[p] == 0
    }
    b = 16.5 * sqrt(200) * 42.8**0.0625 / (216**0.375 * 1450**0.25)
    flow_factor = 2.71 ** (-0.165 * np.log10(b) ** 3.15)

    def thick(shutoff: float, head: float) -> float:
        """Flow at a header head: H = C_H (H0 - 2000 Qw^2) at C_Q Qw, by hand."""
        water = brentq(
            lambda q: (1 - (1 - flow_factor) * (q / 0.06) ** 0.75) * (shutoff - 2000 * q**2) - head, 0, 0.1
        )
        return flow_factor * water

    own = [flow_factor, 1.0, 1.0]
    for liquid, factor in enumerate((1.0, flow_factor, 1.0)):
        best = in_state(found.bounds.best, duties[liquid])[0]
        # the installed pumps' B is at 42.8 m, the new one's at 40.8 m: 0.02 % apart in the factor
        assert best[1:].tolist() == pytest.approx([0.06 * factor] * 2, rel=1e-5), own
    head = brentq(lambda h: 2 * thick(50, h) + thick(48, h) - 0.15, 30, 47.9)
    assert found.header[0, duties[1]] == pytest.approx(head, rel=2e-4)
    assert found.efficiency[0, duties[1], 1] < 0.8 * b ** (-0.0547 * b**0.69)
    # the hot liquid runs as water does, with its own density
    water = brentq(lambda h: 2 * of_installed(h) + sqrt(max(48 - h, 0) / 2000) - 0.12, 30, 49.9)
    assert found.header[0, duties[2]] == pytest.approx(water, rel=1e-9)
    assert found.conditions.density[duties[2]] == 850.0


def test_a_destination_pressure_is_more_metres_of_a_lighter_liquid(plant: Plant, duty: MakeDuty) -> None:
    light = Liquid("light", np.nan, 500.0, 1e-6, 100.0, 1900.0)
    case = plant(duty((0, 1), flow=0.2, rated=True), replace(duty((0, 1), flow=0.15), liquid=1))
    case = replace(
        case, liquids=(*case.liquids, light), system=replace(case.system, destination_pressure=98066.5)
    )
    header = prepare(case, temperature_rise=8.0)
    statics = {state.liquid: state.static for state in header.states}
    # 0.980665 bar are 10 m at 1000 kg/m3 and 20 m at 500 kg/m3
    assert statics == {0: pytest.approx(30.0), 1: pytest.approx(40.0)}


def test_a_bypass_lifts_a_pump_to_its_minimum_flow(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    loss = Loss((100.0,), (2.0,))
    branch = Branch(suction=loss, discharge=loss)
    case = plant(
        duty((0, 1), flow=0.2, rated=True), replace(duty((0, 1), flow=0.09), bypass=(0.015, 0.0, 0.0))
    )
    case = replace(
        case,
        new_pump=replace(case.new_pump, branch=branch),
        installed=tuple(replace(p, branch=branch) for p in case.installed),
    )
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(found.conditions.lowest.argmax())

    def delivered(shutoff: float, head: float, bypass: float) -> float:
        """Suction loss over all that the pump moves, discharge loss over what it delivers."""

        def over(q: float) -> float:
            return shutoff - 2100 * (q + bypass) ** 2 - 100 * q**2 - head

        return brentq(over, 0, 0.1) if over(0) > 0 else 0.0

    head = brentq(lambda h: 2 * delivered(50, h, 0) + delivered(48, h, 0.015) - 0.09, 40, 49.9, xtol=1e-12)
    own = delivered(48, head, 0.015)
    assert found.header[0, place] == pytest.approx(head, rel=1e-6)
    assert found.flow[0, place, 0] == pytest.approx(own + 0.015, rel=1e-5)
    assert own > 0.001
    assert found.total[0, place] == pytest.approx(0.09, rel=1e-9)
    # the pump itself stands at all that it moves
    assert found.head[0, place, 0] == pytest.approx(48 - 2000 * (own + 0.015) ** 2, rel=1e-6)


def test_a_bypass_keeps_a_pump_that_delivers_nothing_alive(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    weak = replace(new, curves=replace(new.curves, head=new.curves.head - 3))  # 45 m at shutoff
    duties = [duty((0, 1), flow=0.2, rated=True), duty((0, 1), flow=0.05)]
    plain = plant(*duties)
    kept = plant(duties[0], replace(duties[1], bypass=(0.02, 0.0, 0.0)))
    name = [criterion.name for criterion in criteria()].index("minimum-flow")
    outcomes = []
    for case in (plain, kept):
        result = judged(set_up(case), weak)
        place = int(result.run.conditions.lowest.argmax())
        outcomes.append(
            (result.run.flow[0, place, 0], Outcome(int(result.candidates.findings.outcome[0, name])))
        )
    assert outcomes[0] == (0.0, Outcome.FAIL)
    assert outcomes[1][0] == pytest.approx(0.02)
    assert outcomes[1][1] != Outcome.FAIL
    # behind its shut valve it stands where its bypass puts it: 45 - 2000 * 0.02^2
    assert result.run.head[0, place, 0] == pytest.approx(44.2, rel=1e-6)


def test_a_replaced_pump_runs_today_and_not_beside_the_new_one(
    plant: Plant, duty: MakeDuty, new: Pumps
) -> None:
    case = plant(duty((0,), flow=0.15, rated=True), shutoff=(50.0, 50.0))
    case = replace(case, new_pump=replace(case.new_pump, replaces=1))
    bench = set_up(case)
    place = bench.header.rated
    # today P-1 and P-2 hold 0.075 each; with the new pump P-2 is gone; without both P-1 is alone
    assert bench.today.flow[0, place, 1:].tolist() == pytest.approx([0.075, 0.075])
    assert bench.today.conditions.runs[place].tolist() == [True, True, True]
    assert np.isinf(bench.without.flow[0, place, 1])  # alone it is past its data
    found = judged(bench, new).run
    assert np.isnan(found.flow[0, place, 2])
    assert found.conditions.runs[place].tolist() == [True, True, False]
    assert evaluate.today(bench.header).total[0, place] == pytest.approx(0.15)
    assert today(bench.header, replaced=False).conditions.runs[place].tolist() == [True, True, False]


def test_the_suction_head_of_its_own_place_adds_to_the_shutoff_pressure(plant: Plant, duty: MakeDuty) -> None:
    case = plant(duty((0, 1), flow=0.2, rated=True))
    lower = replace(case, new_pump=replace(case.new_pump, branch=Branch(suction_head=5.0)))
    before, after = (prepare(made, temperature_rise=8.0).conditions for made in (case, lower))
    # 5 m of water at 1000 kg/m3
    assert (after.suction_pressure - before.suction_pressure)[0] == pytest.approx([5 * 9806.65, 0, 0])


def test_a_bypass_takes_speed_before_the_valve_opens(plant: Plant, duty: MakeDuty, new: Pumps) -> None:
    loss = Loss((100.0,), (2.0,))
    held = replace(duty((0, 1), flow=0.2, control=Control.SPEED, rated=True), bypass=(0.03, 0.0, 0.0))
    case = with_drive(plant(held), Drive(0.5, 1.0))
    case = replace(case, new_pump=replace(case.new_pump, branch=Branch(suction=loss)))
    found = run(prepare(case, temperature_rise=8.0), new)
    place = int(np.flatnonzero(found.conditions.held)[0])
    alone = brentq(lambda h: 2 * of_installed(h) - sqrt((h - 20) / 400), 30, 50, xtol=1e-13)
    # through the pump 0.03 m3/s even before it delivers: r^2 48 - 2000 0.03^2 - 100 0.03^2 = header head
    assert found.opening_speed[0, place] == pytest.approx(sqrt((alone + 2100 * 0.03**2) / 48), rel=1e-6)
    # its minimum flow, 0.02 m3/s, is less than that already
    assert found.least_speed[0, place] == found.opening_speed[0, place]


def test_what_replaces_a_pump_is_told_beside_the_others_alone(plant: Plant, duty: MakeDuty) -> None:
    case = plant(duty((0,), flow=0.08, rated=True), shutoff=(50.0, 50.0))
    case = replace(case, new_pump=replace(case.new_pump, replaces=1))
    report = header_report(case)
    # P-1 alone holds 0.08 at 50 - 2000 * 0.08^2 = 37.2 m; with the pump that goes it is 50 - 2000 * 0.04^2
    assert report.highest_header == pytest.approx(37.2)
    assert report.naive[report.bench.header.rated].missing_head == pytest.approx(37.2)
    assert report.bench.today.header[0, report.bench.header.rated] == pytest.approx(46.8)
