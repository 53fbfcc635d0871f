"""Every pump stays on its measured curve in every state."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Flow over the last measured flow; beyond it there are no data, and no verdict."""
    value = run.flow / run.bounds.end
    first = run.bounds.start / run.bounds.end
    return Observed(
        value,
        run.conditions.runs & np.ones_like(value, bool),
        fail_below=np.where(first > 0, first, 0.0),  # no curve at all is below that
        fail_above=limits["fail_above"],
        caution_above=limits["caution_above"],
    )


CRITERION = Criterion(
    name="curve-end",
    title="flow, % of curve end",
    unit="%",
    gates=True,
    every_pump=True,
    needs="a state in which every pump stays on its curve",
    sentence="{pump} runs at {is} of the end of its curve, {where}",
    observe=observe,
    limits={
        "fail_above": Limit(1.0, "no data, no verdict"),
        "caution_above": Limit(0.95, "ours"),
    },
)
