"""Findings to cells and sentences."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener import units
from screener.criteria import Criterion, criteria
from screener.model.finding import Findings, Outcome
from screener.screening.assess import Bench
from screener.view import names
from screener.view.blocks import Cell, Tone
from screener.view.display import DASH, Display, tidy

WORDS = {
    Outcome.PASS: "pass",
    Outcome.CAUTION: "caution",
    Outcome.NOT_ASSESSED: "not assessed",
    Outcome.FAIL: "FAIL",
}
TONES = {
    Outcome.PASS: Tone.GOOD,
    Outcome.CAUTION: Tone.WARNING,
    Outcome.NOT_ASSESSED: Tone.WARNING,
    Outcome.FAIL: Tone.BAD,
}


NO_FIGURES = "figures: a pump is past its data"


@dataclass(frozen=True, slots=True)
class Found:
    """One finding of one candidate, in words and numbers."""

    criterion: Criterion
    outcome: Outcome
    value: Cell
    limit: Cell
    shortfall: float
    pump: str
    where: str
    already: bool
    needs: str

    @property
    def verdict(self) -> Cell:
        """The outcome as a cell."""
        return Cell(WORDS[self.outcome], WORDS[self.outcome].lower(), TONES[self.outcome])


def found(bench: Bench, display: Display, findings: Findings, row: int) -> list[Found]:
    """Every finding of one candidate, in the order of the criteria."""
    case, states = bench.header.case, bench.header.states
    result = []
    for column, criterion in enumerate(criteria()):
        state, pump = int(findings.state[row, column]), int(findings.pump[row, column])
        observed = float(findings.observed[row, column])
        outside = findings.outcome[row, column] in (Outcome.FAIL, Outcome.CAUTION)
        finer = outside and _alike(criterion, display, observed, float(findings.limit[row, column]))
        end = bench.header.standing[state].branches.end[pump - 1] if pump > 0 and state >= 0 else np.nan
        result.append(
            Found(
                criterion=criterion,
                outcome=Outcome(int(findings.outcome[row, column])),
                value=past_end(display, end)
                if np.isposinf(observed) and criterion.name == "curve-end"
                else amount(criterion, display, observed, finer=finer),
                limit=_limit(criterion, display, findings, row, column, finer=finer),
                shortfall=float(findings.shortfall[row, column]),
                pump=names.pump(case, pump) if pump >= 0 else "",
                where=names.where(case, states[state]) if state >= 0 else "",
                already=bool(findings.already[row, column]),
                needs=NO_FIGURES if findings.blank[row, column] else criterion.needs,
            )
        )
    return result


def _alike(criterion: Criterion, display: Display, observed: float, limit: float) -> bool:
    """Whether a value outside its limit would read as the limit itself."""
    return amount(criterion, display, observed).text == amount(criterion, display, limit).text


def _limit(
    criterion: Criterion, display: Display, findings: Findings, row: int, column: int, *, finer: bool
) -> Cell:
    """The limit, and whether it is the least or the most, by the side on which the value lies."""
    observed, limit = float(findings.observed[row, column]), float(findings.limit[row, column])
    cell = amount(criterion, display, limit, finer=finer)
    if cell.value is None or np.isnan(observed):
        return cell
    outside = findings.outcome[row, column] in (Outcome.FAIL, Outcome.CAUTION)
    least = observed < limit if outside else observed >= limit
    return Cell(f"{'min' if least else 'max'} {cell.text}", cell.value)


def worst_first(items: list[Found]) -> list[Found]:
    """What failed, the largest shortfall first."""
    return sorted(
        (f for f in items if f.outcome == Outcome.FAIL), key=lambda f: (-f.shortfall, f.criterion.name)
    )


def amount(criterion: Criterion, display: Display, value: float, *, finer: bool = False) -> Cell:
    """A value in the unit of its criterion; `finer` with as many digits as it is kept with."""
    if not np.isfinite(value):
        return Cell("none" if np.isposinf(value) else DASH)
    if finer:
        kept = amount(criterion, display, value).value
        return Cell(f"{kept:.5g}", kept)
    if criterion.unit == "%":
        near = 0 < abs(value - 1) < 0.002  # 99.87 is no 99.9
        return Cell(f"{100 * value:z.{2 if near else 1}f}", tidy(100 * value))
    if criterion.unit == "-":
        return Cell(f"{value:z.2f}" if abs(value) < 20 else f"{value:.0f}", tidy(value))
    quantity = _quantity(criterion)
    return display.nameplate(value) if quantity == "power" else display.cell(quantity, value)


def past_end(display: Display, end: float) -> Cell:
    """A flow beyond the last measured one, which is no number."""
    return Cell(f"past {display.text('flow', end)}" if np.isfinite(end) else "past its end")


def unit_of(criterion: Criterion, display: Display) -> str:
    """The unit that values of a criterion are shown in."""
    if criterion.unit in ("%", "-"):
        return "" if criterion.unit == "-" else "%"
    return display.unit(_quantity(criterion))


def _quantity(criterion: Criterion) -> str:
    """What the values of a criterion are; a conformance test holds that its unit is in the table."""
    return units.dimension_of(criterion.unit) or criterion.unit


def sentence(item: Found, display: Display, pump: str) -> str:
    """One finding as a clause; `pump` is what the new pump is called."""
    name = pump if item.pump in (names.NEW, "") else item.pump
    if item.criterion.name == "curve-end" and item.limit.text.startswith("min"):
        return f"{name} has no curve where it would run, {item.where}"
    if item.criterion.name == "curve-end" and item.value.value is None:
        return f"{name} runs past its last measured point, {item.where}"
    unit = unit_of(item.criterion, display)
    space = " " if unit else ""
    text = item.criterion.sentence.format(
        pump=name,
        where=item.where or "in every state",
        limit=f"{item.limit.text.removeprefix('min ').removeprefix('max ')}{space}{unit}",
        **{"is": item.value.text if item.value.value is None else f"{item.value.text}{space}{unit}"},
    )
    return f"{text}, as it is today" if item.already else text
