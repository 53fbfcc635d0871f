"""The new pump never takes more power than its shaft is made for."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Largest shaft power in any state over the largest one allowed."""
    value = (run.power[:, :, 0] / run.pumps.maximum_power[:, None])[:, :, None]
    return Observed(value, per_state(run.conditions.runs[:, 0]), **limits)


CRITERION = Criterion(
    name="shaft-power",
    title="shaft power, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="the largest shaft power allowed",
    sentence="{pump} takes {is} of the largest power that its shaft is made for, {where}",
    observe=observe,
    limits={
        "fail_above": Limit(1.0, "physics: the limit in the catalog"),
    },
)
