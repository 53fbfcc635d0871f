"""Every pump keeps within its allowable region in every duty."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, everywhere, per_duty_pump
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Flow over the flow of best efficiency, in the duties. Shut pumps are left to minimum-flow."""
    ratings = run.ratings
    value = run.flow / run.bounds.best
    applies = per_duty_pump(run) & ~(run.flow <= 0) & ~np.isinf(run.flow)
    stated = run.bounds.largest / run.bounds.best
    high = np.where(np.isnan(everywhere(ratings.region_high)), stated, everywhere(ratings.region_high))
    steep = ratings.specific_speed > 87
    return Observed(
        value,
        applies,
        fail_below=everywhere(np.nan_to_num(ratings.region_low, nan=-np.inf)),
        fail_above=np.nan_to_num(high, nan=np.inf),
        caution_below=everywhere(np.where(steep, limits["caution_below_above_87"], limits["caution_below"])),
        caution_above=everywhere(np.where(steep, limits["caution_above_above_87"], limits["caution_above"])),
    )


CRITERION = Criterion(
    name="region",
    title="flow, % of BEP",
    unit="%",
    gates=True,
    every_pump=True,
    needs="the flow of best efficiency",
    sentence="{pump} runs at {is} of its flow of best efficiency, limit {limit}, {where}",
    observe=observe,
    limits={
        "caution_below": Limit(0.7, "ISO 13709 (API 610), preferred operating region"),
        "caution_above": Limit(1.2, "ISO 13709 (API 610), preferred operating region"),
        "caution_below_above_87": Limit(
            0.8, "ANSI/HI 9.6.3, high specific speed; sources conflict on the upper end"
        ),
        "caution_above_above_87": Limit(
            1.15, "ANSI/HI 9.6.3, high specific speed; sources conflict on the upper end"
        ),
    },
)
