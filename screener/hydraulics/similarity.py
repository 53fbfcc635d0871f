"""Similarity: a pump at another diameter and another speed, made from its tested curves."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import fields, replace

import numpy as np

from screener.hydraulics import interpolate
from screener.hydraulics.similarity_numbers import specific_speed, suction_specific_speed
from screener.hydraulics.trim_laws import trim_head_uncertainty, trim_length
from screener.model.arrays import Floats, Ints
from screener.model.curves import Curves, Pumps, PumpTable


def trimmed(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats) -> Pumps:
    """Bring models to a diameter and a speed.

    Between two tested diameters both curves are brought there by the trim law and mixed linearly in
    diameter at the same scaled flow; elsewhere the nearest tested curve follows the trim law
    Q ~ x^a, H ~ x^b, P ~ x^(a+b), x being the diameter but where the law uses that of the inlet; see
    `trim_length`. Speed: Q ~ n, H ~ n^2, P ~ n^3, NPSHr ~ n^x. A trim leaves NPSHr at a given flow, the
    stable minimum flow and the suction specific speed as they were.

    model       : (c,) int rows of the table
    diameter    : (c,) [m]; NaN runs a model at the diameter of its largest test
    speed_ratio : (c,) [-] speed over the speed of the curves
    Returns c pumps.  Source: affinity laws, e.g. US DOE-HDBK-1012/3-92, centrifugal pumps.
    """
    low, high, weight = _neighbours(table, model, diameter)
    tested = table.tested
    law_flow, law_head = table.flow_exponent[model], table.head_exponent[model]
    cut_low, cut_high = _cut(table, low, model, diameter), _cut(table, high, model, diameter)
    flow_low, flow_high = cut_low**law_flow, cut_high**law_flow
    head_low, head_high = cut_low**law_head, cut_high**law_head
    nearest = _ratio(diameter, table.diameter[np.where(weight < 0.5, low, high)])
    alone = low == high
    lost = table.efficiency_loss[model] * np.where(alone, np.maximum(1 - nearest, 0), 0)
    uncertainty = np.where(alone, trim_head_uncertainty(ratio=nearest, law_head=head_low), 0)
    ratio = speed_ratio

    def blend(values: Floats, scale_low: Floats, scale_high: Floats, either: bool = False) -> Floats:
        """Rows of the tests, scaled, and mixed where a test lies on either side."""
        result = np.empty((len(low), *values.shape[1:]))
        shape = (-1,) + (1,) * (values.ndim - 1)
        for rows in interpolate.blocks(len(low)):
            part, share = result[rows], weight[rows]
            np.multiply(values.take(low[rows], axis=0), scale_low[rows].reshape(shape), out=part)
            between = np.flatnonzero(share > 0)
            if between.size:
                below, share = part[between], share[between].reshape(shape)
                above = values.take(high[rows][between], axis=0) * scale_high[rows][between].reshape(shape)
                mixed = (1 - share) * below + share * above
                if either:  # where one of them was not measured, the other holds
                    mixed = np.where(np.isnan(below), above, np.where(np.isnan(above), below, mixed))
                part[between] = mixed
        return result

    same = np.ones(len(model))
    speed_npsh = ratio ** table.npsh_speed_exponent[model]
    efficiency = blend(tested.efficiency, same, same)
    if lost.any():
        efficiency -= lost[:, None]
    curves = Curves(
        start=np.maximum(tested.start[low] * flow_low, tested.start[high] * flow_high) * ratio,
        end=blend(tested.end, flow_low * ratio, flow_high * ratio),
        span=tested.span[low] * flow_low * ratio,
        head=blend(tested.head, head_low * ratio**2, head_high * ratio**2),
        efficiency=efficiency,
        power=blend(tested.power, flow_low * head_low * ratio**3, flow_high * head_high * ratio**3),
        npsh_required=blend(tested.npsh_required, speed_npsh, speed_npsh, either=True),
        npsh_span=tested.npsh_span[low] * ratio,
    )
    number, suction_number = _numbers(table, model)
    return Pumps(
        curves=curves,
        model=model,
        diameter=np.where(np.isnan(diameter), table.diameter[low], diameter),
        maximum=table.maximum[model],
        minimum=table.minimum[model],
        from_test=np.where(np.isnan(nearest), 0.0, np.abs(nearest - 1)),
        trim_uncertainty=uncertainty,
        law_inlet=table.law_inlet[model],
        speed=table.speed[model] * ratio,
        bep_flow=blend(table.bep_flow, flow_low * ratio, flow_high * ratio, either=True),
        specific_speed=number,
        suction_specific_speed=suction_number,
        minimum_flow=table.minimum_flow[model] * ratio,
        maximum_flow=table.maximum_flow[model] * ratio,
        region_low=table.region_low[model],
        region_high=table.region_high[model],
        allowable_pressure=table.allowable_pressure[model],
        maximum_power=table.maximum_power[model],
        casing_volume=table.casing_volume[model],
        head_tolerance=table.head_tolerance[model],
        lowest_speed=table.lowest_speed[model],
        highest_speed=table.highest_speed[model],
        stages=table.stages[model].astype(np.float64),
        npsh_speed_exponent=table.npsh_speed_exponent[model],
    )


def head_at(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats, flow: Floats) -> Floats:
    """Head of models at one flow each, without making their whole curves.

    All (c,); flow in m3/s.  Returns (c,) [m]; NaN left of the first or right of the last measured point.
    """
    low, high, weight = _neighbours(table, model, diameter)
    start, end, head = _read(table, low, model, diameter, speed_ratio, flow)
    between = np.flatnonzero(weight > 0)
    if between.size:
        rows, speed = high[between], speed_ratio[between]
        above = _read(table, rows, model[between], diameter[between], speed, flow[between])
        start[between] = np.maximum(start[between], above[0])
        end[between] += weight[between] * (above[1] - end[between])
        head[between] += weight[between] * (above[2] - head[between])
    return np.where((flow >= start) & (flow <= end), head, np.nan)


def _read(
    table: PumpTable, row: Ints, model: Ints, diameter: Floats, speed_ratio: Floats, flow: Floats
) -> tuple[Floats, Floats, Floats]:
    """First and last measured flow of tested curves brought to a diameter, and head at a flow between."""
    tested, last = table.tested, table.tested.head.shape[1] - 1
    cut = _cut(table, row, model, diameter)
    law_flow = cut ** table.flow_exponent[model] * speed_ratio
    law_head = cut ** table.head_exponent[model] * speed_ratio**2
    station = np.minimum(np.maximum(flow / (tested.span[row] * law_flow) * last, 0), last)
    head = interpolate.value_once(tested.head, station, row)
    return tested.start[row] * law_flow, tested.end[row] * law_flow, head * law_head


def end_at(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats) -> Floats:
    """Flow of the last measured point of models at a diameter. All (c,); returns (c,) [m3/s]."""
    low, high, weight = _neighbours(table, model, diameter)
    law = table.flow_exponent[model]
    below = table.tested.end[low] * _cut(table, low, model, diameter) ** law
    above = table.tested.end[high] * _cut(table, high, model, diameter) ** law
    return np.asarray((below + weight * (above - below)) * speed_ratio)


def stack(parts: Sequence[Pumps]) -> Pumps:
    """Join pumps, in order, into one set of columns."""
    return Pumps(
        curves=Curves(
            **{f.name: np.concatenate([getattr(p.curves, f.name) for p in parts]) for f in fields(Curves)}
        ),
        **{
            f.name: np.concatenate([getattr(p, f.name) for p in parts])
            for f in fields(Pumps)
            if f.name != "curves"
        },
    )


def take(pumps: Pumps, rows: Ints) -> Pumps:
    """Some of the pumps, as columns."""
    columns = {f.name: getattr(pumps, f.name)[rows] for f in fields(Pumps) if f.name != "curves"}
    curves = Curves(**{f.name: getattr(pumps.curves, f.name)[rows] for f in fields(Curves)})
    return replace(pumps, curves=curves, **columns)


def _neighbours(table: PumpTable, model: Ints, diameter: Floats) -> tuple[Ints, Ints, Floats]:
    """Rows of the tested curves next below and above a diameter, and the share of the upper one."""
    first, last = table.first[model], table.first[model + 1] - 1
    below = np.zeros(len(model), np.int64)
    for offset in range(int((last - first).max(initial=0)) + 1):
        row = np.minimum(first + offset, last)
        below += (first + offset <= last) & ~(table.diameter[row] > diameter)
    low = first + np.maximum(below - 1, 0)
    high = np.where(below > 0, np.minimum(low + 1, last), low)
    gap = table.diameter[high] - table.diameter[low]
    between = gap > 0
    share = np.where(between, (diameter - table.diameter[low]) / np.where(between, gap, 1), 0.0)
    share = np.where(np.isnan(share), 0.0, share)
    exact = share == 0
    return low, np.where(exact, low, high), share


def _cut(table: PumpTable, row: Ints, model: Ints, diameter: Floats) -> Floats:
    """What the trim laws of models raise to their exponents, from tested curves to a diameter, (c,) [-]."""
    inlet = table.law_inlet[model]
    return _ratio(
        trim_length(diameter=diameter, inlet=inlet), trim_length(diameter=table.diameter[row], inlet=inlet)
    )


def _ratio(diameter: Floats, tested: Floats) -> Floats:
    return np.where(np.isnan(diameter) | np.isnan(tested), 1.0, diameter / tested)


def _numbers(table: PumpTable, model: Ints) -> tuple[Floats, Floats]:
    """Specific speed and suction specific speed of models, from their largest tested curve."""
    row = table.first[model + 1] - 1
    bep = table.bep_flow[row]
    curves = table.tested
    last = curves.head.shape[1] - 1
    at = np.where(np.isnan(bep), 0.0, bep)
    head = interpolate.value_once(curves.head, np.minimum(at / curves.span[row], 1) * last, row)
    reach = curves.npsh_span[row]
    need = interpolate.value_once(curves.npsh_required, np.minimum(at / reach, 1) * last, row)
    need = np.where(at <= reach, need, np.nan)
    speed = table.speed[model]
    flow = bep / table.eyes[model]
    return (
        specific_speed(speed=speed, flow=flow, head=head / table.stages[model]),
        suction_specific_speed(speed=speed, flow=flow, npsh_required=need),
    )
