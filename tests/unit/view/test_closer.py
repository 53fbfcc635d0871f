"""A closer look in words and data: changes, corners, reading error, and the shortlist with --closer."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import replace
from math import nan
from pathlib import Path

import numpy as np
import pytest
from jsonschema import Draft202012Validator

import screener
from screener.changes.closer import Closer, look_closer
from screener.changes.near import Near, look_nearer
from screener.changes.reading import Misread
from screener.changes.smallest import Change, ChangeKind
from screener.criteria import criteria
from screener.files import shipped
from screener.model.finding import Verdict
from screener.screening.shortlist import Shortlist
from screener.view import closer, shortlist
from screener.view.blocks import Heading, Lines, Screen, Table
from screener.view.data import Origin
from screener.view.display import Display

PLANT = Path(__file__).parents[2] / "cli" / "plant" / "case.toml"
SHOWN = {"flow": "m3/h", "head": "m", "npsh": "m", "power": "kW", "length": "mm", "pressure": "bar"}
DISPLAY = Display(SHOWN)
NAMES = [criterion.name for criterion in criteria()]
NIGHT = 1


@pytest.fixture(scope="module")
def loaded():
    return screener.load(PLANT)


@pytest.fixture(scope="module")
def result(loaded) -> Shortlist:
    return screener.shortlist(loaded.case, loaded.catalog)


@pytest.fixture(scope="module")
def near(result: Shortlist) -> Near:
    return look_nearer(result, top=10)


@pytest.fixture(scope="module")
def accepted(loaded) -> Closer:
    return look_closer(screener.explain(loaded.case, loaded.catalog, loaded.catalog.ids.index("A")))


def change(kind: ChangeKind, duty: int = -1, pump: int = -1, value: float = nan, to: float = nan) -> Change:
    return Change(kind, duty, pump, value, Verdict.ACCEPTED, to)


CHANGES = [
    (change(ChangeKind.DIAMETER, value=0.39, to=0.395), "390 to 395 mm", "Take 390 to 395 mm"),
    (change(ChangeKind.DIAMETER, value=0.39, to=0.39), "390 mm", "Take 390 mm"),
    (
        change(ChangeKind.FEWER_INSTALLED, NIGHT, 1),
        "without P-1 at night",
        "Run night with one fewer of P-1",
    ),
    (
        change(ChangeKind.WITHOUT_NEW, NIGHT, 0),
        "without it at night",
        "Run night without the new pump; the installed pumps meet it alone",
    ),
    (
        change(ChangeKind.LOWEST_FLOW, NIGHT, -1, 0.05),
        "night from 180 m3/h on",
        "Keep night at 180 m3/h or more",
    ),
    (
        change(ChangeKind.BYPASS, NIGHT, 0, 0.01),
        "bypass 36 at night, new",
        "Take back 36 m3/h at new in night, by a bypass ahead of the check valve",
    ),
    (
        change(ChangeKind.BYPASS, NIGHT, 1, 0.01),
        "bypass 36 at night, P-1",
        "Take back 36 m3/h at P-1 in night, by a bypass ahead of the check valve",
    ),
    (change(ChangeKind.MOTOR, pump=1, value=30e3), "motor 30 kW, P-1", "Put 30 kW motors on P-1"),
    (
        change(ChangeKind.ONE_RESTORED, pump=1),
        "P-1 restored",
        "Restore P-1 to what it gave as new",
    ),
    (
        change(ChangeKind.RESTORED),
        "all restored",
        "Restore the installed pumps to what they gave as new",
    ),
]


@pytest.mark.parametrize(("item", "short", "sentence"), CHANGES)
def test_a_change_in_a_few_words_and_in_a_sentence(
    result: Shortlist, item: Change, short: str, sentence: str
) -> None:
    assert closer.short(result.bench, DISPLAY, item) == short
    _, lines = closer.changes(result.bench, DISPLAY, [item], Verdict.REJECTED)
    assert isinstance(lines, Lines)
    assert lines.lines == [f"{sentence}: then it is accepted."]


def test_every_kind_of_change_has_its_words() -> None:
    assert {item.kind for item, *_ in CHANGES} == set(ChangeKind)


def test_what_is_left_open_by_a_change_is_said(result: Shortlist) -> None:
    item = replace(CHANGES[7][0], verdict=Verdict.CONDITIONAL)
    assert closer.short(result.bench, DISPLAY, item) == "motor 30 kW, P-1 (conditional)"
    assert closer.short(result.bench, DISPLAY, None) == "no single change"


def test_a_change_as_data_holds_its_own_figure_alone(result: Shortlist) -> None:
    figures = {
        ChangeKind.LOWEST_FLOW: {"lowest_flow": 180.0},
        ChangeKind.BYPASS: {"bypass": 36.0},
        ChangeKind.MOTOR: {"motor": 30.0},
        ChangeKind.DIAMETER: {"smallest_diameter": 390.0, "largest_diameter": 395.0},
    }
    for item in (CHANGES[0][0], CHANGES[4][0], CHANGES[5][0], CHANGES[7][0]):
        (data,) = closer.changes_data(result.bench, DISPLAY, [item])
        words = {"change", "duty", "pump", "verdict"}
        found = {key: value for key, value in data.items() if key not in words and value is not None}
        assert found == figures[item.kind]
    assert closer.changes_data(result.bench, DISPLAY, [CHANGES[5][0]])[0]["pump"] == "new"


def test_a_pump_held_shut_in_a_corner_is_named_with_its_duty(accepted: Closer) -> None:
    low = next(corner for corner in accepted.corners if (corner.odd, corner.high) == (0, False))
    shut, fails = np.zeros_like(low.shut), np.zeros_like(low.fails)
    state = next(i for i, s in enumerate(low.bench.header.states) if s.duty == NIGHT)
    shut[0, state, 0], fails[0, NAMES.index("minimum-flow")] = True, True
    parked = replace(low, shut=shut, fails=fails)
    blocks = closer.corners(accepted.explained.bench, DISPLAY, [parked])
    said = "With new low, rest high new is held shut by its check valve at night."
    assert isinstance(blocks[-1], Lines)
    assert blocks[-1].lines == [said]
    (data,) = closer.corners_data(accepted.explained.bench, DISPLAY, [parked], 0)
    assert data["held_shut"] == [{"pump": "new", "where": "night"}]
    elsewhere = replace(low, shut=shut, fails=np.zeros_like(fails))  # it is shut there as given, too
    (data,) = closer.corners_data(accepted.explained.bench, DISPLAY, [elsewhere], 0)
    assert data["held_shut"] == []


def test_the_worst_corner_is_the_one_of_the_largest_shortfall(accepted: Closer) -> None:
    """Of two made to fail by 10 % and by 30 %, whatever their order; the second is of P-1 at night."""
    first = accepted.corners[0]
    night = next(i for i, s in enumerate(first.bench.header.states) if s.duty == NIGHT)
    start, region = NAMES.index("start"), NAMES.index("region")
    shortfall, fails = np.full(first.fails.shape, 9.0), np.zeros_like(first.fails)
    pump, state = np.zeros_like(first.findings.pump), np.zeros_like(first.findings.state)
    shortfall[0, [start, region]], fails[0, [start, region]] = (0.1, 0.3), True
    pump[0, region], state[0, region] = 1, night
    made = replace(
        first, fails=fails, findings=replace(first.findings, shortfall=shortfall, pump=pump, state=state)
    )
    nothing = [replace(corner, fails=np.zeros_like(corner.fails)) for corner in accepted.corners]
    assert closer.worst_corner([*nothing, made], 0) == "P-1 night"
    assert closer.worst_corner([made, *nothing], 0) == "P-1 night"
    shortfall[0, start] = 0.4
    assert closer.worst_corner([made], 0) == "new day"
    assert closer.worst_corner(nothing, 0) == "hold"


def test_each_row_of_a_shortlist_has_its_own_corners(result: Shortlist, near: Near) -> None:
    """With all but the second candidate made to hold, the second alone is told."""
    second = np.arange(len(near.rows))[:, None] == 1
    corners = tuple(replace(corner, fails=corner.fails & second) for corner in near.corners)
    found = closer.nearer(result.bench, DISPLAY, replace(near, corners=corners), result.best.verdict)
    assert [item.corners for item in found.values()] == ["hold", "new day", "hold", ""]


@pytest.mark.parametrize(
    ("source", "said"),
    [
        ("catalogue, Invented sheet", "A catalogue curve"),
        ("", "No source of the curve is stated"),
        ("shop test, Invented sheet", ""),
    ],
)
def test_reading_error_matters_most_where_the_curve_is_off_a_chart(
    accepted: Closer, source: str, said: str
) -> None:
    heading, table, lines = closer.readings(accepted.explained.bench, DISPLAY, accepted.readings, source)
    assert isinstance(heading, Heading)
    assert heading.text == "READING ERROR OF 1 % OF HEAD"
    assert isinstance(table, Table)
    assert [row[0].text for row in table.rows] == ["lower"]
    assert [row[1].text for row in table.rows] == ["fails"]
    assert isinstance(lines, Lines)
    assert [line.split(":")[0] for line in lines.lines] == ([said] if said else [])


def test_one_line_where_nothing_flips(accepted: Closer) -> None:
    calm = [replace(r, flips=np.zeros_like(r.flips)) for r in accepted.readings]
    _, lines = closer.readings(accepted.explained.bench, DISPLAY, calm, "")
    assert isinstance(lines, Lines)
    assert lines.lines == ["The verdict holds."]


def test_reading_as_data_and_in_a_cell(accepted: Closer) -> None:
    data = closer.readings_data(accepted.explained.bench, DISPLAY, accepted.readings, 0)
    assert data["share_of_head"] == 1
    assert [run["curve"] for run in data["runs"]] == [closer.TURNED[misread] for misread in Misread]
    assert [run["verdict_flips"] for run in data["runs"]] == [False, True, False, False]
    assert [len(run["fails"]) for run in data["runs"]] == [0, 1, 0, 0]
    assert [run["passes"] for run in data["runs"]] == [[], [], [], []]
    assert closer.misread(accepted.readings, 0) == "1 of 4"


def _table(screen: Screen, heading: str) -> Table:
    place = next(i for i, b in enumerate(screen.blocks) if isinstance(b, Heading) and b.text == heading)
    table = screen.blocks[place + 1]
    assert isinstance(table, Table)
    return table


def test_the_shortlist_shows_what_holds_and_what_would_help(result: Shortlist, near: Near) -> None:
    screen = shortlist.screen(result, Origin(), near=near)
    accepted = _table(screen, "ACCEPTED, BY SCORE")
    keys = [column.key for column in accepted.columns]
    first, reference = accepted.rows[0], accepted.rows[-1]
    assert keys[-3:] == ["corners", "reading", "probability"]
    assert [cell.text for cell in first[-3:-1]] == ["new day", "1 of 4"]
    assert first[-1].value == pytest.approx(100 * near.sampled.probability[0])
    assert 0 < near.sampled.probability[0] < 1
    assert [cell.text for cell in reference[-3:]] == ["", "", ""]
    rejected = _table(screen, "REJECTED, NEAREST FIRST")
    assert [cell.text for cell in rejected.rows[-1] if cell.text] == ["would pass with", "no single change"]


def test_without_a_closer_look_nothing_of_it_is_shown(result: Shortlist, near: Near) -> None:
    plain, looked = shortlist.screen(result, Origin()), shortlist.screen(result, Origin(), near=near)
    words = json.dumps([str(block) for block in plain.blocks])
    assert "would pass with" not in words
    assert "corners" not in words
    assert [column.key for column in looked.table.columns][: len(plain.table.columns)] == [
        column.key for column in plain.table.columns
    ]
    for group in ("accepted", "conditional", "rejected"):
        assert all("closer" not in item for item in plain.data[group])
        assert all("closer" in item for item in looked.data[group])
        for item in looked.data[group]:
            del item["closer"]
        assert looked.data[group] == plain.data[group]


def test_rows_not_looked_at_stay_empty(result: Shortlist) -> None:
    screen = shortlist.screen(result, Origin(), near=look_nearer(result, top=1))
    looked = [item["pump"] for item in screen.data["conditional"] if "closer" in item]
    assert looked == [screen.data["conditional"][0]["pump"]]
    corners = [column.key for column in screen.table.columns].index("corners")
    assert [row[corners].text for row in screen.table.rows] == ["new day", "new day", "", ""]


def test_json_of_a_closer_look_conforms(result: Shortlist, near: Near) -> None:
    schema = json.loads(shipped.path("catalog_schema", "shortlist.schema.json").read_text())
    data = json.loads(json.dumps(shortlist.screen(result, Origin(), near=near).data))
    changed = closer.changes_data(result.bench, DISPLAY, [item for item, *_ in CHANGES])
    data["rejected"][0]["closer"]["changes"] = changed
    found = [f"{e.json_path}: {e.message}" for e in Draft202012Validator(schema).iter_errors(data)]
    assert found == []


@pytest.mark.parametrize(("more", "loads"), [([], False), (["--closer"], True)])
def test_a_shortlist_loads_no_change_unless_it_is_asked_for(more: list[str], loads: bool) -> None:
    driver = "import sys; from screener.cli import run; run(sys.argv[1:]); "
    driver += "print([n for n in sys.modules if n.startswith('screener.changes')], file=sys.stderr)"
    command = [sys.executable, "-c", driver, "shortlist", str(PLANT), *more]
    done = subprocess.run(command, capture_output=True, text=True, check=True)
    assert (done.stderr.strip() != "[]") == loads
    assert ("would pass with" in done.stdout) == loads
