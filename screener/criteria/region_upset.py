"""Wide open and after a trip every pump stays near its preferred region."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Kind, Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Flow over the flow of best efficiency, wide open and after trips."""
    value = run.flow / run.bounds.best
    upset = per_state(run.conditions.kind != Kind.DUTY) & run.conditions.runs
    return Observed(value, upset & ~(run.flow <= 0) & ~np.isinf(run.flow), **limits)


CRITERION = Criterion(
    name="region-upset",
    title="flow in upset, % of BEP",
    unit="%",
    gates=False,
    every_pump=True,
    needs="the flow of best efficiency",
    sentence="{pump} runs at {is} of its flow of best efficiency, {where}",
    observe=observe,
    limits={
        "caution_below": Limit(
            0.7, "ISO 13709 (API 610), preferred operating region; short duration, common practice, no source"
        ),
        "caution_above": Limit(
            1.2, "ISO 13709 (API 610), preferred operating region; short duration, common practice, no source"
        ),
    },
)
