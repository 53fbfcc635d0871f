"""The diameters of one pump: verdict, match of shutoff heads, lowest safe header flow."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.model.finding import Verdict
from screener.screening.judge import worst_criterion
from screener.screening.one import Trims
from screener.view import names
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.display import Display

ROLES = {Verdict.ACCEPTED: Role.NEW, Verdict.CONDITIONAL: Role.NEW_ASIDE, Verdict.REJECTED: Role.LIMIT}
WORDS = {Verdict.ACCEPTED: "accepted", Verdict.CONDITIONAL: "conditional", Verdict.REJECTED: "rejected"}


def chart(result: Trims) -> Chart | None:
    """Two figures of every diameter, each marked by its verdict; None for a pump that states no diameter."""
    bench, candidates = result.bench, result.judged.candidates
    case, display = bench.header.case, Display(bench.header.case.display)
    if not np.isfinite(candidates.diameter).all():
        return None
    x = parts.axis(display, "impeller diameter", "length")
    across = parts.numbers(display, "length", candidates.diameter)
    state = bench.header.states[bench.header.lowest]
    asked = Series(
        f"asked at {names.situation(case, state)}",
        Role.DUTY,
        Mark.LINE,
        [across[0], across[-1]],
        parts.numbers(display, "flow", [state.asked, state.asked]),
    )
    best = Series(
        f"best: {display.full('length', candidates.diameter[result.best])}",
        Role.NEW,
        Mark.UPRIGHT,
        [across[result.best]],
    )
    match = _marked(result, across, parts.percents(candidates.figures.shutoff))
    lowest = _marked(result, across, parts.numbers(display, "flow", result.band.lowest), stops=True)
    panels = [
        Panel(Axis("shutoff head above installed, worst", "%"), [best, *match]),
        Panel(
            parts.axis(display, "lowest safe header flow", "flow"), [replace(best, label=""), *lowest, asked]
        ),
    ]
    everyone = names.combination(case, state.running, state.new)
    return Chart(
        key="trims",
        title=f"{result.table.ids[result.model]} at its diameters",
        x=x,
        panels=[panel for panel in panels if any(item.mark == Mark.POINTS for item in panel.series)],
        note=f"Lowest safe header flow: with {everyone} running, each at its minimum flow or above. "
        "Beside the diameters next to those that pass stands the criterion that fails by most.",
        told=_told(result, display),
    )


def _marked(
    result: Trims, across: list[float | None], values: list[float | None], *, stops: bool = False
) -> list[Series]:
    """A figure over diameter as a thin line, and a mark for the verdict of each diameter."""
    known = [value is not None for value in values]
    if not any(known):
        return []
    verdict = result.judged.candidates.verdict
    series = [Series("", Role.NEW_ASIDE, Mark.LINE, across, values)]
    told = _stops(result) if stops else {}
    for kind, role in ROLES.items():
        rows = [row for row in np.flatnonzero(verdict == kind) if known[row]]
        if rows:
            series.append(
                Series(
                    WORDS[kind],
                    role,
                    Mark.POINTS,
                    [across[row] for row in rows],
                    [values[row] for row in rows],
                    labels=[told.get(int(row), "") for row in rows],
                )
            )
    return series


def _stops(result: Trims) -> dict[int, str]:
    """What stops the diameters next to those that pass."""
    candidates = result.judged.candidates
    passing = np.flatnonzero(candidates.verdict == Verdict.ACCEPTED)
    beside = [int(passing[0]) - 1, int(passing[-1]) + 1] if passing.size else [result.best]
    return {row: worst_criterion(candidates.findings, row) for row in beside if 0 <= row < len(candidates)}


def _told(result: Trims, display: Display) -> str:
    candidates = result.judged.candidates
    verdicts = candidates.verdict
    edges = np.flatnonzero(np.diff(verdicts)) + 1
    parts_ = []
    for first, end in zip([0, *edges], [*edges, len(verdicts)], strict=True):
        low, high = (
            display.text("length", candidates.diameter[first]),
            display.full("length", candidates.diameter[end - 1]),
        )
        parts_.append(f"{low} to {high} {WORDS[Verdict(int(verdicts[first]))]}")
    return f"{'; '.join(parts_)}."
