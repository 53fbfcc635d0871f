"""Catalog entries to columns: every tested curve on the same stations, all of a model on one flow axis."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Sequence

import numpy as np

from screener.catalog.entry import Entry, TestedCurve, with_law
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.trim_laws import trim_length
from screener.model.arrays import STATIONS, Bools, Floats, Ints, frozen
from screener.model.curves import Curves, PumpTable


def compile_table(entries: Sequence[Entry], *, trim_law: str = "") -> PumpTable:
    """Turn catalog entries into a table. Entries must be checked already; see `catalog.read`.

    trim_law : name of the law under which every pump is put, as far as it can be; see `entry.with_law`
    """
    if trim_law:
        entries = [with_law(entry, trim_law) for entry in entries]
    tests = [curve for entry in entries for curve in entry.curves]
    first = np.concatenate([[0], np.cumsum([len(entry.curves) for entry in entries])]).astype(np.int64)
    owner = np.repeat(np.arange(len(entries)), np.diff(first))

    def per_model(read: Callable[[Entry], float]) -> Floats:
        return frozen([read(entry) for entry in entries])

    flow_law, head_law = per_model(lambda e: e.flow_exponent), per_model(lambda e: e.head_exponent)
    law_inlet = per_model(lambda e: e.law_inlet)
    diameter = np.array([curve.diameter for curve in tests])
    length = trim_length(diameter=diameter, inlet=law_inlet[owner])
    length[np.isnan(length)] = 1.0
    tested, best = _columns(
        tests, first, length ** flow_law[owner], length ** head_law[owner], _best_flows(tests)
    )
    return PumpTable(
        ids=tuple(entry.id for entry in entries),
        titles=tuple(entry.title for entry in entries),
        constructions=tuple(entry.construction for entry in entries),
        sources=tuple(entry.source for entry in entries),
        first=frozen(first, np.int64),
        diameter=frozen(diameter),
        bep_flow=best,
        tested=tested,
        speed=per_model(lambda e: e.speed),
        maximum=_or_tested(per_model(lambda e: e.maximum), diameter[first[1:] - 1]),
        minimum=per_model(lambda e: e.minimum),
        flow_exponent=flow_law,
        head_exponent=head_law,
        law_inlet=law_inlet,
        efficiency_loss=per_model(lambda e: e.efficiency_loss),
        npsh_speed_exponent=per_model(lambda e: e.npsh_speed_exponent),
        stages=frozen([entry.stages for entry in entries], np.int64),
        eyes=frozen([entry.eyes for entry in entries], np.int64),
        minimum_flow=per_model(lambda e: e.minimum_flow),
        maximum_flow=per_model(lambda e: e.maximum_flow),
        region_low=per_model(lambda e: e.region_low),
        region_high=per_model(lambda e: e.region_high),
        allowable_pressure=per_model(lambda e: e.allowable_pressure),
        maximum_power=per_model(lambda e: e.maximum_power),
        casing_volume=per_model(lambda e: e.casing_volume),
        lowest_speed=per_model(lambda e: e.lowest_speed),
        highest_speed=per_model(lambda e: e.highest_speed),
        head_tolerance=per_model(lambda e: e.head_tolerance),
        trim_law=trim_law,
    )


def _or_tested(stated: Floats, tested: Floats) -> Floats:
    return frozen(np.where(np.isnan(stated), tested, stated))


def _best_flows(tests: Sequence[TestedCurve]) -> Floats:
    """Flow of best efficiency of each test: as stated, else by the parabola around the best point."""
    best = np.array([curve.bep_flow for curve in tests])
    for row, curve in enumerate(tests):
        if np.isnan(best[row]):
            efficiency = curve.efficiency
            if np.isnan(efficiency).all():
                efficiency = GRAVITY * REFERENCE_DENSITY * curve.flow * curve.head / curve.power
            known = ~np.isnan(efficiency)
            if known.sum() >= 3:
                flow, height = curve.flow[known], efficiency[known]
                place, inside = interpolate.vertex(
                    x=flow[None], y=height[None], best=np.array([height.argmax()])
                )
                best[row] = place[0] if inside[0] else np.nan
    return best


def _columns(
    tests: Sequence[TestedCurve], first: Ints, scale: Floats, head_scale: Floats, best: Floats
) -> tuple[Curves, Floats]:
    """All tests on evenly spaced stations, every test of a model reaching to the same scaled flow.

    scale, head_scale : of each test, what its flows and heads go with by the trim law
    Returns the curves and the flow of best efficiency of each.
    """
    counts = np.diff(first)
    starts = np.array([curve.flow[0] for curve in tests])
    ends = np.array([curve.flow[-1] for curve in tests])
    span = np.repeat(np.maximum.reduceat(ends / scale, first[:-1]), counts) * scale
    known = np.array([_last_known(curve) for curve in tests])
    npsh_span = np.repeat(np.maximum.reduceat(known, first[:-1]), counts)
    axis = np.linspace(0, 1, STATIONS)
    at, npsh_at = axis * span[:, None], axis * npsh_span[:, None]
    head = _read(tests, lambda t: t.head, at, outside=True)
    efficiency = _read(tests, lambda t: t.efficiency, at)
    power = _read(tests, lambda t: t.power, at)
    npsh = _read(tests, lambda t: t.npsh_required, npsh_at)
    scaled_best = best / scale
    for model in np.flatnonzero(counts > 1):
        rows = np.arange(first[model], first[model + 1])
        longest = int(rows[(ends[rows] / scale[rows]).argmax()])
        for row in rows[ends[rows] < span[rows] * (1 - 1e-12)]:
            flow_ratio = scale[row] / scale[longest]
            head_ratio = head_scale[row] / head_scale[longest]
            beyond = at[row] > ends[row]
            for column, ratio in ((head, head_ratio), (efficiency, 1.0), (power, head_ratio * flow_ratio)):
                _extend(column, row, longest, ratio, beyond)
        _borrow(rows, npsh, _empty(npsh[rows]))
        _borrow(rows, efficiency, _empty(efficiency[rows]) & _empty(power[rows]))
        _borrow(rows, scaled_best, np.isnan(scaled_best[rows]))
    curves = Curves(*map(frozen, (starts, ends, span, head, efficiency, power, npsh, npsh_span)))
    return curves, frozen(scaled_best * scale)


def _read(
    tests: Sequence[TestedCurve],
    column: Callable[[TestedCurve], Floats],
    at: Floats,
    *,
    outside: bool = False,
) -> Floats:
    """One measured column at the stations; NaN outside its measured points unless `outside`.

    Tests with the same points measured are read together.
    """
    together: dict[bytes, list[int]] = defaultdict(list)
    for row, test in enumerate(tests):
        together[(~np.isnan(column(test))).tobytes()].append(row)
    result = np.full(at.shape, np.nan)
    for mask, members in together.items():
        known = np.frombuffer(mask, bool)
        if known.sum() >= 2:
            x = np.array([tests[row].flow[known] for row in members])
            y = np.array([column(tests[row])[known] for row in members])
            places = at[members]
            values = interpolate.through_points(x=x, y=y, at=places)
            slack = 1e-12 * x[:, -1:]
            inside = (places >= x[:, :1] - slack) & (places <= x[:, -1:] + slack)
            result[members] = values if outside else np.where(inside, values, np.nan)
    return result


def _extend(column: Floats, row: int, longest: int, ratio: float, beyond: Bools) -> None:
    """Continue a test past its end by the longest test of its model plus the last known difference."""
    inside = np.flatnonzero(~beyond & ~np.isnan(column[row]) & ~np.isnan(column[longest]))
    if inside.size:
        last = inside[-1]
        difference = column[row, last] - column[longest, last] * ratio
        column[row, beyond] = column[longest, beyond] * ratio + difference


def _borrow(rows: Ints, column: Floats, lacking: Bools) -> None:
    """Give tests that lack a column that of the next larger test which has it, else of the next smaller."""
    having = np.flatnonzero(~lacking)
    for place in np.flatnonzero(lacking) if having.size else ():
        larger = having[having > place]
        giver = rows[larger[0] if larger.size else having[-1]]
        column[rows[place]] = column[giver]


def _empty(columns: Floats) -> Bools:
    return np.asarray(np.isnan(columns).all(axis=1))


def _last_known(curve: TestedCurve) -> float:
    """Flow of the last point with a known NPSH; the end of the curve where there is none."""
    known = np.flatnonzero(~np.isnan(curve.npsh_required))
    return float(curve.flow[known[-1] if known.size else -1])
