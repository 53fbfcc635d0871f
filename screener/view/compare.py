"""The screen of `screener compare`: candidates across, requirements down."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

from screener.changes.datasheet import DataSheet
from screener.model.finding import Outcome, Verdict
from screener.screening.reach import Reason
from screener.view import data
from screener.view.blocks import Block, Cell, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin
from screener.view.datasheet_fields import Field, Writer
from screener.view.datasheet_groups import groups
from screener.view.display import DASH, Display, tidy, word
from screener.view.explain import VERDICT_TONES
from screener.view.findings import TONES, WORDS, Found, found, unit_of

BLANK = Cell("")
BEST = "best"
FIRM = "firm_flow"
MARKS = {
    WORDS[Outcome.FAIL].lower(): "x",
    WORDS[Outcome.CAUTION].lower(): "!",
    WORDS[Outcome.NOT_ASSESSED].lower(): "?",
    BEST: "*",
}
NOTE = (
    "x fails, ! caution, ? not assessed. off by: offered less asked, in the unit of the row. Where "
    "pumps are held against different limits, these stand in a row of their own. explain tells where."
)
FIGURES: dict[str, Callable[[Sequence[float]], float] | None] = {
    "shutoff_head": None,
    "bep_flow": None,
    "curve_end": None,
    "minimum_flow_stable": min,
    "npsh_required_rated": min,
    "discharge_pressure_highest": None,
    "efficiency_rated": max,
    "power_rated": min,
    "power_largest": min,
    "motor": min,
    "head_tolerance": min,
    "from_test": min,
}
"""Fields of the data sheet that tell candidates apart, and which of them is the best, if any is."""

TOTALS: dict[str, tuple[str, str, int, Callable[[Sequence[float]], float]]] = {
    "efficiency": ("efficiency of the system", "%", 1, max),
    "energy_mwh_per_year": ("energy a year", "MWh", 0, min),
    "energy_kwh_per_m3": ("energy for each m3", "kWh/m3", 4, min),
    "score": ("score", "", 1, max),
}
"""Figures of a candidate with the whole header: title, unit, decimals, and which is the best."""


@dataclass(frozen=True, slots=True)
class Offer:
    """What one candidate offers. verdict : of a criterion, "best" among the candidates, or "" where none."""

    offered: Cell
    asked: Cell = BLANK
    verdict: str = ""
    tone: Tone = Tone.PLAIN
    of: str = ""
    where: str = ""

    @property
    def bound(self) -> str:
        """Whether the limit is the least or the most, "" where what is asked is neither."""
        word = self.asked.text.partition(" ")[0]
        return word if word in ("min", "max") else ""

    @property
    def deviation(self) -> Cell:
        """Offered less asked, in the same unit, with as many decimals as what is offered."""
        if not isinstance(self.offered.value, float) or not isinstance(self.asked.value, float):
            return BLANK
        difference = self.offered.value - self.asked.value
        return Cell(f"{difference:+z.{len(self.offered.text.partition('.')[2])}f}", tidy(difference))


@dataclass(frozen=True, slots=True)
class Row:
    """One requirement or figure of every candidate."""

    key: str
    title: str
    unit: str
    offers: tuple[Offer, ...]

    @property
    def label(self) -> str:
        """Title with its unit, where neither the title nor the heading of its part says it."""
        said = not self.unit or self.unit in self.title or "points" in self.title or self.key == FIRM
        return self.title if said else f"{self.title}, {self.unit}"


Part = tuple[str, str, Sequence[Row]]
"""Key, heading and rows."""


def screen(sheets: Sequence[DataSheet], origin: Origin) -> Screen:
    """Candidates side by side as blocks, one row for each and each requirement as the table, and as data."""
    bench = sheets[0].explained.bench
    display = Display(bench.header.case.display)
    fields = [_fields(sheet, display) for sheet in sheets]
    figures = [data.figures(bench, display, sheet.explained.judged.candidates, 0) for sheet in sheets]
    parts: list[Part] = [
        ("requirement", "ASKED AND OFFERED", [*_duty(fields), *_criteria(sheets, display)]),
        ("figure", "FIGURES", [*_figures(fields), *_totals(figures)]),
        (FIRM, "FIRM FLOW AFTER TRIPS", _firm(figures)),
    ]
    asides = {"figure": "* best of these", FIRM: "% of what the duty asks"}
    blocks: list[Block] = [Heading(bench.header.case.title, f"{len(sheets)} candidates")]
    blocks += [Lines([_required(fields[0])]), _candidates(sheets, display)]
    for key, heading, rows in parts:
        if rows:
            note = [NOTE] if key == "requirement" else []
            blocks += [Heading(heading, asides.get(key, "")), _side_by_side(sheets, rows, note)]
    blocks.append(Lines(data.CAUTIONS, Tone.QUIET))
    flat = _flat(sheets, display, parts)
    content = {
        **data.head(bench, "pump-comparison", origin),
        "asked": {
            "where": fields[0]["rated_duty"].cell.value,
            "flow": fields[0]["capacity_asked"].cell.value,
            "head": fields[0]["head_asked"].cell.value,
        },
        "candidates": [_candidate(sheet, display, item) for sheet, item in zip(sheets, figures, strict=True)],
        "rows": [
            {column.key: cell.value for column, cell in zip(flat.columns, row, strict=True)}
            for row in flat.rows
        ],
        "limits": data.limits(bench, display),
    }
    return Screen(blocks, flat, content)


def _fields(sheet: DataSheet, display: Display) -> dict[str, Field]:
    return {field.key: field for group in groups(Writer(sheet, display)) for field in group.fields}


def _required(fields: dict[str, Field]) -> str:
    flow, head, where = (fields[key] for key in ("capacity_asked", "head_asked", "rated_duty"))
    if flow.cell.value is None:
        return f"Required of the new pump: not known at {where.cell.text}."
    asked = f"{flow.cell.text} {flow.unit} at {head.cell.text} {head.unit}"
    return f"Required of the new pump: {asked}, {where.cell.text}."


def _duty(fields: Sequence[dict[str, Field]]) -> Iterator[Row]:
    """Flow and head at the rated duty, beside what it asks of the new pump."""
    for key, asked in (("capacity_rated", "capacity_asked"), ("head_rated", "head_asked")):
        one = fields[0][key]
        yield Row(key, one.label, one.unit, tuple(Offer(f[key].cell, f[asked].cell) for f in fields))


def _criteria(sheets: Sequence[DataSheet], display: Display) -> list[Row]:
    """Every criterion, the worst outcome first."""
    items = [
        found(sheet.explained.bench, display, sheet.explained.judged.candidates.findings, 0)
        for sheet in sheets
    ]
    several = sorted(zip(*items, strict=True), key=lambda one: -max(item.outcome for item in one))
    return [
        Row(
            one[0].criterion.name,
            one[0].criterion.title,
            unit_of(one[0].criterion, display),
            tuple(map(_found, one)),
        )
        for one in several
    ]


def _found(item: Found) -> Offer:
    missing = item.outcome == Outcome.NOT_ASSESSED
    seen = item.value.text != DASH  # else there is no side of the limit on which it lies
    return Offer(
        offered=item.value if seen else BLANK,
        asked=item.limit if seen and item.limit.value is not None else BLANK,
        verdict=WORDS[item.outcome].lower(),
        tone=Tone.PLAIN if item.outcome == Outcome.PASS else TONES[item.outcome],
        of=item.pump,
        where=f"needs {item.needs}" if missing else item.where,
    )


def _figures(fields: Sequence[dict[str, Field]]) -> Iterator[Row]:
    for key, better in FIGURES.items():
        one = fields[0][key]
        yield Row(key, one.label, one.unit, _marked([Offer(f[key].cell) for f in fields], better))


def _totals(figures: Sequence[dict[str, Any]]) -> Iterator[Row]:
    for key, (title, unit, decimals, better) in TOTALS.items():
        offers = [Offer(_cell(item[key], decimals)) for item in figures]
        yield Row(key, title, unit, _marked(offers, better))


def _firm(figures: Sequence[dict[str, Any]]) -> list[Row]:
    """What each trip leaves, of what the duty asks."""
    asked = Cell("100", 100.0)
    rows = []
    for trips in zip(*(item["firm_flow"] for item in figures), strict=True):
        offers = [Offer(_cell(trip["delivered"], 1), asked, where=trip["state"]) for trip in trips]
        rows.append(Row(FIRM, trips[0]["state"], "%", _marked(offers, max)))
    return rows


def _cell(value: float | None, decimals: int) -> Cell:
    return BLANK if value is None else Cell(f"{value:z.{decimals}f}", value)


def _marked(offers: Sequence[Offer], better: Callable[[Sequence[float]], float] | None) -> tuple[Offer, ...]:
    """The offers, those that read as the best marked unless all do."""
    read = {offer.offered.text: offer.offered.value for offer in offers}
    values = {text: value for text, value in read.items() if isinstance(value, float)}
    if better is None or len(values) < 2:
        return tuple(offers)
    best = better(list(values.values()))
    return tuple(
        replace(offer, verdict=BEST, tone=Tone.GOOD) if values.get(offer.offered.text) == best else offer
        for offer in offers
    )


def _columns(sheets: Sequence[DataSheet], *, deviations: bool) -> list[Column]:
    """One column a candidate, and one for how far it is off; where room is short the first ones stay."""
    columns = []
    for number, sheet in enumerate(sheets):
        title = sheet.explained.table.ids[sheet.explained.model]
        columns.append(Column(f"offered {number + 1}", title, rank=max(number - 2, 0)))
        if deviations:
            columns.append(Column(f"deviation {number + 1}", "off by", rank=6 + min(number, 2)))
    return columns


def _candidates(sheets: Sequence[DataSheet], display: Display) -> Table:
    """Who they are, and whether they pass."""
    rows = [[Cell(f"impeller, {display.unit('length')}")], [Cell("verdict")], [Cell("criteria that fail")]]
    for sheet in sheets:
        candidates = sheet.explained.judged.candidates
        verdict = Verdict(int(candidates.verdict[0]))
        failed = int((candidates.findings.outcome[0] == Outcome.FAIL).sum())
        rows[0].append(display.cell("length", candidates.diameter[0]))
        rows[1].append(word(data.VERDICTS[verdict], VERDICT_TONES[verdict]))
        rows[2].append(Cell(str(failed), failed))
    return Table([Column("candidate", "candidate", left=True), *_columns(sheets, deviations=False)], rows)


def _side_by_side(sheets: Sequence[DataSheet], rows: Sequence[Row], note: Sequence[str]) -> Table:
    """Rows in which no candidate has anything to show are left out."""
    asks = any(offer.asked.text for row in rows for offer in row.offers)
    deviations = any(row.key != FIRM for row in rows) and asks
    columns = [Column("requirement", "", left=True)]
    columns += [Column("asked", "asked")] if asks else []
    columns += _columns(sheets, deviations=deviations)
    cells = []
    for row in rows:
        if not any(offer.offered.value is not None or offer.verdict in MARKS for offer in row.offers):
            continue
        known = sorted((offer for offer in row.offers if offer.asked.text), key=lambda o: len(o.asked.text))
        asked = {(offer.bound, offer.asked.value): offer.asked for offer in known}  # the fullest text is kept
        line = [Cell(row.label)]
        line += [known[-1].asked if len(asked) == 1 else BLANK] if asks else []
        limits = [Cell("  held against"), BLANK]
        for offer in row.offers:
            mark = MARKS.get(offer.verdict, "")
            line.append(Cell(f"{mark} {offer.offered.text}".strip(), offer.offered.value, offer.tone))
            line += [offer.deviation] if deviations else []
            limits += [replace(offer.asked, tone=Tone.QUIET), BLANK]
        cells += [line, limits] if len(asked) > 1 else [line]
    return Table(columns, cells, note)


def _flat(sheets: Sequence[DataSheet], display: Display, parts: Sequence[Part]) -> Table:
    """One row for each candidate and each requirement or figure."""
    columns = [
        Column("part", "part", left=True),
        Column("key", "key", left=True),
        Column("requirement", "requirement", left=True),
        Column("unit", "unit", left=True),
        Column("candidate", "candidate"),
        Column("pump", "pump", left=True),
        Column("diameter", "diameter", display.unit("length")),
        Column("bound", "bound", left=True),
        Column("asked", "asked"),
        Column("offered", "offered"),
        Column("deviation", "deviation"),
        Column("verdict", "verdict", left=True),
        Column("of", "of", left=True),
        Column("where", "where", left=True),
    ]
    rows = [
        [
            *(word(text) for text in (part, row.key, row.title, row.unit)),
            Cell(str(number + 1), number + 1),
            word(sheet.explained.table.ids[sheet.explained.model]),
            display.cell("length", sheet.explained.judged.candidates.diameter[0]),
            word(offer.bound),
            offer.asked,
            offer.offered,
            offer.deviation,
            *(word(text) for text in (offer.verdict, offer.of, offer.where)),
        ]
        for part, _, several in parts
        for row in several
        for number, (sheet, offer) in enumerate(zip(sheets, row.offers, strict=True))
    ]
    return Table(columns, rows)


def _candidate(sheet: DataSheet, display: Display, figures: dict[str, Any]) -> dict[str, Any]:
    one = sheet.explained
    table, model, candidates = one.table, one.model, one.judged.candidates
    reason = Reason(int(one.reach.reason[model]))
    return {
        "pump": table.ids[model],
        "title": table.titles[model],
        "construction": table.constructions[model],
        "source": table.sources[model],
        "diameter": display.number("length", candidates.diameter[0]),
        "speed": tidy(float(one.judged.run.pumps.speed[0])),
        "verdict": data.VERDICTS[Verdict(int(candidates.verdict[0]))],
        "cannot_reach": None if reason == Reason.REACHES else data.REASONS[reason],
        **figures,
    }
