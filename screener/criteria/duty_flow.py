"""The header gets the flow that each duty asks for."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Kind, Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Total flow over the flow asked, in the duties in which the new pump runs."""
    conditions = run.conditions
    value = (run.total / conditions.asked)[:, :, None]
    applies = per_state((conditions.kind == Kind.DUTY) & conditions.runs[:, 0])
    return Observed(value, applies, fail_below=limits["fail_below"])


CRITERION = Criterion(
    name="duty-flow",
    title="flow given, % of asked",
    unit="%",
    gates=True,
    every_pump=False,
    needs="a state in which every pump stays on its curve",
    sentence="with {pump} running the header gets only {is} of what is asked, {where}",
    observe=observe,
    limits={
        "fail_below": Limit(0.999, "numerical slack"),
    },
)
