"""Each criterion at its stated defaults: just inside passes, just outside does not. Figures by hand."""

from __future__ import annotations

import numpy as np
import pytest

from screener.criteria import criteria
from screener.model.finding import Outcome
from screener.screening.judge import judge

PASS, CAUTION, NOT_ASSESSED, FAIL = Outcome
NAN, INF = np.nan, np.inf
NAMES = [criterion.name for criterion in criteria()]


def run(**columns: object) -> dict:
    return {"run": columns}


def rate(**columns: object) -> dict:
    return {"ratings": columns}


def bound(**columns: object) -> dict:
    return {"bounds": columns}


def pump(**columns: object) -> dict:
    return {"pumps": columns}


def upset(value: float, duty: float) -> list[list[float]]:
    """One value in the two duties, another one wide open and after the trip."""
    return [[duty], [duty], [value], [value]]


HELD = {"conditions": {"held": (True, False, False, False)}}

ROWS = [
    # largest rise towards more flow over the shutoff head: 0.1 %
    ("continuous-rise", rate(droop=0.0009), PASS),
    ("continuous-rise", rate(droop=0.0011), FAIL),
    ("continuous-rise", rate(droop=NAN), NOT_ASSESSED),
    # of an end at 0.2 m3/s: 94.5, 95.5 %
    ("curve-end", run(flow=0.189), PASS),
    ("curve-end", run(flow=0.191), CAUTION),
    ("curve-end", run(flow=INF), FAIL),
    ("curve-end", run(flow=NAN), NOT_ASSESSED),
    ("curve-end", run(flow=0.051) | bound(start=0.05), PASS),
    ("curve-end", run(flow=0.049) | bound(start=0.05), FAIL),
    # of 0.3 m3/s asked: 99.93, 99.87 %
    ("duty-flow", run(total=0.2998), PASS),
    ("duty-flow", run(total=0.2996), FAIL),
    ("duty-flow", run(total=[[0.3, 0.3, 0.2, 0.2]]), PASS),  # wide open and a trip are no duties
    ("duty-flow", run(total=NAN), NOT_ASSESSED),
    # over 37.5 m wanted: 4.93, 5.07 %, at the rated duty only
    ("head-excess", run(header=39.35), PASS),
    ("head-excess", run(header=39.40), CAUTION),
    ("head-excess", run(header=[[38.0, 60.0, 60.0, 60.0]]), PASS),
    # 0.41 / 0.40 = 1.025; 0.41 / 0.4003 = 1.0242; limit 1.0247
    ("head-reserve", pump(diameter=0.4000), PASS),
    ("head-reserve", pump(diameter=0.4003), CAUTION),
    ("head-reserve", pump(diameter=0.40, maximum=NAN), NOT_ASSESSED),
    ("load-share", run(load_share=0.149), PASS),
    ("load-share", run(load_share=[[0.0, 0.151]]), CAUTION),
    ("load-share", run(load_share=[[0.0, NAN]]), NOT_ASSESSED),
    # minimum 0.03 m3/s, caution below 0.033
    ("minimum-flow", run(flow=0.0331), PASS),
    ("minimum-flow", run(flow=0.0329), CAUTION),
    ("minimum-flow", run(flow=0.0299), FAIL),
    ("minimum-flow", run(flow=0.0), FAIL),
    ("minimum-flow", run(flow=upset(0.01, duty=0.1)), PASS),  # duties only
    # thermal: P / (1000 * 4180 * 8) = 3.344 MW for 0.1 m3/s; here 0.0897, 0.0927, 0.1017
    ("minimum-flow", bound(thermal_power=3.0e6), PASS),
    ("minimum-flow", bound(thermal_power=3.1e6), CAUTION),
    ("minimum-flow", bound(thermal_power=3.4e6), FAIL),
    ("minimum-flow", rate(minimum_flow=NAN), NOT_ASSESSED),
    ("minimum-flow", bound(thermal_power=NAN), NOT_ASSESSED),
    ("minimum-flow", bound(thermal_power=NAN) | run(flow=0.0299), FAIL),
    ("minimum-flow", bound(minimum=NAN, thermal_power=3.4e6), FAIL),
    ("minimum-flow", bound(minimum=NAN, thermal_power=NAN) | run(flow=0.0), FAIL),
    # of 55 kW: 90.9, 91.1, 100.2 %
    ("motor-installed", run(power=50.0e3), PASS),
    ("motor-installed", run(power=50.1e3), CAUTION),
    ("motor-installed", run(power=55.1e3), FAIL),
    ("motor-installed", run(power=[90e3, 40e3, 40e3]), PASS),  # the new one has criteria of its own
    ("motor-installed", rate(motor=NAN), NOT_ASSESSED),
    # of 55 kW, wide open and after trips: 94.9, 95.1 %
    ("motor-load", run(power=52.2e3), PASS),
    ("motor-load", run(power=52.3e3), CAUTION),
    ("motor-load", run(power=upset(52.2e3, duty=54.9e3)), PASS),
    ("motor-load", run(power=[52.2e3, 90e3, 90e3]), PASS),
    ("motor-new", rate(motor=99e3), PASS),
    ("motor-new", rate(motor=101e3), FAIL),
    pytest.param("motor-new", rate(motor=INF), FAIL),
    ("motor-new", rate(motor=[NAN, 55e3, 55e3]), NOT_ASSESSED),
    # 3 m required: at least max(1.1 * 3, 3 + 0.6) = 3.6 m, caution below 1.3 * 3 = 3.9 m
    ("npsh-margin", run(npsh_available=3.91), PASS),
    ("npsh-margin", run(npsh_available=3.89), CAUTION),
    ("npsh-margin", run(npsh_available=3.61), CAUTION),
    ("npsh-margin", run(npsh_available=3.59), FAIL),
    # 10 m required: at least max(11, 10.6) m
    ("npsh-margin", run(npsh_available=11.1, npsh_required=10.0), CAUTION),
    ("npsh-margin", run(npsh_available=10.9, npsh_required=10.0), FAIL),
    # above a suction specific speed of 145: max(1.2 * 3, 3 + 1) = 4 m; max(12, 11) = 12 m
    ("npsh-margin", run(npsh_available=3.99) | rate(suction_specific_speed=144), PASS),
    ("npsh-margin", run(npsh_available=4.01) | rate(suction_specific_speed=146), PASS),
    ("npsh-margin", run(npsh_available=3.99) | rate(suction_specific_speed=146), FAIL),
    (
        "npsh-margin",
        run(npsh_available=11.9, npsh_required=10.0) | rate(suction_specific_speed=146),
        FAIL,
    ),
    # specific speed unknown: a verdict only where both limits agree
    ("npsh-margin", run(npsh_available=4.01) | rate(suction_specific_speed=NAN), PASS),
    ("npsh-margin", run(npsh_available=3.99) | rate(suction_specific_speed=NAN), NOT_ASSESSED),
    ("npsh-margin", run(npsh_available=3.59) | rate(suction_specific_speed=NAN), FAIL),
    ("npsh-margin", run(npsh_available=NAN), NOT_ASSESSED),
    ("npsh-margin", run(npsh_available=upset(3.5, duty=6.0)), FAIL),  # every state counts
    # of a best flow of 0.1 m3/s
    ("rated-flow", run(flow=0.081), PASS),
    ("rated-flow", run(flow=0.079), CAUTION),
    ("rated-flow", run(flow=0.071), CAUTION),
    ("rated-flow", run(flow=0.069), FAIL),
    ("rated-flow", run(flow=0.109), PASS),
    ("rated-flow", run(flow=0.111), CAUTION),
    ("rated-flow", run(flow=0.121), FAIL),
    ("rated-flow", run(flow=[[0.1, 0.2, 0.2], [0.2] * 3, [0.2] * 3, [0.2] * 3]), PASS),
    ("rated-flow", rate(bep_flow=NAN), NOT_ASSESSED),
    # the catalog allows 40 to 140 %, caution outside 70 to 120 %
    ("region", run(flow=0.071), PASS),
    ("region", run(flow=0.069), CAUTION),
    ("region", run(flow=0.041), CAUTION),
    ("region", run(flow=0.039), FAIL),
    ("region", run(flow=0.119), PASS),
    ("region", run(flow=0.121), CAUTION),
    ("region", run(flow=0.141), FAIL),
    ("region", run(flow=0.0), PASS),  # held shut: that is for minimum-flow
    # specific speed above 87: 80 to 115 %
    ("region", run(flow=0.081) | rate(specific_speed=88.0), PASS),
    ("region", run(flow=0.079) | rate(specific_speed=88.0), CAUTION),
    ("region", run(flow=0.079) | rate(specific_speed=86.0), PASS),
    ("region", run(flow=0.116) | rate(specific_speed=88.0), CAUTION),
    # no region stated: the largest flow of 0.15 m3/s is the bound
    ("region", run(flow=0.149) | rate(region_high=NAN), CAUTION),
    ("region", run(flow=0.151) | rate(region_high=NAN), FAIL),
    ("region", run(flow=0.05) | rate(region_low=NAN), CAUTION),
    ("region", rate(bep_flow=NAN), NOT_ASSESSED),
    ("region-upset", run(flow=0.071), PASS),
    ("region-upset", run(flow=0.069), CAUTION),
    ("region-upset", run(flow=0.119), PASS),
    ("region-upset", run(flow=0.19), CAUTION),
    ("region-upset", run(flow=upset(0.1, duty=0.19)), PASS),
    # 50 m at shutoff: 45.4 m is 10.1 %, 45.5 m 9.9 %; 38.5 m 29.9 %, 38.4 m 30.2 %
    ("rise-to-shutoff", run(head=45.4), PASS),
    ("rise-to-shutoff", run(head=45.5), FAIL),
    ("rise-to-shutoff", run(head=38.5), PASS),
    ("rise-to-shutoff", run(head=38.4), CAUTION),
    ("rise-to-shutoff", rate(shutoff=NAN), NOT_ASSESSED),
    # of 100 kW
    ("shaft-power", run(power=99.9e3), PASS),
    ("shaft-power", run(power=100.1e3), FAIL),
    ("shaft-power", pump(maximum_power=NAN), NOT_ASSESSED),
    ("shutoff-match", run(shutoff_match=[[0.049, -0.049]]), PASS),
    ("shutoff-match", run(shutoff_match=[[0.051, 0.0]]), CAUTION),
    ("shutoff-match", run(shutoff_match=[[0.0, -0.051]]), CAUTION),
    # 20 kPa + 9806.65 Pa/m * H of 1000 kPa: H = 94.8 m 949.7, 94.9 m 950.7, 99.9 m 999.7, 100 m 1000.7
    ("shutoff-pressure", rate(summit=94.8), PASS),
    ("shutoff-pressure", rate(summit=94.9), CAUTION),
    ("shutoff-pressure", rate(summit=99.9), CAUTION),
    ("shutoff-pressure", rate(summit=100.0), FAIL),
    ("shutoff-pressure", rate(allowable_pressure=510e3), FAIL),  # 50 m: 510.3 kPa
    ("shutoff-pressure", rate(allowable_pressure=511e3), CAUTION),
    ("shutoff-pressure", rate(allowable_pressure=NAN), NOT_ASSESSED),
    ("shutoff-pressure", rate(allowable_pressure=NAN, summit=100.0), FAIL),  # the header alone is enough
    # of 50 m; the tolerances of both pumps are 3 %: 3.0 m
    ("spare-head", run(spare_head=3.05), PASS),
    ("spare-head", run(spare_head=2.95), CAUTION),
    ("spare-head", run(spare_head=2.55) | rate(head_tolerance=NAN), PASS),  # unknown: 5 %, 2.5 m
    ("spare-head", run(spare_head=2.45) | rate(head_tolerance=NAN), CAUTION),
    # 50 m over the header: 48.5 m 3.09 %, 48.6 m 2.88 %, 50.1 m -0.2 %
    ("start", run(start_header=48.5), PASS),
    ("start", run(start_header=48.6), CAUTION),
    ("start", run(start_header=50.1), FAIL),
    ("start", run(start_header=47.6) | rate(head_tolerance=NAN), PASS),  # unknown: 5 %; 5.04, 4.82 %
    ("start", run(start_header=47.7) | rate(head_tolerance=NAN), CAUTION),
    ("start", run(start_header=NAN), NOT_ASSESSED),
    ("suction-specific-speed", pump(suction_specific_speed=212.9), PASS),
    ("suction-specific-speed", pump(suction_specific_speed=213.1), CAUTION),
    ("trim-from-test", pump(from_test=0.049), PASS),
    ("trim-from-test", pump(from_test=0.051), CAUTION),
    # type number n_q / 52.919: 1.4985, 1.5023; only where the rule with the inlet diameter cuts
    ("trim-law", pump(from_test=0.02, specific_speed=79.3), PASS),
    ("trim-law", pump(from_test=0.02, specific_speed=79.5), CAUTION),
    ("trim-law", pump(from_test=0.02, specific_speed=NAN), NOT_ASSESSED),
    ("trim-law", pump(from_test=0.0, specific_speed=79.5), PASS),
    ("trim-law", pump(from_test=0.02, specific_speed=79.5, law_inlet=0.0), PASS),
    # of 0.41 m; offered down to 0.33 m, which is above 80 %, 0.328 m
    ("trim-range", pump(diameter=0.41), PASS),
    ("trim-range", pump(diameter=0.33), PASS),
    ("trim-range", pump(diameter=0.3295), FAIL),
    ("trim-range", pump(diameter=0.4105), FAIL),
    # no minimum stated: 75 % is 0.3075 m, caution below 0.328 m
    ("trim-range", pump(diameter=0.3285, minimum=NAN), PASS),
    ("trim-range", pump(diameter=0.3275, minimum=NAN), CAUTION),
    # from the minimum flow on, 4.9 or 5.1 % of the speed is left
    ("speed-range", run(least_speed=0.949, opening_speed=0.9) | HELD, PASS),
    ("speed-range", run(least_speed=0.951, opening_speed=0.9) | HELD, CAUTION),
    ("speed-range", run(least_speed=NAN, opening_speed=0.9) | HELD, NOT_ASSESSED),
    ("speed-range", run(least_speed=0.951, opening_speed=0.9), PASS),  # its speed holds no flow
    ("trim-range", pump(diameter=0.308, minimum=NAN), CAUTION),
    ("trim-range", pump(diameter=0.307, minimum=NAN), FAIL),
    # specific speed 48 to 77: caution below 90 %, 0.369 m
    ("trim-range", pump(diameter=0.3695, specific_speed=50.0), PASS),
    ("trim-range", pump(diameter=0.3685, specific_speed=50.0), CAUTION),
    ("trim-range", pump(diameter=0.3685, specific_speed=78.0), PASS),
    ("trim-range", pump(diameter=NAN, maximum=NAN, minimum=NAN), PASS),  # nothing is cut
    # 50 m at shutoff: 0.08, 0.12 %
    ("two-flow-range", rate(header_summit=50.04), PASS),
    ("two-flow-range", rate(header_summit=50.06), CAUTION),
]


@pytest.mark.parametrize(("name", "changes", "expected"), ROWS)
def test_outcome(make_run, make_today, limits, name: str, changes: dict, expected: Outcome) -> None:
    found = judge(make_run(**changes), make_today(), limits)
    assert Outcome(found.outcome[0, NAMES.index(name)]) == expected


def test_nothing_is_said_about_a_run_well_inside(make_run, make_today, limits) -> None:
    outcome = judge(make_run(), make_today(), limits).outcome[0]
    assert [name for name, found in zip(NAMES, outcome, strict=True) if found != PASS] == []


def test_the_table_has_every_criterion() -> None:
    assert {getattr(row, "values", row)[0] for row in ROWS} == set(NAMES)


def test_pumps_that_stand_still_are_not_judged(make_run, make_today, limits) -> None:
    runs = np.ones((4, 3), bool)
    runs[:, 2] = False
    still = {"conditions": {"runs": runs}, "run": {"flow": [0.1, 0.1, NAN], "power": [40e3, 40e3, NAN]}}
    outcome = judge(make_run(**still), make_today(), limits).outcome[0]
    for name in ("curve-end", "minimum-flow", "motor-installed", "npsh-margin", "region", "region-upset"):
        assert outcome[NAMES.index(name)] == PASS


def test_duties_without_the_new_pump_are_not_judged(make_run, make_today, limits) -> None:
    runs = np.ones((4, 3), bool)
    runs[1, 0] = False
    short = {"conditions": {"runs": runs}, "run": {"flow": [[0.1], [0.01], [0.1], [0.1]]}}
    outcome = judge(make_run(**short), make_today(), limits).outcome[0]
    for name in ("duty-flow", "minimum-flow", "region", "start"):
        assert outcome[NAMES.index(name)] == PASS
