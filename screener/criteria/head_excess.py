"""The new pump does not bring much more head than the system asks for."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Head burned at the valves of the users at the rated duty, over the head that the system asks for."""
    conditions = run.conditions
    value = (run.header / conditions.wanted_head - 1)[:, :, None]
    return Observed(value, per_state(conditions.rated), caution_above=limits["caution_above"], scale=1.0)


CRITERION = Criterion(
    name="head-excess",
    title="head burned, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="a rated duty with figures",
    sentence="{pump} makes the users burn {is} of the head at the rated duty, limit {limit}",
    observe=observe,
    limits={
        "caution_above": Limit(0.05, "common practice, no source"),
    },
)
