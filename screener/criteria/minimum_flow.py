"""No pump runs below its minimum flow, stable or thermal, in any duty."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, per_duty_pump, per_state
from screener.hydraulics.constants import REFERENCE_DENSITY
from screener.hydraulics.heating import thermal_minimum_flow
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Flow over the larger of stable and thermal minimum flow; 0 for a pump held shut."""
    rise, capacity = limits["temperature_rise"], run.conditions.heat_capacity
    thermal = thermal_minimum_flow(
        power=run.bounds.thermal_power,
        density=REFERENCE_DENSITY,
        heat_capacity=per_state(capacity),
        temperature_rise=rise,
    )
    stable = run.bounds.minimum
    value = run.flow / np.fmax(stable, thermal)
    value = np.where(np.isnan(stable + thermal) & ~(value < limits["fail_below"]), np.nan, value)
    value = np.where(run.flow == 0, 0.0, value)
    return Observed(
        value,
        per_duty_pump(run) & ~np.isinf(run.flow),
        fail_below=limits["fail_below"],
        caution_below=limits["caution_below"],
    )


CRITERION = Criterion(
    name="minimum-flow",
    title="flow, % of minimum",
    unit="%",
    gates=True,
    every_pump=True,
    needs="the stable minimum flow",
    sentence="{pump} gets {is} of its minimum flow, {where}",
    observe=observe,
    limits={
        "fail_below": Limit(1.0, "ANSI/HI 9.6.3: the larger of stable and thermal minimum flow"),
        "caution_below": Limit(1.1, "common practice, no source"),
        "temperature_rise": Limit(8.0, "common practice, no source", "K"),
    },
)
