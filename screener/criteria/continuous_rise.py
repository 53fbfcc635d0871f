"""The head of the new pump rises continuously to shutoff."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Largest rise of head towards more flow, over the shutoff head."""
    return Observed(once(run.ratings.droop[:, 0]), once(np.ones(len(run.pumps), bool)), scale=0.1, **limits)


CRITERION = Criterion(
    name="continuous-rise",
    title="droop, % of shutoff head",
    unit="%",
    gates=True,
    every_pump=False,
    needs="a curve measured at shutoff",
    sentence="{pump} droops by {is} of its shutoff head, limit {limit}",
    observe=observe,
    limits={
        "fail_above": Limit(
            0.001,
            "ISO 13709 (API 610), pumps in parallel: continuous rise; 0.1 % is reading error, ours",
        ),
    },
)
