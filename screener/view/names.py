"""What states and pumps are called."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from screener.model.case import Case
from screener.model.run import Kind, State

NEW = "new"


def pump(case: Case, column: int) -> str:
    """Name of a pump by its place in a run: 0 the new one, then the installed ones."""
    return NEW if column == 0 else case.installed[column - 1].tag


def alike(case: Case, classes: Sequence[int], row: int) -> str:
    """Tags of all installed pumps that are identical to one, "P-1, P-2"."""
    return ", ".join(
        case.installed[other].tag for other in range(len(case.installed)) if classes[other] == row
    )


def combination(case: Case, running: Sequence[int], new: int = 0) -> str:
    """Names of the pumps that run together, "P-1 + P-2 + new"."""
    names = [case.installed[row].tag for row in running]
    if new:
        names.append(NEW if new == 1 else f"{new} x {NEW}")
    return " + ".join(names) or "none"


def situation(case: Case, state: State) -> str:
    """What happens in a state, without its level: "peak", "peak, wide open", "peak, P-1 lost"."""
    duty = case.duties[state.duty].name
    if len(case.duties[state.duty].running) > 1:
        everyone = state.running if state.lost in (None, -1) else (*state.running, state.lost)
        duty = f"{duty} ({combination(case, sorted(everyone), state.new)})"
    if state.kind == Kind.WIDE_OPEN:
        return f"{duty}, wide open"
    if state.kind == Kind.TRIP:
        return f"{duty}, {lost(case, state)} lost"
    return duty


def after_trip(case: Case, state: State, *, new: bool) -> str:
    """A trip in a few words; `new` where it is the new pump that is lost out of a state run wide open."""
    if not new:
        return where(case, state)
    name = f"{situation(case, replace(state, kind=Kind.DUTY))}, {NEW} lost"
    return f"{name}, {level(case, state)}" if len(case.levels) > 1 else name


def lost(case: Case, state: State) -> str:
    """The pump that a state has lost."""
    return "one new" if state.lost == -1 else case.installed[state.lost or 0].tag


def level(case: Case, state: State) -> str:
    """Name of the level of a state."""
    return case.levels[state.level].name


def liquid(case: Case, state: State) -> str:
    """Name of the liquid of a state."""
    return case.liquids[state.liquid].name


def where(case: Case, state: State) -> str:
    """A state in a few words: "peak, P-1 lost, river low"; level and liquid only where there are several."""
    parts = [situation(case, state)]
    if len(case.levels) > 1:
        parts.append(level(case, state))
    if len(case.liquids) > 1:
        parts.append(liquid(case, state))
    return ", ".join(parts)
