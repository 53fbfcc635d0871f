"""A standard motor is large enough for the new pump."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Nameplate that the new pump needs; above the largest of the series there is none."""
    value = run.ratings.motor[:, 0]
    return Observed(once(value), once(np.ones(len(run.pumps), bool)), **limits)


CRITERION = Criterion(
    name="motor-new",
    title="motor needed",
    unit="kW",
    gates=True,
    every_pump=False,
    needs="shaft power wherever it runs",
    sentence="{pump} needs a motor larger than any of the series",
    observe=observe,
    limits={
        "fail_above": Limit(1000000000.0, "the motor series of the case; a lower bound may be set"),
    },
)
