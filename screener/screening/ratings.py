"""Figures of pumps that no state changes, for new and installed pumps alike."""

from __future__ import annotations

import numpy as np

from screener.header.branch import BranchCurves
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.heating import thermal_minimum_flow
from screener.model.arrays import STATIONS, Floats, Real
from screener.model.curves import Pumps
from screener.model.run import Ratings


def thermal_power(pumps: Pumps) -> Floats:
    """Largest shaft power at 1000 kg/m3 from shutoff to best efficiency, (c,) [W]; NaN where not known.

    Taking it there and not at the minimum flow itself is on the safe side: common practice, no source.
    """
    power, flow = station_power(pumps), _station_flows(pumps)
    last = np.fmin(pumps.bep_flow, pumps.curves.end)
    largest = _read(pumps, power, pumps.bep_flow)
    for rows in interpolate.blocks(len(pumps)):
        below_best = np.where(flow[rows] <= last[rows, None], power[rows], np.nan)
        largest[rows] = np.fmax(largest[rows], _largest(below_best))
    return largest


def station_power(pumps: Pumps) -> Floats:
    """Shaft power at 1000 kg/m3 at the stations, (c, k) [W]: as measured, else from the efficiency."""
    curves = pumps.curves
    power, flow = curves.power.copy(), _station_flows(pumps)
    for rows in interpolate.blocks(len(pumps)):
        efficiency = curves.efficiency[rows]
        missing = np.isnan(power[rows]) & (efficiency > 0) & (flow[rows] > 0)
        if missing.any():
            useful = REFERENCE_DENSITY * GRAVITY * flow[rows] * curves.head[rows]
            np.divide(useful, efficiency, out=power[rows], where=missing)
    return power


def ratings(pumps: Pumps, branches: BranchCurves, motor: Floats) -> Ratings:
    """Ratings of c pumps, each (c,). motor : (c,) [W] nameplates, NaN where not known or not chosen yet."""
    curves = pumps.curves
    shutoff = np.where(curves.start == 0, curves.head[:, 0], np.nan)
    summit, rise = _summit_and_rise(pumps)
    return Ratings(
        shutoff=shutoff,
        summit=np.where(np.isnan(shutoff), np.nan, summit),
        droop=rise / shutoff,
        header_shutoff=branches.shutoff,
        header_summit=branches.low_head,
        bep_flow=pumps.bep_flow,
        minimum_flow=pumps.minimum_flow,
        maximum_flow=pumps.maximum_flow,
        region_low=pumps.region_low,
        region_high=pumps.region_high,
        specific_speed=pumps.specific_speed,
        suction_specific_speed=pumps.suction_specific_speed,
        allowable_pressure=pumps.allowable_pressure,
        maximum_power=pumps.maximum_power,
        motor=motor,
        head_tolerance=pumps.head_tolerance,
    )


def summits(pumps: Pumps) -> Floats:
    """Largest head of each curve, (c,) [m]; NaN where shutoff was not measured."""
    return np.where(pumps.curves.start == 0, _summit_and_rise(pumps)[0], np.nan)


def _summit_and_rise(pumps: Pumps) -> tuple[Floats, Floats]:
    """Largest measured head of each curve, and its largest rise towards more flow, (c,) [m] each."""
    curves = pumps.curves
    summit, rise = curves.head[:, 0].copy(), np.zeros(len(pumps))
    rows = (curves.head[:, 1:] > curves.head[:, :-1]).any(axis=1) | (curves.start > 0)
    flow = _station_flows(pumps)[rows]
    inside = (flow >= curves.start[rows, None] * (1 - 1e-12)) & (flow <= curves.end[rows, None] * (1 + 1e-12))
    head = np.where(inside, curves.head[rows], np.nan)
    summit[rows], rise[rows] = _largest(head), _largest(head - np.fmin.accumulate(head, axis=1))
    return summit, rise


def _station_flows(pumps: Pumps) -> Floats:
    return np.linspace(0, 1, STATIONS) * pumps.curves.span[:, None]


def _largest(values: Floats) -> Floats:
    """Largest of each row, ignoring NaN; NaN for a row of nothing else."""
    largest = np.fmax.reduce(values, axis=1)
    return np.asarray(largest)


def efficiency_at(pumps: Pumps, flow: float) -> Floats:
    """Efficiency of each pump at one flow [m3/s], (c,) [-]; NaN outside its data."""
    return _read(pumps, _efficiencies(pumps), np.full(len(pumps), flow))


def smallest_flow(
    pumps: Pumps, *, heat_capacity: Real, temperature_rise: Real, power: Floats | None = None
) -> Floats:
    """Smallest allowed flow of each pump, stable or thermal, (c,) [m3/s]; 0 where neither is known.

    power : (c,) [W] `thermal_power` of the pumps, where it is at hand
    """
    thermal = thermal_minimum_flow(
        power=thermal_power(pumps) if power is None else power,
        density=REFERENCE_DENSITY,
        heat_capacity=heat_capacity,
        temperature_rise=temperature_rise,
    )
    return np.nan_to_num(np.fmax(pumps.minimum_flow, thermal))


def _read(pumps: Pumps, values: Floats, flow: Floats) -> Floats:
    """One column of the stations (c, k) at a flow of each pump (c,); NaN outside its data."""
    curves = pumps.curves
    known = (flow >= curves.start) & (flow <= curves.end)
    station = np.where(known, flow / curves.span * (STATIONS - 1), 0.0)
    read = interpolate.value_once(values, station, np.arange(len(pumps)))
    return np.where(known, read, np.nan)


def _efficiencies(pumps: Pumps) -> Floats:
    """Efficiency at the stations, (c, k): as measured, else from the shaft power."""
    curves = pumps.curves
    flow = _station_flows(pumps)
    worked_out = REFERENCE_DENSITY * GRAVITY * flow * curves.head / curves.power
    return np.where(np.isnan(curves.efficiency), worked_out, curves.efficiency)
