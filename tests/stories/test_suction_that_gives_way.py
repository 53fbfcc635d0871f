"""Two pumps on a weak suction get a third: equal at full flow, far apart when the demand falls.

Every figure was computed independently from the closed forms below [D]. Flows in m3/h, heads in m.

    installed   2 x H = 720 - 100 (Q/120)^2, minimum flow 40
    candidates  H = H0 - (H0 - 620) (Q/120)^2, all through 120 at 620
    system      520 + 70 (Q/360)^2 wide open; demand 360, 200, 160, 120
    NPSHa       9.0 - 1.0 (Qtotal/240)^2;  NPSHr 3.2 + 1.9 (Q/120)^2.2

Left open by that, and chosen here: curves end at 150 % of a BEP of 120, with 75 % there, falling off as
1 - 0.75 (1 - Q/BEP)^2; no branch has a loss; five stages and a first one with two eyes at 2980 rpm, so that
the suction specific speed is 113 and the usual NPSH rule holds; casings and header stand 100 bar gauge;
minimum flow 40 for the candidates too; 101325 Pa on a suction surface at such a level below the pumps that
9.0 m are left at no flow. All three run at every demand; two alone also at 240.
"""

from __future__ import annotations

import json

import pytest

INSTALLED = (720, 100, 120)
CANDIDATES = ("H0 655", "H0 715", "H0 720", "H0 745")
GRAVITY = 9.80665
SUCTION_HEAD = 9.0 - (101325 - 2339) / (1000 * GRAVITY)
ALL = '["P-1", "P-2", "new"]'
DUTIES = (
    ("all", 360, ALL),
    ("two", 240, '["P-1", "P-2"]'),
    ("low", 200, ALL),
    ("lower", 160, ALL),
    ("lowest", 120, ALL),
)


def case(installed="H0 720", static_head=520, duties=DUTIES, limits=""):
    text = f"""
format = "pump-case/1"
title = "Suction that gives way"
catalog = ["pumps.json"]
units = {{ flow = "m3/h", head = "m", power = "kW", pressure = "bar" }}
site = {{ atmospheric_pressure = "101325 Pa" }}
system = {{ friction = {{ head = 70, at_flow = 360 }}, allowable_pressure = "100 bar gauge" }}
suction = {{ friction = {{ head = 1.0, at_flow = 240 }} }}
limits = {{ {limits} }}
new_pump = {{ }}

[[liquid]]
name = "warm"
density = "1000 kg/m3"
viscosity = "1 cSt"
vapour_pressure = "2339 Pa"
heat_capacity = "4.18 kJ/(kg K)"

[[level]]
name = "only"
static_head = {static_head}
suction_head = {SUCTION_HEAD}
"""
    for tag in ("P-1", "P-2"):
        text += f'\n[[installed]]\ntag = "{tag}"\ncurve = {{ pump = "{installed}" }}\nmotor = 400\n'
    for name, flow, running in duties:
        text += f'\n[[duty]]\nname = "{name}"\nflow = {flow}\nrunning = {running}\n'
    return text


def npsh_required(flow):
    return 3.2 + 1.9 * (flow / 120) ** 2.2


def curve_of(pump):
    shutoff = int(pump.removeprefix("H0 "))
    return (shutoff, shutoff - 620, 120)


@pytest.fixture(scope="module")
def pumps(pump_of):
    limits = {"minimum_flow": 40, "allowable_pressure": "100 bar gauge", "maximum_power": "500 kW"}
    return [
        pump_of(
            name,
            curve_of(name),
            end=180,
            best_flow=120,
            best_efficiency=75,
            npsh_required=npsh_required,
            speed=2980,
            stages=5,
            eyes=2,
            limits=limits,
        )
        for name in CANDIDATES
    ]


@pytest.fixture(scope="module")
def plant(tmp_path_factory, plant_of, pumps):
    return plant_of(tmp_path_factory.mktemp("usual"), case(), pumps)


@pytest.fixture(scope="module")
def stricter(tmp_path_factory, plant_of, pumps):
    return plant_of(tmp_path_factory.mktemp("stricter"), case(limits="npsh-margin = { ratio = 1.25 }"), pumps)


@pytest.fixture
def ratio_of():
    return lambda pump: pump["npsh_available"] / pump["npsh_required"]


@pytest.mark.parametrize("pump", CANDIDATES)
def test_all_look_equal_at_full_flow(plant, state_of, pump):
    state = state_of(plant("explain", pump), "all")
    assert state["flows"] == pytest.approx({"new": 120, "P-1": 120, "P-2": 120})
    assert (state["total_flow"], state["header_head"]) == pytest.approx((360, 620))


@pytest.mark.parametrize(("pump", "flow"), [("H0 655", "6"), ("H0 715", "64"), ("H0 745", "77")])
def test_far_apart_at_200(plant, state_of, reads, share, pump, flow):
    flows = state_of(plant("explain", pump), "low")["flows"]
    assert reads(flows["new"], flow)
    exact = share([curve_of(pump), INSTALLED, INSTALLED], lambda _: 200)
    assert list(flows.values()) == pytest.approx(exact, rel=2e-5)


def test_low_candidate_is_dead_headed_at_120(plant, state_of, findings_of, reads):
    explained = plant("explain", "H0 655")
    state = state_of(explained, "lowest")
    assert reads(state["header_head"], "695")
    assert state["flows"] == pytest.approx({"new": 0, "P-1": 60, "P-2": 60})
    assert findings_of(explained, "fail")["minimum-flow"]["observed"] == 0
    start = findings_of(explained, "fail")["start"]
    assert (start["pump"], start["where"]) == ("new", "lowest")
    assert start["observed"] == pytest.approx(100 * (655 / 695 - 1), rel=1e-5)


def test_strong_candidate_unloads_the_installed(plant, state_of, findings_of, reads):
    explained = plant("explain", "H0 745")
    flows = state_of(explained, "lowest")["flows"]
    assert reads(flows["P-1"], "30")
    assert reads(flows["P-2"], "30")
    small = findings_of(explained, "fail")["minimum-flow"]
    assert (small["pump"], small["where"]) == ("P-1", "lowest")
    assert reads(small["observed"] / 100 * 40, "30")  # of the stable 40, which governs


def test_npsh_of_the_pair(plant, state_of, reads, ratio_of):
    header = plant("header")
    two = state_of(header, "two", of="today")["pumps"]["P-1"]
    assert two["flow"] == pytest.approx(120)
    assert reads(two["npsh_available"], "8.0")
    assert reads(ratio_of(two), "1.57")
    for answer, name, of in (
        (header, "all, wide open", "today"),
        (plant("explain", "H0 720"), "all, P-1 lost", "states"),
    ):
        left = state_of(answer, name, of=of)["pumps"]["P-2"]
        assert reads(left["flow"], "148")
        assert reads(ratio_of(left), "1.20")


@pytest.mark.parametrize("pump", CANDIDATES)
def test_npsh_with_three_is_not_that_of_two(plant, state_of, reads, ratio_of, pump):
    three = state_of(plant("explain", pump), "all")["pumps"]
    for figures in three.values():
        assert figures["npsh_available"] == pytest.approx(9.0 - 1.5**2, abs=1e-4)  # and not 8.0
        assert reads(ratio_of(figures), "1.32")


def test_worst_npsh_is_wide_open(plant, state_of, findings_of, reads, ratio_of):
    explained = plant("explain", "H0 720")
    state = state_of(explained, "all, wide open")
    assert reads(state["total_flow"], "390")
    for figures in state["pumps"].values():
        assert reads(ratio_of(figures), "1.16")
        assert reads(figures["npsh_available"] - figures["npsh_required"], "0.88")
        assert figures["npsh_required"] == pytest.approx(npsh_required(figures["flow"]), abs=1e-4)
    assert reads(explained["npsh_ratio"], "1.16")
    (margin,) = (item for item in explained["findings"] if item["criterion"] == "npsh-margin")
    assert margin["where"] == "all, wide open"


def test_npsh_rule_that_was_applied(plant, stricter, reads, findings_of):
    rules = {}
    for name, answers in (("usual", plant), ("stricter", stricter)):
        answer = answers("explain", "H0 720")
        (rules[name],) = (
            (row["value"], row["source"])
            for row in answer["limits"]
            if (row["criterion"], row["limit"]) == ("npsh-margin", "ratio")
        )
    assert rules == {"usual": (1.1, "ANSI/HI 9.6.1, water"), "stricter": (1.25, "set in the case")}
    passed = findings_of(plant("explain", "H0 720"), "caution")["npsh-margin"]
    failed = findings_of(stricter("explain", "H0 720"), "fail")["npsh-margin"]
    assert reads(passed["observed"], "1.16")
    assert reads(failed["observed"], "1.16")
    assert (failed["limit"], failed["where"]) == (1.25, "all, wide open")
    assert (plant.codes["explain", "H0 720"], stricter.codes["explain", "H0 720"]) == (0, 1)


def test_turndown_and_what_a_bypass_must_pass(plant, reads):
    """A bypass upstream of the check valve passes b = min(Qmin, Qlow - Qd); Qlow is what the tool prints."""
    done = plant.process("trims", "H0 655")
    assert done.returncode == 1, done.stderr
    (only,) = json.loads(done.stdout)["trims"]
    # the candidate sets the limit: 40 at 655 - 35/9, where each installed pump gives 120 sqrt(0.6889)
    exact = 40 + 2 * 120 * ((720 - (655 - 35 / 9)) / 100) ** 0.5
    assert only["lowest"] == pytest.approx(exact, rel=1e-6)
    for demand, flow in ((200, "39"), (160, "40"), (120, "40")):
        assert reads(min(40, only["lowest"] - demand), flow)
    (pair,) = (row for row in plant("header")["permitted"] if row["running"] == "P-1 + P-2")
    assert pair["lowest"] == pytest.approx(80)


@pytest.mark.parametrize("demand", ["lower", "lowest"])
def test_pump_whose_bypass_takes_all_delivers_nothing(plant, state_of, demand):
    assert state_of(plant("explain", "H0 655"), demand)["flows"]["new"] == 0


@pytest.fixture(scope="module")
def small(tmp_path_factory, pump_of, plant_of):
    """Pumps of half the head that take 130 kW at their BEP and have no stable minimum flow stated.

    The curve of the first plant ends at 150 % of BEP as all do, that of the second at 200 %.
    """

    def plant(end):
        pump = pump_of(
            "half",
            (360, 50, 120),
            end=end,
            best_flow=120,
            best_efficiency=100 * GRAVITY * 120 / 3600 * 310 / 130,
            npsh_required=npsh_required,
            speed=2980,
            stages=5,
            eyes=2,
        )
        limits = 'minimum-flow = { temperature_rise = "8.3 K" }'
        text = case("half", 250, (("all", 300, ALL),), limits)
        return plant_of(tmp_path_factory.mktemp("small"), text, [pump])

    return plant(180), plant(240)


def thermal_minimum(plant):
    """With no other minimum known, the pair may go down to twice its thermal one."""
    (pair,) = (row for row in plant("header")["permitted"] if row["running"] == "P-1 + P-2")
    return pair["lowest"] / 2


def test_thermal_minimum_flow_is_below_the_stable_one(small, reads):
    assert reads(130e3 / (1000 * 4180 * 8.3) * 3600, "13.5")
    assert reads(thermal_minimum(small[1]), "13.5")
    assert thermal_minimum(small[1]) < 40


def test_thermal_minimum_flow_wherever_the_curve_ends(small, reads):
    assert reads(thermal_minimum(small[0]), "13.5")


def test_temperature_rise_is_shown_as_a_difference(small):
    (row,) = (row for row in small[1]("header")["limits"] if row["limit"] == "temperature_rise")
    assert row["value"] == pytest.approx(8.3)


@pytest.mark.parametrize("command", [("header",), *(("explain", pump) for pump in CANDIDATES)], ids=" ".join)
def test_nothing_is_warned_of(plant, command):
    plant(*command)
    assert plant.warnings[command] == []
