"""The head rises enough from the rated duty to shutoff, and not too much."""

from __future__ import annotations

from collections.abc import Mapping

from screener.criteria import Criterion, Limit, Observed, per_state
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Shutoff head over the head at the rated duty, less one, both at the speed of that duty."""
    shutoff = run.ratings.shutoff[:, :1] * run.bounds.speed[:, :, 0] ** 2
    value = (shutoff / run.head[:, :, 0] - 1)[:, :, None]
    return Observed(value, per_state(run.conditions.rated), **limits)


CRITERION = Criterion(
    name="rise-to-shutoff",
    title="rise to shutoff, %",
    unit="%",
    gates=True,
    every_pump=False,
    needs="a curve measured at shutoff",
    sentence="{pump} rises by {is} from the rated duty to shutoff, limit {limit}",
    observe=observe,
    limits={
        "fail_below": Limit(
            0.1, "ISO 13709 (API 610), pumps in parallel: at least 10 % from the rated point"
        ),
        "caution_above": Limit(0.3, "common practice, no source"),
    },
)
