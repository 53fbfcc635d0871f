"""Similarity: a pump at another diameter and another speed, made from its tested curves."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import fields, replace

import numpy as np

from screener.hydraulics import interpolate
from screener.hydraulics.similarity_numbers import specific_speed, suction_specific_speed
from screener.model.arrays import Floats, Ints
from screener.model.curves import Curves, Pumps, PumpTable


def trimmed(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats) -> Pumps:
    """Bring models to a diameter and a speed.

    Between two tested diameters both curves are brought there by the trim law and mixed linearly in
    diameter at the same scaled flow; elsewhere the nearest tested curve follows the trim law
    Q ~ D^a, H ~ D^b, P ~ D^(a+b). Speed: Q ~ n, H ~ n^2, P ~ n^3, NPSHr ~ n^x. A trim leaves NPSHr at a
    given flow, the stable minimum flow and the suction specific speed as they were.

    model       : (c,) int rows of the table
    diameter    : (c,) [m]; NaN runs a model at the diameter of its largest test
    speed_ratio : (c,) [-] speed over the speed of the curves
    Returns c pumps.  Source: affinity laws, e.g. US DOE-HDBK-1012/3-92, centrifugal pumps.
    """
    low, high, weight = _neighbours(table, model, diameter)
    tested = table.tested
    law_flow, law_head = table.flow_exponent[model], table.head_exponent[model]
    cut_low, cut_high = _ratio(diameter, table.diameter[low]), _ratio(diameter, table.diameter[high])
    flow_low, flow_high = cut_low**law_flow, cut_high**law_flow
    head_low, head_high = cut_low**law_head, cut_high**law_head
    nearest = np.where(weight < 0.5, cut_low, cut_high)
    outside = low == high
    lost = table.efficiency_loss[model] * np.where(outside, np.maximum(1 - nearest, 0), 0)
    ratio = speed_ratio

    def mix(below: Floats, above: Floats) -> Floats:
        shape = (-1,) + (1,) * (below.ndim - 1)
        share = weight.reshape(shape)
        return np.where(share == 0, below, (1 - share) * below + share * above)

    def column(scale: Floats) -> Floats:
        return scale[:, None]

    curves = Curves(
        start=np.maximum(tested.start[low] * flow_low, tested.start[high] * flow_high) * ratio,
        end=mix(tested.end[low] * flow_low, tested.end[high] * flow_high) * ratio,
        span=tested.span[low] * flow_low * ratio,
        head=mix(tested.head[low] * column(head_low), tested.head[high] * column(head_high))
        * column(ratio**2),
        efficiency=mix(tested.efficiency[low], tested.efficiency[high]) - column(lost),
        power=mix(
            tested.power[low] * column(flow_low * head_low),
            tested.power[high] * column(flow_high * head_high),
        )
        * column(ratio**3),
        npsh_required=_either(mix, tested.npsh_required[low], tested.npsh_required[high])
        * column(ratio ** table.npsh_speed_exponent[model]),
        npsh_span=tested.npsh_span[low] * ratio,
    )
    bep_low, bep_high = table.bep_flow[low] * flow_low, table.bep_flow[high] * flow_high
    number, suction_number = _numbers(table, model)
    return Pumps(
        curves=curves,
        model=model,
        diameter=np.where(np.isnan(diameter), table.diameter[low], diameter),
        maximum=table.maximum[model],
        minimum=table.minimum[model],
        from_test=np.where(np.isnan(nearest), 0.0, np.abs(nearest - 1)),
        speed=table.speed[model] * ratio,
        bep_flow=_either(mix, bep_low, bep_high) * ratio,
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
    )


def _either(mix: Callable[[Floats, Floats], Floats], below: Floats, above: Floats) -> Floats:
    """Mix two columns; where one of them was not measured, the other holds."""
    mixed = mix(below, above)
    return np.where(np.isnan(below), above, np.where(np.isnan(above), below, mixed))


def head_at(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats, flow: Floats) -> Floats:
    """Head of models at one flow each, without making their whole curves.

    All (c,); flow in m3/s.  Returns (c,) [m]; NaN left of the first or right of the last measured point.
    """
    low, high, weight = _neighbours(table, model, diameter)
    tested = table.tested
    start, end, head = [], [], []
    for row in (low, high):
        cut = _ratio(diameter, table.diameter[row])
        law_flow = cut ** table.flow_exponent[model] * speed_ratio
        law_head = cut ** table.head_exponent[model] * speed_ratio**2
        station = flow / (tested.span[row] * law_flow) * (tested.head.shape[1] - 1)
        inside = np.clip(station, 0, tested.head.shape[1] - 1)
        heads = tested.head[row]
        read = interpolate.value(heads, interpolate.station_slopes(heads), np.arange(len(row)), inside)
        start.append(tested.start[row] * law_flow)
        end.append(tested.end[row] * law_flow)
        head.append(read * law_head)
    last = end[0] + weight * (end[1] - end[0])
    known = (flow >= np.maximum(*start)) & (flow <= last)
    return np.where(known, head[0] + weight * (head[1] - head[0]), np.nan)


def end_at(table: PumpTable, *, model: Ints, diameter: Floats, speed_ratio: Floats) -> Floats:
    """Flow of the last measured point of models at a diameter. All (c,); returns (c,) [m3/s]."""
    low, high, weight = _neighbours(table, model, diameter)
    law = table.flow_exponent[model]
    below = table.tested.end[low] * _ratio(diameter, table.diameter[low]) ** law
    above = table.tested.end[high] * _ratio(diameter, table.diameter[high]) ** law
    return np.asarray((below + weight * (above - below)) * speed_ratio)


def largest_tested(table: PumpTable) -> Ints:
    """Row of the largest tested curve of each model, (n,) int."""
    return table.first[1:] - 1


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


def _ratio(diameter: Floats, tested: Floats) -> Floats:
    return np.where(np.isnan(diameter) | np.isnan(tested), 1.0, diameter / tested)


def _numbers(table: PumpTable, model: Ints) -> tuple[Floats, Floats]:
    """Specific speed and suction specific speed of models, from their largest tested curve."""
    row = table.first[model + 1] - 1
    bep = table.bep_flow[row]
    curves = table.tested
    last = curves.head.shape[1] - 1
    rows = np.arange(len(row))
    at = np.where(np.isnan(bep), 0.0, bep)
    heads, needs = curves.head[row], curves.npsh_required[row]
    head = interpolate.value(
        heads, interpolate.station_slopes(heads), rows, np.minimum(at / curves.span[row], 1) * last
    )
    need = interpolate.value(
        needs, interpolate.station_slopes(needs), rows, np.minimum(at / curves.npsh_span[row], 1) * last
    )
    need = np.where(at <= curves.npsh_span[row], need, np.nan)
    speed = table.speed[model]
    flow = bep / table.eyes[model]
    return (
        specific_speed(speed=speed, flow=flow, head=head / table.stages[model]),
        suction_specific_speed(speed=speed, flow=flow, npsh_required=need),
    )
