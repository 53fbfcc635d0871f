"""What an installed pump has lost: as stated, or fitted to points measured in the field; and how it shows."""

from __future__ import annotations

import json
from collections.abc import Callable

import numpy as np
import pytest
from jsonschema import Draft202012Validator

from screener.errors import InputError
from screener.files import shipped
from screener.model.case import Case, WearFit
from screener.screening.today import header_report
from screener.view import header
from screener.view.blocks import Heading, Lines, Screen, Table
from screener.view.data import WEAR_CAUTIONS, WEAR_READINGS, Origin

Read = Callable[..., Case]
PLAIN = '{ pump = "plain" }'
ALL = WearFit.Caution.FEW_POINTS | WearFit.Caution.SHUTOFF_INFERRED | WearFit.Caution.NARROW


def points(flow: str, head: str, more: str = "") -> tuple[str, str]:
    """P-2, whose head is 50 m - 20 m (Q / 180 m3/h)^2, with points [m3/h] and [m] measured in the field."""
    return (
        PLAIN,
        f"{PLAIN}, condition = {{ field_points = {{ flow = {flow}, head = {head}{more} }} }}",
    )


def fitted(case: Case) -> WearFit:
    found = case.installed[1].wear
    assert found is not None
    assert case.installed[0].wear is None
    return found


def test_one_point_gives_the_loss_and_the_leakage(read: Read) -> None:
    # [D] 45 m as new at 90 m3/h; 42.75 m is 5 % less, and the head as new at 180 sqrt(7.25 / 20) m3/h
    case = read(points("[90]", "[42.75]"))
    found = fitted(case)
    assert case.installed[1].head_loss == found.loss == pytest.approx(0.05)
    assert found.leak == pytest.approx((180 * np.sqrt(7.25 / 20) - 90) / 3600)
    assert (found.reading, found.loss_error) == (0.01, pytest.approx(0.0095))
    assert found.cautions == ALL


def test_the_curves_of_the_case_are_lower_by_the_fitted_loss(read: Read) -> None:
    case = read(points("[0, 90, 108]", "[47.5, 42.75, 40.66]"))  # 5 % below 50, 45 and 42.8 m
    assert fitted(case).cautions == WearFit.Caution.NONE
    assert case.as_new is not None
    assert case.as_new.curves.head[1, [0, -1]] == pytest.approx([50.0, 30.0])
    assert case.pumps.curves.head[1, [0, -1]] == pytest.approx([47.5, 28.5])


def test_points_carry_units_and_a_speed(read: Read) -> None:
    # the pump runs at 1450 rpm; at 0.9 of that 0.9 of the flow and 0.81 of the head
    case = read(points('["0.0225 m3/s"]', '["34.6275 m"]', ", speed = 1305"))
    assert case.installed[1].head_loss == pytest.approx(0.05)


def test_without_a_speed_points_are_at_the_speed_at_load(read: Read) -> None:
    old, new = points("[81]", "[34.6275]")
    assert read((old, f"{new}, speed = 1305")).installed[1].head_loss == pytest.approx(0.05)


def test_a_point_at_the_very_end_of_the_curve_is_on_it(read: Read) -> None:
    # 0.86 of the speed, of 180 m3/h and, squared, of 29.4 m; as floats the flow comes out past the end
    found = fitted(read(points("[154.8]", "[21.74424]", ", speed = 1247")))
    assert found.loss == pytest.approx(0.02)
    assert found.leak == pytest.approx(0, abs=1e-9)


def test_points_a_little_above_the_curve_count_as_new(read: Read) -> None:
    case = read(points("[90]", "[45.4]"))
    assert case.installed[1].head_loss == fitted(case).loss == 0
    assert case.as_new is None


def test_a_loss_stated_has_no_fit(read: Read) -> None:
    case = read((PLAIN, f"{PLAIN}, condition = {{ head_loss = 4 }}"))
    assert [pump.head_loss for pump in case.installed] == [0.0, pytest.approx(0.04)]
    assert [pump.wear for pump in case.installed] == [None, None]


@pytest.mark.parametrize(
    ("condition", "what"),
    [
        ("{}", "condition says nothing"),
        ("{ head_loss = -4 }", "must be above 0, not -4"),
        ("{ head_loss = 49 }", "the curve ends before leakage could cost that much head"),
        ("{ head_loss = 4, field_points = { flow = [90], head = [43] } }", "are both given"),
        ("{ field_points = { flow = [90, 99], head = [43] } }", "head has 1 values and flow has 2"),
        ("{ field_points = { flow = [-9], head = [43] } }", "flow is -9"),
        ("{ field_points = { flow = [90], head = [0] } }", "head is 0"),
        ("{ field_points = { flow = [181], head = [29] } }", "past the last point of the curve"),
        ("{ field_points = { flow = [170], head = [29], speed = 1300 } }", "flow is 170 at 1300 rpm, past"),
        ("{ field_points = { flow = [0, 90], head = [52, 46.8] } }", "lie 4 % above the curve"),
        ("{ field_points = { flow = [90], head = [17] } }", "60 % or more below the curve"),
    ],
)
def test_each_problem_has_its_place(read: Read, condition: str, what: str) -> None:
    with pytest.raises(InputError, match=what) as caught:
        read((PLAIN, f"{PLAIN}, condition = {condition}"))
    (problem,) = caught.value.problems
    line = '  { tag = "P-2", curve = { pump = "plain" }, condition = '
    assert problem.line == 10
    assert problem.column > len(line)


@pytest.fixture
def screen(read: Read) -> Screen:
    return header.screen(header_report(read(points("[90]", "[42.75]"))), Origin())


def test_the_header_screen_shows_the_fit(screen: Screen) -> None:
    at = next(
        number
        for number, block in enumerate(screen.blocks)
        if isinstance(block, Heading) and block.text == "WEAR BY FIELD POINTS"
    )
    table, told = screen.blocks[at + 1 : at + 3]
    assert isinstance(table, Table)
    # [D] leakage 18.374 m3/h at a slope of 40 m * 108.374 / 180^2 = 0.13379 m for each m3/h
    shown = ["P-2", "1", "5.0", "0.9", "0.00", "18", "3", "0.00", "neither"]
    assert [[cell.text for cell in row] for row in table.rows] == [shown]
    assert "an error of reading of 1.0 % of head" in table.note[0]
    assert isinstance(told, Lines)
    assert told.lines[0].startswith("P-2: fewer than three points")
    assert "held shut" in told.lines[0]


def test_the_json_of_the_header_holds_the_fit(screen: Screen) -> None:
    first, second = json.loads(json.dumps(screen.data))["installed"]
    assert (first["pump"], first["head_loss"], first["wear"]) == ("P-1", 0, None)
    assert second["head_loss"] == pytest.approx(5)
    assert second["wear"] == {
        "points": 1,
        "reading_error": 1.0,
        "head_loss": pytest.approx(5),
        "head_loss_uncertainty": pytest.approx(0.95),
        "head_loss_residual": pytest.approx(0, abs=1e-9),
        "leakage": pytest.approx(18.37435, rel=1e-6),
        "leakage_uncertainty": pytest.approx(0.4275 / 0.1337956, rel=1e-5),
        "leakage_residual": pytest.approx(0, abs=1e-9),
        "nearer": "neither",
        "cautions": [WEAR_CAUTIONS[caution] for caution in ALL],
    }
    schema = json.loads(shipped.path("catalog_schema", "header.schema.json").read_text(encoding="utf-8"))
    assert [error.message for error in Draft202012Validator(schema).iter_errors(screen.data)] == []


def test_without_field_points_nothing_is_shown(read: Read) -> None:
    shown = header.screen(header_report(read()), Origin())
    assert not [b for b in shown.blocks if isinstance(b, Heading) and b.text.startswith("WEAR")]
    assert [pump["wear"] for pump in shown.data["installed"]] == [None, None]


def test_every_caution_and_reading_has_words() -> None:
    assert set(WEAR_CAUTIONS) == set(WearFit.Caution)
    assert set(WEAR_READINGS) == set(WearFit.Reading)
