"""After a trip with the users' valves left as they were: for information, it gates nothing."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.header.left import flow_left
from screener.header.meet import meet
from screener.header.system import SystemCurve
from screener.model.arrays import Floats, frozen
from screener.model.case import Loss
from screener.model.finding import Judged
from screener.model.run import Kind, Speed
from screener.screening.evaluate import fit
from screener.screening.header import Header


@dataclass(frozen=True, slots=True)
class AsSet:
    """One trip out of a throttled duty, the valves where that duty had set them.

    state  : the duty;  lost : row of the installed pump lost
    header : [m], total : [m3/s], flow : (1 + p,) [m3/s] new pump first; NaN where a pump does not run, and
             everywhere where one runs past its data
    """

    state: int
    lost: int
    header: float
    total: float
    flow: Floats


def valves_as_set(header: Header, judged: Judged) -> tuple[AsSet, ...]:
    """Every single-pump trip out of every throttled duty, for one candidate.

    The valves of a duty are a resistance in the square of flow that takes what the system left over.
    """
    run = judged.run
    found = []
    for place, state in enumerate(header.states):
        stands = float(run.header[0, place])
        held = state.speed == Speed.HELD
        if (
            state.kind != Kind.DUTY
            or not state.new
            or not state.throttled
            or held
            or not stands > state.static
        ):
            continue
        standing = header.standing[place]
        new = fit(header, run.pumps, standing.setting)
        resistance = (stands - state.static) / float(run.total[0, place]) ** 2
        nothing = frozen(np.empty((1, 0)))
        curve = SystemCurve(state.static, Loss((resistance,), (2.0,)), np.inf, nothing, nothing)
        for first in dict.fromkeys(int(header.alike[row]) for row in state.running):
            lost = next(row for row in state.running if header.alike[row] == first)
            left = flow_left(
                standing.branches,
                running=[row for row in state.running if row != lost],
                curve=curve,
                asked=state.asked,
                throttled=False,
                count=state.new,
            )
            met = meet(new.branches, left, standing.branches)
            given = np.concatenate([met.flow, met.installed[0]])
            total = float(state.new * given[0] + np.nansum(given[1:]))
            flow = given + np.append(new.bypass, standing.bypass)
            found.append(AsSet(place, lost, float(met.header[0]), total, flow))
    return tuple(found)
