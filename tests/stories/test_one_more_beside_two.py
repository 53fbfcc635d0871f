"""Two pumps run on a header and a third is to be added: four candidates that a data sheet cannot tell apart.

Every figure was computed independently from the closed forms below [D]. Flows in m3/h, heads in m.

    installed   2 x H = 52.5 - 10.5 (Q/2400)^2, best efficiency 86 % at 2500, motors 355 kW
    system      12 + 22 (Q/6600)^2 + 5 (Q/4800)^2; users rated 6.0 bar gauge, suction 0.4 bar gauge
    demand      3960 / 5400 / 6600 for 20 / 50 / 30 % of the hours
    candidates  H = H0 - drop (Q/at)^2, see CURVES
    efficiency  best (1 - 0.75 (1 - Q/BEP)^2); density 1000 kg/m3

Left open by that, and chosen here: curves end at 150 % of BEP; all candidates have their BEP at 2300; no
branch has a loss; the suction pressure is a suction head of 4.0789 m; minimum flows are 25 % of BEP; the
installed pumps may run from 50 to 130 % of BEP; casings stand 10 bar gauge and shafts 600 kW; NPSH required
is 4 + 3 (Q/BEP)^2; 6600 is taken with the users' valves open, the other demands throttled. All three pumps
run at every demand; 4500, and 5400 with two pumps, are there without hours and so do not count in the score.
"""

from __future__ import annotations

import json

import pytest

INSTALLED = (52.5, 10.5, 2400)
CURVES = {
    "A": (48.5, 6.5, 1800),  # the naive duty, 1800 at 42
    "B": (46.5, 3.0, 2200),
    "C": (52.0, 8.5, 2200),  # B, C and D through 2200 at 43.5
    "D": (63.0, 19.5, 2200),
    "one more": INSTALLED,
}
GRAVITY = 9.80665
CASE = """
format = "pump-case/1"
title = "Two running, one to be added"
catalog = ["pumps.json"]
units = { flow = "m3/h", head = "m", power = "kW", pressure = "bar" }

[[liquid]]
name = "cold"
density = "1000 kg/m3"
viscosity = "1 cSt"
vapour_pressure = "0.02 bar"
heat_capacity = "4.18 kJ/(kg K)"

[system]
friction = [{ head = 22, at_flow = 6600 }, { head = 5, at_flow = 4800 }]
allowable_pressure = "6 bar gauge"

[[level]]
name = "only"
static_head = 12
suction_head = 4.0789

[[installed]]
tag = "P-1"
curve = { pump = "one more" }
rated_flow = 2400
motor = 355

[[installed]]
tag = "P-2"
curve = { pump = "one more" }
rated_flow = 2400
motor = 355

[new_pump]

[[duty]]
name = "most"
flow = 6600
running = ["P-1", "P-2", "new"]
control = "open"
hours = 2628

[[duty]]
name = "usual"
flow = 5400
running = ["P-1", "P-2", "new"]
hours = 4380

[[duty]]
name = "between"
flow = 4500
running = ["P-1", "P-2", "new"]
hours = 0

[[duty]]
name = "least"
flow = 3960
running = ["P-1", "P-2", "new"]
hours = 1752

[[duty]]
name = "usual with two"
flow = 5400
running = ["P-1", "P-2"]
hours = 0
"""


def system_flow(head):
    return (max(head - 12, 0) / (22 / 6600**2 + 5 / 4800**2)) ** 0.5


def power(curve, best_flow, best_efficiency, flow):
    head = curve[0] - curve[1] * (flow / curve[2]) ** 2
    return GRAVITY * flow / 3600 * head / (best_efficiency * (1 - 0.75 * (1 - flow / best_flow) ** 2))


@pytest.fixture(scope="module")
def plant(tmp_path_factory, pump_of, plant_of):
    pumps = []
    for name, curve in CURVES.items():
        best = 2500 if curve == INSTALLED else 2300
        limits = {"minimum_flow": best / 4, "allowable_pressure": "10 bar gauge", "maximum_power": "600 kW"}
        if curve == INSTALLED:
            limits["allowable_region"] = [50, 130]
        pumps.append(
            pump_of(
                name,
                curve,
                end=1.5 * best,
                best_flow=best,
                best_efficiency=88 if name == "B" else 86,
                npsh_required=lambda flow, best=best: 4 + 3 * (flow / best) ** 2,
                speed=1480,
                eyes=2,
                limits=limits,
            )
        )
    return plant_of(tmp_path_factory.mktemp("two"), CASE, pumps)


def test_pair_alone(plant, state_of, reads, share):
    pair = state_of(plant("header"), "usual, wide open", of="today")
    assert pair["flows"]["P-1"] == pytest.approx(share([INSTALLED] * 2, system_flow)[0], rel=1e-6)
    for tag in ("P-1", "P-2"):
        assert reads(pair["pumps"][tag]["flow"], "2932")
        assert reads(pair["pumps"][tag]["flow_of_best"], "117")
        assert reads(pair["pumps"][tag]["power"], "350")


def test_one_alone_has_no_number(plant, state_of, reads, share):
    (flow,) = share([INSTALLED], system_flow)
    assert reads(flow, "3989")
    assert flow > 1.5 * 2500
    alone = state_of(plant("header"), "most, P-1 lost", of="today")
    assert alone["pumps"]["P-2"]["past_end"]
    assert alone["total_flow"] is None
    assert alone["header_head"] is None
    for figure in ("flow", "flow_of_best", "head", "power", "efficiency", "npsh_available", "npsh_required"):
        assert alone["pumps"]["P-2"][figure] is None


def test_true_duty_beside_the_naive_one(plant, reads):
    (needed,) = (row for row in plant("header")["requirement"] if row["rated"])
    assert (needed["flow_by_rated"], needed["head_by_rated"]) == (1800, 42)
    assert reads(needed["flow"], "2145")
    assert reads(needed["header_head"], "43.453")
    assert needed["head"] == needed["header_head"]
    assert reads(needed["supplied"] / 2, "2227.7")
    assert reads(100 * (2200 / needed["flow"] - 1), "2.6")


def test_naive_duty_falls_short(plant, reads, state_of, findings_of):
    explained = plant("explain", "A")
    assert reads(state_of(explained, "most")["total_flow"], "6480")
    assert reads(100 - findings_of(explained, "fail")["duty-flow"]["observed"], "1.8")
    assert explained["cannot_reach"] == "head too low"


def test_third_identical_pump(plant, state_of, reads):
    three = state_of(plant("explain", "one more"), "most")
    assert reads(three["total_flow"], "6618")
    assert all(reads(flow, "2206") for flow in three["flows"].values())


@pytest.mark.parametrize(
    ("pump", "rise", "open_", "between", "least"),
    [
        ("B", "6.8", ("6611", "2180"), ("1868", "764"), ("1823", "313")),
        ("C", "19.3", ("6613", "2189"), ("1522", "1456"), ("1348", "1265")),
        ("D", "44.5", ("6615", "2195"), ("1328", "1845"), ("1093", "1774")),
        ("A", "14.6", ("6480", "1755"), ("1780", "940"), ("1642", "676")),
    ],
)
def test_table_of_candidates(plant, state_of, reads, share, pump, rise, open_, between, least):
    explained = plant("explain", pump)
    (found,) = (item for item in explained["findings"] if item["criterion"] == "rise-to-shutoff")
    assert reads(found["observed"], rise)
    for name, demand in (
        ("most", system_flow),
        ("usual, wide open", system_flow),
        ("between", lambda _: 4500),
        ("least", lambda _: 3960),
    ):
        exact = share([CURVES[pump], INSTALLED, INSTALLED], demand)
        assert list(state_of(explained, name)["flows"].values()) == pytest.approx(exact, rel=1e-5)
    for name in ("most", "usual, wide open"):
        state = state_of(explained, name)
        assert reads(state["total_flow"], open_[0])
        assert reads(state["flows"]["new"], open_[1])
    for name, (each, new) in (("between", between), ("least", least)):
        flows = state_of(explained, name)["flows"]
        assert reads(flows["P-1"], each)
        assert reads(flows["P-2"], each)
        assert reads(flows["new"], new)


@pytest.mark.parametrize(
    ("pump", "verdict", "reasons", "more"),
    [
        # at 510 kW after a trip B leaves the motors that are tabulated
        ("B", "rejected", {"rise-to-shutoff", "minimum-flow"}, {"motor-new"}),
        ("C", "accepted", set(), set()),
        # after a trip the installed pump left beside D takes 357 kW, beside A 358 kW
        ("D", "rejected", {"shutoff-pressure", "region"}, {"motor-installed"}),
        ("A", "rejected", {"duty-flow"}, {"motor-installed"}),
    ],
)
def test_verdicts_and_their_reasons(plant, findings_of, pump, verdict, reasons, more):
    explained = plant("explain", pump)
    assert explained["verdict"] == verdict
    assert set(findings_of(explained, "fail")) == reasons | more
    assert not findings_of(explained, "not assessed")
    assert plant.codes["explain", pump] == (0 if verdict == "accepted" else 1)


def test_figures_of_the_reasons(plant, state_of, findings_of, reads):
    b, d = plant("explain", "B"), plant("explain", "D")
    assert reads(state_of(b, "least")["pumps"]["new"]["flow_of_best"], "14")
    assert reads(findings_of(b, "fail")["rise-to-shutoff"]["observed"], "6.8")
    small = findings_of(b, "fail")["minimum-flow"]
    assert (small["pump"], small["where"]) == ("new", "least")
    assert reads(small["observed"] / 100 * 575, "313")
    pressure = findings_of(d, "fail")["shutoff-pressure"]
    assert reads(pressure["observed"] / 100 * 6.0, "6.6")
    assert pressure["pump"] == "new"
    unloaded = findings_of(d, "fail")["region"]
    assert (unloaded["pump"], unloaded["where"]) == ("P-1", "least")
    assert reads(unloaded["observed"], "44")
    assert reads(state_of(d, "least")["pumps"]["P-2"]["flow_of_best"], "44")


@pytest.mark.parametrize("pump", ["A", "D"])
def test_third_reason_is_true(plant, findings_of, share, pump):
    flow = share([CURVES[pump], INSTALLED], system_flow)[1]
    overload = findings_of(plant("explain", pump), "fail")["motor-installed"]
    assert overload["observed"] / 100 * 355 == pytest.approx(power(INSTALLED, 2500, 0.86, flow), rel=1e-4)
    assert overload["observed"] > 100


def test_cautions_of_the_one_accepted(plant, state_of, findings_of, reads):
    explained = plant("explain", "C")
    cautions = findings_of(explained, "caution")
    assert set(cautions) == {"region-upset", "region", "motor-installed"}
    assert reads(cautions["region-upset"]["observed"], "128")
    assert (cautions["region-upset"]["pump"], cautions["region-upset"]["where"]) == ("new", "most, P-1 lost")
    assert reads(cautions["motor-installed"]["observed"] / 100 * 355, "350")
    assert cautions["motor-installed"]["where"] == "most, P-1 lost"
    assert reads(state_of(explained, "least")["pumps"]["new"]["flow_of_best"], "55")
    # the installed pumps are a little lower still there, 1348 of 2500, and so stand in the finding
    assert (cautions["region"]["pump"], cautions["region"]["where"]) == ("P-1", "least")
    assert reads(cautions["region"]["observed"], "53.9")


def test_flow_left_after_a_trip(plant, share):
    found = {trip["state"]: trip["delivered"] for trip in plant("explain", "C")["firm_flow"]}
    exact = 100 * sum(share([CURVES["C"], INSTALLED], system_flow)) / 6600
    assert found["most, P-1 lost"] == pytest.approx(exact, rel=1e-6)
    pair = 100 * sum(share([INSTALLED, INSTALLED], system_flow)) / 6600
    assert found["most, new lost"] == pytest.approx(pair, rel=1e-6)


@pytest.mark.parametrize(
    ("pump", "score"), [("C", "62.3"), ("one more", "62.15"), ("B", "56.9"), ("D", "56.8")]
)
def test_scores(plant, reads, pump, score):
    assert reads(plant("explain", pump)["score"], score)


def test_score_of_the_one_that_falls_short(plant, reads):
    assert reads(plant("explain", "A")["score"], "61.1")


def test_two_pumps_suffice_at_5400(plant, state_of, reads):
    explained = plant("explain", "C")
    for name, total in (("usual with two", "674"), ("usual", "838")):
        powers = [pump["power"] for pump in state_of(explained, name)["pumps"].values() if pump["runs"]]
        assert reads(sum(powers), total)
    assert 2 * power(INSTALLED, 2500, 0.86, 2700) == pytest.approx(673.92, abs=0.01)


def test_shortlist_puts_first_what_efficiency_alone_does_not(plant, reads):
    done = plant.process("shortlist")
    assert done.returncode == 0, done.stderr
    found = json.loads(done.stdout)
    assert [row["pump"] for row in found["accepted"]] == ["C", "one more"]
    assert {row["pump"] for row in found["rejected"]} == {"B", "D"}
    assert found["counts"]["cannot_reach"] == {"head too low": 1}
    (reference,) = found["references"]
    assert (reference["same_as"], reference["verdict"]) == ("P-1", "accepted")
    assert reads(reference["score"], "62.15")
    everyone = found["accepted"] + found["rejected"]
    assert max(everyone, key=lambda row: row["efficiency_at_duty"])["pump"] == "B"
    assert max(everyone, key=lambda row: row["efficiency"])["pump"] == "B"
    assert max(everyone, key=lambda row: row["score"])["pump"] == "C"


@pytest.mark.parametrize(
    "command",
    [
        ("header",),
        ("explain", "A"),
        ("explain", "B"),
        ("explain", "C"),
        ("explain", "D"),
    ],
    ids=" ".join,
)
def test_nothing_is_warned_of(plant, command):
    plant(*command)
    assert plant.warnings[command] == []
