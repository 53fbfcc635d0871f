"""The suction of the new pump is not of an extreme design."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Suction specific speed at the largest impeller, for each eye."""
    return Observed(once(run.pumps.suction_specific_speed), once(np.ones(len(run.pumps), bool)), **limits)


CRITERION = Criterion(
    name="suction-specific-speed",
    title="suction specific speed",
    unit="-",
    gates=False,
    every_pump=False,
    needs="NPSH required at best efficiency",
    sentence="{pump} has a suction specific speed of {is} (rpm, m3/s, m)",
    observe=observe,
    limits={
        "caution_above": Limit(213.0, "common practice, no source: 11,000 in US units"),
    },
)
