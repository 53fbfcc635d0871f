"""The whole job on the demo plant."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.criteria import criteria
from screener.hydraulics.similarity import take as take_pumps
from screener.hydraulics.similarity import trimmed
from screener.model.case import Case
from screener.model.finding import Candidates, Figures, Findings, Outcome, Verdict
from screener.model.run import Kind
from screener.screening.assess import judged
from screener.screening.reach import Reason
from screener.screening.shortlist import LADDER, best_of, shortlist


def columns(candidates: Candidates) -> dict[str, np.ndarray]:
    """Every column of candidates, by name."""
    parts = ((Candidates, candidates), (Findings, candidates.findings), (Figures, candidates.figures))
    return {
        f"{kind.__name__}.{f.name}": getattr(item, f.name)
        for kind, item in parts
        for f in fields(kind)
        if f.name not in ("findings", "figures")
    }


def assert_same(one: Candidates, row: int, other: Candidates, other_row: int, *, but: tuple = ()) -> None:
    for name, values in columns(one).items():
        if name.split(".")[1] not in but:
            np.testing.assert_allclose(
                values[row], columns(other)[name][other_row], rtol=1e-9, atol=1e-9, err_msg=name
            )


def names(found, verdict: Verdict) -> list[str]:
    return [found.table.ids[m] for m in found.best.model[found.best.verdict == verdict]]


def test_some_are_accepted_and_some_rejected(found) -> None:
    assert names(found, Verdict.ACCEPTED)
    assert names(found, Verdict.REJECTED)


def test_every_model_is_accounted_for_once(found) -> None:
    reaching = np.flatnonzero(found.reach.reason == Reason.REACHES)
    assert sorted(found.best.model) == reaching.tolist()
    assert len(found.reach.reason) == len(found.table)
    assert found.screened >= len(found.best)


def test_a_search_finds_more_than_one_reason_to_leave_a_model_out(found) -> None:
    left = {Reason(code) for code in found.reach.reason} - {Reason.REACHES}
    assert {Reason.HEAD_TOO_LOW, Reason.CURVE_TOO_SHORT} <= left


def test_order_is_by_verdict_then_score_then_nearness(found) -> None:
    best = found.best
    assert np.all(np.diff(best.verdict) >= 0)
    score = np.nan_to_num(best.figures.score, nan=-np.inf)
    for verdict in (Verdict.ACCEPTED, Verdict.CONDITIONAL):
        ranked = score[best.verdict == verdict]
        assert ranked.tolist() == sorted(ranked, reverse=True)
    worst = best.worst[best.verdict == Verdict.REJECTED]
    assert worst.tolist() == sorted(worst)
    assert np.all((best.worst > 0) == (best.verdict == Verdict.REJECTED))


def test_verdicts_follow_from_the_findings(found) -> None:
    gates = np.array([criterion.gates for criterion in criteria()])
    for row, verdict in enumerate(found.best.verdict):
        outcome = found.best.findings.outcome[row]
        failed, open_ = (outcome == Outcome.FAIL).any(), (outcome[gates] == Outcome.NOT_ASSESSED).any()
        expected = Verdict.REJECTED if failed else Verdict.CONDITIONAL if open_ else Verdict.ACCEPTED
        assert Verdict(verdict) == expected


def test_trims_are_whole_steps_on_offer(found) -> None:
    best, table = found.best, found.table
    step = found.bench.header.case.new_pump.trim_step
    whole = np.abs(best.diameter / step - np.rint(best.diameter / step)) < 1e-6
    assert np.all(whole | np.isclose(best.diameter, table.maximum[best.model]))
    assert np.all(best.diameter <= table.maximum[best.model] + 1e-9)
    assert np.all(best.diameter >= found.reach.wanted[best.model] - 1e-9)


def every_step(found, model: int) -> list[float]:
    """Diameters of a model at whole trim steps, from the smallest that meets the duties to the largest."""
    step = found.bench.header.case.new_pump.trim_step
    most, wanted = found.table.maximum[model], found.reach.wanted[model]
    whole = range(int(np.ceil(wanted / step - 1e-6)), int(most / step + 1e-6) + 1)
    return sorted({round(float(d), 9) for d in (*(number * step for number in whole), most)})


def at(found, model: int, diameters: list[float]) -> Candidates:
    rows = np.full(len(diameters), model)
    pumps = trimmed(
        found.table, model=rows, diameter=np.array(diameters), speed_ratio=found.reach.speed_ratio[rows]
    )
    return judged(found.bench, pumps).candidates


def test_the_best_trim_is_the_best_of_all_steps_judged_one_by_one(found) -> None:
    accepted = np.flatnonzero(found.best.verdict == Verdict.ACCEPTED)
    steps = {row: every_step(found, found.best.model[row]) for row in accepted}
    more = sorted((row for row in steps if len(steps[row]) > LADDER), key=lambda row: len(steps[row]))[:3]
    assert len(more) == 3
    for row in more:
        scored = {}
        for diameter in steps[row]:
            one = at(found, found.best.model[row], [diameter])
            if one.verdict[0] == Verdict.ACCEPTED:
                scored[diameter] = one.figures.score[0]
        best = max(scored, key=lambda diameter: scored[diameter])
        assert found.best.diameter[row] == pytest.approx(best)
        assert found.best.figures.score[row] == pytest.approx(scored[best], rel=1e-9)


def test_no_step_of_any_model_does_better(found) -> None:
    for row, model in enumerate(found.best.model):
        if np.isnan(found.table.maximum[model]):
            continue
        every = at(found, model, every_step(found, model))
        assert found.best.verdict[row] == every.verdict.min()
        of_kind = every.verdict == every.verdict.min()
        if found.best.verdict[row] == Verdict.REJECTED:
            assert found.best.worst[row] == every.worst.min()
        elif np.isfinite(every.figures.score[of_kind]).any():
            highest = np.nanmax(every.figures.score[of_kind])
            assert found.best.figures.score[row] == pytest.approx(highest, rel=1e-9)


def test_a_candidate_does_not_depend_on_the_others(case, entries, found) -> None:
    kept = [*names(found, Verdict.ACCEPTED)[1:3], names(found, Verdict.REJECTED)[0]]
    few = [entry for entry in entries if entry.id in kept][::-1]
    alone = shortlist(case, compile_table(few))
    assert {alone.table.ids[m] for m in alone.best.model} == set(kept)
    for row, model in enumerate(alone.best.model):
        name = alone.table.ids[model]
        other = [found.table.ids[m] for m in found.best.model].index(name)
        assert_same(alone.best, row, found.best, other, but=("model",))


def shifted(case: Case, factor: float) -> Case:
    """The case with its system curve moved up or down, static head and friction."""
    friction = case.system.friction
    friction = replace(friction, coefficient=tuple(factor * k for k in friction.coefficient))
    levels = tuple(replace(level, static_head=factor * level.static_head) for level in case.levels)
    return replace(case, system=replace(case.system, friction=friction), levels=levels)


@pytest.mark.parametrize("factor", [0.95, 1.05])
def test_a_system_5_percent_off_still_has_accepted_and_rejected_pumps(case, table, found, factor) -> None:
    moved = shortlist(shifted(case, factor), table)
    assert names(moved, Verdict.ACCEPTED)
    assert names(moved, Verdict.REJECTED)
    assert names(moved, Verdict.ACCEPTED) != names(found, Verdict.ACCEPTED)


def test_a_system_beyond_every_pump_leaves_an_empty_shortlist(case, table) -> None:
    beyond = shortlist(shifted(case, 30.0), table)
    assert len(beyond.best) == 0
    assert beyond.screened == 0
    assert not (beyond.reach.reason == Reason.REACHES).any()


def test_progress_is_told_to_the_end(case, entries, found) -> None:
    few = [entry for entry in entries if entry.id in names(found, Verdict.ACCEPTED)[:2]]
    told: list[tuple[int, int]] = []
    short = shortlist(case, compile_table(few), progress=lambda done, total: told.append((done, total)))
    assert all(0 < done <= total for done, total in told)
    assert sum(done for done, total in told if done == total) == short.screened


def test_the_reference_is_one_more_of_what_is_installed(case, found) -> None:
    same_as = found.same_as
    assert len(found.references) == len(same_as) >= 1
    place = judged(found.bench, take_pumps(case.pumps, np.array(same_as)))
    for row, installed in enumerate(same_as):
        assert found.references.diameter[row] == case.pumps.diameter[installed]
        alike = case.installed[installed].branch == case.new_pump.branch
        assert alike  # in the demo the free place is like the others
        # beside its like in the same place it gives the same flow, head and power in every state
        run, conditions = place.run, place.run.conditions
        both = conditions.runs[:, 0] & conditions.runs[:, 1 + installed]
        assert both.any()
        for name in ("flow", "head", "power", "npsh_available", "npsh_required"):
            values = getattr(run, name)[row][both]
            np.testing.assert_allclose(values[:, 0], values[:, 1 + installed], rtol=1e-8, err_msg=name)
        assert run.shutoff_match[row, installed] == pytest.approx(0, abs=1e-12)
        assert run.load_share[row, installed] == pytest.approx(0, abs=1e-4)


def test_requirements_are_what_the_others_leave(found) -> None:
    header = found.bench.header
    assert set(found.needs) == {
        place for place, state in enumerate(header.states) if state.kind == Kind.DUTY and state.new
    }
    for place, need in found.needs.items():
        rest = header.states[place].asked - need.supplied  # nothing is known past the end of a curve
        assert np.isnan(rest) == (need.past >= 0)
        assert np.isnan(rest) or need.flow == pytest.approx(max(rest, 0.0))


def test_best_of_names_the_accepted_trim_of_the_highest_score(found) -> None:
    chosen = best_of(found.best)
    model = found.best.model[chosen]
    assert model == min(found.best.model)  # rows of the first model come first
    assert np.flatnonzero(found.best.model == model).tolist() == [chosen]
