"""Head losses that grow with a power of the flow."""

from __future__ import annotations

import numpy as np

from screener.model.arrays import Floats
from screener.model.case import Loss


def loss_head(loss: Loss, *, flow: Floats) -> Floats:
    """Head lost at a flow, sum of coefficient * flow ** exponent.

    flow : any shape, >= 0 [m3/s].  Returns the same shape [m].

    >>> loss_head(Loss((2.0, 1.0), (2.0, 1.0)), flow=np.array([3.0]))
    array([21.])
    """
    head = np.zeros_like(flow)
    for coefficient, exponent in zip(loss.coefficient, loss.exponent, strict=True):
        head = head + coefficient * (flow * flow if exponent == 2 else flow**exponent)
    return head


def loss_slope(loss: Loss, *, flow: Floats) -> Floats:
    """Derivative of `loss_head` with flow, same shape [m per m3/s]."""
    slope = np.zeros_like(flow)
    for coefficient, exponent in zip(loss.coefficient, loss.exponent, strict=True):
        slope = slope + coefficient * exponent * flow ** (exponent - 1)
    return slope
