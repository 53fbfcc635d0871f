"""One pump of a catalog as it was read: SI, before its curves are put on common stations."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from screener.model.arrays import Floats
from screener.model.tables.trim_laws import EQUAL_EXPONENTS, ISO_9906, exponents


@dataclass(frozen=True, slots=True)
class TestedCurve:
    """The measured points of one impeller diameter: columns of equal length, NaN where not measured.

    diameter      : [m], NaN where not stated
    flow          : (k,) [m3/s] rising, k >= 2
    head          : (k,) [m], never NaN
    efficiency    : (k,) [-]
    power         : (k,) [W] shaft power at 1000 kg/m3
    npsh_required : (k,) [m]
    bep_flow      : [m3/s] flow of best efficiency, NaN where not stated
    """

    __test__ = False  # the name is the trade's; it is no test case

    diameter: float
    flow: Floats
    head: Floats
    efficiency: Floats
    power: Floats
    npsh_required: Floats
    bep_flow: float


@dataclass(frozen=True, slots=True)
class Entry:
    """One pump: its tested curves and the figures that go with them; NaN where not stated.

    title              : for readers; the id where none is given
    source             : where the curves come from, such as "shop test, Sheet 12, 2024-05-01"; may be empty
    speed              : [rpm] at which the curves hold
    curves             : in rising diameter; a single one may be without
    maximum, minimum   : [m] impeller as offered
    flow_exponent, head_exponent : [-] of the trim law, Q ~ x^a and H ~ x^b, x = sqrt(D^2 - D1^2)
    trim_law           : name of the law in `tables.trim_laws`; empty where exponents of its own are stated
    inlet_diameter     : [m] of the impeller, D1 in the one law that uses it; else D1 is 0
    efficiency_loss    : [-] efficiency lost = efficiency_loss * (1 - D / D_tested)
    npsh_speed_exponent : [-]
    stages, eyes       : counts
    minimum_flow, maximum_flow : [m3/s] at the largest impeller
    region_low, region_high    : [-] allowable region as a fraction of the flow of best efficiency
    allowable_pressure : [Pa gauge]
    maximum_power      : [W]
    casing_volume      : [m3]
    lowest_speed, highest_speed : [rpm] that variable speed may take
    head_tolerance     : [-] plus or minus
    """

    id: str
    title: str
    construction: str
    source: str
    speed: float
    curves: tuple[TestedCurve, ...]
    maximum: float = math.nan
    minimum: float = math.nan
    flow_exponent: float = 1.0
    head_exponent: float = 2.0
    trim_law: str = ""
    inlet_diameter: float = math.nan
    efficiency_loss: float = 0.0
    npsh_speed_exponent: float = 2.0
    stages: int = 1
    eyes: int = 1
    minimum_flow: float = math.nan
    maximum_flow: float = math.nan
    region_low: float = math.nan
    region_high: float = math.nan
    allowable_pressure: float = math.nan
    maximum_power: float = math.nan
    casing_volume: float = math.nan
    lowest_speed: float = math.nan
    highest_speed: float = math.nan
    head_tolerance: float = math.nan

    @property
    def law_inlet(self) -> float:
        """Inlet diameter in the trim law [m], 0 where the law does without."""
        return self.inlet_diameter if self.trim_law == ISO_9906 else 0.0


def with_law(entry: Entry, name: str) -> Entry:
    """Put a pump under a trim law, by its name in `tables.trim_laws`; ValueError where there is none such.

    It keeps its own law where it states no inlet diameter and the named one needs it, and its own exponent
    where it is under the law with equal exponents already.
    """
    flow_exponent, head_exponent = exponents(name)
    if (name == ISO_9906 and math.isnan(entry.inlet_diameter)) or name == entry.trim_law == EQUAL_EXPONENTS:
        return entry
    return replace(entry, trim_law=name, flow_exponent=flow_exponent, head_exponent=head_exponent)
