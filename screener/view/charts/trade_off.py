"""What candidates cost against how well they fit: efficiency over the mismatch of shutoff heads."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from screener.model.finding import Candidates, Verdict
from screener.screening.shortlist import Shortlist
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.data import energy_words

BEST = 10
"""Accepted pumps that are named."""

GROUPS = ((Verdict.REJECTED, Role.LIMIT), (Verdict.CONDITIONAL, Role.NEW_ASIDE), (Verdict.ACCEPTED, Role.NEW))
WORDS = {Verdict.ACCEPTED: "accepted", Verdict.CONDITIONAL: "conditional", Verdict.REJECTED: "near miss"}


def chart(result: Shortlist) -> Chart | None:
    """Overall efficiency over shutoff mismatch of every pump that was run; None where there is none."""
    best, case = result.best, result.bench.header.case
    series = []
    for verdict, role in GROUPS:
        rows = np.flatnonzero(best.verdict == verdict)
        named = (
            [result.table.ids[int(best.model[row])] for row in rows] if verdict == Verdict.ACCEPTED else []
        )
        series += _points(best, WORDS[verdict], role, rows, named)
    tags = [f"one more {case.installed[row].tag}" for row in result.same_as]
    series += _points(result.references, "one more installed", Role.INSTALLED, np.arange(len(tags)), tags)
    if not series:
        return None
    x, y = Axis("shutoff head above that of the installed pumps, worst", "%"), Axis("system efficiency", "%")
    limits = result.bench.limits["shutoff-match"]
    bounds = [value for value in (limits["caution_below"], limits["caution_above"]) if np.isfinite(value)]
    line = Series("caution", Role.LIMIT, Mark.UPRIGHT, parts.percents(bounds))
    return Chart(
        key="trade-off",
        title="Efficiency against how well a new pump matches",
        x=x,
        panels=[Panel(y, [*series, line])],
        note=f"System efficiency: useful head of the system over {energy_words(case)}, all pumps, by hours. "
        f"The {BEST} best accepted pumps are named. Pumps without one of the two figures are not drawn.",
        told=f"The best accepted, mismatch and efficiency: {parts.told(series, Axis('', '%'), y)}.",
    )


def _points(
    candidates: Candidates, label: str, role: Role, rows: np.typing.NDArray[np.int64], named: Sequence[str]
) -> list[Series]:
    """One verdict as points, the first of them named."""
    f = candidates.figures
    known = [
        number
        for number, row in enumerate(rows)
        if np.isfinite(f.shutoff[row]) and np.isfinite(f.efficiency[row])
    ]
    if not known:
        return []
    at = rows[known]
    labels = [named[number] if place < BEST else "" for place, number in enumerate(known)] if named else ()
    return [
        Series(
            label,
            role,
            Mark.POINTS,
            parts.percents(f.shutoff[at]),
            parts.percents(f.efficiency[at]),
            labels=labels,
        )
    ]
