"""Dead-headed, the new pump overloads neither its casing nor the header."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once, per_state
from screener.hydraulics.constants import GRAVITY
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Largest suction pressure plus largest head of the curve, over the lower of the two ratings."""
    conditions, ratings = run.conditions, run.ratings
    head = run.bounds.summit[:, :, :1] * per_state(conditions.density * GRAVITY)
    pressure = conditions.suction_pressure[:, :1] + head
    allowed = np.fmin(ratings.allowable_pressure[:, 0], limits["header"])
    known = ~np.isnan(ratings.allowable_pressure[:, 0]) & ~np.isnan(limits["header"])
    value = pressure / once(allowed)
    value = np.where(once(known) | (value > limits["fail_above"]), value, np.nan)
    return Observed(
        value,
        per_state(conditions.runs[:, 0]),
        fail_above=limits["fail_above"],
        caution_above=limits["caution_above"],
    )


CRITERION = Criterion(
    name="shutoff-pressure",
    title="shutoff pressure, %",
    unit="%",
    gates=True,
    every_pump=False,
    needs="a curve measured at shutoff and both pressure ratings",
    sentence="{pump} reaches {is} of the allowable pressure when dead-headed, {where}",
    observe=observe,
    limits={
        "fail_above": Limit(1.0, "physics: the rating of the weaker of pump and header"),
        "caution_above": Limit(0.95, "common practice, no source"),
    },
)
