"""Between largest and smallest demand the new pump sheds load as the installed ones do."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from screener.criteria import Criterion, Limit, Observed, beside, everywhere
from screener.model.run import Run


def observe(run: Run, limits: Mapping[str, float]) -> Observed:
    """Largest difference between the shares of rated flow that two pumps keep."""
    value = np.concatenate([np.full((len(run.pumps), 1), np.nan), run.load_share], axis=1)
    return Observed(everywhere(value), everywhere(beside(run)), **limits)


CRITERION = Criterion(
    name="load-share",
    title="load share, points",
    unit="%",
    gates=False,
    every_pump=True,
    needs="two demands at load, in the liquid of the rated duty, with figures",
    sentence="{pump} and the new one differ by {is} of their rated flows between largest and smallest demand",
    observe=observe,
    limits={
        "caution_above": Limit(0.15, "ours"),
    },
)
