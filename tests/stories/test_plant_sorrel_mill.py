"""The demo plant whose common suction gives way: boiler feed, two pumps installed and a third to come.

Expectations [D] come from the catalog's printed points by splines and brentq of scipy, from the losses and
levels written in the case and repeated below, and from density and vapour pressure of IAPWS-97 by `iapws`.
Flows in m3/h, heads in m.
"""

from __future__ import annotations

import pytest
from iapws import IAPWS97

GRAVITY = 9.80665
WATER = IAPWS97(T=273.15 + 104, x=0)
SYSTEM = 64 / 216**2
SUCTION = 5.0 / 216**2
INLET = 0.1 / 75**2
BRANCH = INLET + 2.0 / 75**2
MINIMUM = 25
# standard atmosphere of ISO 2533 at 60 m [1]
AIR = 101325 * (1 - 2.25577e-5 * 60) ** 5.25588
DUTIES = {"both boilers": 216, "day": 160, "night": 84}
FIRM = 3e-3  # of a flow: points are printed to 0.1 m of about 500 m, and a spline is not the tool's cubic


def metres(pressure):
    return pressure / (WATER.rho * GRAVITY)


STATIC = 15.0 + metres(37.5e5 - 0.16e5)


def system_flow(head):
    return (max(head - STATIC, 0) / SYSTEM) ** 0.5


def npsh_available(total, each):
    at_rest = metres(AIR + 0.16e5 - WATER.P * 1e6) + 11.1
    return at_rest - SUCTION * total**2 - INLET * each**2


@pytest.fixture(scope="module")
def plant(demo_of):
    return demo_of("sorrel-mill")


@pytest.fixture(scope="module")
def feed_pump(printed):
    return printed("sorrel-mill", "80-200-2 R", 211, ratio=2965 / 2960, loss=BRANCH)


@pytest.fixture(scope="module")
def candidate(printed):
    """One of the candidates that were tested at one diameter only, trimmed by the affinity laws."""
    tested = {"80-200-2 K": 215, "80-215-2 J": 228, "80-225-2 M": 236, "80-215-2 N": 230}

    def trimmed(name, diameter):
        return printed("sorrel-mill", name, tested[name], cut=diameter / tested[name], loss=BRANCH)

    return trimmed


def test_counts_and_verdicts(plant):
    counts = plant("shortlist")["counts"]
    assert plant.codes["shortlist",] == 0
    assert counts["models"] == 36
    assert (counts["accepted"], counts["conditional"], counts["rejected"]) == (7, 2, 23)
    assert counts["cannot_reach"] == {"head too low": 4}


def test_pair_today(plant, state_of, feed_pump, meet):
    header = meet([feed_pump] * 2, system_flow, top=560)
    open_ = state_of(plant("header"), "both boilers, wide open", of="today")
    assert open_["header_head"] == pytest.approx(header, rel=1e-4)
    assert open_["flows"]["FP-1"] == pytest.approx(feed_pump.flow(header), rel=FIRM)


def test_true_duty_of_the_new_pump(plant, feed_pump):
    (needed,) = (row for row in plant("header")["requirement"] if row["rated"])
    header = STATIC + SYSTEM * 216**2
    flow = 216 - 2 * feed_pump.flow(header)
    assert needed["header_head"] == pytest.approx(header, abs=0.02)
    assert needed["flow"] == pytest.approx(flow, rel=FIRM)
    assert needed["head"] == pytest.approx(header + BRANCH * flow**2, abs=0.02)
    assert needed["missing_flow_today"] < 0.75 * flow


def test_suction_gives_way(plant, state_of, feed_pump, reads):
    """NPSH available over required: 1.60 with two at 150, 1.15 with three at 216, less wide open."""
    explained = plant("explain", "80-215-2 J")
    answers = {
        "1.60": state_of(plant("header"), "one boiler", of="today"),
        "1.15": state_of(explained, "both boilers"),
        "1.147": state_of(explained, "both boilers, wide open"),
    }
    for ratio, state in answers.items():
        pump = state["pumps"]["FP-1"]
        total, each = state["total_flow"], pump["flow"]
        assert pump["npsh_available"] == pytest.approx(npsh_available(total, each), abs=0.02)
        assert pump["npsh_required"] == pytest.approx(feed_pump.npsh_required(each), rel=FIRM)
        assert reads(pump["npsh_available"] / pump["npsh_required"], ratio)
    pair = answers["1.60"]["pumps"]["FP-1"]["npsh_available"]
    three = answers["1.15"]["pumps"]["FP-1"]["npsh_available"]
    assert pair - three == pytest.approx(SUCTION * (216**2 - 150**2), abs=0.05)


@pytest.mark.parametrize("name", ["80-200-2 K", "80-215-2 J", "80-215-2 N"])
def test_flows_in_every_duty(plant, state_of, feed_pump, candidate, meet, name):
    explained = plant("explain", name)
    new = candidate(name, explained["diameter"])
    for duty, demand in DUTIES.items():
        state = state_of(explained, duty)
        header = meet([new, feed_pump, feed_pump], lambda _, demand=demand: demand, top=640)
        assert state["header_head"] == pytest.approx(header, rel=2e-4)
        assert state["flows"]["new"] == pytest.approx(new.flow(header), abs=0.6)
        assert state["flows"]["FP-1"] == pytest.approx(feed_pump.flow(header), abs=0.3)


def test_low_candidate_is_held_shut_at_night(plant, feed_pump, candidate, meet, findings_of, reads):
    explained = plant("explain", "80-200-2 K")
    header = meet([feed_pump] * 2, lambda _: 84, top=560)
    shutoff = candidate("80-200-2 K", explained["diameter"]).head(0)
    failed = findings_of(explained, "fail")
    assert set(failed) == {"minimum-flow", "rise-to-shutoff", "start"}
    assert (failed["minimum-flow"]["pump"], failed["minimum-flow"]["where"]) == ("new", "night")
    assert failed["minimum-flow"]["observed"] == 0
    assert failed["start"]["observed"] == pytest.approx(100 * (shutoff / header - 1), abs=0.02)
    assert reads(failed["start"]["observed"], "-2.9")
    (need,) = explained["bypasses"]["pumps"]
    assert (need["duty"], need["pump"], need["bypass"]) == ("night", "new", MINIMUM)  # all of its minimum
    assert need["delivers_nothing"]


def test_high_candidate_pushes_the_installed_below_their_minimum(
    plant, candidate, feed_pump, meet, findings_of
):
    explained = plant("explain", "80-215-2 N")
    new = candidate("80-215-2 N", explained["diameter"])
    header = meet([new, feed_pump, feed_pump], lambda _: 84, top=640)
    failed = findings_of(explained, "fail")
    assert set(failed) == {"minimum-flow", "region"}
    small = failed["minimum-flow"]
    assert (small["pump"], small["where"]) == ("FP-1", "night")
    assert small["observed"] == pytest.approx(100 * feed_pump.flow(header) / MINIMUM, abs=1)
    assert new.flow(header) > 1.5 * MINIMUM
    header = feed_pump.head(MINIMUM) - BRANCH * MINIMUM**2  # with each of them kept at its minimum
    back = (2 * MINIMUM + new.flow(header) - 84) / 2
    needs = {need["pump"]: need["bypass"] for need in explained["bypasses"]["pumps"]}
    assert needs == pytest.approx({"FP-1": back, "FP-2": back}, abs=0.6)


def test_wide_open_a_candidate_takes_the_npsh_of_the_others(plant, candidate, feed_pump, meet, findings_of):
    """80-225-2 M is flat and cut little: wide open the total rises, and the installed lose their margin."""
    (row,) = (row for row in plant("shortlist")["rejected"] if row["pump"] == "80-225-2 M")
    failed = findings_of(row, "fail")
    assert set(failed) == {"npsh-margin"}
    margin = failed["npsh-margin"]
    assert (margin["pump"], margin["where"]) == ("FP-1", "both boilers, wide open")
    new = candidate("80-225-2 M", row["diameter"])
    header = meet([new, feed_pump, feed_pump], system_flow, top=560)
    each = feed_pump.flow(header)
    required = feed_pump.npsh_required(each)
    assert margin["observed"] == pytest.approx(
        npsh_available(system_flow(header), each) / required, abs=0.005
    )
    assert margin["limit"] == pytest.approx(1 + 0.6 / required, abs=0.002)  # ANSI/HI 9.6.1 [1]
    assert margin["observed"] < margin["limit"]


def test_most_efficient_is_the_one_held_shut(plant):
    found = plant("shortlist")
    judged = found["accepted"] + found["conditional"] + found["rejected"]
    best = max(judged, key=lambda row: row["efficiency_at_duty"] or 0)
    assert (best["pump"], best["verdict"]) == ("80-200-2 K", "rejected")
    assert found["accepted"][0]["pump"] == "80-200-2 J"
