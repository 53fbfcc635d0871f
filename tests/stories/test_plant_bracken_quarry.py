"""The demo plant whose two pumps are worn by silt: as tested, and restored.

Expectations [D] come from the catalog's printed points by splines and root finders of scipy, and from the
losses, levels and field points written in the case and repeated below. Flows in L/s, heads in m.
"""

from __future__ import annotations

import re
from functools import cache

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

STATIC, FRICTION = 40.0, 14 / 370**2
BRANCH = 1.0 / 140**2
BEP = 501 / 3.6
POINTS = {
    "P-1": ([0, 45, 80, 110, 140, 165], [63.0, 60.9, 57.8, 54.0, 49.0, 44.0], 1480),
    "P-2": ([112, 138], [50.6, 46.6], 1476),
}
FIRM = 4e-3  # of a flow: heads are printed to 0.01 m, and a spline is not the tool's cubic
FIRST, STEEP, SAME = "250-400-4 O", "200-400-4 Q", "200-400-4 A"


def system_head(flow):
    return STATIC + FRICTION * flow**2


def system_flow(head):
    return (max(head - STATIC, 0) / FRICTION) ** 0.5


class Worn:
    """A `Printed` pump of the demo in L/s: a share of its head lost, or a flow that goes round inside it."""

    def __init__(self, pump, *, lost=0.0, leak=0.0):
        self.pump, self.lost, self.leak, self.loss = pump, lost, leak, BRANCH
        self.end = pump.end / 3.6 - leak

    def head(self, flow):
        return self.pump.head(3.6 * (flow + self.leak)) * (1 - self.lost)

    def flow(self, header):
        def spare(flow):
            return self.head(flow) - self.loss * flow**2 - header

        return brentq(spare, 0, self.end) if spare(0) > 0 else 0.0


@pytest.fixture(scope="module")
def plant(demo_of):
    return demo_of("bracken-quarry")


@pytest.fixture(scope="module")
def as_new(printed):
    return Worn(printed("bracken-quarry", SAME, 412))


@pytest.fixture(scope="module")
def points(as_new):
    """Field points of each pump at 1480 rpm, and the heads as new there."""
    result = {}
    for tag, (flow, head, speed) in POINTS.items():
        up = 1480 / speed
        flow, head = np.array(flow) * up, np.array(head) * up**2
        result[tag] = flow, head, np.array([as_new.head(q) for q in flow])
    return result


@pytest.fixture(scope="module")
def lost(points):
    """Least squares of H = H_new (1 - x): closed form."""
    return {tag: 1 - (head @ new) / (new @ new) for tag, (_, head, new) in points.items()}


@pytest.fixture(scope="module")
def leak(points, as_new):
    """Least squares of H = H_new(Q + q), by a scalar search."""

    def miss(tag):
        flow, head, _ = points[tag]
        return lambda leak: sum((as_new.head(q + leak) - h) ** 2 for q, h in zip(flow, head, strict=True))

    return {tag: minimize_scalar(miss(tag), bounds=(0, 50), method="bounded").x for tag in points}


@pytest.fixture(scope="module")
def worn(as_new, lost):
    return {tag: Worn(as_new.pump, lost=share) for tag, share in lost.items()}


@pytest.fixture(scope="module")
def overhauled(tmp_path_factory, plant, plant_of):
    """The same plant with the pumps of some tags as new: their conditions left out."""

    @cache
    def without(*tags):
        text = plant.case.read_text(encoding="utf-8")
        pumps = (plant.case.parent / "pumps").as_posix()
        text = text.replace('catalog = ["pumps"]', f'catalog = ["{pumps}"]')
        parts = re.split(r"(?=^\[\[)", text, flags=re.M)
        for place, part in enumerate(parts):
            if any(f'tag = "{tag}"' in part for tag in tags):
                parts[place] = re.sub(r"\[installed\.condition\.field_points\](\n|.)*?\n\n", "", part)
        return plant_of(tmp_path_factory.mktemp("as-new"), "".join(parts), [])

    return without


@pytest.fixture(scope="module")
def restored(overhauled):
    return overhauled("P-1", "P-2")


def test_counts_and_verdicts(plant):
    counts = plant("shortlist")["counts"]
    assert plant.codes["shortlist",] == 0
    assert counts["models"] == 30
    assert (counts["accepted"], counts["conditional"], counts["rejected"]) == (12, 2, 10)


def test_what_the_field_points_say(plant, lost, leak, reads):
    wear = {pump["pump"]: pump["wear"] for pump in plant("header")["installed"]}
    for tag, fitted in wear.items():
        assert fitted["points"] == len(POINTS[tag][0])
        assert fitted["head_loss"] == pytest.approx(100 * lost[tag], abs=0.02)
        assert fitted["leakage"] == pytest.approx(leak[tag], abs=0.1)
    assert reads(wear["P-1"]["head_loss"], "3.0")
    assert reads(wear["P-2"]["head_loss"], "9.1")
    assert (wear["P-1"]["nearer"], wear["P-1"]["cautions"]) == ("leakage", [])


def test_few_points_are_warned_of(plant):
    (cautions,) = (pump["wear"]["cautions"] for pump in plant("header")["installed"] if pump["pump"] == "P-2")
    assert [caution.split(":")[0] for caution in cautions] == [
        "fewer than three points",
        "shutoff was not measured",
        "the points span less than 20 % of the curve",
    ]


def test_pair_as_tested(plant, state_of, worn, meet):
    header = meet(list(worn.values()), system_flow, top=60)
    found = state_of(plant("header"), "three lines", of="today")
    assert found["header_head"] == pytest.approx(header, abs=0.02)
    for tag, pump in worn.items():
        assert found["flows"][tag] == pytest.approx(pump.flow(header), rel=FIRM)


def test_restoring_lessens_what_the_new_pump_must_do(plant, restored, overhauled, as_new, worn, reads):
    header = system_head(345)
    weak = overhauled("P-2")
    sets = {
        "130": (plant, [worn["P-1"], worn["P-2"]]),
        "94": (weak, [worn["P-1"], as_new]),
        "84": (restored, [as_new, as_new]),
    }
    for printed, (answers, pumps) in sets.items():
        (needed,) = (row for row in answers("header")["requirement"] if row["rated"])
        flow = 345 - sum(pump.flow(header) for pump in pumps)
        assert needed["flow"] == pytest.approx(flow, rel=FIRM)
        assert reads(needed["flow"], printed)


def test_restored_pumps_alone_would_not_do(plant, as_new, meet):
    alone = plant("shortlist")["restored_alone"]
    header = meet([as_new, as_new], system_flow, top=60)
    assert alone["total_flow"] == pytest.approx(2 * as_new.flow(header), abs=0.05)
    assert round(alone["total_flow"]) == 297
    assert not alone["meets_every_duty"]


def test_match_against_tested_and_against_restored(plant, restored, lost, reads):
    """One more of the same: its shutoff head over that of P-2, over the latter's own."""
    found = [
        next(row for row in answers("shortlist")["references"] if row["same_as"] == "P-1")
        for answers in (plant, restored)
    ]
    tested, again = (row["shutoff_match"] for row in found)
    assert tested == pytest.approx(100 * lost["P-2"] / (1 - lost["P-2"]), abs=0.05)
    assert reads(tested, "10.0")
    assert again == pytest.approx(0, abs=1e-6)
    assert found[0]["load_share"] > 15 > found[1]["load_share"]


def test_restoring_the_weak_pump_alone_lets_a_rejected_one_pass(
    plant, printed, state_of, findings_of, overhauled, as_new, worn, meet
):
    answer = plant("explain", STEEP)
    assert answer["diameter"] == 446
    new = Worn(printed("bracken-quarry", STEEP, 446))
    header = meet([new, worn["P-2"]], lambda _: 180, top=75)
    state = state_of(answer, "night (P-2 + new)")
    assert state["header_head"] == pytest.approx(header, abs=0.03)
    assert state["flows"]["P-2"] == pytest.approx(worn["P-2"].flow(header), rel=1e-2)
    assert set(findings_of(answer, "fail")) == {"region"}
    failed = findings_of(answer, "fail")["region"]
    assert (failed["pump"], failed["where"]) == ("P-2", "night (P-2 + new)")
    assert failed["observed"] == pytest.approx(100 * worn["P-2"].flow(header) / BEP, abs=0.5)
    assert failed["observed"] < 45

    beside = meet([new, as_new], lambda _: 180, top=75)
    assert 100 * as_new.flow(beside) / BEP > 45
    alone = {item["pump"]: item["verdict"] for item in answer["changes"] if item["change"] == "one restored"}
    assert alone == {"P-2": "accepted"}
    for tag, verdict in (("P-1", "rejected"), ("P-2", "accepted")):
        (last,) = (row for row in overhauled(tag)("trims", STEEP)["trims"] if row["diameter"] == 446)
        assert last["verdict"] == verdict


def test_first_as_tested_does_not_suit_the_restored_pumps(
    plant, restored, printed, findings_of, as_new, worn, meet, reads
):
    first = plant("shortlist")["accepted"][0]
    assert (first["pump"], first["restored_verdict"]) == (FIRST, "rejected")
    diameter = first["diameter"]
    new = Worn(printed("bracken-quarry", FIRST, 424, cut=diameter / 424))
    rises = []
    for pumps in (list(worn.values()), [as_new, as_new]):
        flow = new.flow(meet([new, *pumps], lambda _: 345, top=62))
        rises.append(100 * (new.head(0) / new.head(flow) - 1))
    tested = plant("explain", FIRST, "--diameter", f"{diameter} mm")
    again = restored("explain", FIRST, "--diameter", f"{diameter} mm")
    assert (tested["verdict"], again["verdict"]) == ("accepted", "rejected")
    (rise,) = (item for item in tested["findings"] if item["criterion"] == "rise-to-shutoff")
    assert rise["observed"] == pytest.approx(rises[0], abs=0.3)
    failed = findings_of(again, "fail")["rise-to-shutoff"]
    assert failed["observed"] == pytest.approx(rises[1], abs=0.3)
    assert rises[1] < 10 < rises[0]
