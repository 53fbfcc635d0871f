"""Pump curves as columns: one row for each (model, diameter, speed, liquid, condition)."""

from __future__ import annotations

from dataclasses import dataclass

from screener.model.arrays import Floats, Ints


@dataclass(frozen=True, slots=True)
class Curves:
    """Curves of c pumps, each on k evenly spaced stations of flow (k = `arrays.STATIONS`).

    The stations of a row run from flow 0 to flow `span`; data run from `start` to `end` <= `span`. Head
    stations outside the data only carry the cubic to its last measured point: no figure is read there.
    NPSH has an axis of its own, from flow 0 to `npsh_span`, because a trim leaves the inlet alone.
    NaN means 'not measured' and nothing else.

    start         : (c,)   [m3/s] first measured flow, 0 where shutoff was measured
    end           : (c,)   [m3/s] last measured flow; nothing exists beyond it
    span          : (c,)   [m3/s] flow of the last station
    head          : (c, k) [m]
    efficiency    : (c, k) [-], NaN where not given
    power         : (c, k) [W] shaft power at 1000 kg/m3, NaN where not given
    npsh_required : (c, k) [m] at flows 0 to `npsh_span`
    npsh_span     : (c,)   [m3/s]
    """

    start: Floats
    end: Floats
    span: Floats
    head: Floats
    efficiency: Floats
    power: Floats
    npsh_required: Floats
    npsh_span: Floats

    def __len__(self) -> int:
        return len(self.end)


@dataclass(frozen=True, slots=True)
class PumpTable:
    """A catalog of n models with m tested curves in all, as columns.

    The tested curves of model i are rows first[i]:first[i + 1] of `diameter`, `bep_flow` and `tested`,
    in rising diameter. All curves of one model share one axis of flow scaled by the trim law
    (span / x ** flow_exponent is the same), so that a blend between them is a plain mix.

    ids, titles, constructions, sources : n strings each; `sources` says where the curve came from
    first            : (n + 1,) int
    diameter         : (m,) [m] impeller of each tested curve, NaN where the model states none
    bep_flow         : (m,) [m3/s] flow of best efficiency, NaN where it is not known
    tested           : m curves
    speed            : (n,) [rpm] at which the curves hold
    maximum, minimum : (n,) [m] impeller as offered; NaN where not stated
    flow_exponent, head_exponent : (n,) [-] of the trim law, Q ~ x^a and H ~ x^b, x = sqrt(D^2 - D1^2)
    law_inlet        : (n,) [m] inlet diameter D1 of the impeller in a trim law that uses it, else 0
    efficiency_loss  : (n,) [-] efficiency lost = efficiency_loss * (1 - D / D_tested)
    npsh_speed_exponent : (n,) [-]
    stages, eyes     : (n,) int
    minimum_flow     : (n,) [m3/s] stable, at the largest impeller; NaN where not stated
    maximum_flow     : (n,) [m3/s]
    region_low, region_high : (n,) [-] allowable region as a fraction of the flow of best efficiency
    allowable_pressure : (n,) [Pa] gauge
    maximum_power    : (n,) [W]
    casing_volume    : (n,) [m3]
    lowest_speed, highest_speed : (n,) [rpm] that variable speed may take, NaN where not stated
    head_tolerance   : (n,) [-] plus or minus, from the acceptance grade or as stated; NaN where neither
    trim_law         : name of the law that replaces those of the models; empty where each keeps its own
    """

    ids: tuple[str, ...]
    titles: tuple[str, ...]
    constructions: tuple[str, ...]
    sources: tuple[str, ...]
    first: Ints
    diameter: Floats
    bep_flow: Floats
    tested: Curves
    speed: Floats
    maximum: Floats
    minimum: Floats
    flow_exponent: Floats
    head_exponent: Floats
    law_inlet: Floats
    efficiency_loss: Floats
    npsh_speed_exponent: Floats
    stages: Ints
    eyes: Ints
    minimum_flow: Floats
    maximum_flow: Floats
    region_low: Floats
    region_high: Floats
    allowable_pressure: Floats
    maximum_power: Floats
    casing_volume: Floats
    lowest_speed: Floats
    highest_speed: Floats
    head_tolerance: Floats
    trim_law: str = ""

    def __len__(self) -> int:
        return len(self.ids)


@dataclass(frozen=True, slots=True)
class Pumps:
    """c pumps as they would run: a model at one diameter and one speed, with the figures that go with it.

    Installed and new pumps are rows of the same kind.

    curves          : c curves
    model           : (c,) int, row in the table they came from
    diameter        : (c,) [m], NaN where the model states none
    maximum, minimum : (c,) [m] as offered
    from_test       : (c,) [-] distance to the nearest tested diameter, as a fraction of that; 0 = tested
    trim_uncertainty : (c,) [-] share of its head by which it may lie below its trim law; 0 at tested
                      diameters and between them
    law_inlet       : (c,) [m] as in `PumpTable`
    speed           : (c,) [rpm]
    bep_flow        : (c,) [m3/s] at this diameter and speed
    specific_speed  : (c,) [rpm, m3/s, m] n_q per stage and eye, at the largest diameter
    suction_specific_speed : (c,) [rpm, m3/s, m] per eye, at the largest diameter
    minimum_flow, maximum_flow : (c,) [m3/s]
    region_low, region_high    : (c,) [-] fraction of the flow of best efficiency
    allowable_pressure, maximum_power, casing_volume, head_tolerance : (c,) as in `PumpTable`
    lowest_speed, highest_speed : (c,) [rpm] as in `PumpTable`
    stages, npsh_speed_exponent : (c,) [-]
    """

    curves: Curves
    model: Ints
    diameter: Floats
    maximum: Floats
    minimum: Floats
    from_test: Floats
    trim_uncertainty: Floats
    law_inlet: Floats
    speed: Floats
    bep_flow: Floats
    specific_speed: Floats
    suction_specific_speed: Floats
    minimum_flow: Floats
    maximum_flow: Floats
    region_low: Floats
    region_high: Floats
    allowable_pressure: Floats
    maximum_power: Floats
    casing_volume: Floats
    head_tolerance: Floats
    lowest_speed: Floats
    highest_speed: Floats
    stages: Floats
    npsh_speed_exponent: Floats

    def __len__(self) -> int:
        return len(self.model)
