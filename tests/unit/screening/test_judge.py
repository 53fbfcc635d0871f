"""Outcomes: which comes first, where it governs, by how much, and what was so already."""

from __future__ import annotations

import numpy as np
import pytest

from screener.criteria import criteria
from screener.model.finding import Findings, Outcome, Verdict
from screener.screening.judge import inherited, judge, verdicts

PASS, CAUTION, NOT_ASSESSED, FAIL = Outcome
NAN, INF = np.nan, np.inf
NAMES = [criterion.name for criterion in criteria()]


@pytest.fixture
def found(make_run, make_today, limits):
    """One criterion over a run of plain numbers, as {column: value} of the first candidate."""

    def one(name: str, *, today: dict | None = None, **changes: object) -> dict:
        before = make_today() if today is None else make_run(**today)
        findings = judge(make_run(**changes), before, limits)
        columns = ("outcome", "observed", "limit", "shortfall", "state", "pump", "already")
        return {name_: getattr(findings, name_)[0, NAMES.index(name)] for name_ in columns}

    return one


# the catalog allows 40 to 140 % of 0.1 m3/s, caution outside 70 to 120 %
GOOD, WARN, BAD, UNKNOWN = 0.1, 0.06, 0.03, NAN


@pytest.mark.parametrize(
    ("flows", "expected"),
    [
        ([GOOD, GOOD, GOOD], PASS),
        ([GOOD, WARN, GOOD], CAUTION),
        ([WARN, UNKNOWN, GOOD], NOT_ASSESSED),
        ([UNKNOWN, WARN, BAD], FAIL),
        ([BAD, UNKNOWN, UNKNOWN], FAIL),
    ],
)
def test_a_fail_comes_before_not_assessed_before_a_caution(found, flows: list, expected: Outcome) -> None:
    assert found("region", run={"flow": flows})["outcome"] == expected


def test_it_governs_where_it_is_worst(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[0, 1], flow[1, 2], flow[2, 0] = 0.035, 0.03, 0.01  # the last is wide open: no duty
    assert found("region", run={"flow": flow}) == {
        "outcome": FAIL,
        "observed": pytest.approx(0.3),
        "limit": 0.4,
        "shortfall": pytest.approx((0.4 - 0.3) / 0.4),
        "state": 1,
        "pump": 2,
        "already": False,
    }


def test_on_the_other_side_it_is_relative_to_the_upper_limit(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[0, 0], flow[1, 1] = 0.168, 0.0335
    # 168 % is 20 % above 140; 33.5 % is 16.25 % below 40
    seen = found("region", run={"flow": flow})
    assert (seen["state"], seen["pump"], seen["limit"]) == (0, 0, 1.4)
    assert seen["shortfall"] == pytest.approx(0.2)


def test_a_caution_shows_the_caution_limit_and_how_far_it_is_from_failing(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[1, 2] = 0.06
    seen = found("region", run={"flow": flow})
    assert (seen["outcome"], seen["limit"], seen["state"], seen["pump"]) == (CAUTION, 0.7, 1, 2)
    assert seen["shortfall"] == pytest.approx((0.4 - 0.6) / 0.4)


def test_a_pass_shows_the_place_nearest_to_its_limit(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[1, 1] = 0.075
    seen = found("region", run={"flow": flow})
    assert (seen["outcome"], seen["limit"], seen["state"], seen["pump"]) == (PASS, 0.7, 1, 1)
    assert seen["observed"] == pytest.approx(0.75)


def test_what_is_not_assessed_shows_where(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[0, 1], flow[1, 2] = 0.06, NAN
    seen = found("region", run={"flow": flow})
    assert (seen["outcome"], seen["state"], seen["pump"]) == (NOT_ASSESSED, 1, 2)
    assert np.isnan(seen["observed"])


def test_a_margin_around_zero_is_not_divided_by_its_limit(found) -> None:
    # start: 49 / 50 - 1 = -2 % against a limit of 0
    seen = found("start", run={"start_header": [50 / 0.98, 40.0, 40.0]})
    assert (seen["outcome"], seen["limit"]) == (FAIL, 0.0)
    assert seen["shortfall"] == pytest.approx(0.02)


def test_criteria_of_the_candidate_alone_name_no_state(found) -> None:
    seen = found("trim-range", pumps={"diameter": 0.3})
    assert (seen["state"], seen["pump"]) == (-1, 0)
    assert seen["shortfall"] == pytest.approx((0.33 - 0.3) / 0.33, abs=1e-6)
    seen = found("duty-flow", run={"total": [[0.3, 0.27, 0.3, 0.3]]})
    assert (seen["state"], seen["pump"], seen["shortfall"]) == (1, 0, pytest.approx(0.099 / 0.999))


@pytest.mark.parametrize(
    ("name", "changes"),
    [
        pytest.param("motor-new", {"ratings": {"motor": INF}}),
        pytest.param("curve-end", {"run": {"flow": [-INF, NAN, NAN]}, "bounds": {"start": 0.05}}),
        ("curve-end", {"run": {"flow": [NAN, INF, NAN]}}),
    ],
)
def test_beyond_all_data_is_a_fail_without_measure(found, name: str, changes: dict) -> None:
    seen = found(name, **changes)
    assert seen["outcome"] == FAIL
    assert seen["shortfall"] == INF


def test_candidates_are_judged_one_by_one(make_run, make_today, limits) -> None:
    flow = np.array([0.1, 0.06, 0.03, NAN])[:, None, None]
    together = judge(make_run(candidates=4, run={"flow": flow}), make_today(), limits)
    column = NAMES.index("region")
    assert together.outcome[:, column].tolist() == [PASS, CAUTION, FAIL, NOT_ASSESSED]
    for row in range(4):
        alone = judge(make_run(run={"flow": flow[row]}), make_today(), limits)
        for name in ("outcome", "observed", "limit", "shortfall", "state", "pump"):
            np.testing.assert_array_equal(getattr(together, name)[row], getattr(alone, name)[0], name)


# today the installed pumps run at 150 % of best efficiency, where 140 % is allowed
TODAY = {"run": {"flow": [NAN, 0.15, 0.15]}}


@pytest.mark.parametrize(
    ("flow", "expected", "already"),
    [
        (0.150, CAUTION, True),  # as today
        (0.145, CAUTION, True),  # better than today, though still outside
        (0.151, FAIL, False),  # made worse
        (0.035, FAIL, False),  # outside on the other side: 12.5 % below against 7.1 % above
        (0.100, PASS, False),
    ],
)
def test_an_installed_pump_outside_already_is_a_caution_unless_made_worse(
    found, flow: float, expected: Outcome, already: bool
) -> None:
    seen = found("region", today=TODAY, run={"flow": [0.1, flow, 0.1]})
    assert (seen["outcome"], bool(seen["already"])) == (expected, already)


def test_already_so_shows_where_and_against_what(found) -> None:
    flow = np.full((4, 3), 0.1)
    flow[1, 2] = 0.145
    seen = found("region", today=TODAY, run={"flow": flow})
    assert (seen["outcome"], seen["state"], seen["pump"]) == (CAUTION, 1, 2)
    assert seen["observed"] == pytest.approx(1.45)


def test_outside_on_the_other_side_is_not_already_so(found) -> None:
    # 5 % under the lowest flow allowed, where today it is 7.1 % over the highest
    seen = found("region", today=TODAY, run={"flow": [0.1, 0.038, 0.1]})
    assert (seen["outcome"], bool(seen["already"])) == (FAIL, False)


def test_a_new_pump_is_never_excused(found) -> None:
    seen = found("region", today=TODAY, run={"flow": [0.15, 0.1, 0.1]})
    assert (seen["outcome"], seen["pump"], bool(seen["already"])) == (FAIL, 0, False)


def test_already_so_holds_in_the_same_state_only(found) -> None:
    today = np.full((4, 3), 0.1)
    today[0, 1] = 0.15
    now = np.full((4, 3), 0.1)
    now[1, 1] = 0.145
    seen = found("region", today={"run": {"flow": today}}, run={"flow": now})
    assert (seen["outcome"], bool(seen["already"])) == (FAIL, False)


def test_a_fail_elsewhere_is_not_hidden_by_what_is_already_so(found) -> None:
    seen = found("region", today=TODAY, run={"flow": [0.141, 0.15, 0.15]})
    assert (seen["outcome"], seen["pump"], bool(seen["already"])) == (FAIL, 0, False)


def findings(**outcomes: Outcome) -> Findings:
    """One candidate that passes everything but what is given; a fail is 10 % short, or as given."""
    outcome = np.zeros((1, len(NAMES)), np.int8)
    shortfall = np.full((1, len(NAMES)), -0.5)
    for name, (code, short) in outcomes.items():
        outcome[0, NAMES.index(name.replace("_", "-"))] = code
        shortfall[0, NAMES.index(name.replace("_", "-"))] = short
    blank = np.zeros(outcome.shape)
    return Findings(outcome, blank, blank, shortfall, blank, blank, blank, blank)


@pytest.mark.parametrize(
    ("outcomes", "verdict", "worst"),
    [
        ({}, Verdict.ACCEPTED, 0.0),
        ({"region": (CAUTION, -0.1), "shutoff_match": (CAUTION, 0.3)}, Verdict.ACCEPTED, 0.0),
        ({"region": (NOT_ASSESSED, NAN)}, Verdict.CONDITIONAL, 0.0),
        ({"load_share": (NOT_ASSESSED, NAN)}, Verdict.ACCEPTED, 0.0),  # it is no gate
        (
            {"region": (FAIL, 0.1), "start": (FAIL, 0.25), "npsh_margin": (NOT_ASSESSED, NAN)},
            Verdict.REJECTED,
            0.25,
        ),
        ({"shaft_power": (FAIL, 0.1)}, Verdict.REJECTED, 0.1),  # no gate, but a fail is a fail
    ],
)
def test_verdicts(outcomes: dict, verdict: Verdict, worst: float) -> None:
    code, short = verdicts(findings(**outcomes))
    assert Verdict(code[0]) == verdict
    assert short[0] == worst


def test_inherited_judges_the_installed_pumps_alone(make_run, limits) -> None:
    flow = np.full((4, 3), 0.1)
    flow[:, 0] = NAN
    flow[1, 2] = 0.16
    seen = inherited(make_run(run={"flow": flow, "total": 0.0}), limits)
    assert len(seen.outcome) == 1
    region = NAMES.index("region")
    assert (seen.outcome[0, region], seen.state[0, region], seen.pump[0, region]) == (FAIL, 1, 2)
    assert seen.observed[0, region] == pytest.approx(1.6)
    assert not seen.already.any()
    assert seen.outcome[0, NAMES.index("duty-flow")] == PASS  # asked of the new pump only
    assert seen.outcome[0, NAMES.index("curve-end")] == PASS  # the one that stands still is no pump
