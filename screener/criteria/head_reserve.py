"""A larger impeller could still be fitted."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Largest diameter over the one chosen."""
    value = run.pumps.maximum / run.pumps.diameter
    return Observed(
        once(value), once(~np.isnan(run.pumps.diameter)), caution_below=limits["caution_below"] - 1e-9
    )


CRITERION = Criterion(
    name="head-reserve",
    title="largest impeller ratio",
    unit="-",
    gates=False,
    every_pump=False,
    needs="the largest diameter on offer",
    sentence="{pump} leaves less than 5 % of head in reserve: the largest impeller is {is} times as large",
    observe=observe,
    limits={
        "caution_below": Limit(1.0247, "ISO 13709 (API 610): 5 % more head by a new impeller, by H ~ D^2"),
    },
)
