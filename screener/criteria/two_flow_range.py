"""At the header no head belongs to two flows of the new pump."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Peak of the branch curve over its shutoff head, less one."""
    value = run.ratings.header_summit[:, 0] / run.ratings.header_shutoff[:, 0] - 1
    return Observed(once(value), once(np.ones(len(run.pumps), bool)), **limits)


CRITERION = Criterion(
    name="two-flow-range",
    title="two-flow range, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="a curve measured at shutoff",
    sentence="{pump} has two flows for one head over the top {is} of its branch curve",
    observe=observe,
    limits={
        "caution_above": Limit(
            0.001,
            "US DOE and HI tip sheet on parallel pumping: drooping pumps not in parallel; ours",
        ),
    },
)
