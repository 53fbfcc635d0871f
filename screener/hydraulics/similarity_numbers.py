"""Specific speeds, in rpm, m3/s and m."""

from __future__ import annotations

import numpy as np

from screener.model.arrays import Floats


def specific_speed(*, speed: Floats, flow: Floats, head: Floats) -> Floats:
    """Specific speed n_q = n sqrt(Q) / H^0.75 [rpm, m3/s, m]; 51.645 times that in US units.

    speed : [rpm].  flow : [m3/s] per impeller eye, at best efficiency.  head : [m] per stage, > 0.
    Any shapes that broadcast; NaN where a figure is not known.
    Source: ISO 17769-1 (as type number); Fox and McDonald, Example 10.7: 1170 rpm, 300 gpm, 21.9 ft.

    >>> n_q = specific_speed(speed=np.array(1170.0), flow=np.array(0.0189271), head=np.array(6.67512))
    >>> float(n_q.round(2)), float((n_q / 52.919).round(4))   # the second: free of units
    (38.76, 0.7324)
    """
    return speed * np.sqrt(flow) / head**0.75


def suction_specific_speed(*, speed: Floats, flow: Floats, npsh_required: Floats) -> Floats:
    """Suction specific speed n sqrt(Q) / NPSHr^0.75 [rpm, m3/s, m]; 51.645 times that in US units.

    speed : [rpm].  flow : [m3/s] per impeller eye, at best efficiency, largest impeller.
    npsh_required : [m] at that flow, > 0.  Any shapes that broadcast; NaN where a figure is not known.
    Source: ISO 13709 (API 610), definition. 11,000 in US units is 212.99: here 3550 rpm, 1000 gpm, 22.137 ft.

    >>> n_ss = suction_specific_speed(speed=np.array(3550.0), flow=np.array(0.0630902),
    ...                               npsh_required=np.array(6.74729))
    >>> float(n_ss.round(1))
    213.0
    """
    return speed * np.sqrt(flow) / npsh_required**0.75
