"""The trim rule of ISO 9906 is used on the kind of pump that it is meant for."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run

TYPE_NUMBER = 52.919
"""Specific speed [rpm, m3/s, m] over the type number K = 2 pi n sqrt(Q) / (g H)^0.75, n per second."""


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Type number of a pump that is cut by the rule with the inlet diameter.

    How far it is cut is watched for every trim law by `trim-from-test`, with the limit of the same rule.
    """
    pumps = run.pumps
    by_rule = (pumps.law_inlet > 0) & ~(pumps.from_test == 0)
    return Observed(
        once(pumps.specific_speed / TYPE_NUMBER), once(by_rule), caution_above=limits["caution_above"]
    )


CRITERION = Criterion(
    name="trim-law",
    title="type number",
    unit="-",
    gates=False,
    every_pump=False,
    needs="the flow of best efficiency",
    sentence="{pump} has a type number of {is}; the ISO 9906 trim rule is meant for {limit} at most",
    observe=observe,
    limits={
        "caution_above": Limit(1.5, "ISO 9906:2012, trim rule with the inlet diameter, one source"),
    },
)
