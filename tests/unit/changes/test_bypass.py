"""Bypasses for one pump beside two that push it back: figures by hand, in m3/h, m and kW.

installed   2 x H = 72 - 10 (Q/120)^2;  candidates H0 - (H0 - 62) (Q/120)^2, all through 120 at 62
power       10 + 0.12 Q of each pump, measured from shutoff on;  minimum flow 40
system      52 + 7 (Q/360)^2;  water of 20 degC: 998.16 kg/m3, 4184 J/(kg K)
"""

from __future__ import annotations

import json
import sys
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from iapws.iapws97 import _TSat_P
from scipy.optimize import brentq

import screener
from screener.changes.bypass import Governs, needed, settings, verified, warming, with_bypass
from screener.criteria import criteria
from screener.model.finding import Outcome, Verdict
from screener.screening.assess import judged, set_up
from screener.screening.one import Explained

HOUR, GRAVITY, DENSITY, CAPACITY = 3600, 9.80665, 998.16, 4184
ALL = '["P-1", "P-2", "new"]'
CASE = """
format = "pump-case/1"
title = "Pushed back"
catalog = ["pumps.json"]
units = { flow = "m3/h", head = "m", power = "kW", pressure = "bar" }
system = { friction = [{ head = 7, at_flow = 360 }], allowable_pressure = "100 bar gauge" }
site = { atmospheric_pressure = "101325 Pa" }
limits = { LIMITS }
new_pump = { }

[[liquid]]
name = "cold"
kind = "water"
temperature = "20 degC"

[[level]]
name = "only"
static_head = 52
suction_head = 2.0
"""


def pump(shutoff: float, **limits: Any) -> dict[str, Any]:
    flows = [6.0 * point for point in range(31)]
    curve = {
        "bep_flow": 120,
        "flow": flows,
        "head": [shutoff - (shutoff - 62) * (flow / 120) ** 2 for flow in flows],
        "power": [10 + 0.12 * flow for flow in flows],
    }
    usual = {"minimum_flow": 40, "allowable_pressure": "100 bar gauge"}
    return {"id": f"H0 {shutoff:g}", "speed": 2980, "limits": usual | limits, "curves": [curve]}


@pytest.fixture
def look(tmp_path) -> Callable[..., Explained]:
    """One candidate explained; `changes` of the case's text, `limits` of the candidates."""

    def make(
        shutoff: float, limits: str = "", changes: tuple[str, str] = ("", ""), **pumps: Any
    ) -> Explained:
        units = {"flow": "m3/h", "head": "m", "power": "kW"}
        catalog = [pump(72), *(pump(other, **pumps) for other in (65.5, 74.5))]
        written = {"format": "pump-catalog/1", "units": units, "pumps": catalog}
        (tmp_path / "pumps.json").write_text(json.dumps(written))
        text = CASE.replace("LIMITS", limits)
        for tag in ("P-1", "P-2"):
            text += f'\n[[installed]]\ntag = "{tag}"\ncurve = {{ pump = "H0 72" }}\n'
        for name, flow in (("all", 360), ("low", 200), ("lower", 160), ("lowest", 120)):
            text += f'\n[[duty]]\nname = "{name}"\nflow = {flow}\nrunning = {ALL}\nhours = 1000\n'
        (tmp_path / "case.toml").write_text(text.replace(*changes))
        loaded = screener.load(tmp_path / "case.toml")
        return screener.explain(loaded.case, loaded.catalog, loaded.catalog.ids.index(f"H0 {shutoff:g}"))

    return make


def names(explained: Explained, items: Any) -> list[tuple[str, int]]:
    header = explained.bench.header
    return [(header.case.duties[header.states[item.state].duty].name, item.pump) for item in items]


def test_the_low_one_needs_all_of_its_minimum_and_little_less(look) -> None:
    found = look(65.5)
    needs = needed(found.bench, found.judged.run)
    assert names(found, needs) == [("low", 0), ("lower", 0), ("lowest", 0)]
    # at 40 it stands at 65.5 - 3.5/9 = 65.111; the others give 120 sqrt(6.889/10) = 99.599 each there
    bypass = [40 - (200 - 2 * 120 * np.sqrt((72 - 65.5 + 3.5 / 9) / 10)), 40, 40]
    assert [need.bypass * HOUR for need in needs] == pytest.approx(bypass, rel=1e-4)
    assert [need.idle for need in needs] == [False, True, True]
    for need, flow in zip(needs, bypass, strict=True):
        assert need.head == pytest.approx(65.5 - 3.5 / 9, rel=1e-6)
        assert (need.minimum * HOUR, need.governs) == (pytest.approx(40), Governs.STABLE)
        power = (10 + 0.12 * 40) * 1e3 * flow / 40 * DENSITY / 1000  # its share of 14.8 kW at 1000 kg/m3
        assert need.power == pytest.approx(power, rel=1e-4)
        assert need.energy == pytest.approx(power * 1000 * 3600, rel=1e-4)
        assert need.pipe == pytest.approx(np.sqrt(4 * flow / HOUR / (3 * np.pi)), rel=1e-4)
        assert need.bore is not None
        assert 0.1 < need.bore / need.pipe < 0.75
    assert needs[0].flow * HOUR == pytest.approx(low_flow(), rel=1e-4)
    assert needs[2].flow == 0


def low_flow() -> float:
    """Flow of the low candidate at 200 in total."""

    def flow(header: float) -> float:
        return 120 * np.sqrt((65.5 - header) / 3.5)

    def over(header: float) -> float:
        return 2 * 120 * np.sqrt((72 - header) / 10) + flow(header) - 200

    return float(flow(brentq(over, 63, 65.5, xtol=1e-13)))


def test_a_strong_one_leaves_the_installed_in_need_and_both_share(look) -> None:
    found = look(74.5)
    needs = needed(found.bench, found.judged.run)
    # at 40 the installed stand at 70.889; the new one gives 120 sqrt(3.611/12.5) = 64.50 there, they the rest
    rest = (120 - 120 * np.sqrt((74.5 - 72 + 10 / 9) / 12.5)) / 2
    assert names(found, needs) == [("lowest", 1), ("lowest", 2)]
    assert [need.bypass * HOUR for need in needs] == pytest.approx([40 - rest, 40 - rest], rel=1e-4)
    assert not any(need.idle for need in needs)


def test_the_thermal_minimum_governs_where_it_is_larger(look) -> None:
    found = look(65.5, limits="minimum-flow = { temperature_rise = 0.4 }")
    needs = needed(found.bench, found.judged.run)
    assert {need.governs for need in needs} == {Governs.THERMAL}
    thermal = (10 + 0.12 * 120) * 1e3 / (1000 * CAPACITY * 0.4)
    assert needs[0].minimum == pytest.approx(thermal, rel=1e-3)


def test_a_drooping_curve_is_kept_on_its_falling_side(look, tmp_path) -> None:
    droop = {"flow": [0, 30, 60, 90, 120, 150], "head": [63, 65, 66, 65.5, 63, 58], "power": [10] * 6}
    look(65.5)
    catalog = json.loads((tmp_path / "pumps.json").read_text())
    catalog["pumps"][1]["curves"][0] = droop | {"bep_flow": 110}
    (tmp_path / "pumps.json").write_text(json.dumps(catalog))
    loaded = screener.load(tmp_path / "case.toml")
    found = screener.explain(loaded.case, loaded.catalog, 1)
    (need,) = (n for n in needed(found.bench, found.judged.run) if names(found, [n]) == [("lowest", 0)])
    assert need.governs == Governs.CURVE
    assert 55 < need.minimum * HOUR < 75
    assert need.head == pytest.approx(66, abs=0.1)


def test_no_hours_no_energy(look) -> None:
    found = look(65.5, changes=("hours = 1000", ""))
    assert np.isnan([need.energy for need in needed(found.bench, found.judged.run)]).all()


def test_held_shut_without_a_stated_minimum_its_size_is_not_known(look) -> None:
    found = look(65.5)
    bounds = found.judged.run.bounds
    unknown = {}
    for name in ("minimum", "thermal_power"):
        unknown[name] = getattr(bounds, name).copy()
        unknown[name][..., 0] = np.nan
    run = replace(found.judged.run, bounds=replace(bounds, **unknown))
    needs = needed(found.bench, run)
    assert names(found, needs) == [("lower", 0), ("lowest", 0)]
    assert np.isnan([[n.minimum, n.bypass, n.head, n.power, n.energy] for n in needs]).all()
    assert [n.bore for n in needs] == [None, None]
    assert settings(found.bench, needs) == {2: (0, 0, 0), 3: (0, 0, 0)}


def test_without_the_extra_there_is_no_bore(look, monkeypatch) -> None:
    monkeypatch.setitem(sys.modules, "fluids.flow_meter", None)
    found = look(65.5)
    assert [need.bore for need in needed(found.bench, found.judged.run)] == [None] * 3


def test_the_case_with_bypasses_says_them_and_no_more(look) -> None:
    found = look(65.5)
    case = found.bench.header.case
    flows = settings(found.bench, needed(found.bench, found.judged.run))
    assert sorted(flows) == [1, 2, 3]
    assert flows[2] == pytest.approx((40 / HOUR, 0, 0))
    changed = with_bypass(case, flows)
    assert [duty.bypass for duty in changed.duties] == [(), flows[1], flows[2], flows[3]]
    assert with_bypass(changed, {}).duties == changed.duties
    assert [duty.bypass for duty in case.duties] == [()] * 4


@pytest.mark.parametrize("shutoff", [65.5, 74.5])
def test_run_again_with_them_every_pump_has_its_minimum(look, shutoff: float) -> None:
    found = look(shutoff)
    bench, pumps = found.bench, found.judged.run.pumps
    flows = settings(bench, needed(bench, found.judged.run))
    again = judged(set_up(with_bypass(bench.header.case, flows)), pumps)
    place = [criterion.name for criterion in criteria()].index("minimum-flow")
    assert found.judged.candidates.findings.outcome[0, place] == Outcome.FAIL
    assert again.candidates.findings.outcome[0, place] != Outcome.FAIL
    assert np.nanmin(again.run.flow[0, :, :]) * HOUR == pytest.approx(40, rel=1e-5)
    assert verified(bench, pumps, flows) == Verdict(int(again.candidates.verdict[0]))


def test_how_warm_and_how_soon_it_boils(look) -> None:
    found = look(65.5, casing_volume="30 l")
    items = warm(found)
    assert names(found, items) == [("low", 0), ("lower", 0), ("lowest", 0)]
    low, _, lowest = items
    flow = low_flow()
    head = 65.5 - 3.5 * (flow / 120) ** 2
    wasted = (10 + 0.12 * flow) * 1e3 / 1000 - GRAVITY * flow / HOUR * head  # W per kg/m3 of liquid
    assert low.rise == pytest.approx(wasted / (flow / HOUR * CAPACITY), rel=1e-3)
    assert low.share == pytest.approx(flow / 40, rel=1e-4)
    assert np.isnan([low.eye, low.casing, lowest.rise]).all()
    rate = 10e3 / 1000 / (0.030 * CAPACITY)  # K/s
    for seconds, metres in ((lowest.eye, 2.0), (lowest.casing, 2.0 + 65.5)):
        boiling = _TSat_P((101325 + DENSITY * GRAVITY * metres) / 1e6) - 273.15
        assert seconds == pytest.approx((boiling - 20) / rate, rel=1e-3)
    assert (lowest.flow, lowest.share, lowest.needs) == (0, 0, ())


def warm(found: Explained) -> Any:
    return warming(found.bench, found.judged.run)


def test_without_a_casing_volume_it_says_so(look) -> None:
    found = look(65.5)
    shut = [item for item in warm(found) if item.flow == 0]
    assert {item.needs for item in shut} == {("casing volume",)}
    assert np.isnan([item.casing for item in shut]).all()


def test_a_pump_just_above_its_minimum_is_told_too(look) -> None:
    """110 % of 58 is 63.8: more than the 63.5 that the 74.5 m pump gives at 120 in total."""
    found = look(74.5, minimum_flow=58)
    flows = {names(found, [i])[0]: i.share for i in warm(found)}
    assert 1 < flows["lowest", 0] < 1.1
    assert ("lowest", 0) not in names(found, needed(found.bench, found.judged.run))
