"""The states in which a header is judged: duties as asked, wide open, and after each trip."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import fields

import numpy as np

from screener.header.system import SystemCurve, system_curve
from screener.model.arrays import Ints
from screener.model.case import Case, Control, Duty
from screener.model.run import Kind, Speed, State


def states(case: Case) -> tuple[State, ...]:
    """Every state with at least one new pump running, and the duties run without one.

    Identical installed pumps in the same place are one case: a combination or a trip that only swaps
    them is listed once. Wide-open states and trips are taken at the level of lowest static head and, if
    that is another one, at the level of lowest suction head; what several duties share is listed once,
    with the largest of them.
    """
    alike = classes(case)
    duties: list[State] = []
    upsets: dict[tuple[object, ...], State] = {}
    for number in sorted(range(len(case.duties)), key=lambda number: -case.duties[number].flow):
        duty = case.duties[number]
        for running, new, share in _combinations(duty, alike):
            count = case.new_pump.count if new else 0
            duties += [
                _state(case, number, level, Kind.DUTY, running, count, None, share / len(duty.levels))
                for level in duty.levels
            ]
            for level in _upset_levels(case, duty) if new else ():
                for state in _upsets(case, number, level, running, count, alike):
                    rest = tuple(sorted(int(alike[row]) for row in state.running))
                    same = (state.kind, level, duty.liquid, rest, state.new, state.speed, state.bypass)
                    upsets.setdefault(same, state)
    return tuple(sorted([*duties, *upsets.values()], key=lambda state: (state.duty, state.kind)))


def classes(case: Case) -> Ints:
    """For each installed pump, the first one that is identical to it in every figure; (p,) int."""
    signatures = [_signature(case, row) for row in range(len(case.installed))]
    return np.array([signatures.index(signature) for signature in signatures], np.int64)


def curve_of(case: Case, state: State) -> SystemCurve:
    """The system curve of a state."""
    return system_curve(case.system, case.levels[state.level], case.liquids[state.liquid])


def rated_state(case: Case, found: Sequence[State]) -> int:
    """The state on which the data sheet is written: the rated duty at its highest static head."""
    rated = [
        place
        for place, state in enumerate(found)
        if case.duties[state.duty].rated and state.kind == Kind.DUTY and state.new
    ]
    return max(rated, key=lambda place: found[place].static)


def _upsets(
    case: Case, number: int, level: int, running: tuple[int, ...], count: int, alike: Ints
) -> list[State]:
    """The combination wide open, and with each running pump lost in turn."""
    duty = case.duties[number]
    result = []
    if duty.control != Control.OPEN or level not in duty.levels:
        result.append(_state(case, number, level, Kind.WIDE_OPEN, running, count, None, 0.0))
    for lost in dict.fromkeys(int(alike[row]) for row in running):
        lost_row = next(row for row in running if alike[row] == lost)
        rest = tuple(row for row in running if row != lost_row)
        result.append(_state(case, number, level, Kind.TRIP, rest, count, lost_row, 0.0))
    if count > 1:
        result.append(_state(case, number, level, Kind.TRIP, running, count - 1, -1, 0.0))
    return result


def _state(
    case: Case,
    number: int,
    level: int,
    kind: Kind,
    running: tuple[int, ...],
    new: int,
    lost: int | None,
    share: float,
) -> State:
    duty = case.duties[number]
    curve = system_curve(case.system, case.levels[level], case.liquids[duty.liquid])
    held = duty.control == Control.SPEED
    speed = Speed.AT_LOAD if not held else Speed.HELD if kind == Kind.DUTY else Speed.HIGHEST
    return State(
        duty=number,
        level=level,
        kind=kind,
        running=running,
        new=new,
        lost=lost,
        asked=duty.flow,
        throttled=kind == Kind.DUTY and duty.control != Control.OPEN,
        static=curve.static,
        share=share,
        liquid=duty.liquid,
        speed=speed,
        bypass=duty.bypass,
    )


def _combinations(duty: Duty, alike: Ints) -> list[tuple[tuple[int, ...], bool, float]]:
    """The combinations of a duty that differ, each with its share of the hours."""
    grouped: dict[tuple[tuple[int, ...], bool], list[tuple[int, ...]]] = {}
    for running, new in zip(duty.running, duty.new, strict=True):
        grouped.setdefault((tuple(sorted(int(alike[row]) for row in running)), new), []).append(running)
    total = len(duty.running)
    return [(members[0], new, len(members) / total) for (_, new), members in grouped.items()]


def _upset_levels(case: Case, duty: Duty) -> list[int]:
    curves = {
        level: system_curve(case.system, case.levels[level], case.liquids[duty.liquid]).static
        for level in duty.levels
    }
    lowest_static = min(duty.levels, key=lambda level: (curves[level], case.levels[level].suction_head))
    lowest_suction = min(duty.levels, key=lambda level: (case.levels[level].suction_head, curves[level]))
    return list(dict.fromkeys([lowest_static, lowest_suction]))


def _signature(case: Case, row: int) -> tuple[object, ...]:
    pumps, installed = case.pumps, case.installed[row]
    columns = [getattr(pumps, f.name)[row] for f in fields(pumps) if f.name not in ("curves", "model")]
    curves = [getattr(pumps.curves, f.name)[row].tobytes() for f in fields(pumps.curves)]
    figures = np.array([*columns, installed.rated_flow, installed.motor]).tobytes()
    bypass = tuple(duty.bypass[1 + row] if duty.bypass else 0.0 for duty in case.duties)
    leak = installed.wear.leak if installed.wear else 0.0
    return (installed.branch, installed.drive, figures, bypass, leak, *curves)
