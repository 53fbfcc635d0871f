"""The bypass that each pump would need where it gets too little, and how warm it gets without one."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from screener.header.bypass import Part, bypass_flows
from screener.header.setting import pumps_at
from screener.header.system import system_curve
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.heating import (
    boiling_temperature,
    temperature_rise,
    thermal_minimum_flow,
    time_to_boil,
)
from screener.hydraulics.orifice import SMALLEST_PIPE, MissingExtra, bore
from screener.hydraulics.similarity import take
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch, Case
from screener.model.curves import Pumps
from screener.model.finding import Verdict
from screener.model.run import Kind, Run, Speed, in_state
from screener.screening.assess import Bench, judged, set_up

PIPE_VELOCITY = 3.0
"""[m/s] for which the bypass pipe is sized, down to 50 mm: common practice, no source."""

_SECONDS = 3600.0  # in an hour


class Governs(IntEnum):
    """What sets the flow that a pump is kept at."""

    STABLE = 0
    THERMAL = 1
    CURVE = 2


@dataclass(frozen=True, slots=True)
class Need:
    """One pump in one throttled duty, and the bypass that it needs there.

    state, pump : place in the header's states, column of the run (0 the new pump, each of them)
    flow    : [m3/s] through the pump as the duty is now, 0 where held shut
    minimum : [m3/s] that it is to be kept at, NaN where it is not known: then so is the rest
    governs : what sets that; CURVE where its curve has no falling side, or no data, further left
    bypass  : [m3/s];  idle : it takes everything and the pump delivers nothing
    head    : [m] of the pump at that flow, for the bypass to burn
    power   : [W] shaft power that the bypass costs;  energy : [J] per year, NaN without hours
    pipe    : [m] inside diameter of the bypass pipe taken for the bore
    bore    : [m] of an orifice plate, NaN outside its standard, None without the extra `orifice`
    """

    state: int
    pump: int
    flow: float
    minimum: float
    governs: Governs
    bypass: float
    idle: bool
    head: float
    power: float
    energy: float
    pipe: float
    bore: float | None


@dataclass(frozen=True, slots=True)
class Warming:
    """One pump in one state in which it gets little or nothing.

    share  : [-] flow over minimum flow, NaN where that is not known
    rise   : [K] of the liquid that passes, NaN where it is held shut or its efficiency is not known
    eye, casing : [s] after which the liquid boils, dead-headed, at the pressure of the suction and at that of
                  shutoff; NaN where it is not held shut or something is missing
    needs  : what is missing for those times
    """

    state: int
    pump: int
    flow: float
    share: float
    rise: float
    eye: float
    casing: float
    needs: tuple[str, ...]


def needed(bench: Bench, run: Run) -> tuple[Need, ...]:
    """The bypasses of every throttled duty in which a running pump of one candidate is under its minimum.

    run : of one candidate on that bench. Duties whose flow is held by speed are left out, and states without
    figures.
    """
    result: list[Need] = []
    for place, state in enumerate(bench.header.states):
        if state.kind == Kind.DUTY and state.throttled and state.speed != Speed.HELD:
            flow = run.flow[0, place]
            least = np.fmax(*_minimums(bench, run, place))
            if np.isfinite(run.header[0, place]) and ((flow < least * (1 - 1e-9)) | (flow == 0)).any():
                result += _needs(bench, run, place)
    return tuple(result)


def settings(bench: Bench, needs: Sequence[Need]) -> dict[int, tuple[float, ...]]:
    """The bypass of each pump for each duty, as `Duty.bypass`: the largest that any of its states needs."""
    flows: dict[int, list[float]] = {}
    for need in needs:
        duty = bench.header.states[need.state].duty
        pumps = flows.setdefault(duty, [0.0] * (1 + len(bench.header.case.installed)))
        pumps[need.pump] = max(pumps[need.pump], float(np.nan_to_num(need.bypass)))
    return {duty: tuple(pumps) for duty, pumps in flows.items()}


def with_bypass(case: Case, flows: Mapping[int, Sequence[float]]) -> Case:
    """The same case with bypasses at its pumps. flows : {row of the duty: (1 + p,) [m3/s]}"""
    duties = tuple(
        replace(duty, bypass=tuple(flows.get(row, duty.bypass))) for row, duty in enumerate(case.duties)
    )
    return replace(case, duties=duties)


def verified(bench: Bench, pumps: Pumps, flows: Mapping[int, Sequence[float]]) -> Verdict:
    """Verdict of one candidate with bypasses, by judging it again in the case that has them."""
    again = judged(set_up(with_bypass(bench.header.case, flows)), pumps)
    return Verdict(int(again.candidates.verdict[0]))


def warming(bench: Bench, run: Run) -> tuple[Warming, ...]:
    """How warm a pump of one candidate gets wherever it has little more than its minimum flow, or none."""
    case, limits = bench.header.case, bench.limits["minimum-flow"]
    result = []
    for place in range(len(bench.header.states)):
        least = np.fmax(*_minimums(bench, run, place)) / limits["fail_below"]
        capacity = float(run.conditions.heat_capacity[place])
        for column in np.flatnonzero(run.conditions.runs[place]):
            flow = float(run.flow[0, place, column])
            if not (flow == 0 or flow < limits["caution_below"] * least[column]) or np.isinf(flow):
                continue
            rise, times, needs = np.nan, (np.nan, np.nan), tuple[str, ...]()
            if flow == 0:
                times, needs = _times(run, case, place, int(column))
            else:
                head, efficiency = run.head[0, place, column], run.efficiency[0, place, column]
                rise = float(temperature_rise(head=head, efficiency=efficiency, heat_capacity=capacity))
            share = flow / float(least[column]) if least[column] > 0 else float(np.nan)
            result.append(Warming(place, int(column), flow, share, rise, *times, needs))
    return tuple(result)


def _minimums(bench: Bench, run: Run, place: int) -> tuple[Floats, Floats]:
    """Flow that each pump of one candidate must have in a state, stable and thermal, (1 + p,) [m3/s] each."""
    limits = bench.limits["minimum-flow"]
    thermal = thermal_minimum_flow(
        power=in_state(run.bounds.thermal_power, place)[0],
        density=REFERENCE_DENSITY,
        heat_capacity=float(run.conditions.heat_capacity[place]),
        temperature_rise=limits["temperature_rise"],
    )
    share = limits["fail_below"]
    return share * in_state(run.bounds.minimum, place)[0], share * thermal


def _needs(bench: Bench, run: Run, place: int) -> list[Need]:
    """The pumps that need a bypass in one state."""
    case, state = bench.header.case, bench.header.states[place]
    columns = [*([0] if state.new else []), *(1 + row for row in state.running)]
    pumps = [_pump(case, run, place, column) for column in columns]
    stable, thermal = (values[columns] for values in _minimums(bench, run, place))
    least = np.fmax(stable, thermal)
    parts = [
        Part(pump.curves, _branch(case, column), state.new if column == 0 else 1)
        for column, pump in zip(columns, pumps, strict=True)
    ]
    liquid = case.liquids[state.liquid]
    found = bypass_flows(
        parts,
        minimum=[np.array([flow]) for flow in np.nan_to_num(least)],
        asked=state.asked,
        curve=system_curve(case.system, case.levels[state.level], liquid),
    )
    seconds = float(run.conditions.hours[place] * run.conditions.share_of_hours[place]) * _SECONDS
    result = []
    for part, column in enumerate(columns):
        flow, now = float(found.bypass[0, part]), float(run.flow[0, place, column])
        if np.isnan(least[part]):
            if now == 0:
                result.append(_unknown(place, column))
        elif flow > 0:
            kept, head = float(found.kept[0, part]), float(found.head[0, part])
            power = _power(pumps[part], kept, head) * flow / kept * liquid.density / REFERENCE_DENSITY
            pipe = float(max(SMALLEST_PIPE, np.sqrt(4 * flow / (np.pi * PIPE_VELOCITY))))
            result.append(
                Need(
                    state=place,
                    pump=column,
                    flow=now,
                    minimum=kept,
                    governs=_governs(kept, float(stable[part]), float(least[part])),
                    bypass=flow,
                    idle=bool(found.idle[0, part]),
                    head=head,
                    power=power,
                    energy=power * seconds,
                    pipe=pipe,
                    bore=_bore(flow, head, liquid.density, liquid.viscosity, pipe),
                )
            )
    return result


def _unknown(place: int, column: int) -> Need:
    """A pump held shut whose minimum flow nobody stated: it needs a bypass, of a size that is not known."""
    nan = float(np.nan)
    return Need(place, column, 0.0, nan, Governs.STABLE, nan, False, nan, nan, nan, nan, None)


def _governs(kept: float, stable: float, least: float) -> Governs:
    if kept > least * (1 + 1e-9):
        return Governs.CURVE
    return Governs.STABLE if least == stable else Governs.THERMAL


def _bore(flow: float, head: float, density: float, viscosity: float, pipe: float) -> float | None:
    try:
        return bore(flow=flow, head=head, density=density, viscosity=viscosity, pipe_diameter=pipe)
    except MissingExtra:
        return None


def _pump(case: Case, run: Run, place: int, column: int) -> Pumps:
    """One pump of one candidate as it runs in a state, at its speed and in its liquid."""
    pumps = take(case.pumps, np.array([column - 1])) if column else run.pumps
    liquid = case.liquids[case.duties[int(run.conditions.duty[place])].liquid]
    ratio = in_state(run.bounds.speed, place)[:, column]
    return pumps_at(pumps, ratio=ratio, viscosity=liquid.viscosity if liquid.viscous else 0.0)


def _branch(case: Case, column: int) -> Branch:
    return case.installed[column - 1].branch if column else case.new_pump.branch


def _power(pump: Pumps, flow: float, head: float) -> float:
    """Shaft power of one pump at 1000 kg/m3 [W]: as measured, else from its efficiency."""
    curves = pump.curves
    station = np.array([flow / float(curves.span[0]) * (STATIONS - 1)])
    row = np.zeros(1, np.int64)
    measured = float(interpolate.value_once(curves.power, station, row)[0])
    if np.isfinite(measured):
        return measured
    efficiency = float(interpolate.value_once(curves.efficiency, station, row)[0])
    return REFERENCE_DENSITY * GRAVITY * flow * head / efficiency if efficiency > 0 else float(np.nan)


def _times(run: Run, case: Case, place: int, column: int) -> tuple[tuple[float, float], tuple[str, ...]]:
    """Times to boil of a pump held shut in a state, at the eye and in the casing, and what is missing."""
    liquid = case.liquids[case.duties[int(run.conditions.duty[place])].liquid]
    pump = _pump(case, run, place, column)
    curves = pump.curves
    volume = float(pump.casing_volume[0])
    power = float(curves.power[0, 0]) * liquid.density / REFERENCE_DENSITY
    missing = {
        "casing volume": np.isnan(volume),
        "power at zero flow": np.isnan(power),
        "head at zero flow": curves.start[0] > 0,
        "temperature of the liquid": np.isnan(liquid.temperature),
    }
    suction = case.atmospheric_pressure + float(run.conditions.suction_pressure[place, column])
    shutoff = suction + liquid.density * GRAVITY * float(curves.head[0, 0])
    boiling = boiling_temperature(pressure=np.array([suction, shutoff]))
    seconds = time_to_boil(
        power=power,
        mass=volume * liquid.density,
        heat_capacity=liquid.heat_capacity,
        start=liquid.temperature,
        boiling=boiling,
    )
    needs = tuple(name for name, absent in missing.items() if absent)
    return ((np.nan, np.nan) if needs else (float(seconds[0]), float(seconds[1]))), needs
