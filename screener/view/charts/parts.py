"""What charts of a header share: lines, the system between its levels, and the points at which states lie."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

import numpy as np

from screener.model.arrays import Floats
from screener.model.case import Case
from screener.model.run import Kind, Run, Speed, State, in_state
from screener.screening import lines
from screener.screening.assess import Bench
from screener.screening.lines import Line
from screener.view import names
from screener.view.blocks import Axis, Mark, Role, Series
from screener.view.display import Display

COMBINATIONS = 6
"""Combined curves drawn at most."""

LABELS = 8
"""Points of one kind that are all labelled."""

LIKE_LOAD = 0.005
"""Speeds that are so near to that at load are taken for it."""

KINDS = (
    ("duty", Role.DUTY, (Kind.DUTY,)),
    ("wide open, or with one pump lost", Role.TRIP, (Kind.WIDE_OPEN, Kind.TRIP)),
)


def numbers(display: Display, quantity: str, values: Iterable[float]) -> list[float | None]:
    """Values in the unit of the case, None where there is none."""
    return [display.number(quantity, value) for value in values]


def percents(values: Iterable[float]) -> list[float | None]:
    """Fractions in percent, None where there is none."""
    return [round(100 * float(value), 4) if np.isfinite(value) else None for value in values]


def axis(display: Display, title: str, quantity: str) -> Axis:
    """An axis in the unit of the case."""
    return Axis(title, display.unit(quantity))


def curve(display: Display, label: str, role: Role, line: Line) -> Series:
    """Header head over flow as a series."""
    return Series(
        label, role, Mark.LINE, numbers(display, "flow", line.flow), numbers(display, "head", line.head)
    )


def system(bench: Bench, display: Display, most: float) -> Series:
    """The system curve: an area between the levels, or a line where all levels are one."""
    found = lines.system_lines(bench, most=most)
    levels = [bench.header.case.levels[row].name for row in found]
    low, *_, high = [*found.values()] * 2
    if np.allclose(low.head, high.head):
        return curve(display, "system", Role.SYSTEM, low)
    return Series(
        f"system, {levels[0]} to {levels[-1]}",
        Role.SYSTEM,
        Mark.AREA,
        numbers(display, "flow", low.flow),
        numbers(display, "head", high.head),
        numbers(display, "head", low.head),
    )


def installed(bench: Bench, display: Display) -> list[Series]:
    """Branch curves of the installed pumps, identical ones once; worn ones also as they were new."""
    header = bench.header
    found: list[Series] = []
    restored: dict[bytes, tuple[list[str], Line]] = {}
    for row in dict.fromkeys(header.alike.tolist()):
        tags = names.alike(header.case, list(header.alike), row)
        now = lines.branch_line(header.branches, row, first=float(header.base.pumps.curves.start[row]))
        found.append(curve(display, tags, Role.INSTALLED, now))
        if new := lines.restored_line(bench, row):
            restored.setdefault(new.head.tobytes(), ([], new))[0].append(tags)
    return found + [
        curve(display, f"{', '.join(tags)} restored", Role.RESTORED, new) for tags, new in restored.values()
    ]


def combined(bench: Bench, display: Display, run: Run, most: float, *, new: bool) -> tuple[list[Series], int]:
    """The combined curve of each combination that a duty asks for, and how many are left out.

    At load in the liquid of the rated duty, and at the speeds found where speed holds the flow.
    new : whether the new pump is there
    """
    header, conditions = bench.header, bench.header.conditions
    found: dict[tuple[tuple[int, float], ...], Series] = {}
    order = sorted(range(len(header.states)), key=lambda place: place != header.rated)
    for place in order:
        state = header.states[place]
        held = state.speed == Speed.HELD
        count = state.new if new else 0
        if state.kind != Kind.DUTY or not (
            np.isfinite(run.header[0, place]) if held else conditions.usual[place]
        ):
            continue
        speeds = _speeds(run, place, state, count) if held else {}
        if len(state.running) + count < 2 and not speeds:
            continue
        key = (
            *sorted((int(header.alike[row]), round(speeds.get(1 + row, 1), 2)) for row in state.running),
            (count, round(speeds.get(0, 1), 2)),
        )
        if key in found:
            continue
        installed_there = lines.installed_in_state(header, run, place)
        parts = [(installed_there, row, 1) for row in state.running]
        if count:
            parts.append((lines.new_in_state(header, run, place), 0, count))
        label = _together(header.case, state.running, count, speeds)
        found[key] = curve(display, label, Role.COMBINED, lines.together(parts, most=most))
    series = list(found.values())
    return series[:COMBINATIONS], len(series[COMBINATIONS:])


def _speeds(run: Run, place: int, state: State, count: int) -> dict[int, float]:
    """Speeds of the pumps that run in a state which are not those at load, by column of the run."""
    ratio = in_state(run.bounds.speed, place)[0]
    columns = [*([0] if count else []), *(1 + row for row in state.running)]
    return {column: float(ratio[column]) for column in columns if abs(ratio[column] - 1) > LIKE_LOAD}


def _together(case: Case, running: Sequence[int], count: int, speeds: Mapping[int, float]) -> str:
    """Names of pumps that run together, each with its speed where that is not the one at load."""
    who = [(1 + row, names.combination(case, [row])) for row in running]
    if count:
        who.append((0, names.combination(case, [], count)))
    return " + ".join(
        f"{name} at {100 * speeds[column]:.0f} %" if column in speeds else name for column, name in who
    )


def points(
    bench: Bench, display: Display, x: Floats, y: Floats, quantity: str, *, named: bool = True
) -> list[Series]:
    """One point for each state, by kind; states at one and the same point share a label.

    x : (s,) [m3/s];  y : (s,) in SI of the quantity, a fraction for "%"
    """
    case = bench.header.case
    across = numbers(display, "flow", x)
    up = percents(y) if quantity == "%" else numbers(display, quantity, y)
    series = []
    for word, role, kinds in KINDS:
        at: list[tuple[float, float, list[State]]] = []
        for state, one, other in zip(bench.header.states, across, up, strict=True):
            if state.kind not in kinds or one is None or other is None or not (state.running or state.new):
                continue
            near = (item for item in at if np.allclose(item[:2], (one, other), rtol=1e-3, atol=1e-9))
            if (there := next(near, None)) is None:
                at.append(there := (one, other, []))
            there[2].append(state)
        if at:
            labels = _thinned([one for one, *_ in at], _labels(case, at)) if named else ()
            series.append(
                Series(word, role, Mark.POINTS, [one for one, *_ in at], [b for _, b, _ in at], labels=labels)
            )
    return series


def _labels(case: Case, at: Sequence[tuple[float, float, Sequence[State]]]) -> list[str]:
    """What happens at each point; with its level where the same happens at another point too."""
    words = [dict.fromkeys(names.situation(case, state) for state in states) for *_, states in at]
    every = [word for point in words for word in point]
    labels = []
    for one, _, states in at:
        texts = [
            names.where(case, state)
            if every.count(names.situation(case, state)) > 1
            else names.situation(case, state)
            for state in states
        ]
        labels.append("; ".join(dict.fromkeys(texts)) + (" (gives nothing)" if one == 0 else ""))
    return labels


def _thinned(flows: Sequence[float], labels: Sequence[str]) -> list[str]:
    """Labels of points; of very many only those of the smallest and the largest flow."""
    ends = (min(flows), max(flows))
    return [
        text if len(flows) <= LABELS or one in ends else "" for one, text in zip(flows, labels, strict=True)
    ]


def unknown(bench: Bench, run: Run) -> list[str]:
    """States that have no figures, in words."""
    lost = [
        names.where(bench.header.case, state)
        for place, state in enumerate(bench.header.states)
        if (state.running or state.new) and not np.isfinite(run.header[0, place])
    ]
    return [f"No figures, a pump being past its data: {'; '.join(dict.fromkeys(lost))}."] if lost else []


def basis(bench: Bench) -> str:
    """What the curves of a chart hold for."""
    header = bench.header
    liquid = header.case.liquids[header.states[header.rated].liquid].name
    text = f"Heads are those at the header, branch losses taken off; curves for {liquid}, pumps at load"
    return f"{text}, each drawn over its measured flows only."


def others(bench: Bench) -> list[str]:
    """Why some points need not lie on the curves drawn."""
    duties = (bench.header.conditions.kind == Kind.DUTY) & ~bench.header.conditions.usual
    held = bench.header.conditions.held
    said = []
    if (duties & ~held).any():
        said.append("Points of duties in another liquid, or with a bypass, need not lie on the curves.")
    if held.any():
        said.append(
            "Where speed holds the flow, combined curves and points are those at the speed found, wide open "
            "and with a pump lost at the highest speed; percent of the speed at load."
        )
    return said


def told(series: Sequence[Series], x: Axis, y: Axis) -> str:
    """The labelled points in words, for those who cannot see them."""
    return "; ".join(
        f"{label}: {across:g} {x.unit}, {up:g} {y.unit}".strip()
        for item in series
        if item.mark == Mark.POINTS and item.labels
        for label, across, up in zip(item.labels, item.x, item.y, strict=True)
        if label and across is not None and up is not None
    )
