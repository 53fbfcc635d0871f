"""The shutoff head of the new pump matches those it runs beside."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, beside, everywhere
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Shutoff head at the header less that of each installed pump, over the latter."""
    value = np.concatenate([np.full((len(run.pumps), 1), np.nan), run.shutoff_match], axis=1)
    return Observed(everywhere(value), everywhere(beside(run)), scale=1.0, **limits)


CRITERION = Criterion(
    name="shutoff-match",
    title="shutoff head match, %",
    unit="%",
    gates=False,
    every_pump=True,
    needs="a curve measured at shutoff",
    sentence="{pump} and the new one differ by {is} in shutoff head",
    observe=observe,
    limits={
        "caution_below": Limit(-0.05, "common practice, no source"),
        "caution_above": Limit(0.05, "common practice, no source"),
    },
)
