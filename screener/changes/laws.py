"""One pump under every trim law: how far the choice of the law moves what it is cut to, and its verdict."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, with_law
from screener.hydraulics.similarity import head_at
from screener.model.arrays import Codes, Floats
from screener.model.tables.trim_laws import ISO_9906, NAMES
from screener.screening.assess import Bench, assess
from screener.screening.reach import reach
from screener.screening.shortlist import asked, requirements


@dataclass(frozen=True, slots=True)
class ByLaw:
    """One pump under k trim laws, at d diameters.

    entries  : the pump under each law, that of the case or its own first
    steps    : (d,) [m];  chosen : the row at which `head` holds
    flow, needed : [m3/s, m] what the rated duty asks of the pump; flow NaN where that is not known
    wanted   : (k,) [m] smallest diameter that meets every duty, NaN where none on offer does
    head     : (k,) [m] at that flow; NaN where the curve does not reach it
    verdict  : (k, d)
    named    : name of the law of the case, empty where it names none; the pump may be unable to follow it
    """

    entries: tuple[Entry, ...]
    steps: Floats
    chosen: int
    flow: float
    needed: float
    wanted: Floats
    head: Floats
    verdict: Codes
    named: str


def by_law(bench: Bench, entry: Entry, *, steps: Floats, chosen: int) -> ByLaw:
    """Run one pump through every duty under each trim law that it can follow.

    bench : the case;  entry : the pump under its own law
    steps : (d,) [m] diameters on offer, rising;  chosen : the row of one of them
    """
    case = bench.header.case
    entries = _laws(entry, case.new_pump.trim_law)
    table = compile_table(entries)
    needs = requirements(bench)
    found = reach(table, asked(bench, needs), replace(case.new_pump, trim_law=""))
    count = len(entries)
    laws = np.repeat(np.arange(count), len(steps))
    candidates = assess(
        bench,
        table,
        model=laws,
        diameter=np.tile(steps, count),
        speed_ratio=found.speed_ratio[laws],
    )
    rated = needs[bench.header.rated]
    head = np.full(count, np.nan)
    if np.isfinite(rated.flow):
        head = head_at(
            table,
            model=np.arange(count),
            diameter=np.full(count, steps[chosen]),
            speed_ratio=found.speed_ratio,
            flow=np.full(count, rated.flow),
        )
    return ByLaw(
        entries=entries,
        steps=steps,
        chosen=chosen,
        flow=rated.flow,
        needed=rated.head,
        wanted=found.wanted,
        head=head,
        verdict=candidates.verdict.reshape(count, len(steps)),
        named=case.new_pump.trim_law,
    )


def _laws(entry: Entry, named: str) -> tuple[Entry, ...]:
    """The pump under each law once: as the case asks, under its own, under the others that it can follow."""
    can = [name for name in NAMES if name != ISO_9906 or not math.isnan(entry.inlet_diameter)]
    under = [with_law(entry, named) if named else entry, entry, *(with_law(entry, name) for name in can)]
    laws: dict[tuple[float, float, float], Entry] = {}
    for item in under:
        laws.setdefault((item.law_inlet, item.flow_exponent, item.head_exponent), item)
    return tuple(laws.values())
