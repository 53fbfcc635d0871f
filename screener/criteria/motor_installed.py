"""No installed motor is overloaded, service factor not credited."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, everywhere
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Shaft power over the nameplate of each installed motor."""
    value = run.power / everywhere(run.ratings.motor)
    installed = np.arange(run.flow.shape[2]) > 0
    return Observed(value, run.conditions.runs & installed & ~(run.flow <= 0), **limits)


CRITERION = Criterion(
    name="motor-installed",
    title="motor load, %",
    unit="%",
    gates=True,
    every_pump=True,
    needs="the motor nameplate and the shaft power",
    sentence="{pump} loads its motor to {is} of the nameplate, {where}",
    observe=observe,
    limits={
        "fail_above": Limit(1.0, "physics: the nameplate"),
        "caution_above": Limit(
            0.91, "ISO 13709 (API 610): nameplate at least 110 % of the power, turned round"
        ),
    },
)
