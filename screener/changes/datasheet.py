"""What the data sheet of one candidate tells beyond its run: its inlet and outlet, extremes, least flows."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.changes.bypass import Need, needed
from screener.criteria import minimum_flow, region
from screener.header.requirement import Requirement
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.heating import thermal_minimum_flow
from screener.model.arrays import Bools, Floats
from screener.model.case import Case
from screener.model.curves import Pumps, PumpTable
from screener.model.run import Kind
from screener.screening.assess import Bench
from screener.screening.evaluate import fit
from screener.screening.one import Explained, explain
from screener.screening.ratings import thermal_power
from screener.screening.shortlist import requirements


@dataclass(frozen=True, slots=True)
class Places:
    """States in which the new pump is at an extreme, -1 where one of them has no figure.

    normal  : of most hours, -1 where a duty states none
    peak, lowest : its largest and smallest flow in a duty;  runout : its largest flow in any state
    strongest : its largest shaft power;  tightest : its lowest NPSH available over required
    start   : duty in which the others hold the header highest while it starts
    suction : highest suction pressure, no flow;  discharge : the same with the largest head of its curve
    """

    normal: int
    peak: int
    lowest: int
    runout: int
    strongest: int
    tightest: int
    start: int
    suction: int
    discharge: int


@dataclass(frozen=True, slots=True)
class DataSheet:
    """One candidate, with the figures that its data sheet adds. NaN where not known.

    base : the pump at its speed at load, in the liquid of the rated duty
    need : what the rated duty asks of it
    suction, discharge : [Pa gauge] at its inlet and outlet in the rated duty, velocity heads left out
    highest_suction, highest_discharge : [Pa gauge] at the places of those names
    thermal_minimum : [m3/s] at load, with the liquid of lowest heat capacity
    shutoff_power : [W] in the liquid of the rated duty
    preferred, allowable : [-] low and high end of the region, over the flow of best efficiency
    bypass  : whether it is under its minimum flow in a duty, None where that is not known
    bypasses : what would keep it there, duty by duty
    """

    explained: Explained
    base: Pumps
    need: Requirement
    places: Places
    suction: float
    discharge: float
    highest_suction: float
    highest_discharge: float
    thermal_minimum: float
    shutoff_power: float
    preferred: tuple[float, float]
    allowable: tuple[float, float]
    bypass: bool | None
    bypasses: tuple[Need, ...]


def datasheet(case: Case, catalog: PumpTable, model: int, diameter: float | None = None) -> DataSheet:
    """Work out the data sheet of one model, at a diameter [m] or at its best one.

    model : row of the catalog.  ValueError where the diameter is not on offer.
    """
    explained = explain(case, catalog, model, diameter)
    bench, run = explained.bench, explained.judged.run
    header, limits = bench.header, bench.limits
    rated, base = header.rated, fit(header, run.pumps, header.base.setting).pumps
    liquid = case.liquids[header.states[rated].liquid]
    weight = liquid.density * GRAVITY
    suction = weight * float(run.npsh_available[0, rated, 0])
    suction += liquid.vapour_pressure - case.atmospheric_pressure
    highest, pressed = _pressures(explained)
    places = _places(explained, highest, pressed)
    thermal = thermal_minimum_flow(
        power=thermal_power(base),
        density=REFERENCE_DENSITY,
        heat_capacity=header.heat_capacity,
        temperature_rise=limits["minimum-flow"]["temperature_rise"],
    )
    with np.errstate(invalid="ignore"):
        ends = region.observe(run, limits["region"])
    preferred, allowable = (
        (_end(low), _end(high))
        for low, high in (
            (ends.caution_below, ends.caution_above),
            (ends.fail_below, ends.fail_above),
        )
    )
    measured = base.curves.start[0] == 0
    return DataSheet(
        explained=explained,
        base=base,
        need=requirements(bench)[rated],
        places=places,
        suction=suction,
        discharge=suction + weight * float(run.head[0, rated, 0]),
        highest_suction=_at(highest, places.suction),
        highest_discharge=_at(pressed, places.discharge),
        thermal_minimum=float(thermal[0]),
        shutoff_power=float(base.curves.power[0, 0]) * liquid.density / REFERENCE_DENSITY
        if measured
        else np.nan,
        preferred=preferred,
        allowable=allowable,
        bypass=_under_minimum(explained),
        bypasses=tuple(need for need in needed(bench, run) if need.pump == 0),
    )


def compare(
    case: Case, catalog: PumpTable, picks: Sequence[tuple[int, float | None]]
) -> tuple[DataSheet, ...]:
    """Work out several candidates for the same place, in the order given.

    picks : row of the catalog, and a diameter [m] or None for the best one of each
    ValueError where a diameter is not on offer.
    """
    return tuple(datasheet(case, catalog, model, diameter) for model, diameter in picks)


def _pressures(explained: Explained) -> tuple[Floats, Floats]:
    """Pressure at the inlet without flow, and at the outlet of the pump run dead-headed, (s,) [Pa gauge]."""
    run = explained.judged.run
    weight = run.conditions.density * GRAVITY
    suction = run.conditions.suction_pressure[:, 0]
    return suction, suction + weight * run.bounds.summit[0, :, 0]


def _places(explained: Explained, suction: Floats, discharge: Floats) -> Places:
    bench, run = explained.bench, explained.judged.run
    flow, power = run.flow[0, :, 0], run.power[0, :, 0]
    runs = run.conditions.runs[:, 0]
    duty = runs & (run.conditions.kind == Kind.DUTY)
    margin = run.npsh_available[0, :, 0] / run.npsh_required[0, :, 0]
    return Places(
        normal=_most_hours(bench, duty),
        peak=_highest(flow, duty),
        lowest=_highest(-flow, duty),
        runout=_highest(flow, runs),
        strongest=_highest(np.where(flow == 0, np.fmax(power, 0.0), power), runs),
        tightest=_highest(-margin, runs & (flow != 0)),
        start=_highest(run.start_header[0, :, 0], duty),
        suction=_highest(suction, runs),
        discharge=_highest(discharge, runs),
    )


def _highest(values: Floats, among: Bools) -> int:
    """Place of the largest of some values (s,), -1 where one of them is not known or there is none."""
    if not among.any() or not np.isfinite(values[among]).all():
        return -1
    return int(np.flatnonzero(among)[values[among].argmax()])


def _most_hours(bench: Bench, duty: Bools) -> int:
    """The state of most hours with the new pump, of equal ones that of most static head."""
    header = bench.header
    hours = header.conditions.hours * header.conditions.share_of_hours
    places = [int(place) for place in np.flatnonzero(duty)]
    if np.isnan(hours[places]).any():
        return -1
    return max(places, key=lambda place: (hours[place], header.states[place].static))


def _under_minimum(explained: Explained) -> bool | None:
    run, limits = explained.judged.run, explained.bench.limits["minimum-flow"]
    duty = run.conditions.runs[:, 0] & (run.conditions.kind == Kind.DUTY)
    with np.errstate(invalid="ignore"):
        share = minimum_flow.observe(run, limits).value[0, duty, 0]
    if (share < limits["fail_below"]).any():
        return True
    known = np.isfinite(share) & np.isfinite(run.flow[0, duty, 0])
    return False if known.all() else None


def _end(bound: Floats | float) -> float:
    """One end of a region of the new pump, NaN where there is none."""
    value = float(np.asarray(bound).flat[0])
    return value if np.isfinite(value) else np.nan


def _at(values: Floats, place: int) -> float:
    return float(values[place]) if place >= 0 else np.nan
