"""Every pump can open its check valve against the others."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, everywhere, per_duty_pump
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Shutoff head at the header over the header head that the others hold, less one."""
    value = run.bounds.opening / run.start_header - 1
    tolerance = np.where(
        np.isnan(run.ratings.head_tolerance), limits["unknown_tolerance"], run.ratings.head_tolerance
    )
    return Observed(
        value,
        per_duty_pump(run),
        fail_below=limits["fail_below"],
        caution_below=everywhere(np.maximum(tolerance, limits["fail_below"])),
        scale=1.0,
    )


CRITERION = Criterion(
    name="start",
    title="head to open valve, %",
    unit="%",
    gates=True,
    every_pump=True,
    needs="a curve measured at shutoff, and figures while it stands still",
    sentence="{pump} has {is} of head over the header to open its check valve, {where}",
    observe=observe,
    limits={
        "fail_below": Limit(0.0, "physics: a check valve opens only against a lower head"),
        "unknown_tolerance": Limit(0.05, "ours, where the curve has no acceptance grade (ISO 9906)"),
    },
)
