"""The data sheet, its figures worked out by hand from the numbers in the case and the catalog.

Two pumps of 50 - 0.0012 Q^2 m, 6 + 0.09 Q kW and 2 + 0.0002 Q^2 m of NPSH (Q in m3/h, 0 to 160, at 1480 rpm)
on a system of 20 + 0.0003 Q^2 m, 3 m of suction head, no branch losses; asked: 210 m3/h by day, 150 by night.
Water of 15 degC: 999.10 kg/m3, 1705.8 Pa, 4188.5 J/(kg K), 1.1386 cSt [M: steam tables].
"""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence
from math import sqrt
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import screener
from screener.changes.datasheet import DataSheet, datasheet
from screener.files import shipped
from screener.view import datasheet as view
from screener.view.blocks import Heading, Pairs, Screen, Table
from screener.view.data import Origin

PLANT = Path(__file__).parents[2] / "cli" / "plant"
CASE = (PLANT / "case.toml").read_text(encoding="utf-8")
A = json.loads((PLANT / "pumps" / "pumps.json").read_text(encoding="utf-8"))["pumps"][0]
GRAVITY, DENSITY, VAPOUR, AIR, CAPACITY = 9.80665, 999.10, 1705.8, 101325.0, 4188.5
BAR = 1e5

# by hand: asked, and both pumps sharing alike where the users hold the flow
LEFT = 210 - sqrt((50 - (20 + 0.0003 * 210**2)) / 0.0012)
RATED, RATED_HEAD = 105.0, 50 - 0.0012 * 105**2
RUNOUT = sqrt((50 - 20) / (0.0012 + 0.0003))  # P-1 lost, wide open
NPSHA = (AIR - VAPOUR) / (DENSITY * GRAVITY) + 3
POWER = (6 + 0.09 * 105) * DENSITY / 1000
LARGEST = (6 + 0.09 * RUNOUT) * DENSITY / 1000

# the flow at which Q H / P is largest, on a fine grid of the same formulas
_GRID = np.linspace(1, 160, 200_001)
BEST = float(_GRID[np.argmax(_GRID * (50 - 0.0012 * _GRID**2) / (6 + 0.09 * _GRID))])

BY_HAND: dict[str, float | str | None] = {
    "count": 1,
    "capacity_asked": LEFT,
    "head_asked": 20 + 0.0003 * 210**2,
    "capacity_rated": RATED,
    "head_rated": RATED_HEAD,
    "differential_pressure": DENSITY * GRAVITY * RATED_HEAD / BAR,
    "capacity_normal": RATED,  # 4000 of 6000 hours
    "capacity_peak": RATED,
    "capacity_minimum": 75.0,
    "head_minimum": 50 - 0.0012 * 75**2,
    "capacity_runout": RUNOUT,
    "head_runout": 50 - 0.0012 * RUNOUT**2,
    "hours": 6000.0,
    "header_flow": 210.0,
    "header_head": RATED_HEAD,
    "system_head": 20 + 0.0003 * 210**2,
    "static_head": 20.0,
    "header_shutoff_head": 50.0,
    "start_head": 50 - 0.0012 * 20000,  # P-1 alone cannot give 210 by day: wide open
    "shutoff_match": 0.0,
    "header_allowable_pressure": 10.0,
    "atmospheric_pressure": AIR / BAR,
    "suction_head": 3.0,
    "npsh_datum": None,
    "suction_pressure_rated": DENSITY * GRAVITY * 3 / BAR,
    "suction_pressure_highest": DENSITY * GRAVITY * 3 / BAR,
    "discharge_pressure_rated": DENSITY * GRAVITY * (3 + RATED_HEAD) / BAR,
    "discharge_pressure_highest": DENSITY * GRAVITY * (3 + 50) / BAR,
    "npsh_available_rated": NPSHA,
    "npsh_required_rated": 2 + 0.0002 * 105**2,
    "npsh_margin_rated": NPSHA - (2 + 0.0002 * 105**2),
    "npsh_ratio_lowest": NPSHA / (2 + 0.0002 * RUNOUT**2),
    "stages": 1,
    "eyes": 1,
    "speed": 1480.0,
    "speed_rated": 1480.0,
    "diameter": 210.0,
    "diameter_maximum": 210.0,
    "diameter_minimum": 180.0,
    "shutoff_head": 50.0,
    "highest_head": 50.0,
    "rise_to_shutoff": 100 * (50 / RATED_HEAD - 1),
    "efficiency_rated": 100 * 1000 * GRAVITY * (105 / 3600) * RATED_HEAD / (15.45 * 1000),
    "curve_end": 160.0,
    "minimum_flow_stable": 30.0,
    "bypass_needed": "no",
    "bypass_flow": 0.0,
    "bypass_set": 0.0,
    "allowable_pressure": 16.0,
    "power_rated": POWER,
    "power_largest": LARGEST,
    "power_shutoff": 6 * DENSITY / 1000,
    "power_allowed": None,
    "motor": 22.0,  # IEC: 18.5 kW carries 18.5 / 1.25 = 14.8 kW of rated power, 22 kW 22 / 1.15 = 19.1
    "motor_load_rated": 100 * POWER / 22,
    "motor_load_largest": 100 * LARGEST / 22,
    "motor_efficiency": None,
    "frequency": 50.0,
    "speed_lowest": None,
    "temperature": 15.0,
    "density": DENSITY,
    "viscosity": 1.1386,
    "vapour_pressure": VAPOUR / BAR,
    "heat_capacity": CAPACITY / 1000,
    "curve_source": "catalogue, Invented sheet A",
    "trim_law": "affinity",
    "tested_diameter": 210.0,
    "from_test": 0.0,
    "head_tolerance": None,
    "revision": None,
    "revision_date": None,
    "revision_by": "screener 0.1.0",
    "revision_checked": None,
}

NEAR_BEST = {
    "bep_flow": BEST,
    "share_of_bep": 100 * RATED / BEST,
    "preferred_low": 0.7 * BEST,
    "preferred_high": 1.2 * BEST,
    "specific_speed": 1480 * sqrt(BEST / 3600) / (50 - 0.0012 * BEST**2) ** 0.75,
    "suction_specific_speed": 1480 * sqrt(BEST / 3600) / (2 + 0.0002 * BEST**2) ** 0.75,
    "minimum_flow_thermal": 3600 * (6 + 0.09 * BEST) * 1000 / (1000 * CAPACITY * 8),
}
"""Figures that hang on the best point, which the tool has to find between measured points."""


def write(folder: Path, pump: dict[str, Any], *changes: tuple[str, str]) -> tuple[Any, Any]:
    """The plant with another pump A, and its case with some words changed; P-1 keeps its curve."""
    text = CASE.replace('catalog = ["pumps"]', 'catalog = ["pumps.json"]').replace('"A"', '"I"')
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    catalog = json.loads((PLANT / "pumps" / "pumps.json").read_text(encoding="utf-8"))
    catalog["pumps"] = [pump, {**A, "id": "I"}]
    (folder / "pumps.json").write_text(json.dumps(catalog))
    (folder / "case.toml").write_text(text)
    loaded = screener.load(folder / "case.toml")
    return loaded.case, loaded.catalog


@pytest.fixture
def sheet(tmp_path: Path) -> Callable[..., DataSheet]:
    """Data sheet of pump A, changed as said, in the plant with some words changed."""

    def make(*changes: tuple[str, str], diameter: float | None = None, **pump: Any) -> DataSheet:
        changed = {key: value for key, value in {**A, **pump}.items() if value is not None}
        case, catalog = write(tmp_path, changed, *changes)
        return datasheet(case, catalog, 0, diameter)

    return make


def shown(made: DataSheet) -> Screen:
    return view.screen(made, Origin())


def fields(made: DataSheet) -> dict[str, dict[str, Any]]:
    listed: Sequence[dict[str, Any]] = shown(made).data["fields"]  # type: ignore[assignment]
    return {field["key"]: field for field in listed}


@pytest.fixture(scope="module")
def by_hand(tmp_path_factory: pytest.TempPathFactory) -> dict[str, dict[str, Any]]:
    return fields(datasheet(*write(tmp_path_factory.mktemp("plant"), A), 0, 0.21))


@pytest.mark.parametrize("key", BY_HAND)
def test_a_field_is_what_it_comes_to_by_hand(key: str, by_hand: dict[str, dict[str, Any]]) -> None:
    value = BY_HAND[key]
    expected = pytest.approx(value, rel=2e-4, abs=1e-9) if isinstance(value, float) else value
    assert by_hand[key]["value"] == expected


@pytest.mark.parametrize("key", NEAR_BEST)
def test_figures_at_the_best_point_come_near_to_it(key: str, by_hand: dict[str, dict[str, Any]]) -> None:
    assert by_hand[key]["value"] == pytest.approx(NEAR_BEST[key], rel=5e-3)


def test_the_demo_pump_of_two_eyes_by_hand() -> None:
    """200-400-4 P as tested at 405 mm, in the catalog of the demo plant; [D] from the numbers in its file."""
    loaded = screener.load(screener.demo("osier-bank", "case.toml"))
    found = fields(datasheet(loaded.case, loaded.catalog, loaded.catalog.ids.index("200-400-4 P"), 0.405))
    best = 1205 / 3600 / 2
    head = np.interp(1205, [1162, 1291], [36.68, 34.25])  # straight between the points beside it
    assert found["specific_speed"]["value"] == pytest.approx(1480 * sqrt(best) / head**0.75, rel=2e-3)
    need = np.interp(1205, [1162, 1291], [4.33, 4.89])
    assert found["suction_specific_speed"]["value"] == pytest.approx(1480 * sqrt(best) / need**0.75, rel=2e-3)
    assert (found["eyes"]["value"], found["head_tolerance"]["value"]) == (2, 3.0)  # grade 1B
    assert found["allowable_low"]["value"] == pytest.approx(0.45 * 1205)
    assert found["shutoff_head"]["value"] == pytest.approx(47.64)
    flow = found["capacity_rated"]["value"]
    lost = 0.8 + 0.1 * (flow / 1100) ** 2
    air, vapour, density = 101325 * (1 - 2.25577e-5 * 40) ** 5.25588, 1402.8, 999.5  # 12 degC [M]
    npsha = (air - vapour) / (density * GRAVITY) + 2 - lost
    assert found["npsh_available_rated"]["value"] == pytest.approx(npsha, rel=2e-4)
    suction = density * GRAVITY * (2 - lost) / BAR
    assert found["suction_pressure_rated"]["value"] == pytest.approx(suction, rel=1e-3)
    assert found["suction_pressure_highest"]["value"] == pytest.approx(density * GRAVITY * 5 / BAR, rel=2e-4)
    assert found["suction_pressure_highest"]["source"] == "no flow: night, river high"
    high = density * GRAVITY * (5 + 47.64) / BAR
    assert found["discharge_pressure_highest"]["value"] == pytest.approx(high, rel=2e-4)


def test_sources_name_the_state_the_file_or_the_rule(by_hand: dict[str, dict[str, Any]]) -> None:
    said = {key: field["source"] for key, field in by_hand.items()}
    assert said["rated_duty"] == "case"
    assert said["capacity_normal"] == "most hours: day"
    assert said["capacity_minimum"] == "night"
    assert said["capacity_runout"] == said["power_largest"] == said["npsh_ratio_lowest"] == "day, P-1 lost"
    assert said["shutoff_head"] == "catalog, tested at 210 mm"
    assert said["motor"] == "ISO 13709 bands, IEC series"
    assert said["preferred_low"] == "limits of region, 70 % of best"
    assert said["minimum_flow_thermal"] == "curve at load, rise of 8 K"
    assert said["power_allowed"] == said["allowable_low"] == "not in the catalog"
    assert said["npsh_datum"] == "not stated; as the suction heads"
    assert said["speed_lowest"] == "fixed speed"


def test_what_is_not_known_stays_blank(sheet: Callable[..., DataSheet]) -> None:
    """No shutoff, no NPSH and no power: nothing that rests on them is told."""
    curve = {
        "diameter": 210,
        "flow": A["curves"][0]["flow"][1:],
        "head": A["curves"][0]["head"][1:],
    }
    found = fields(sheet(("hours = 2000\n", ""), curves=[curve], limits=None, source=None))
    blank = {key for key, field in found.items() if field["value"] is None}
    assert {
        *("capacity_normal", "hours", "header_shutoff_head", "shutoff_match", "discharge_pressure_highest"),
        *("npsh_required_rated", "npsh_margin_rated", "npsh_ratio_lowest", "shutoff_head", "highest_head"),
        *(
            "rise_to_shutoff",
            "efficiency_rated",
            "bep_flow",
            "share_of_bep",
            "preferred_high",
            "specific_speed",
        ),
        *("suction_specific_speed", "minimum_flow_stable", "minimum_flow_thermal", "bypass_needed"),
        *("bypass_flow", "power_rated", "power_largest", "power_shutoff", "motor", "curve_source"),
    } <= blank
    assert {"capacity_rated", "head_rated", "discharge_pressure_rated", "curve_end"} & blank == set()
    assert found["discharge_pressure_highest"]["source"] == "no shutoff head measured"
    assert found["capacity_normal"]["source"] == "not known: not every duty states hours"
    assert found["npsh_ratio_lowest"]["source"] == "not known in every state"
    assert all(field["source"] for key, field in found.items() if not key.startswith("revision"))


def test_a_state_past_the_data_leaves_the_extremes_blank(sheet: Callable[..., DataSheet]) -> None:
    short = {name: values[:7] for name, values in A["curves"][0].items() if name != "diameter"}
    made = sheet(curves=[{"diameter": 210, **short}], diameter=0.21)  # to 120 m3/h: the trip is at 141
    found = fields(made)
    assert found["capacity_rated"]["value"] == pytest.approx(105)
    assert found["capacity_peak"]["value"] == pytest.approx(105)
    for key in ("capacity_runout", "power_largest", "npsh_ratio_lowest", "motor", "motor_load_largest"):
        assert found[key]["value"] is None, key
    failed = {f["of"]: f["source"] for f in shown(made).data["fields"] if f["key"] == "fail"}  # type: ignore[attr-defined]
    assert failed["curve-end"] == "past its end, max 100.0, new, day, P-1 lost"


def test_a_pump_held_shut_needs_a_bypass(sheet: Callable[..., DataSheet]) -> None:
    """At night P-1 alone gives 150 at 23 m, so 22 m of shutoff head keep the valve shut: all 30 go round."""
    weak = [value * 22 / 50 for value in A["curves"][0]["head"]]
    found = fields(sheet(curves=[{**A["curves"][0], "head": weak}], diameter=0.21))
    assert found["bypass_needed"]["value"] == "yes"
    assert found["bypass_flow"]["value"] == pytest.approx(30)
    assert found["capacity_minimum"]["value"] == 0
    assert found["verdict"]["value"] == "rejected"


def test_a_bypass_in_the_case_is_told(sheet: Callable[..., DataSheet]) -> None:
    found = fields(sheet(("hours = 4000\n", "hours = 4000\nbypass = { new = 12 }\n")))
    assert found["bypass_set"]["value"] == pytest.approx(12)


def test_a_suction_of_its_own_adds_to_the_pressures(sheet: Callable[..., DataSheet]) -> None:
    """Its own vessel stands 1.5 m higher than the common one."""
    found = fields(sheet(('trim_step = "1 mm"', 'trim_step = "1 mm"\nsuction_head = 1.5'), diameter=0.21))
    weight = DENSITY * GRAVITY / BAR
    assert found["suction_head"]["value"] == pytest.approx(4.5)
    assert found["npsh_available_rated"]["value"] == pytest.approx(NPSHA + 1.5, rel=2e-4)
    assert found["suction_pressure_rated"]["value"] == pytest.approx(4.5 * weight, rel=2e-4)
    assert found["suction_pressure_highest"]["value"] == pytest.approx(4.5 * weight, rel=2e-4)
    assert found["discharge_pressure_highest"]["value"] == pytest.approx(54.5 * weight, rel=2e-4)


def test_trims_tell_their_law_and_their_distance(sheet: Callable[..., DataSheet]) -> None:
    found = fields(sheet(diameter=0.20))
    assert found["diameter"]["source"] == "catalog, 4.8 % from 210 mm"
    assert found["from_test"]["value"] == pytest.approx(100 * 10 / 210)
    assert (found["trim_law"]["value"], found["trim_law"]["source"]) == ("affinity", "catalog")
    law = {"flow_exponent": 2.2, "head_exponent": 2.2}
    own = fields(sheet(impeller={**A["impeller"], "trim_law": law}, diameter=0.20))
    assert own["trim_law"]["value"] == "equal exponents, 2.2"
    odd = fields(sheet(impeller={**A["impeller"], "trim_law": {**law, "flow_exponent": 1.1}}))
    assert odd["trim_law"]["value"] == "exponents 1.1 and 2.2"
    stated = fields(sheet(('trim_step = "1 mm"', 'trim_step = "1 mm"\ntrim_law = "affinity"')))
    assert (stated["trim_law"]["value"], stated["trim_law"]["source"]) == ("affinity", "case")


def test_a_pump_without_a_diameter(sheet: Callable[..., DataSheet]) -> None:
    bare = {name: values for name, values in A["curves"][0].items() if name != "diameter"}
    made = sheet(curves=[bare], impeller={})
    found = fields(made)
    for key in ("diameter", "tested_diameter", "from_test", "trim_law"):
        assert (found[key]["value"], found[key]["source"]) == (None, "not in the catalog"), key
    assert found["shutoff_head"]["source"] == "catalog"
    assert "impeller" not in str(shown(made).blocks[1])


def test_viscous_liquids_tell_their_factors(sheet: Callable[..., DataSheet]) -> None:
    """ANSI/HI 9.6.7 [V]: B = 16.5 nu^0.5 H^0.0625 / (Q^0.375 n^0.25); C_Q = e^(-0.165 (log10 B)^3.15)."""
    oil = 'density = "900 kg/m3"\nviscosity = "90 cSt"\nvapour_pressure = "0.01 bar absolute"\n'
    change = ('kind = "water"\n', oil + 'heat_capacity = "2 kJ/(kg K)"\n')
    found = fields(sheet(change, diameter=0.21))
    b = 16.5 * 90**0.5 * (50 - 0.0012 * BEST**2) ** 0.0625 / (BEST**0.375 * 1480**0.25)
    assert found["viscosity_b"]["value"] == pytest.approx(b, rel=5e-3)
    assert found["viscosity_c_q"]["value"] == pytest.approx(np.exp(-0.165 * np.log10(b) ** 3.15), rel=5e-3)
    assert found["viscosity_c_h"]["value"] == found["viscosity_c_q"]["value"]
    assert found["viscosity_c_eta"]["value"] == pytest.approx(b ** (-0.0547 * b**0.69), rel=2e-2)
    assert found["viscosity_c_npsh"]["value"] > 1
    assert (found["viscosity_b"]["of"], found["viscosity_b"]["source"]) == ("water", "ANSI/HI 9.6.7")
    assert found["shutoff_head"]["source"] == "ANSI/HI 9.6.7, tested at 210 mm"


def test_variable_speed_tells_its_range_and_where_it_holds(sheet: Callable[..., DataSheet]) -> None:
    """By day P-1 gives 118.2 at 33.23 m; the rest comes at the speed n with 50 n^2 - 0.0012 Q^2 = 33.23."""
    found = fields(
        sheet(
            ('trim_step = "1 mm"', 'trim_step = "1 mm"\nspeed_range = [60, 100]\nmotor_efficiency = 95'),
            ("hours = 4000\n", 'hours = 4000\ncontrol = "speed"\n'),
            diameter=0.21,
        )
    )
    speed = 1480 * sqrt((33.23 + 0.0012 * LEFT**2) / 50)
    assert found["speed_held"]["value"] == found["speed_rated"]["value"] == pytest.approx(speed, rel=1e-4)
    assert found["speed_held"]["of"] == "day"
    assert (found["speed_lowest"]["value"], found["speed_highest"]["value"]) == (888, 1480)
    assert found["motor_efficiency"]["value"] == 95
    assert found["speed"]["value"] == 1480


def test_every_key_is_in_the_schema_and_the_other_way_round(sheet: Callable[..., DataSheet]) -> None:
    """Over sheets that have viscous liquids, held speeds and findings of every kind."""
    schema = json.loads(shipped.path("catalog_schema", "datasheet.schema.json").read_text(encoding="utf-8"))
    described = [rule["const"] for rule in schema["$defs"]["field"]["properties"]["key"]["oneOf"]]
    oil = 'density = "900 kg/m3"\nviscosity = "90 cSt"\nvapour_pressure = "0.01 bar absolute"\n'
    made = sheet(
        ('kind = "water"\n', oil + 'heat_capacity = "2 kJ/(kg K)"\n'),
        ('trim_step = "1 mm"', 'trim_step = "1 mm"\nspeed_range = [60, 100]'),
        ("hours = 4000\n", 'hours = 4000\ncontrol = "speed"\n'),
        limits={},
        diameter=0.18,
    )
    written = set(fields(made))
    assert set(described) - written == set()
    assert written - set(described) == set()
    assert len(described) == len(set(described))


def test_the_screen_holds_every_field(by_hand: dict[str, dict[str, Any]], tmp_path: Path) -> None:
    screen = shown(datasheet(*write(tmp_path, A), 0, 0.21))
    headings = [block.text for block in screen.blocks if isinstance(block, Heading)][1:]
    groups = dict.fromkeys(field["group"].upper() for field in screen.data["fields"])  # type: ignore[attr-defined]
    assert headings == list(groups)
    labels = [row[0].text for block in screen.blocks if isinstance(block, Table) for row in block.rows]
    labels += [label for block in screen.blocks if isinstance(block, Pairs) for label, _ in block.pairs]
    assert set(labels) == {field["field"] for field in screen.data["fields"]}  # type: ignore[attr-defined]
    assert len(screen.table.rows) == len(screen.data["fields"])  # type: ignore[arg-type]
    value = next(row[1] for block in screen.blocks if isinstance(block, Table) for row in block.rows)
    assert value.text == "1"
    pressure = by_hand["suction_pressure_rated"]
    assert pressure["unit"] == "bar gauge"
    assert by_hand["atmospheric_pressure"]["unit"] == "bar absolute"


def test_specific_speeds_are_told_in_us_units(tmp_path: Path) -> None:
    """Common knowledge [V]: 51.6 times those in rpm, m3/s and m: (15850.3)^0.5 / 3.28084^0.75 = 51.645."""
    made = datasheet(*write(tmp_path, A), 0, 0.21)
    found = fields(made)
    factor = sqrt(15850.323) / 3.2808399**0.75
    numbers = [found[key]["value"] * factor for key in ("specific_speed", "suction_specific_speed")]
    note = f"specific speed {numbers[0]:.0f}, suction specific speed {numbers[1]:.0f}"
    assert note in shown(made).data["notes"][0]  # type: ignore[index]


def test_a_diameter_that_is_not_on_offer(sheet: Callable[..., DataSheet]) -> None:
    with pytest.raises(ValueError, match="180 to 210 mm"):
        sheet(diameter=0.3)
