"""A pump of variable speed has a range of speeds in which it is of use."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Speed at load less the speed at which the new pump reaches its minimum flow, system open."""
    value = (1 - run.least_speed)[:, :, None]
    varies = run.conditions.held & run.conditions.runs[:, 0]
    return Observed(value, per_state(varies) & ~np.isnan(run.opening_speed)[:, :, None], scale=1.0, **limits)


CRITERION = Criterion(
    name="speed-range",
    title="usable speed, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="a minimum flow that it reaches below twice its speed",
    sentence="{pump} is of use over {is} of its speed, limit {limit}, {where}",
    observe=observe,
    limits={
        "caution_below": Limit(0.05, "ours: the steps of a drive and the swing of a level need more"),
    },
)
