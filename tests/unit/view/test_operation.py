"""Words of the operation screen, on results made by hand."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import inf, nan

import pytest

import screener
from screener.changes.combination import BREACHES, Ran
from screener.changes.operating_map import OperatingMap, Range, Spot
from screener.changes.operation import Choice, Operation
from screener.model.case import Case, Drive
from screener.screening.assess import set_up
from screener.view import operation as view
from screener.view.blocks import Heading, Lines, Screen, Table
from screener.view.data import Origin

M3H = 1 / 3600


def ran(
    running: tuple[int, ...], breach: int = -1, pump: int = -1, power: float = 2e5, **more: object
) -> Ran:
    values = {"new": 0, "level": 0, "header": 40.0, "total": 0.5, "shortfall": 0.0, "unknown": ()}
    return Ran(running=running, breach=breach, pump=pump, power=power, **(values | more))  # type: ignore[arg-type]


def breach(word: str, criterion: str) -> int:
    return next(i for i, b in enumerate(BREACHES) if (b.word, b.criterion) == (word, criterion))


SHORT = ran((0,), breach("short", "duty-flow"), shortfall=0.25)
LOW = ran((0, 1), breach("low", "region"), 2, shortfall=0.1)
PAST = ran((0,), breach("past", "curve-end"), 1, nan, header=nan, total=nan, shortfall=inf)
BOTH = ran((0, 1), power=3e5)


@pytest.fixture(scope="module")
def case() -> Case:
    return screener.load_case(
        screener.demo("osier-bank", "case.toml"), screener.load_catalog(screener.demo("osier-bank", "pumps"))
    )


@pytest.fixture
def shown(case: Case) -> Callable[..., Screen]:
    """The demo plant as it is; peak short, night cheaper with one pump."""
    bench = set_up(case)

    def show(changed: Case = case, *choices: Choice) -> Screen:
        found = Operation(
            bench=replace(bench, header=replace(bench.header, case=changed)),
            explained=None,
            motor=nan,
            choices=choices
            or (
                Choice(0, 0, SHORT, SHORT, SHORT, 1500.0),
                Choice(2, 1, BOTH, ran((0,)), ran((0,)), 900.0),
                Choice(2, 2, LOW, LOW, LOW, nan),
            ),
            tried=2,
            map=OperatingMap(
                flows=(1700 * M3H, 3000 * M3H),
                combinations=(((0,), False), ((0, 1), False)),
                left_out=1,
                levels=(0, 2),
                liquids=(0,),
                spots=((Spot(PAST, -1), Spot(BOTH, -1)), (Spot(PAST, 0), Spot(LOW, 2))),
                ranges=((), (Range(1047 * M3H, 2621 * M3H, Spot(LOW, -1), None),)),
            ),
        )
        return view.screen(found, Origin())

    return show


def texts(table: Table) -> list[list[str]]:
    return [[cell.text for cell in row] for row in table.rows]


def tables(screen: Screen) -> list[Table]:
    return [block for block in screen.blocks if isinstance(block, Table)]


def said(screen: Screen) -> str:
    lines = [line for block in screen.blocks if isinstance(block, Lines) for line in block.lines]
    return "\n".join([*lines, *(note for table in tables(screen) for note in table.note)])


def test_duties_say_what_is_asked_and_what_is_cheapest(shown: Callable[..., Screen]) -> None:
    assert texts(tables(shown())[0]) == [
        ["peak", "river low", "3000", "P-1", "200", "short", "none", "-", ""],
        ["night", "river mid", "1700", "P-1+P-2", "300", "within", "P-1", "200", "90000"],
        ["night", "river high", "1700", "P-1+P-2", "200", "low P-2", "none", "-", ""],
    ]
    text = said(shown())
    assert "No combination is within limits at peak, river low. The least outside is P-1: short" in text
    assert "(duty-flow, 25.0 % outside)" in text
    assert "low P-2 (region, 10.0 % outside)" in text
    assert "In all 90000 kWh of shaft energy a year less than as asked." in text
    assert "short: the combination cannot give that flow. low: below its minimum flow" in text
    assert "high:" not in text
    assert "nothing here switches or controls a pump" in text


def test_the_csv_holds_the_one_that_is_least_outside_too(shown: Callable[..., Screen]) -> None:
    table = shown().table
    keys = [column.key for column in table.columns]
    first, second, _ = ({k: cell.value for k, cell in zip(keys, row, strict=True)} for row in table.rows)
    assert (first["cheapest"], first["cheapest_limits"], first["saved"]) == ("P-1", "short", None)
    assert (second["asked"], second["cheapest_power"], second["hours"]) == ("P-1 + P-2", 200.0, 900.0)
    assert second["saved"] == 90000.0


def test_the_map_marks_what_holds_at_one_level_only(shown: Callable[..., Screen]) -> None:
    _, ranges, cells = tables(shown())
    assert [column.title for column in cells.columns] == ["flow", "duty", "A", "B"]
    assert texts(cells) == [["1700", "night", "past P-1", "ok"], ["3000", "peak", "past P-1 +", "low P-2 -"]]
    assert texts(ranges) == [
        ["A", "P-1", "never", "", "", ""],
        ["B", "P-1 + P-2", "1047", "low P-2", "2621", "-"],
    ]
    text = said(shown())
    assert "highest static head (river low) and at the lowest (river high)" in text
    assert "1 more combination" in text
    assert "Any of identical pumps may stand for another: P-1, P-2." in text
    assert "vary their speed" not in text


def test_combinations_that_matter_stay_where_there_is_no_room(
    shown: Callable[..., Screen], case: Case
) -> None:
    screen = shown(case, Choice(0, 0, BOTH, BOTH, BOTH, nan))
    assert [column.rank for column in tables(screen)[-1].columns] == [0, 0, 2, 1]


@pytest.mark.parametrize(
    ("efficiencies", "kind", "words"),
    [
        ((1.0, 1.0), "shaft", "shaft power of all pumps together, no efficiency"),
        ((0.95, 0.94), "supply", "that motors and drives take from the supply"),
        ((0.95, 1.0), "mixed", "from the supply where efficiencies are stated, else at the shaft"),
    ],
)
def test_it_says_which_power_it_means(
    efficiencies: tuple[float, ...], kind: str, words: str, case: Case, shown: Callable[..., Screen]
) -> None:
    installed = tuple(
        replace(pump, drive=Drive(motor_efficiency=efficiency))
        for pump, efficiency in zip(case.installed, efficiencies, strict=True)
    )
    screen = shown(replace(case, installed=installed))
    assert screen.data["power_is"] == kind
    assert words in said(screen)


def test_pumps_of_variable_speed_are_told_to_run_at_load_in_the_map(
    case: Case, shown: Callable[..., Screen]
) -> None:
    one, other = case.installed
    changed = replace(case, installed=(one, replace(other, drive=Drive(lowest=0.6))))
    assert "Pumps that can vary their speed run at their speed at load." in said(shown(changed))


def test_what_is_not_known_is_no_plain_pass(case: Case, shown: Callable[..., Screen]) -> None:
    guess = ran((0, 1), unknown=("npsh-margin", "start"))
    screen = shown(case, Choice(1, 1, None, guess, None, nan))
    assert "Not known, so not judged for P-1 + P-2: npsh-margin, start." in said(screen)
    table = screen.table
    values = {c.key: cell.text for c, cell in zip(table.columns, table.rows[0], strict=True)}
    assert (values["asked"], values["cheapest_limits"], values["without_new_limits"]) == (
        "-",
        "within, open",
        "-",
    )
    assert screen.data["duties"][0]["cheapest"]["not_assessed"] == ["npsh-margin", "start"]  # type: ignore[index]


def test_the_first_heading_says_that_no_pump_is_new(shown: Callable[..., Screen]) -> None:
    first = shown().blocks[0]
    assert isinstance(first, Heading)
    assert first.aside == "as it is, without the new pump"


def test_every_word_for_a_limit_has_a_meaning() -> None:
    assert {b.word for b in BREACHES} == set(view.operating_map.MEANS)
