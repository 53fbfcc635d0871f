from __future__ import annotations

import math

import numpy as np
import pytest

from screener.files.document import Document
from screener.files.quantities import Quantities, dimension

TEXT = """{
  "units": {"flow": "m3/h", "head": "ft", "power": "kw/h"},
  "flow": 750,
  "list": [1, 2]
}
"""


@pytest.fixture
def quantities():
    found = Quantities(Document("case.json", TEXT, {}), {"flow": "m3/h", "head": "ft", "pressure": "bar"})
    yield found
    assert not found.problems, "a test takes the problems it expects"


def taken(quantities):
    found = [str(problem) for problem in quantities.problems]
    quantities.problems.clear()
    return found


def test_bare_number_takes_the_declared_unit(quantities):
    assert quantities.value(720, "flow", ("flow",)) == pytest.approx(0.2)
    assert quantities.value(100, "head", ("head",)) == pytest.approx(30.48)


def test_text_carries_its_own_unit(quantities):
    assert quantities.value("2 L/s", "flow", ("flow",)) == pytest.approx(0.002)
    assert quantities.value("10 ft", "npsh", ("flow",)) == pytest.approx(3.048)


def test_missing_is_nan_and_no_problem(quantities):
    assert math.isnan(quantities.value(None, "power", ("power",)))
    assert math.isnan(quantities.pressure(None, ("pressure",)))
    assert math.isnan(quantities.percent(None))


def test_bad_text_is_nan_and_a_problem_at_its_place(quantities):
    assert math.isnan(quantities.value("12 kW", "flow", ("flow",)))
    (line,) = taken(quantities)
    assert line.startswith("case.json:3:11  'kW' is a unit of power, not of flow")


def test_undeclared_unit_is_said_once(quantities):
    assert math.isnan(quantities.value(12, "power", ("flow",)))
    assert math.isnan(quantities.value(13, "power", ("list", 1)))
    assert taken(quantities) == [
        "case.json:3:11  flow has no unit  (declare units.power, or write the unit behind the number)"
    ]


def test_bad_declaration_is_said_once_at_its_place():
    quantities = Quantities(Document("case.json", TEXT, {}), {"power": "kw/h"})
    assert math.isnan(quantities.value(12, "power", ("flow",)))
    (line,) = taken(quantities)
    assert line.startswith("case.json:2:52  unknown unit of power 'kw/h'")


@pytest.mark.parametrize("node", [0, -3, "0 m3/h", "-3 m3/h"])
def test_positive(quantities, node):
    assert quantities.positive(720, "flow", ("flow",)) == pytest.approx(0.2)
    assert math.isnan(quantities.positive(node, "flow", ("flow",)))
    (line,) = taken(quantities)
    assert line.startswith(f"case.json:3:11  flow is {node}  (must be above 0")


@pytest.mark.parametrize(
    ("node", "absolute", "value"),
    [
        (2, False, 2e5),
        (2, True, 2e5),
        ("2 bar", True, 2e5),
        ("-20 kPa", False, -2e4),
        ("2 bar gauge", False, 2e5),
        ("2 bar absolute", True, 2e5),
    ],
)
def test_pressure(quantities, node, absolute, value):
    assert quantities.pressure(node, ("flow",), absolute=absolute) == pytest.approx(value)


@pytest.mark.parametrize(
    ("node", "absolute", "what"),
    [
        ("2 bar gauge", True, "flow is given as gauge pressure  (give it as absolute pressure)"),
        ("2 bar(a)", False, "flow is given as absolute pressure  (give it as gauge pressure)"),
    ],
)
def test_pressure_of_the_other_kind(quantities, node, absolute, what):
    assert math.isnan(quantities.pressure(node, ("flow",), absolute=absolute))
    assert taken(quantities) == [f"case.json:3:11  {what}"]


def test_pressure_that_must_be_positive(quantities):
    assert math.isnan(quantities.pressure("-1 bar gauge", ("flow",), positive=True))
    assert len(taken(quantities)) == 1


def test_array(quantities):
    assert quantities.array([36, None, 72], "flow", ("list",)) == pytest.approx(
        [0.01, np.nan, 0.02], nan_ok=True
    )
    mixed = quantities.array([36, None, "20 L/s"], "flow", ("list",))
    assert mixed == pytest.approx([0.01, np.nan, 0.02], nan_ok=True)
    assert quantities.array(None, "flow", ("list",)).size == 0


def test_array_without_a_unit_is_nan_and_one_problem(quantities):
    assert np.isnan(quantities.array([None, None], "power", ("list",))).all()  # nothing that needs one
    assert np.isnan(quantities.array([1, 2], "power", ("list",))).all()
    assert taken(quantities) == ["case.json:4:11  list has no unit  (declare units.power)"]


def test_bad_text_in_an_array_is_a_problem_at_its_place(quantities):
    assert np.isnan(quantities.array([36, "2"], "flow", ("list",))).tolist() == [False, True]
    (line,) = taken(quantities)
    assert line.startswith("case.json:4:15  '2' has no unit")


def test_percent(quantities):
    assert quantities.percent(75) == 0.75
    assert quantities.percents([75, None]) == pytest.approx([0.75, np.nan], nan_ok=True)
    assert quantities.percents(None).size == 0


def test_npsh_is_a_head():
    assert dimension("npsh") == "head"
    assert dimension("flow") == "flow"
