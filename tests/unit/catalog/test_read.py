from __future__ import annotations

import copy
import json
from pathlib import Path

import numpy as np
import pytest

from screener.catalog.read import read
from screener.errors import InputError
from screener.files import shipped
from screener.model.tables.grades import GRADES

# 100 m3/h at 30 m is 9.80665 * 1000 * 30 * 100 / 3600 = 8172.2 W of water: 10.896 kW at 75 % [D]
CURVE = {
    "diameter": 260,
    "flow": [0, 10, 100, 150],
    "head": [34, 33, 30, 25],
    "efficiency": [0, 20, 75, 70],
    "power": [4.5, 4.5, 10.896, 14.593],
    "npsh_required": [None, 1.8, 2.2, 3.1],
}
UNITS = {"flow": "m3/h", "head": "m", "npsh": "ft", "power": "kW", "length": "mm", "pressure": "bar"}


def pump(name="A", **more):
    return {"id": name, "speed": 1450, "curves": [copy.deepcopy(CURVE)], **more}


def write(path, *pumps, **more):
    path.write_text(json.dumps({"format": "pump-catalog/1", "units": UNITS, "pumps": pumps, **more}))
    return path


@pytest.fixture
def one(tmp_path):
    """Read a single pump."""

    def read_one(**more):
        (entry,), _ = read([write(tmp_path / "one.json", pump(**more))])
        return entry

    return read_one


def problems(*paths):
    with pytest.raises(InputError) as caught:
        read(paths)
    return [problem.what for problem in caught.value.problems]


def test_curve_in_si(one):
    (curve,) = one().curves
    assert curve.diameter == pytest.approx(0.26)
    assert curve.flow == pytest.approx([0, 10 / 3600, 100 / 3600, 150 / 3600])
    assert curve.head.tolist() == [34, 33, 30, 25]
    assert curve.efficiency == pytest.approx([0, 0.2, 0.75, 0.7])
    assert curve.power == pytest.approx([4500, 4500, 10896, 14593])
    assert curve.npsh_required == pytest.approx(
        [np.nan, 0.54864, 0.67056, 0.94488], nan_ok=True
    )  # foot 0.3048 m
    assert np.isnan(curve.bep_flow)


def test_curve_cannot_be_changed(one):
    (curve,) = one().curves
    with pytest.raises(ValueError, match="read-only"):
        curve.flow[0] = 1.0


def test_missing_columns_are_nan(one):
    bare = {"flow": [0, 1], "head": [20, 10]}
    (curve,) = one(curves=[bare]).curves
    for column in (curve.efficiency, curve.power, curve.npsh_required):
        assert np.isnan(column).tolist() == [True, True]
    assert np.isnan(curve.diameter)


def test_curves_of_all_pumps_keep_their_points(tmp_path):
    first = {"diameter": 200, "flow": [0, 36], "head": [20, 10]}
    second = {"diameter": 210, "flow": [0, 36, 72], "head": [24, 20, 9], "power": [1, 2, 3]}
    path = write(tmp_path / "a.json", pump("A", curves=[first, second]), pump("B"))
    (a, b), _ = read([path])
    assert [curve.head.tolist() for curve in a.curves] == [[20, 10], [24, 20, 9]]
    assert np.isnan(a.curves[0].power).all()
    assert a.curves[1].power.tolist() == [1000, 2000, 3000]
    assert b.curves[0].head.tolist() == [34, 33, 30, 25]


def test_defaults(one):
    entry = one()
    assert (entry.title, entry.construction, entry.source) == ("A", "", "")
    assert (entry.flow_exponent, entry.head_exponent, entry.efficiency_loss) == (1, 2, 0)
    assert (entry.npsh_speed_exponent, entry.stages, entry.eyes) == (2, 1, 1)
    unstated = ("maximum", "minimum", "minimum_flow", "maximum_flow", "region_low", "region_high")
    unstated += ("allowable_pressure", "maximum_power", "casing_volume", "head_tolerance")
    assert all(np.isnan(getattr(entry, name)) for name in unstated)


def test_everything_stated(one):
    entry = one(
        title="A, 4 poles",
        construction="axially split",
        stages=2.0,
        eyes=2,
        npsh_speed_exponent=1.5,
        impeller={
            "maximum": 270,
            "minimum": "20 cm",
            "trim_law": {"flow_exponent": 1.1, "head_exponent": 2.2, "efficiency_loss": 0.3},
        },
        limits={
            "minimum_flow": 36,
            "maximum_flow": "50 L/s",
            "allowable_region": [60, 125],
            "allowable_pressure": "16 bar gauge",
            "maximum_power": 40,
            "casing_volume": "12 L",
        },
        source={"kind": "shop test", "document": "Sheet 12", "date": "2024-05-01", "head_uncertainty": 4},
    )
    assert (entry.title, entry.construction) == ("A, 4 poles", "axially split")
    assert entry.source == "shop test, Sheet 12, 2024-05-01"
    assert (entry.speed, entry.stages, entry.eyes, entry.npsh_speed_exponent) == (1450, 2, 2, 1.5)
    assert (entry.maximum, entry.minimum) == pytest.approx((0.27, 0.2))
    assert (entry.flow_exponent, entry.head_exponent, entry.efficiency_loss) == (1.1, 2.2, 0.3)
    assert (entry.minimum_flow, entry.maximum_flow) == pytest.approx((0.01, 0.05))
    assert (entry.region_low, entry.region_high) == pytest.approx((0.6, 1.25))
    assert (entry.allowable_pressure, entry.maximum_power) == pytest.approx((16e5, 40e3))
    assert (entry.casing_volume, entry.head_tolerance) == pytest.approx((0.012, 0.04))


@pytest.mark.parametrize(("grade", "tolerance"), [("1B", 0.03), ("3B", 0.07), ("1U", 0.06)])
def test_tolerance_of_a_grade(one, grade, tolerance):
    # ISO 9906:2012, acceptance grades for head; 1U allows +6 % and nothing below [M]
    assert one(source={"kind": "catalogue", "acceptance_grade": grade}).head_tolerance == tolerance


def test_power_at_another_density_is_scaled_to_1000(one):
    oil = {"flow": [0, 1], "head": [20, 10], "power": [1.7, 3.4], "density": "850 kg/m3"}
    water = {"flow": [0, 1], "head": [20, 10], "power": [1.7, 3.4]}
    (curve,) = one(curves=[oil]).curves
    assert curve.power == pytest.approx([2000, 4000])
    (curve,) = one(curves=[water]).curves
    assert curve.power == pytest.approx([1700, 3400])


@pytest.mark.parametrize(
    ("point", "power", "wrong"),
    [
        (2, 10.896 / 1.029, False),  # 2.9 % of power
        (2, 10.896 / 1.031, True),
        (2, 10.896 / 0.969, True),
        (1, 30.0, False),  # at 6.7 % of the last flow: not compared
    ],
)
def test_power_against_efficiency(tmp_path, point, power, wrong):
    it = pump()
    it["curves"][0]["power"][point] = power
    path = write(tmp_path / "a.json", it)
    if wrong:
        assert [what[:5] for what in problems(path)] == ["power"]
    else:
        assert read([path])


def test_power_agrees_at_its_own_density(tmp_path):
    it = pump()
    it["curves"][0].update(density="800 kg/m3", power=[3.6, 3.6, 8.7168, 11.6744])  # 0.8 of those at 1000
    assert read([write(tmp_path / "a.json", it)])


@pytest.mark.parametrize(
    ("diameter", "wrong"), [(260.2, False), (260.3, True), (199.9, False), (199.7, True)]
)
def test_diameter_may_lie_a_thousandth_outside(tmp_path, diameter, wrong):
    it = pump(impeller={"maximum": 260, "minimum": 200})
    it["curves"][0]["diameter"] = diameter
    path = write(tmp_path / "a.json", it)
    assert len(problems(path)) == 1 if wrong else read([path])


def test_a_bad_unit_is_said_once_and_hides_nothing_else(tmp_path):
    it, other = pump("A"), pump("B")
    other["curves"][0]["flow"] = [0, 100, 50, 150]
    path = write(tmp_path / "a.json", it, other, units=UNITS | {"power": "kilo"})
    assert problems(path) == ["unknown unit of power 'kilo'", "flow 50 comes after 100"]


def test_folder_is_read_in_order_and_other_files_are_left_alone(tmp_path):
    written = {name: write(tmp_path / f"{name}.json", pump(name.upper())) for name in "debafc"}
    write(tmp_path / "b.json", pump("Z"), pump("B"))
    (tmp_path / "g.json").write_text('{"format": "pump-case/1"}')
    (tmp_path / "notes.txt").write_text("no catalog")
    entries, files = read([tmp_path])
    assert [entry.id for entry in entries] == ["A", "Z", "B", "C", "D", "E", "F"]
    assert files == [written[name] for name in "abcdef"]


def test_a_file_that_is_named_must_be_a_catalog(tmp_path):
    path = tmp_path / "c.json"
    path.write_text('{"format": "pump-case/1", "units": {"flow": "m3/h", "head": "m"}, "pumps": []}')
    assert len(problems(path)) == 2  # its format, and no pumps


def test_a_file_named_twice_is_read_once(tmp_path, monkeypatch):
    path = write(tmp_path / "a.json", pump())
    monkeypatch.chdir(tmp_path)
    entries, files = read([path, tmp_path, "a.json"])
    assert len(entries) == 1
    assert files == [path]


def test_problems_of_all_files_together(tmp_path):
    write(tmp_path / "a.json", pump(speed=-1))
    write(tmp_path / "b.json", pump(limits={"maximum_power": "4 kilo"}))
    (tmp_path / "c.json").write_text("{")
    with pytest.raises(InputError) as caught:
        read([tmp_path, tmp_path / "none.json"])
    files = [Path(problem.file).name for problem in caught.value.problems]
    assert files == ["a.json", "b.json", "c.json", "none.json"]


def _properties(schema):
    for name, inner in schema.get("properties", {}).items():
        yield name, inner
    for inner in schema.values():
        if isinstance(inner, dict):
            yield from _properties(inner)


def _schema():
    return json.loads(shipped.path("catalog_schema", "pump-catalog.schema.json").read_text(encoding="utf-8"))


def test_schema_is_one_and_describes_every_property():
    from jsonschema import Draft202012Validator

    Draft202012Validator.check_schema(_schema())
    found = list(_properties(_schema()))
    assert len(found) > 40
    assert [name for name, inner in found if not inner.get("description")] == []


def test_schema_knows_the_grades():
    source = _schema()["$defs"]["pump"]["properties"]["source"]["properties"]
    assert tuple(source["acceptance_grade"]["enum"]) == GRADES
