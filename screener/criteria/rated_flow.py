"""The rated flow lies near the best efficiency of the new pump."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Flow of the new pump at the rated duty, over its flow of best efficiency."""
    value = (run.flow[:, :, 0] / run.bounds.best[:, :, 0])[:, :, None]
    return Observed(np.where(np.isinf(value), np.nan, value), per_state(run.conditions.rated), **limits)


CRITERION = Criterion(
    name="rated-flow",
    title="rated flow, % of BEP",
    unit="%",
    gates=True,
    every_pump=False,
    needs="the flow of best efficiency",
    sentence="{pump} runs at {is} of its flow of best efficiency at the rated duty, limit {limit}",
    observe=observe,
    limits={
        "fail_below": Limit(0.7, "ISO 13709 (API 610), preferred operating region 70-120 %; as a gate: ours"),
        "fail_above": Limit(1.2, "ISO 13709 (API 610), preferred operating region 70-120 %; as a gate: ours"),
        "caution_below": Limit(0.8, "ISO 13709 (API 610), rated flow 80-110 %"),
        "caution_above": Limit(1.1, "ISO 13709 (API 610), rated flow 80-110 %"),
    },
)
