"""Every pump has NPSH to spare in every state, trips included."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, everywhere
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """NPSH available over NPSH required; the limit is the greater of a ratio and a difference.

    Where the suction specific speed is not known, a margin between its two limits is not judged.
    """
    value = run.npsh_available / run.npsh_required
    speed = everywhere(run.ratings.suction_specific_speed)
    usual = np.fmax(limits["ratio"], 1 + limits["difference"] / run.npsh_required)
    high = np.fmax(limits["ratio_when_high"], 1 + limits["difference_when_high"] / run.npsh_required)
    fail_below = np.where(speed > limits["high_suction_specific_speed"], high, usual)
    value = np.where(np.isnan(speed) & (value >= usual) & (value < high), np.nan, value)
    runs = run.conditions.runs & ~(run.flow <= 0) & ~np.isinf(run.flow)
    return Observed(
        value, runs, fail_below=fail_below, caution_below=np.fmax(limits["caution_below"], fail_below)
    )


CRITERION = Criterion(
    name="npsh-margin",
    title="NPSHa/NPSHr",
    unit="-",
    gates=True,
    every_pump=True,
    needs="NPSH required at that flow and, for a narrow margin, at best efficiency",
    sentence="{pump} has {is} times the NPSH it requires, limit {limit}, {where}",
    observe=observe,
    limits={
        "ratio": Limit(1.1, "ANSI/HI 9.6.1, water"),
        "difference": Limit(0.6, "ANSI/HI 9.6.1, water", "m"),
        "high_suction_specific_speed": Limit(145.0, "ANSI/HI 9.6.1, water: 7500 in US units"),
        "ratio_when_high": Limit(1.2, "ANSI/HI 9.6.1, water"),
        "difference_when_high": Limit(1.0, "ANSI/HI 9.6.1, water", "m"),
        "caution_below": Limit(1.3, "common practice, no source"),
    },
)
