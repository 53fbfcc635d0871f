"""Which models can meet the duties at all: every reason, the smallest diameter, the speed at load."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve
from screener.model.arrays import frozen
from screener.model.case import Branch, Drive, NewPump
from screener.model.curves import PumpTable
from screener.screening.reach import Need, Reason, reach, smallest_diameters, speed_ratios

NAN = np.nan


def curve(diameter: float, shutoff: float, *, bend: float = 4000.0, start: float = 0.0, end: float = 0.08):
    flow = np.linspace(start, end, 9)
    missing = frozen(np.full(9, NAN))
    return TestedCurve(
        diameter, frozen(flow), frozen(shutoff - bend * flow**2), missing, missing, missing, NAN
    )


def entry(*curves: TestedCurve, speed: float = 1450.0, **figures: float) -> Entry:
    return Entry("m", "", "", "", speed, curves, **figures)


def place(frequency: float = NAN, slip: float = NAN) -> NewPump:
    return NewPump(1, frequency, slip, Branch(), 0.001, "IEC")


NEED = Need(0.05, 30.0)  # every curve below falls by 4000 * 0.05^2 = 10 m to there

REASONS = {
    Reason.REACHES: entry(curve(0.2, 50.0), minimum=0.16),
    Reason.HEAD_TOO_LOW: entry(curve(0.2, 39.0)),
    Reason.CURVE_TOO_SHORT: entry(curve(0.2, 50.0, end=0.04)),
    Reason.TOO_LARGE: entry(curve(0.2, 60.0), minimum=0.19),  # 0.95^2 * 60 - 10 = 44.15 m > 37.5 m
    Reason.WRONG_SPEED: entry(curve(0.2, 50.0), speed=1180.0),  # at 50 Hz: 1500 less 21 %
}


def test_each_reason() -> None:
    found = reach(compile_table(list(REASONS.values())), [NEED], place(frequency=50))
    assert [Reason(code) for code in found.reason] == list(REASONS)
    assert [*REASONS, Reason.TOO_VISCOUS] == list(Reason)
    # at the largest diameter: given, and what the duty needs
    np.testing.assert_allclose(found.head, [40, 29, NAN, 50, 40], rtol=1e-12)
    assert found.needed.tolist() == [30.0] * 5
    assert found.flow.tolist() == [0.05] * 5
    np.testing.assert_allclose(found.end, [0.08, 0.08, 0.04, 0.08, 0.08])
    assert np.isfinite(found.wanted).tolist() == [True] + [False] * 4


def test_the_first_thing_in_the_way_is_named() -> None:
    # both too low and of a wrong speed; too short where it matters, too low elsewhere
    low_and_wrong = entry(curve(0.2, 39.0), speed=1180.0)
    short = entry(curve(0.2, 50.0, end=0.04))
    table = compile_table([low_and_wrong, short])
    found = reach(table, [Need(0.03, 60.0), NEED], place(frequency=50))
    assert [Reason(code) for code in found.reason] == [Reason.WRONG_SPEED, Reason.HEAD_TOO_LOW]


def test_the_duty_with_the_least_head_to_spare_is_shown() -> None:
    table = compile_table([entry(curve(0.2, 50.0))])
    found = reach(table, [Need(0.02, 30.0), Need(0.05, 36.0), Need(0.06, 30.0)], place())
    # given 48.4, 40, 35.6: 161, 111 and 119 % of what is needed
    assert (found.flow[0], found.needed[0], found.head[0]) == (0.05, 36.0, pytest.approx(40.0))


def test_the_smallest_diameter_of_one_test_in_closed_form() -> None:
    # H = 50 (D/0.2)^2 - 4000 Q^2: 30 m at 0.05 m3/s from D = 0.2 * sqrt(40 / 50) on
    found = reach(compile_table([REASONS[Reason.REACHES]]), [NEED], place())
    assert found.wanted[0] == pytest.approx(0.2 * 0.8**0.5, rel=1e-7)
    assert found.at_most[0] == 0.2


def test_the_smallest_diameter_against_a_scan() -> None:
    small, large = curve(0.18, 40.0, bend=3500.0), curve(0.2, 50.0, bend=4200.0, end=0.09)
    table = compile_table([entry(small, large, minimum=0.15, maximum=0.21)])
    duties = [Need(0.05, 32.0), Need(0.03, 36.5), Need(0.02, 37.0)]

    def given(diameter: float, flow: float) -> float:
        """Both tests brought to the diameter, mixed in diameter."""
        low, high = diameter / 0.18, diameter / 0.2
        share = (diameter - 0.18) / 0.02
        return (1 - share) * (40 * low**2 - 3500 * flow**2) + share * (50 * high**2 - 4200 * flow**2)

    scan = np.arange(0.18, 0.2, 1e-6)
    least = next(d for d in scan if all(given(d, n.flow) >= n.head for n in duties))
    assert 0.181 < least < 0.199
    assert reach(table, duties, place()).wanted[0] == pytest.approx(least, abs=2e-6)


def test_the_smallest_diameter_is_never_under_what_is_offered() -> None:
    table = compile_table([entry(curve(0.2, 50.0), minimum=0.19)])  # 0.95^2 * 50 - 10 = 35.1 m
    assert reach(table, [NEED], place()).wanted[0] == pytest.approx(0.19, rel=1e-8)


def test_nothing_asked_is_always_reached() -> None:
    table = compile_table([entry(curve(0.2, 50.0), minimum=0.16), entry(curve(NAN, 50.0))])
    for needs in ([], [Need(0.0, 30.0)], [Need(NAN, NAN)]):
        found = reach(table, needs, place())
        assert [Reason(code) for code in found.reason] == [Reason.REACHES] * 2
        np.testing.assert_allclose(found.wanted, [0.16, NAN], rtol=1e-8)


def test_a_model_without_diameters_is_looked_at_as_it_is() -> None:
    table = compile_table([entry(curve(NAN, 45.0)), entry(curve(NAN, 39.0)), entry(curve(NAN, 60.0))])
    found = reach(table, [NEED], place())
    assert [Reason(code) for code in found.reason] == [
        Reason.REACHES,
        Reason.HEAD_TOO_LOW,
        Reason.TOO_LARGE,
    ]
    assert np.isnan(found.wanted).all()


def test_a_speed_above_the_curve_reaches_further() -> None:
    # 39 m at 1450 rpm are 39 * (1485/1450)^2 = 40.9 m at 1485; less 4000 * 0.05^2
    table = compile_table([REASONS[Reason.HEAD_TOO_LOW]])
    found = reach(table, [NEED], place(frequency=50, slip=0.01))
    assert Reason(found.reason[0]) == Reason.REACHES
    assert found.head[0] == pytest.approx(39 * (1485 / 1450) ** 2 - 10)


def test_without_a_stated_minimum_three_quarters_are_looked_at() -> None:
    table = compile_table([entry(curve(0.2, 50.0)), entry(curve(0.2, 50.0), minimum=0.18)])
    np.testing.assert_allclose(smallest_diameters(table), [0.15, 0.18])


def speeds(*speed: float) -> PumpTable:
    return compile_table([entry(curve(0.2, 50.0), speed=n) for n in speed])


@pytest.mark.parametrize(
    ("frequency", "speed", "runs", "at_two_percent"),
    [
        (50, 1450.0, True, 1470.0),  # 4 poles
        (50, 1500.0, True, 1470.0),  # a curve at synchronous speed
        (50, 1351.0, True, 1470.0),  # 9.9 % below
        (50, 1349.0, False, 1349.0),
        (50, 1750.0, False, 1750.0),  # a pump for 60 Hz
        (50, 2900.0, True, 2940.0),
        (50, 980.0, True, 980.0),
        (50, 735.0, True, 735.0),
        (50, 3500.0, False, 3500.0),  # above 2 poles
        (60, 1750.0, True, 1764.0),
        (60, 1450.0, False, 1450.0),
        (60, 3550.0, True, 3528.0),
        (60, 1180.0, True, 1176.0),
        (NAN, 1234.0, True, 1234.0),  # no supply stated: as the curve
    ],
)
def test_the_speed_at_load(frequency: float, speed: float, runs: bool, at_two_percent: float) -> None:
    ratio, known = speed_ratios(speeds(speed), place(frequency=frequency))
    assert (ratio[0], known[0]) == (1.0, runs)  # no slip stated: the curve's own speed
    ratio, known = speed_ratios(speeds(speed), place(frequency=frequency, slip=0.02))
    assert (ratio[0] * speed, known[0]) == (pytest.approx(at_two_percent), runs)


def test_a_pump_of_variable_speed_may_run_faster_or_slower() -> None:
    # 39 m at shutoff is too low at its speed; 5 % faster it gives 39 * 1.1025 - 10 = 33.0 m of the 30
    table = compile_table([REASONS[Reason.HEAD_TOO_LOW], REASONS[Reason.TOO_LARGE]])
    drive = Drive(lowest=0.8, highest=1.05)
    held = Need(0.05, 30.0, held=True)
    varied = reach(table, [held], replace(place(), drive=drive))
    assert [Reason(code) for code in varied.reason] == [Reason.REACHES, Reason.REACHES]
    fixed = reach(table, [NEED], replace(place(), drive=drive))  # that duty is throttled
    assert [Reason(code) for code in fixed.reason] == [Reason.HEAD_TOO_LOW, Reason.TOO_LARGE]


def test_a_range_of_the_model_narrows_that_of_the_drive() -> None:
    drive, held = Drive(lowest=0.8, highest=1.05), Need(0.05, 30.0, held=True)
    table = compile_table([replace(REASONS[Reason.HEAD_TOO_LOW], lowest_speed=1200.0, highest_speed=1450.0)])
    assert reach(table, [held], replace(place(), drive=drive)).reason[0] == Reason.HEAD_TOO_LOW


def test_a_viscous_liquid_asks_for_more_water_head() -> None:
    # BEP 180 m3/h, 40 m at 1450 rpm and 100 cSt: B = 16.5 * 10 * 40^.0625 / (180^.375 * 1450^.25) = 4.80,
    # C_Q = C_BEP-H = 2.71^(-0.165 * 0.6815^3.15) = 0.9521
    flow = np.linspace(0, 0.08, 9)
    eta = frozen(0.8 * (1 - ((flow - 0.05) / 0.05) ** 2))
    given = replace(curve(0.2, 50.0), efficiency=eta, bep_flow=0.05)
    table = compile_table([entry(given, minimum=0.16)])
    factor = 2.71 ** (-0.165 * np.log10(165 * 40**0.0625 / (180**0.375 * 1450**0.25)) ** 3.15)
    water_flow = 0.05 / factor
    limit = (1 - (1 - factor) * (water_flow / 0.05) ** 0.75) * (50 - 4000 * water_flow**2)
    for head, reason in ((0.999 * limit, Reason.REACHES), (1.001 * limit, Reason.HEAD_TOO_LOW)):
        found = reach(table, [Need(0.05, head, viscosity=100e-6)], place())
        assert found.reason[0] == reason
    assert reach(table, [Need(0.05, 20.0, viscosity=5000e-6)], place()).reason[0] == Reason.TOO_VISCOUS


def test_a_table_under_another_trim_law_is_refused() -> None:
    table = compile_table([REASONS[Reason.REACHES]])
    with pytest.raises(ValueError, match="trims by 'equal exponents'"):
        reach(table, [NEED], replace(place(), trim_law="equal exponents"))
