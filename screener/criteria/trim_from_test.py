"""A trim lies near a diameter that was tested."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, once
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Distance of the diameter from the nearest tested one, over that one."""
    return Observed(
        once(run.pumps.from_test), once(~np.isnan(run.pumps.diameter)), caution_above=limits["caution_above"]
    )


CRITERION = Criterion(
    name="trim-from-test",
    title="cut from a test, %",
    unit="%",
    gates=False,
    every_pump=False,
    needs="tested diameters",
    sentence="{pump} is cut {is} from a tested diameter, farther than the trim law is trusted",
    observe=observe,
    limits={
        "caution_above": Limit(0.05, "ISO 9906:2012, trim rule, value from memory"),
    },
)
