"""The impeller stays within what is offered, and is not cut too far."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Diameter over the largest one on offer. Without a stated minimum a general least trim holds."""
    pumps = run.pumps
    value = pumps.diameter / pumps.maximum
    smallest = pumps.minimum / pumps.maximum
    fail_below = np.where(np.isnan(smallest), limits["fail_below"], smallest)
    mixed = (pumps.specific_speed >= 48) & (pumps.specific_speed <= 77)
    caution_below = np.where(mixed, limits["caution_below_at_48_to_77"], limits["caution_below"])
    return Observed(
        once(value),
        once(~np.isnan(pumps.diameter)),
        fail_below=once(fail_below - 1e-9),
        fail_above=1 + 1e-9,
        caution_below=once(np.maximum(caution_below, fail_below) - 1e-9),
    )


CRITERION = Criterion(
    name="trim-range",
    title="impeller, %",
    unit="%",
    gates=True,
    every_pump=False,
    needs="the diameters on offer",
    sentence="{pump} would be cut to {is} of its largest impeller, limit {limit}",
    observe=observe,
    limits={
        "fail_below": Limit(
            0.75,
            "US DOE tip sheet on trimming: about 75 %, where the catalog states no minimum",
        ),
        "caution_below": Limit(
            0.8, "Lobanoff and Ross, Centrifugal Pumps, 2nd ed., p. 19: least diameter 80 % of full"
        ),
        "caution_below_at_48_to_77": Limit(
            0.9,
            "Lobanoff and Ross, Centrifugal Pumps, 2nd ed., p. 19: 90 % at specific speeds 2500-4000 (US)",
        ),
    },
)
