"""Every kind of change on a small header in closed form, and applied by hand to the case.

Two pumps H = H0 - 1000 Q2 on a header without branch losses give x and y with x + y = Q and
x2 - y2 = (H0x - H0y) / 1000. So the flow under which a pump of least flow y must not be run is
y + sqrt(y2 + dH0 / 1000), and a bypass must take back what is missing of that. All [D] by that.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import sqrt

import numpy as np
import pytest

from screener.changes.smallest import HALVINGS, STEPS, Change, ChangeKind, smallest_changes
from screener.hydraulics.similarity import stack, take
from screener.hydraulics.wear import uniform
from screener.model.case import Case, Duty
from screener.model.finding import Verdict
from screener.screening.assess import judged, set_up
from screener.screening.one import Explained

DAY, NIGHT, LEAST = 0.19, 0.08, 0.035
GRID = STEPS * 2**HALVINGS


def changes(explained: Explained, *, first: bool = False) -> list[Change]:
    one = explained.judged
    found = smallest_changes(
        explained.bench, explained.table, one.run.pumps, one.candidates.findings, first=first
    )
    return found[0]


def only(found: list[Change], kind: ChangeKind) -> Change:
    (one,) = (change for change in found if change.kind == kind)
    return one


def verdict(explained: Explained, case: Case) -> Verdict:
    return Verdict(int(judged(set_up(case), explained.judged.run.pumps).candidates.verdict[0]))


def with_night(case: Case, **of: object) -> Case:
    day, night = case.duties
    return replace(case, duties=(day, replace(night, **of)))


@pytest.fixture(scope="module")
def weak(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> Explained:
    """A new pump of 48.5 m beside one of 50 m: at night it stands under its minimum flow."""
    return explained(case_of(50.0), 48.5)


@pytest.fixture(scope="module")
def of_weak(weak: Explained) -> list[Change]:
    return changes(weak)


@pytest.fixture(scope="module")
def strong(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> Explained:
    """A new pump of 52 m beside two of 50 m: at night they stand under theirs."""
    return explained(case_of(50.0, 50.0, night=0.12), 52.0)


@pytest.fixture(scope="module")
def of_strong(strong: Explained) -> list[Change]:
    return changes(strong)


def test_the_easiest_comes_first(of_weak: list[Change]) -> None:
    assert [change.kind for change in of_weak] == [
        ChangeKind.FEWER_INSTALLED,
        ChangeKind.WITHOUT_NEW,
        ChangeKind.LOWEST_FLOW,
        ChangeKind.BYPASS,
    ]
    assert all(change.verdict == Verdict.ACCEPTED for change in of_weak)


def test_the_lowest_flow_is_the_one_of_the_closed_form(weak: Explained, of_weak: list[Change]) -> None:
    change = only(of_weak, ChangeKind.LOWEST_FLOW)
    step = (DAY - NIGHT) / GRID
    exact = LEAST + sqrt(LEAST**2 + 1.5 / 1000)
    assert (change.duty, change.pump) == (1, -1)
    assert exact <= change.value <= exact + step
    case = weak.bench.header.case
    assert verdict(weak, with_night(case, flow=change.value)) == Verdict.ACCEPTED
    assert verdict(weak, with_night(case, flow=change.value - step)) == Verdict.REJECTED


def test_the_bypass_takes_back_what_is_missing_of_that_flow(weak: Explained, of_weak: list[Change]) -> None:
    change = only(of_weak, ChangeKind.BYPASS)
    step = LEAST / GRID
    exact = LEAST + sqrt(LEAST**2 + 1.5 / 1000) - NIGHT
    assert (change.duty, change.pump) == (1, 0)
    assert exact <= change.value <= exact + step
    case = weak.bench.header.case
    assert verdict(weak, with_night(case, bypass=(change.value, 0.0))) == Verdict.ACCEPTED
    assert verdict(weak, with_night(case, bypass=(change.value - step, 0.0))) == Verdict.REJECTED


def test_identical_pumps_get_the_same_bypass(strong: Explained, of_strong: list[Change]) -> None:
    """Both installed pumps at their minimum, the new one 2 m above: the rest is taken back in halves."""
    change = only(of_strong, ChangeKind.BYPASS)
    exact = (2 * LEAST + sqrt(LEAST**2 + 2 / 1000) - 0.12) / 2
    assert (change.duty, change.pump) == (1, 1)
    assert exact <= change.value <= exact + LEAST / GRID
    case = strong.bench.header.case
    assert verdict(strong, with_night(case, bypass=(0.0, change.value, change.value))) == Verdict.ACCEPTED
    assert verdict(strong, with_night(case, bypass=(0.0, change.value, 0.0))) == Verdict.REJECTED


def test_a_bypass_that_the_duty_has_is_kept(weak: Explained) -> None:
    """A little at P-1 lowers the header, and so the bypass that the new pump needs."""
    case = with_night(weak.bench.header.case, bypass=(0.0, 0.004))
    again = replace(weak, bench=set_up(case), judged=judged(set_up(case), weak.judged.run.pumps))
    change = only(changes(again), ChangeKind.BYPASS)
    assert verdict(weak, with_night(case, bypass=(change.value, 0.004))) == Verdict.ACCEPTED
    less = change.value - LEAST / GRID
    assert verdict(weak, with_night(case, bypass=(less, 0.004))) == Verdict.REJECTED
    exact = LEAST + sqrt(LEAST**2 + 1.5 / 1000) - NIGHT - 0.004
    assert exact <= change.value <= exact + LEAST / GRID


@pytest.mark.parametrize(
    ("kind", "night"),
    [
        (ChangeKind.FEWER_INSTALLED, {"running": ((),)}),
        (ChangeKind.WITHOUT_NEW, {"new": (False,)}),
    ],
)
def test_another_combination_passes_when_it_is_asked_for(
    weak: Explained, of_weak: list[Change], kind: ChangeKind, night: dict[str, object]
) -> None:
    change = only(of_weak, kind)
    assert (change.duty, change.pump) == (1, 1 if kind == ChangeKind.FEWER_INSTALLED else 0)
    assert verdict(weak, with_night(weak.bench.header.case, **night)) == Verdict.ACCEPTED


def test_a_pump_that_leaves_does_not_help_to_meet_a_duty(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    """P-1 alone gives sqrt(30 / (1000 + 222)) = 0.157 m3/s wide open, not 0.16; P-2 is replaced."""
    case = case_of(50.0, 50.0)
    day, night = (replace(duty, running=((0,),)) for duty in case.duties)
    two = replace(case, duties=(replace(day, flow=0.24), replace(night, flow=0.16)))
    leaves = replace(two, new_pump=replace(case.new_pump, replaces=1))
    beside = replace(leaves, duties=(leaves.duties[0], replace(leaves.duties[1], flow=0.15)))
    kinds = [
        {change.kind for change in changes(explained(changed, 48.5, minimum=0.08))}
        for changed in (leaves, beside)
    ]
    assert [ChangeKind.WITHOUT_NEW in found for found in kinds] == [False, True]


def test_diameters_that_pass_are_told_as_a_range(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    """At night neither pump is under 0.035 while the shutoff heads differ by at most 0.8 m: 52 m (D/400)2."""
    found = explained(case_of(50.0), 52.0)
    change = only(changes(found), ChangeKind.DIAMETER)
    low, high = 400 * sqrt(49.2 / 52), 400 * sqrt(50.8 / 52)
    assert change.value == pytest.approx(np.ceil(low) / 1000)
    assert change.to == pytest.approx(np.floor(high) / 1000)
    for diameter, expected in ((0.390, 0), (0.395, 0), (0.389, 2), (0.396, 2)):
        assert explained(found.bench.header.case, 52.0, diameter).judged.candidates.verdict[0] == expected


def test_a_motor_one_size_up_is_told_where_only_the_motor_fails(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    """Wide open P-1 takes 25 kW and 250 kW for each m3/s: 50.6 kW at 0.1025 m3/s, 55 kW by IEC."""
    case = case_of(50.0, motor=45e3, end=0.13)  # today it runs past its end, so that nothing is known of it
    found = explained(case, 48.5, minimum=0.02)
    (change,) = changes(found)
    assert (change.kind, change.pump, change.value) == (ChangeKind.MOTOR, 1, 55e3)
    (pump,) = case.installed
    for motor, expected in ((55e3, Verdict.ACCEPTED), (45e3, Verdict.REJECTED)):
        assert verdict(found, replace(case, installed=(replace(pump, motor=motor),))) == expected


@pytest.fixture(scope="module")
def worn(case_of: Callable[..., Case], explained: Callable[..., Explained]) -> Explained:
    """P-1 has lost 0.4 % of its head and P-2 4 %: in the only duty P-2 is under its minimum flow."""
    case = case_of(50.0, 50.0, night=0.14)
    limits = {name: dict(values) for name, values in case.limits.items()}
    limits["rated-flow"]["fail_below"], limits["rise-to-shutoff"]["fail_below"] = 0.4, 0.0
    case = replace(case, duties=(replace(case.duties[1], rated=True),), limits=limits)
    loss = np.array([0.004, 0.04])
    installed = tuple(replace(p, head_loss=float(x)) for p, x in zip(case.installed, loss, strict=True))
    pumps = uniform(case.pumps, loss=loss)
    return explained(replace(case, installed=installed, pumps=pumps, as_new=case.pumps), 50.0)


def test_one_pump_restored_is_told_before_all_of_them(worn: Explained) -> None:
    found = [c for c in changes(worn) if c.kind in (ChangeKind.ONE_RESTORED, ChangeKind.RESTORED)]
    assert [(c.kind, c.pump) for c in found] == [(ChangeKind.ONE_RESTORED, 2), (ChangeKind.RESTORED, -1)]
    case = worn.bench.header.case
    first, second = case.installed

    def with_new(row: int, *installed: object) -> Case:
        rows = [np.array([0]), np.array([1])]
        both = [take(case.as_new if place == row else case.pumps, rows[place]) for place in (0, 1)]
        return replace(case, installed=installed, pumps=stack(both))

    assert verdict(worn, with_new(1, first, replace(second, head_loss=0.0))) == Verdict.ACCEPTED
    assert verdict(worn, with_new(0, replace(first, head_loss=0.0), second)) == Verdict.REJECTED


def test_the_only_worn_pump_restored_is_not_told_twice(worn: Explained) -> None:
    case = worn.bench.header.case
    first, second = case.installed
    alone = replace(
        case,
        installed=(replace(first, head_loss=0.0), second),
        pumps=stack([take(case.as_new, np.array([0])), take(case.pumps, np.array([1]))]),
    )
    again = replace(worn, bench=set_up(alone), judged=judged(set_up(alone), worn.judged.run.pumps))
    kinds = [change.kind for change in changes(again)]
    assert kinds.count(ChangeKind.ONE_RESTORED) == 1
    assert ChangeKind.RESTORED not in kinds


def test_nothing_is_told_of_a_pump_that_passes(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    assert changes(explained(case_of(50.0), 50.0)) == []


def test_nothing_is_told_where_two_duties_fail(
    case_of: Callable[..., Case], explained: Callable[..., Explained]
) -> None:
    """Under its minimum flow at night and in another duty like it: no single change helps both."""
    case = case_of(50.0)
    twice: tuple[Duty, ...] = (*case.duties, replace(case.duties[1], name="dawn", flow=0.079))
    assert changes(explained(replace(case, duties=twice), 48.5)) == []


def test_the_first_that_is_accepted_will_do(weak: Explained, of_weak: list[Change]) -> None:
    found = changes(weak, first=True)
    assert found[0].kind == of_weak[0].kind
    assert ChangeKind.LOWEST_FLOW not in [change.kind for change in found]


def test_several_candidates_are_looked_at_side_by_side(weak: Explained, of_weak: list[Change]) -> None:
    """One that passes, and the weak one twice: each has its own list."""
    table = weak.table
    pumps = stack([replace(weak.judged.run.pumps, minimum_flow=np.array([x])) for x in (0.02, 0.035, 0.036)])
    findings = judged(weak.bench, pumps).candidates.findings
    passing, same, more = smallest_changes(weak.bench, table, pumps, findings)
    assert passing == []
    flow = only(same, ChangeKind.LOWEST_FLOW).value
    assert flow == only(of_weak, ChangeKind.LOWEST_FLOW).value
    exact = 0.036 + sqrt(0.036**2 + 1.5 / 1000)
    assert exact <= only(more, ChangeKind.LOWEST_FLOW).value <= exact + (DAY - NIGHT) / GRID
