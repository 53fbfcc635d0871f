"""What holds for every criterion there is, one that is added tomorrow included."""

from __future__ import annotations

import importlib
import pkgutil
import re
import string
from dataclasses import fields, replace

import numpy as np
import pytest

from screener import criteria as package
from screener import units
from screener.criteria import Observed, criteria, default_limits
from screener.model.arrays import frozen
from screener.model.finding import Outcome
from screener.model.run import Bounds, Conditions, Ratings, Run
from screener.screening.judge import judge

EVERY = pytest.mark.parametrize("criterion", criteria(), ids=lambda criterion: criterion.name)
BOUNDS = {f.name for f in fields(Observed)} - {"value", "applies", "scale"}
NAMES = [criterion.name for criterion in criteria()]
CANDIDATES = 2000

ALWAYS_THERE = {"start", "end", "model", "curves"}
"""Every curve has a first and a last point, and every pump is a row of a table."""

STANDS_IN = {
    ("region", "region_low"): "a bound of the maker's; without it there is none below",
    ("region", "region_high"): "a bound of the maker's; the largest flow stands in",
    ("region", "largest"): "a bound of the maker's; without it there is none above",
    ("speed-range", "opening_speed"): "a pump of fixed speed has none",
    ("trim-range", "minimum"): "a bound of the maker's; 75 % of the largest stands in",
    ("trim-range", "diameter"): "a pump without a diameter is not cut",
    ("trim-from-test", "diameter"): "a pump without a diameter is not cut",
    ("head-reserve", "diameter"): "a pump without a diameter is not cut",
}
"""Columns that are bounds and no observations: to lose one may loosen a limit, as the criterion says."""


@pytest.fixture(scope="module")
def varied(make_run) -> Run:
    """Many candidates of every fate: figures up to three times off, some missing, some pumps shut."""
    random = np.random.default_rng(20)
    run = make_run(
        candidates=CANDIDATES,
        run={"shutoff_match": [[0.04, -0.04]], "least_speed": 0.95, "opening_speed": 0.9},
        ratings={"droop": 0.001},
        bounds={"thermal_power": 1e6},
        conditions={"held": (True, False, False, False)},
        pumps={"from_test": 0.04},
    )

    def off(columns: object) -> dict:
        changed = {}
        for column in fields(columns):
            values = getattr(columns, column.name)
            if isinstance(values, np.ndarray) and values.dtype == np.float64:
                spread = random.choice([0.02, 0.2, 1.1], (CANDIDATES,) + (1,) * (values.ndim - 1))
                values = values * np.exp(spread * random.uniform(-1, 1, values.shape))
                if column.name not in ALWAYS_THERE:
                    values[random.random(values.shape) < 0.005] = np.nan
                changed[column.name] = values
        return changed

    changed = off(run)
    shut = random.random(changed["flow"].shape) < 0.01
    changed["flow"][shut], changed["power"][shut] = 0.0, 15e3
    for name in ("head", "efficiency", "npsh_available", "npsh_required"):
        changed[name][shut] = np.nan
    ratings = replace(run.ratings, **off(run.ratings))
    bounds = replace(run.bounds, **off(run.bounds))
    pumps = replace(run.pumps, **off(run.pumps))
    return replace(run, **changed, ratings=ratings, bounds=bounds, pumps=pumps)


def test_names_are_unique_and_are_those_of_their_files() -> None:
    files = [module.name for module in pkgutil.iter_modules(package.__path__)]
    assert len(set(NAMES)) == len(NAMES)
    assert sorted(name.replace("-", "_") for name in NAMES) == sorted(files)
    for file in files:
        module = importlib.import_module(f"screener.criteria.{file}")
        assert module.CRITERION.name == file.replace("_", "-")
        assert module.__doc__
        assert module.observe.__doc__


@EVERY
def test_words_and_units(criterion) -> None:
    assert re.fullmatch(r"[a-z]+(-[a-z]+)*", criterion.name)
    known = {unit for dimension in units.SI for unit in units.unit_names(dimension)} | {"%", "-"}
    assert criterion.unit in known
    assert {limit.unit for limit in criterion.limits.values()} <= known | {""}
    assert criterion.title
    assert criterion.needs
    assert "%" not in criterion.title or criterion.unit == "%"


@EVERY
def test_sentence(criterion) -> None:
    places = {field for _, field, _, _ in string.Formatter().parse(criterion.sentence) if field}
    assert places <= {"pump", "is", "limit", "where"}
    said = criterion.sentence.format(**{"pump": "P-9", "is": "7 %", "limit": "9 %", "where": "at night"})
    assert "{" not in said
    assert said.strip() == said
    assert "  " not in said


@EVERY
def test_every_limit_has_a_default_and_a_source(criterion) -> None:
    assert criterion.limits
    for name, limit in criterion.limits.items():
        assert re.fullmatch(r"[a-z]+(_[a-z0-9]+)*", name)
        assert len(limit.source) >= len("ours")
        assert np.isfinite(limit.default)
    assert default_limits()[criterion.name] == {n: limit.default for n, limit in criterion.limits.items()}


@EVERY
def test_a_caution_comes_before_a_fail(criterion) -> None:
    default = {name: limit.default for name, limit in criterion.limits.items()}
    assert default.get("caution_below", np.inf) >= default.get("fail_below", -np.inf)
    assert default.get("caution_above", -np.inf) <= default.get("fail_above", np.inf)


@EVERY
def test_shapes(criterion, make_run, limits) -> None:
    for candidates, states, installed in ((5, 4, 2), (1, 4, 1), (2, 4, 6)):
        run = make_run(candidates=candidates, installed=installed)
        observed = criterion.observe(run, limits[criterion.name])
        assert set(BOUNDS) < {f.name for f in fields(observed)}
        width = 1 + installed if criterion.every_pump else 1
        shape = np.broadcast_shapes(
            *(np.shape(getattr(observed, f.name)) for f in fields(observed)), (candidates, 1, 1)
        )
        assert len(shape) == 3
        assert np.broadcast_shapes(shape, (candidates, states, 1 + installed)) == (
            candidates,
            states,
            1 + installed,
        )
        assert shape[2] == width
        assert np.asarray(observed.applies).dtype == np.bool_


@EVERY
def test_observing_changes_nothing(criterion, make_run, limits) -> None:
    run = make_run(candidates=3)  # its arrays refuse to be written
    given = dict(limits[criterion.name])
    again = [criterion.observe(run, given) for _ in range(2)]
    np.testing.assert_array_equal(again[0].value, again[1].value)
    assert given == limits[criterion.name]


@EVERY
def test_the_case_can_move_every_limit(criterion, varied, make_today, limits) -> None:
    column = NAMES.index(criterion.name)
    usual = judge(varied, make_today(), limits)
    for name, limit in criterion.limits.items():
        moved = set()
        for factor in (0.5, 2.0):
            changed = limits | {
                criterion.name: limits[criterion.name] | {name: limit.default * factor + 0.01}
            }
            found = judge(varied, make_today(), changed)
            moved.add((found.outcome[:, column] != usual.outcome[:, column]).any())
            others = np.arange(len(NAMES)) != column
            assert (found.outcome[:, others] == usual.outcome[:, others]).all()
        assert True in moved, name


@EVERY
def test_the_varied_run_meets_every_outcome(criterion, varied, make_today, limits) -> None:
    outcome = judge(varied, make_today(), limits).outcome[:, NAMES.index(criterion.name)]
    expected = {Outcome.PASS, Outcome.NOT_ASSESSED}
    expected |= {Outcome.FAIL} if {"fail_below", "fail_above", "ratio"} & set(criterion.limits) else set()
    expected |= {Outcome.CAUTION} if {"caution_below", "caution_above"} & set(criterion.limits) else set()
    assert {Outcome(code) for code in np.unique(outcome)} >= expected


def columns() -> list[tuple[str, str]]:
    runs = [
        ("run", f.name) for f in fields(Run) if f.name not in ("pumps", "ratings", "bounds", "conditions")
    ]
    ratings = [("ratings", f.name) for f in fields(Ratings)]
    given = ("wanted_head", "asked", "density", "heat_capacity", "suction_pressure")
    conditions = [("conditions", f.name) for f in fields(Conditions) if f.name in given]
    pumps = [("pumps", name) for name in ("diameter", "maximum", "minimum", "from_test")]
    pumps += [("pumps", name) for name in ("specific_speed", "suction_specific_speed", "maximum_power")]
    bounds = [("bounds", f.name) for f in fields(Bounds) if f.name not in ALWAYS_THERE]
    return [*runs, *conditions, *pumps, *bounds, *(r for r in ratings if r[1] not in ALWAYS_THERE)]


@pytest.mark.parametrize(("table", "column"), columns())
def test_a_missing_input_never_makes_a_pass(table: str, column: str, varied, make_today, limits) -> None:
    whole = varied if table == "run" else getattr(varied, table)
    holed = replace(whole, **{column: frozen(np.full_like(getattr(whole, column), np.nan))})
    run = holed if table == "run" else replace(varied, **{table: holed})
    before, after = (judge(given, make_today(), limits).outcome for given in (varied, run))
    for number, name in enumerate(NAMES):
        if (name, column) in STANDS_IN:
            continue
        lost = (before[:, number] >= Outcome.NOT_ASSESSED) & (after[:, number] < Outcome.NOT_ASSESSED)
        assert not lost.any(), f"{name} passes without {column}"
        worse = (before[:, number] <= Outcome.CAUTION) & (after[:, number] == Outcome.FAIL)
        assert not worse.any(), f"{name} fails without {column}"
