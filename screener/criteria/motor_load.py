"""Wide open and after a trip the new motor keeps a little in hand."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Kind, Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Shaft power over the nameplate chosen, wide open and after trips."""
    value = (run.power[:, :, 0] / run.ratings.motor[:, :1])[:, :, None]
    upset = (run.conditions.kind != Kind.DUTY) & run.conditions.runs[:, 0]
    return Observed(value, per_state(upset), **limits)


CRITERION = Criterion(
    name="motor-load",
    title="new motor load, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="shaft power wherever it runs",
    sentence="{pump} loads its new motor to {is} of the nameplate, {where}",
    observe=observe,
    limits={
        "caution_above": Limit(0.95, "common practice, no source"),
    },
)
