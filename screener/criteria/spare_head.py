"""A pump may lose some head before it falls under its minimum flow."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, everywhere, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Head that a pump may lose at the lowest common duty, over its shutoff head."""
    ratings = run.ratings
    value = run.spare_head / ratings.shutoff
    tolerance = ratings.head_tolerance
    runs = np.tile(run.conditions.runs[run.conditions.lowest].any(axis=0), (len(run.pumps), 1))
    others = np.where(runs[:, 1:], tolerance[:, 1:], -np.inf).max(axis=1, initial=-np.inf)
    needed = tolerance[:, 0] + others
    needed = np.where(np.isfinite(needed), needed, limits["unknown_tolerance"])
    return Observed(everywhere(value), everywhere(runs), caution_below=once(needed), scale=1.0)


CRITERION = Criterion(
    name="spare-head",
    title="head to spare, %",
    unit="%",
    gates=False,
    every_pump=True,
    needs="curves measured at shutoff, and a lowest duty at load in the liquid of the rated one",
    sentence="{pump} may lose {is} of its head at the lowest duty before it is under its minimum flow",
    observe=observe,
    limits={
        "unknown_tolerance": Limit(
            0.05, "ours, where a curve has no grade; else the tolerances of both (ISO 9906)"
        ),
    },
)
