"""Rows that are all the header as given must come out as the plain way has them, figure by figure."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields, replace
from typing import Any

import numpy as np
import pytest

import screener
from screener.changes.drawn import flows_of, run_each
from screener.hydraulics.similarity import take, trimmed
from screener.model.case import Branch, Case, Control, Drive, Loss
from screener.model.curves import Pumps, PumpTable
from screener.model.run import Run
from screener.screening import evaluate
from screener.screening.assess import set_up

BRANCH = Branch(suction=Loss((10.0,), (2.0,)), discharge=Loss((50.0,), (2.0,)), suction_head=0.4)
CAUTIONS = ("spare_head", "shutoff_match", "load_share", "opening_speed", "least_speed")


def compare(case: Case, pumps: Pumps) -> Run:
    header = set_up(case).header
    installed = [take(case.pumps, np.full(len(pumps), row)) for row in range(len(case.pumps))]
    every = (pumps, *installed)
    plain = evaluate.run(header, pumps)
    for starts in ({}, flows_of(header, every, np.ones(len(pumps)))):
        same(run_each(header, every, np.ones(len(pumps)), starts), plain)
    return plain


def same(found: Any, plain: Any) -> None:
    for f in fields(plain):
        if f.name in CAUTIONS or f.name in ("pumps", "conditions"):
            continue
        one, other = getattr(found, f.name), getattr(plain, f.name)
        if f.name in ("ratings", "bounds"):
            same(one, other)
        else:
            one, other = np.broadcast_arrays(one, other)
            assert one == pytest.approx(other, rel=1e-7, abs=1e-9, nan_ok=True), f.name


@pytest.fixture
def pumps(table_of: Callable[..., PumpTable]) -> Callable[..., Pumps]:
    """Pumps of some shutoff heads, as tested."""

    def make(*shutoffs: float, **of: float) -> Pumps:
        table = table_of(*shutoffs, **of)
        rows = np.arange(len(shutoffs))
        return trimmed(table, model=rows, diameter=table.maximum, speed_ratio=np.ones(len(rows)))

    return make


def test_the_demo() -> None:
    loaded = screener.load(screener.demo("osier-bank", "case.toml"))
    model = np.arange(0, len(loaded.catalog), 7)
    diameter, ones = loaded.catalog.maximum[model], np.ones(len(model))
    compare(
        loaded.case, trimmed(loaded.catalog, model=model, diameter=diameter, speed_ratio=ones * 1480 / 1450)
    )


def test_held_shut_and_past_the_data_of_either(case_of, pumps) -> None:
    """Alone the pair is past its data at day: that bounds the header against which a pump starts."""
    plain = compare(case_of(50.0, 50.0, end=0.12), pumps(40.0, 46.0, 50.0, 52.0, 70.0, end=0.12))
    assert (plain.flow == 0).any()
    assert np.isinf(plain.flow[..., 0]).any()
    assert np.isinf(plain.flow[..., 1:]).any()
    assert np.isclose(plain.start_header[..., 0], 50 - 1000 * 0.12**2).any()


@pytest.mark.parametrize("night", [0.06, 0.13, 0.2])
def test_flow_held_by_speed(case_of, pumps, night: float) -> None:
    drive = Drive(lowest=0.9, highest=1.0)
    case = case_of(50.0, 48.0, end=0.13, night=night)
    case = replace(
        case,
        installed=tuple(
            replace(pump, drive=drive if row else Drive(), branch=BRANCH)
            for row, pump in enumerate(case.installed)
        ),
        new_pump=replace(case.new_pump, drive=drive, branch=BRANCH),
        duties=tuple(replace(duty, control=Control.SPEED) for duty in case.duties),
    )
    compare(case, pumps(44.0, 50.0, 56.0, 62.0, end=0.13))


def test_bypasses_a_viscous_liquid_and_two_new_pumps(case_of, pumps) -> None:
    case = case_of(50.0, 47.0)
    case = replace(
        case,
        liquids=(replace(case.liquids[0], viscosity=60e-6, viscous=True),),
        new_pump=replace(case.new_pump, branch=BRANCH, count=2),
        duties=tuple(replace(duty, bypass=(0.01, 0.0, 0.02)) for duty in case.duties),
    )
    compare(case, pumps(44.0, 50.0, 56.0))


def test_nothing_else_runs(case_of, pumps) -> None:
    """The duties need no installed pump: the new one starts against the static head."""
    case = case_of(50.0)
    alone = tuple(replace(duty, flow=0.08, running=((),), new=(True,)) for duty in case.duties)
    plain = compare(replace(case, duties=alone), pumps(50.0, 40.0))
    assert (plain.start_header[:, plain.conditions.rated, 0] == 20.0).all()
