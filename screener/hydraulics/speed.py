"""Pumps at another speed: whole curves along the parabolas of similarity."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.hydraulics.similarity import take
from screener.model.arrays import Floats
from screener.model.curves import Curves, Pumps


def at_speed(pumps: Pumps, *, ratio: Floats) -> Pumps:
    """Bring c pumps to another speed: Q ~ n, H ~ n^2, P ~ n^3, NPSHr ~ n^x, minimum flow ~ n.

    pumps : c rows, or one row for all;  ratio : (c,) [-] speed over the present one
    Returns c pumps.  Source: affinity laws, e.g. US DOE-HDBK-1012/3-92, centrifugal pumps.
    """
    if len(pumps) == 1 and len(ratio) > 1:
        pumps = take(pumps, np.zeros(len(ratio), np.int64))
    curves, column = pumps.curves, ratio[:, None]
    turned = Curves(
        start=curves.start * ratio,
        end=curves.end * ratio,
        span=curves.span * ratio,
        head=curves.head * column**2,
        efficiency=curves.efficiency,
        power=curves.power * column**3,
        npsh_required=curves.npsh_required * column ** pumps.npsh_speed_exponent[:, None],
        npsh_span=curves.npsh_span * ratio,
    )
    return replace(
        pumps,
        curves=turned,
        speed=pumps.speed * ratio,
        bep_flow=pumps.bep_flow * ratio,
        minimum_flow=pumps.minimum_flow * ratio,
        maximum_flow=pumps.maximum_flow * ratio,
    )
