"""The workbook, read back by another library, and opened by LibreOffice where there is one."""

from __future__ import annotations

import csv
import io
import re
import shutil
import subprocess
import sys
import zipfile
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from screener.case.load import load
from screener.errors import UsageError
from screener.export import xlsx
from screener.export._xlsx_tables import complete, tables
from screener.model.finding import Verdict
from screener.screening.shortlist import shortlist
from screener.view import shortlist as view
from screener.view.blocks import (
    Axis,
    Block,
    Cell,
    Chart,
    Column,
    Heading,
    Lines,
    Mark,
    Pairs,
    Panel,
    Role,
    Screen,
    Series,
    Table,
    Tone,
)
from screener.view.data import Origin

openpyxl = pytest.importorskip("openpyxl")
PLANT = Path(__file__).parents[2] / "cli" / "plant" / "case.toml"
HOSTILE = (
    "=1+1",
    "=Summary!A1",
    "Summary!A1",
    "<script>alert(1)</script>",
    "[/red]",
    "two\nlines",
    "\x1b[2J\x1b[31mred\x07",
    "long" * 75,
    "http://x.invalid",
    "\t@SUM(1)",
    "{=1}",
)


@pytest.fixture(scope="module")
def screen() -> Screen:
    loaded = load(PLANT)
    return view.screen(shortlist(loaded.case, loaded.catalog), Origin(loaded.files), top=1)


@pytest.fixture(scope="module")
def book(screen: Screen) -> Any:
    return _read(screen)


def _read(screen: Screen) -> Any:
    return openpyxl.load_workbook(io.BytesIO(xlsx.render(screen)))


def _made(*blocks: Block, charts: Sequence[Chart] = (), sheets: Sequence[tuple[str, Table]] = ()) -> Screen:
    table = next((block for block in blocks if isinstance(block, Table)), Table([Column("a", "a")], []))
    return Screen(blocks, table, {}, charts=lambda: charts, sheets=lambda: sheets)


def _rows(sheet: Any) -> list[dict[str, Any]]:
    """Rows of a table's sheet by the key over each column, up to its notes."""
    keys, _, *rows = sheet.iter_rows(min_row=3, values_only=True)
    last = int(re.search(r"\d+$", sheet.auto_filter.ref)[0]) - 4  # type: ignore[index]
    named = [(place, key) for place, key in enumerate(keys) if key is not None]
    return [{key: row[place] for place, key in named} for row in rows[:last]]


def _parts(screen: Screen) -> dict[str, str]:
    with zipfile.ZipFile(io.BytesIO(xlsx.render(screen))) as archive:
        return {name: archive.read(name).decode() for name in archive.namelist()}


def _one(text: str, value: float | str | bool | None, tone: Tone = Tone.PLAIN) -> Screen:
    return _made(Heading("T"), Table([Column("a", "a")], [[Cell(text, value, tone)]]))


def test_every_figure_of_every_candidate_is_that_of_the_json(screen: Screen, book: Any) -> None:
    data: Any = screen.data
    items = [*data["accepted"], *data["conditional"], *data["rejected"]]
    rows = _rows(book["Every row"])
    assert [row["pump"] for row in rows] == [item["pump"] for item in items] == ["A", "D", "E", "C"]
    compared = 0
    for row, item in zip(rows, items, strict=True):
        for key in item.keys() & row.keys():
            assert row[key] == item[key] or (row[key] is None and item[key] in ("", None)), key
            compared += isinstance(item[key], float)
    assert compared > 40


def test_the_ranked_table_holds_all_rows_and_the_figures_of_the_json(screen: Screen, book: Any) -> None:
    data: Any = screen.data
    ranked = [row for row in _rows(book["Accepted, by score"]) if row["rank"] != "="]
    assert [row["pump"] for row in ranked] == [item["pump"] for item in data["accepted"]]
    for row, item in zip(ranked, data["accepted"], strict=True):
        for key in ("diameter", "score", "efficiency", "shutoff_match", "load_share", "npsh_ratio", "motor"):
            assert row[key] == item[key], key
    findings = [row for row in _rows(book["Rejected, nearest first"]) if row["outcome"] == "FAIL"]
    failed = [
        (item["pump"], one["criterion"], one["observed"])
        for item in data["rejected"]
        for one in item["findings"]
        if one["outcome"] == "fail"
    ]
    assert [(row["pump"], row["criterion"], row["observed"]) for row in findings] == failed
    assert failed


def test_the_sheets_of_a_shortlist(book: Any) -> None:
    names = book.sheetnames
    assert names[0] == "Summary"
    wanted = (
        "Requirement",
        "Trims of the best",
        "States of the best",
        "Energy of the best",
        "Limits",
        "Inputs",
    )
    assert [name for name in names if name in wanted] == list(wanted)


def test_states_requirement_and_limits_are_those_of_the_json(screen: Screen, book: Any) -> None:
    data: Any = screen.data
    for row, item in zip(_rows(book["Requirement"]), data["requirement"], strict=True):
        assert row["flow"] == item["flow"]
        assert row["missing_flow_today"] == item["missing_flow_today"]
        assert row["rated"] == ("yes" if item["rated"] else None)
    assert [(r["limit"], r["source"]) for r in _rows(book["Limits"])] == [
        (item["limit"], item["source"]) for item in data["limits"]
    ]
    assert [row["sha256"] for row in _rows(book["Inputs"])] == [item["sha256"] for item in data["inputs"]]


def test_energy_of_each_pump_and_duty_adds_up_to_that_of_the_candidate(screen: Screen, book: Any) -> None:
    data: Any = screen.data
    rows = [row for row in _rows(book["Energy of the best"]) if row["pump"] == "A"]
    parts = sum(row["energy_mwh_per_year"] for row in rows if row["of"] != "all pumps")
    whole = next(row["energy_mwh_per_year"] for row in rows if row["of"] == "all pumps")
    assert whole == data["accepted"][0]["energy_mwh_per_year"]
    assert parts == pytest.approx(whole, rel=1e-6)
    one = next(row for row in rows if row["of"] == "new")
    assert one["energy_mwh_per_year"] == pytest.approx(one["power"] * one["hours"] / 1000, rel=1e-5)


def test_energy_of_each_pump_counts_the_losses_of_its_motor_and_drive() -> None:
    loaded = load(PLANT)
    lossy = [replace(p, drive=replace(p.drive, motor_efficiency=0.9)) for p in loaded.case.installed]
    new = replace(loaded.case.new_pump, drive=replace(loaded.case.new_pump.drive, drive_efficiency=0.8))
    result = shortlist(replace(loaded.case, installed=tuple(lossy), new_pump=new), loaded.catalog)
    rows = _rows(_read(view.screen(result, Origin()))["Energy of the best"])
    first = [row for row in rows if row["pump"] == rows[0]["pump"]]
    parts = sum(row["energy_mwh_per_year"] for row in first if row["of"] != "all pumps")
    assert parts == pytest.approx(first[-1]["energy_mwh_per_year"], rel=1e-6)


def test_trims_hold_the_diameter_that_was_ranked(screen: Screen, book: Any) -> None:
    data: Any = screen.data
    rows = _rows(book["Trims of the best"])
    best = data["accepted"][0]
    at = next(row for row in rows if (row["pump"], row["diameter"]) == (best["pump"], best["diameter"]))
    assert (at["verdict"], at["score"], at["worst"]) == ("accepted", best["score"], None)
    assert len({row["pump"] for row in rows}) == 3


def test_energy_without_hours_is_blank_not_a_number() -> None:
    loaded = load(PLANT)
    case = replace(loaded.case, duties=tuple(replace(d, hours=float("nan")) for d in loaded.case.duties))
    result = shortlist(case, loaded.catalog)
    assert (result.best.verdict == Verdict.ACCEPTED).any()
    rows = _rows(_read(view.screen(result, Origin()))["Energy of the best"])
    assert {row["energy_mwh_per_year"] for row in rows} == {"-"}


def test_a_sheet_is_set_up_to_be_read_and_printed(book: Any) -> None:
    sheet = book["Accepted, by score"]
    assert sheet.freeze_panes == "C5"
    assert sheet.auto_filter.ref.startswith("A4:")
    assert (sheet.page_setup.orientation, int(sheet.page_setup.paperSize)) == ("landscape", 9)
    assert sheet.sheet_properties.pageSetUpPr.fitToPage
    assert (sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight) == (None, 0)  # one page wide
    assert sheet.print_title_rows == "$3:$4"
    assert sheet.oddHeader.left.text == "Second pump for a small plant"
    assert sheet.oddFooter.right.text == "Page &P of &N"
    titles = {key.value: title.value for key, title in zip(sheet[3], sheet[4], strict=True)}
    assert titles["diameter"] == "diameter, mm"
    assert titles["motor"] == "motor, kW"
    assert titles["rank"] == "rank"
    assert titles["load_share"] == "share, %"
    assert titles["efficiency"] == "eff %"


@pytest.mark.parametrize(
    ("text", "value", "shown"),
    [
        ("34.38", 34.3812, "0.00"),
        ("+1.2", 1.24, "+0.0;-0.0"),
        ("-0.6", -0.61, "0.0;-0.0"),
        ("0.0", -0.04, "0.0;0.0"),
        ("min 0.98", 0.98, '"min "0.00;"min "-0.00'),
        ("12.0 %", 12.04, '0.0" %";-0.0" %"'),
        ("shut", 0.0, '"shut"'),
        ("18.5", 18.5, "0.0"),
        ("2 x 110", 110.0, "General"),
    ],
)
def test_a_number_is_one_and_reads_as_its_text(text: str, value: float, shown: str) -> None:
    cell = _read(_one(text, value))["T"]["A5"]
    assert (cell.data_type, cell.value, cell.number_format) == ("n", value, shown)


@pytest.mark.parametrize(("text", "value"), [("past 1200", None), ("yes", True), ("-", None), ("12", "12")])
def test_what_is_no_number_is_written_as_words(text: str, value: bool | str | None) -> None:
    cell = _read(_one(text, value))["T"]["A5"]
    assert (cell.data_type, cell.value) == ("s", text)


def test_tones_differ_in_fill_and_in_type() -> None:
    rows = [[Cell(tone.name, None, tone)] for tone in Tone]
    sheet = _read(_made(Heading("T"), Table([Column("a", "a")], rows)))["T"]
    looks = {
        (cell.fill.fgColor.rgb, bool(cell.font.b), bool(cell.font.i), cell.font.color.rgb)
        for (cell,) in sheet.iter_rows(min_row=5)
    }
    assert len(looks) == len(Tone)
    assert sheet["A8"].font.b
    assert sheet["A7"].font.i


def test_columns_of_rank_9_are_left_out_and_notes_stand_under_the_table() -> None:
    columns = [Column("a", "A", "m"), Column("b", "B", rank=9), Column("c", "C", rank=8)]
    table = Table(columns, [[Cell("1", 1.0), Cell("2", 2.0), Cell("3", 3.0)]], ["first", "second"])
    sheet = _read(_made(Heading("T"), table))["T"]
    assert [cell.value for cell in sheet[4] if cell.value] == ["A, m", "C"]
    assert [sheet["A7"].value, sheet["A8"].value] == ["first", "second"]


def test_the_summary_holds_what_is_no_table_in_order() -> None:
    table = Table([Column("a", "A")], [[Cell("1", 1.0)]])
    made = _made(
        Heading("Title", "aside"), Lines(["line"]), Pairs([("label", "text")]), Heading("PART"), table
    )
    data: dict[str, object] = {
        "tool": {"name": "screener", "version": "9"},
        "date": "May",
        "inputs": [{"file": "case.toml", "sha256": "ab12"}],
    }
    sheet = _read(replace(made, data=data))["Summary"]
    values = [value for row in sheet.iter_rows(values_only=True) for value in row if value is not None]
    assert values == [
        "Title",
        "aside",
        "line",
        "label",
        "text",
        "PART",
        '1 row on the sheet "Part"',
        "MADE FROM",
        "tool",
        "screener 9",
        "date",
        "May",
        "case.toml",
        "sha256 ab12",
    ]


def test_a_fuller_table_takes_the_place_of_one_of_its_name() -> None:
    short = Table([Column("a", "A")], [[Cell("1", 1.0)]])
    flat = Table([Column("a", "A")], [[Cell("3", 3.0)]])
    full = Table([Column("a", "A")], [[Cell("1", 1.0)], [Cell("2", 2.0)]])
    made = _made(Heading("R", "1 more: --all"), short, sheets=[("R", full), ("More", short)])
    book = _read(replace(made, table=flat))
    assert book.sheetnames == ["Summary", "R", "Every row", "More"]
    assert [row["a"] for row in _rows(book["Every row"])] == [3]
    assert [row["a"] for row in _rows(book["R"])] == [1, 2]
    assert book["R"]["A2"].value is None


def test_tables_of_like_columns_that_follow_each_other_are_one_sheet() -> None:
    def table(value: float) -> Table:
        return Table([Column("a", "A")], [[Cell(f"{value:.0f}", value)]], ["same note"])

    other = Table([Column("b", "B")], [])
    book = _read(
        _made(
            Heading("DUTY"),
            table(1),
            Heading("B"),
            table(2),
            Heading("DRIVER"),
            table(3),
            Heading("LAST"),
            other,
        )
    )
    assert book.sheetnames == ["Summary", "Duty to driver", "Last"]
    assert _rows(book["Duty to driver"]) == [
        {"part": part, "a": value} for part, value in (("DUTY", 1), ("B", 2), ("DRIVER", 3))
    ]
    assert book["Duty to driver"]["A9"].value == "same note"
    said = [row[0] for row in book["Summary"].iter_rows(values_only=True)]
    assert said.count('1 row on the sheet "Duty to driver"') == 3


def test_names_of_sheets_are_allowed_and_unique() -> None:
    kinds = [Table([Column(key, "A")], []) for key in "ab"]
    wanted = [
        "[x]:*?/\\y",
        "'quoted'",
        "x" * 300,
        "x" * 40,
        "SUMMARY",
        "chart data",
        "",
        "揚" * 40,
        "😀" * 20,
    ]
    blocks = [part for n, name in enumerate(wanted) for part in (Heading(name), kinds[n % 2])]
    names = _read(_made(*blocks)).sheetnames[1:]
    assert names == [
        "x y", "quoted", "x" * 31, f"{'x' * 26} (2)", "Summary (2)", "chart data (2)", "Sheet",
        "揚" * 31, "😀" * 15,
    ]  # fmt: skip


def _chart(name: str = "P-1") -> Chart:
    line = Series(name, Role.INSTALLED, Mark.LINE, [0.0, 100.0, None, 200.0], [50.0, 45.0, None, 30.0])
    area = Series("system", Role.SYSTEM, Mark.AREA, [0.0, 200.0], [20.0, 40.0], [10.0, 30.0])
    upright = Series("lowest", Role.LIMIT, Mark.UPRIGHT, [80.0, 90.0])
    points = Series("duty", Role.DUTY, Mark.POINTS, [150.0, 151.0], [25.0, 25.0], labels=[name, "close"])
    panels = [Panel(Axis("head", "m"), [line, area, upright]), Panel(Axis("power", "kW"), [points])]
    return Chart("header", f"Header {name}", Axis("flow", "m3/h"), panels, note="a note", told="told")


def test_a_chart_refers_to_figures_in_cells() -> None:
    parts = _parts(_made(Heading("T"), charts=[_chart()]))
    sheet = _read(_made(Heading("T"), charts=[_chart()]))["Chart data"]
    columns = {
        tuple(cell.value for cell in column[2:4]): [cell.value for cell in column[4:]]
        for column in sheet.iter_cols(max_row=9)
    }
    assert columns["P-1", "flow, m3/h"][:4] == [0, 100, None, 200]
    assert columns["P-1", "head, m"][:4] == [50, 45, None, 30]
    assert columns["system", "head, m (lower edge)"][:2] == [10, 30]
    assert columns["lowest", "flow, m3/h"] == [80, 80, None, 90, 90]
    assert columns["duty", "label"][:2] == ["P-1", "close"]
    first, second = parts["xl/charts/chart1.xml"], parts["xl/charts/chart2.xml"]
    assert first.count("<c:ser>") == 4  # a line, both edges of an area, uprights
    assert second.count("<c:ser>") == 1
    assert re.findall(r"<c:yVal><c:numRef><c:f>([^<]*)", first) == [
        "'Chart data'!$B$5:$B$8",
        "'Chart data'!$E$5:$E$6",
        "'Chart data'!$F$5:$F$6",
        "'Chart data'!$I$5:$I$10",
    ]
    titles = re.findall(r"<c:title>.*?<c:v>([^<]*)", first)
    assert titles == ["Header P-1", "flow, m3/h", "head, m"]
    assert re.findall(r"<c:title>.*?<c:v>([^<]*)", second) == ["flow, m3/h", "power, kW"]
    assert re.findall(r'<c:legendEntry><c:idx val="([0-9])"', first) == ["2"]  # the lower edge
    assert 'descr="told"' in parts["xl/drawings/drawing1.xml"]


def test_an_area_is_named_at_its_beginning_where_there_is_room_and_not_in_the_legend() -> None:
    area = Series("P-1 + new", Role.NEW, Mark.AREA, [500.0, 900.0], [1.3, 1.3], [0.7, 0.7])
    text = _parts(_made(Heading("T"), charts=[Chart("map", "Map", Axis("flow"), [Panel(Axis(""), [area])])]))[
        "xl/charts/chart1.xml"
    ]
    assert re.findall(r"<a:t>([^<]*)", text) == ["P-1 + new"]
    assert re.findall(r'<c:legendEntry><c:idx val="([0-9])"', text) == ["0", "1"]


def test_uprights_span_the_axis_and_panels_share_theirs() -> None:
    parts = _parts(_made(Heading("T"), charts=[_chart()]))
    limits = [
        re.findall(r'<c:max val="([^"]*)"/><c:min val="([^"]*)"/>', parts[f"xl/charts/chart{n}.xml"])
        for n in (1, 2)
    ]
    assert [float(value) for value in limits[0][0]] == [250, 0]
    assert limits[0][0] == limits[1][0]
    sheet = _read(_made(Heading("T"), charts=[_chart()]))["Chart data"]
    assert [sheet["I5"].value, sheet["I6"].value] == [float(value) for value in reversed(limits[0][1])]


def test_labels_that_would_hide_one_another_are_left_to_the_cells() -> None:
    close = Series("d", Role.DUTY, Mark.POINTS, [1.0] * 6, [1.0] * 6, labels=[f"label {n}" for n in range(6)])
    chart = Chart("c", "C", Axis("x"), [Panel(Axis("y"), [close])])
    text = _parts(_made(Heading("T"), charts=[chart]))["xl/charts/chart1.xml"]
    shown = re.findall(r"<a:t>(label \d)", text)
    assert 1 <= len(shown) < 6
    assert text.count("<c:delete") == 6 - len(shown)


@pytest.mark.parametrize("name", HOSTILE)
def test_a_name_acts_on_nothing(name: str) -> None:
    table = Table([Column(name, name, left=True)], [[Cell(name, name)], [Cell(name, 1.0)]], [name])
    made = _made(Heading(name, name), Lines([name]), Pairs([(name, name)]), table, charts=[_chart(name)])
    parts = _parts(made)
    sheets = [text for part, text in parts.items() if part.startswith("xl/worksheets/sheet")]
    assert not any("<f>" in text or "<hyperlink" in text for text in sheets)
    assert "TargetMode" not in "".join(parts.values())
    for reference in re.findall(r"<c:f>([^<]*)", "".join(parts.values())):
        assert reference.startswith("'Chart data'!"), reference
    acting = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f]|_x00(0[0-8BCEF]|1.)_")
    assert not any(acting.search(text) for text in parts.values())
    for sheet in _read(made):
        assert not [cell for row in sheet.iter_rows() for cell in row if cell.data_type == "f"]


def test_the_same_input_gives_the_same_bytes(screen: Screen) -> None:
    made = _made(Heading("T"), Lines(["a"]), charts=[_chart()])
    assert xlsx.render(made) == xlsx.render(made)
    assert "2000-01-01" in _parts(made)["docProps/core.xml"]


def test_without_xlsxwriter_the_extra_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "xlsxwriter", None)
    with pytest.raises(UsageError, match=r"extra 'report'.*pump-header-screener\[report\]"):
        xlsx.render(_made(Heading("T")))


@pytest.mark.skipif(shutil.which("soffice") is None, reason="LibreOffice is not installed here")
def test_libreoffice_shows_every_cell_as_its_text(screen: Screen, tmp_path: Path) -> None:
    """Number formats included: what it shows of a sheet is what the terminal shows of the table."""
    full = complete(screen)
    (tmp_path / "w.xlsx").write_bytes(xlsx.render(screen))
    shown = "csv:Text - txt - csv (StarCalc):44,34,76,1,,0,false,true,true,false,false,-1"
    for target in (shown, "pdf"):
        subprocess.run(
            ["soffice", "--headless", f"-env:UserInstallation={(tmp_path / 'user').as_uri()}",
             "--convert-to", target, "--outdir", tmp_path, tmp_path / "w.xlsx"],
            check=True, capture_output=True, timeout=120,
        )  # fmt: skip
    assert (tmp_path / "w.pdf").stat().st_size > 10_000
    for item in tables(full):
        places = [n for n, column in enumerate(item.table.columns) if column.rank < 9]
        with (tmp_path / f"w-{item.name}.csv").open(encoding="utf-8", newline="") as file:
            rows = list(csv.reader(file))[4 : 4 + len(item.table.rows)]
        for row, cells in zip(rows, item.table.rows, strict=True):
            assert row[: len(places)] == [cells[place].text for place in places], item.name
