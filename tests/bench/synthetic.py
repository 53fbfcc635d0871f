"""Seeded catalogs of invented pumps, made directly as columns."""

from __future__ import annotations

import numpy as np

from screener.model.arrays import STATIONS, Floats, frozen
from screener.model.curves import Curves, PumpTable

CUBIC_METRES_PER_HOUR = 1 / 3600


def table(
    count: int, *, flow: tuple[float, float] = (15.0, 25000.0), head: tuple[float, float] = (2.0, 800.0)
) -> PumpTable:
    """Make `count` models, each with 1 to 3 tested diameters.

    flow, head : smallest and largest flow of best efficiency [m3/h] and shutoff head [m] at the largest
                 impeller, spread evenly over their logarithms
    Of the models 4 in 100 droop, 3 in 100 were not measured at shutoff, 3 in 10 give power beside the
    efficiency and 1 in 10 gives power alone, so that no path is left out.
    """
    random = np.random.default_rng(20260101)
    best = np.exp(random.uniform(*np.log(flow), count)) * CUBIC_METRES_PER_HOUR
    shutoff = np.exp(random.uniform(*np.log(head), count))
    largest = np.round(np.clip(0.33 * np.sqrt(shutoff / 35), 0.12, 1.2), 3)
    tests = random.integers(1, 4, count)
    first = np.concatenate([[0], np.cumsum(tests)])
    owner = np.repeat(np.arange(count), tests)
    place = np.arange(len(owner)) - first[owner]
    cut = 1 - 0.16 * (1 - place / np.maximum(tests[owner] - 1, 1))  # from 84 % to the largest, rising
    cut = np.where(tests[owner] == 1, 1.0, cut)
    end = random.uniform(1.25, 1.5, count)  # end of the curve over best efficiency
    span = (best * end)[owner] * cut
    share = np.linspace(0, 1, STATIONS)
    fall, bend = random.uniform(0.35, 0.7, count)[owner, None], random.uniform(1.6, 2.6, count)[owner, None]
    droop = np.where(random.random(count) < 0.04, random.uniform(0.02, 0.1, count), 0.0)[owner, None]
    heads = (shutoff[owner] * cut**2)[:, None] * (1 + droop * share - (fall + droop) * share**bend)
    over_best = share * end[owner, None]
    top = random.uniform(0.7, 0.88, count)[owner, None] - 0.3 * (1 - cut)[:, None]
    efficiency = top * np.maximum(1 - np.abs(1 - over_best) ** 2.2, 0.0)
    efficiency[:, 0] = 0.0
    flows = share * span[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        power = 9806.65 * flows * heads / efficiency
    power[:, 0] = 2 * power[:, 1] - power[:, 2]
    given = random.random(count)[owner, None]
    need = random.uniform(2.0, 6.0, count)[owner, None] * (0.6 + 0.4 * over_best**2)
    start = np.where(random.random(count) < 0.03, 0.1, 0.0)[owner] * span

    def each(low: float, high: float, missing: float = 0.0) -> Floats:
        values = random.uniform(low, high, count)
        return frozen(np.where(random.random(count) < missing, np.nan, values))

    names = tuple(f"S-{number:06d}" for number in range(count))
    return PumpTable(
        ids=names,
        titles=names,
        constructions=("end suction",) * count,
        sources=("invented",) * count,
        first=frozen(first, np.int64),
        diameter=frozen(largest[owner] * cut),
        bep_flow=frozen(best[owner] * cut),
        tested=Curves(
            start=frozen(start),
            end=frozen(span),
            span=frozen(span),
            head=frozen(heads),
            efficiency=frozen(np.where(given < 0.9, efficiency, np.nan)),
            power=frozen(np.where(given > 0.6, power, np.nan)),
            npsh_required=frozen(need),
            npsh_span=frozen((best * end)[owner]),
        ),
        speed=frozen(np.full(count, 1480.0)),
        maximum=frozen(largest),
        minimum=frozen(np.where(random.random(count) < 0.2, np.nan, np.round(largest * 0.8, 3))),
        flow_exponent=frozen(np.ones(count)),
        head_exponent=frozen(np.full(count, 2.0)),
        law_inlet=frozen(np.zeros(count)),
        efficiency_loss=frozen(np.full(count, 0.2)),
        npsh_speed_exponent=frozen(np.full(count, 2.0)),
        stages=frozen(np.ones(count), np.int64),
        eyes=frozen(random.integers(1, 3, count), np.int64),
        minimum_flow=frozen(best * each(0.2, 0.4, 0.05)),
        maximum_flow=frozen(np.full(count, np.nan)),
        region_low=each(0.4, 0.6, 0.1),
        region_high=each(1.2, 1.4, 0.1),
        allowable_pressure=each(10e5, 25e5, 0.05),
        maximum_power=each(100e3, 400e3, 0.3),
        casing_volume=each(0.05, 0.3, 0.5),
        lowest_speed=frozen(np.full(count, np.nan)),
        highest_speed=frozen(np.full(count, np.nan)),
        head_tolerance=each(0.03, 0.07, 0.2),
    )
