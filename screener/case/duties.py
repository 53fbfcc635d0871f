"""The duties of a case: what is asked of the header, and which pumps run."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations

from screener import units
from screener.case.parts import NEW, Node, lookup, names
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.model.case import Control, Duty

MOST_COMBINATIONS = 500
"""Combinations in one duty: a guard against a slip of the pen, far above any real header."""

HOURS_IN_A_YEAR = 8784

Combinations = tuple[tuple[tuple[int, ...], ...], tuple[bool, ...]]


@dataclass(frozen=True, slots=True)
class Fleet:
    """What a duty must know of the pumps. Places: the new pump, then the installed ones.

    tags     : of the installed pumps
    replaced : row of the installed pump that leaves, -1 where none does
    varies   : for each place, whether its speed can be changed
    end      : for each place, the end of its curve [m3/s], NaN where it is not known
    flow     : unit to name flows in
    """

    tags: Sequence[str]
    replaced: int
    varies: Sequence[bool]
    end: Sequence[float]
    flow: str

    @property
    def names(self) -> list[str]:
        """What a duty calls each place."""
        return [NEW, *self.tags]


def duties(
    q: Quantities,
    nodes: Sequence[Node],
    *,
    levels: Sequence[str],
    liquids: Sequence[str],
    fleet: Fleet,
) -> tuple[Duty, ...]:
    """Return the duties; levels and liquids are known by name."""
    names(q, nodes, "name", "duty")
    running = []
    unsure = set()
    for row, node in enumerate(nodes):
        before = len(q.problems)
        running.append(_running(q, node["running"], ("duty", row, "running"), fleet))
        if len(q.problems) > before:
            unsure.add(row)
    flows = [q.positive(node["flow"], "flow", ("duty", row, "flow")) for row, node in enumerate(nodes)]
    rated = _rated(q, nodes, flows, [any(new) for _, new in running], sure=not unsure)
    found = []
    for row, node in enumerate(nodes):
        path = ("duty", row)
        named = node.get("liquid", liquids[0])
        control = Control[node.get("control", "throttled").upper()]
        if control == Control.SPEED:
            _check_speed(q, path, running[row], fleet)
        found.append(
            Duty(
                name=node["name"],
                flow=flows[row],
                levels=_levels(q, node.get("levels"), (*path, "levels"), levels),
                liquid=lookup(q, named, liquids, (*path, "liquid"), "liquid"),
                running=running[row][0],
                new=running[row][1],
                control=control,
                hours=float(node.get("hours", math.nan)),
                rated=row == rated,
                bypass=_bypass(q, node, path, running[row], fleet, sure=row not in unsure),
            )
        )
    hours = sum(duty.hours for duty in found if not math.isnan(duty.hours))
    if hours > HOURS_IN_A_YEAR:
        last = max(row for row, node in enumerate(nodes) if "hours" in node)
        q.bad(
            ("duty", last, "hours"),
            f"the duties add up to {hours:g} h",
            f"at most {HOURS_IN_A_YEAR} h a year",
        )
    return tuple(found)


def _levels(
    q: Quantities, given: Sequence[str] | None, path: KeyPath, known: Sequence[str]
) -> tuple[int, ...]:
    if given is None:
        return tuple(range(len(known)))
    _once(q, given, path)
    return tuple(lookup(q, name, known, (*path, i), "level") for i, name in enumerate(given))


def _running(q: Quantities, node: Node | Sequence[str], path: KeyPath, fleet: Fleet) -> Combinations:
    """Return the combinations of installed pumps, and for each whether the new pump runs."""
    if not isinstance(node, Mapping):
        return _listed(q, node, path, fleet)
    count, new = int(node["any"]), node["new"]
    named = node.get("of", [tag for row, tag in enumerate(fleet.tags) if row != fleet.replaced])
    _once(q, named, (*path, "of"))
    among = [_installed(q, tag, fleet.tags, (*path, "of", i), fleet) for i, tag in enumerate(named)]
    if count > len(among):
        there = "named" if "of" in node else "installed" if fleet.replaced < 0 else "left beside the new one"
        what = f"any {count} pumps, but only {len(among)} are {there}"
        q.bad((*path, "any"), what, f"at most {len(among)}")
    elif count == 0 and not new:
        q.bad(path, "no pump runs", "any above 0, or new = true")
    elif math.comb(len(among), count) > MOST_COMBINATIONS:
        what = f"any {count} of {len(among)} pumps is {math.comb(len(among), count)} combinations"
        q.bad(
            (*path, "any"),
            what,
            f"at most {MOST_COMBINATIONS}: list the tags of the combination that matters",
        )
    else:
        found = tuple(combinations(sorted(among), count))
        return found, (new,) * len(found)
    return (), ()


def _listed(q: Quantities, node: Sequence[str], path: KeyPath, fleet: Fleet) -> Combinations:
    _once(q, node, path)
    known = [*fleet.tags, NEW]
    rows = [_installed(q, tag, known, (*path, i), fleet) for i, tag in enumerate(node)]
    installed = tuple(sorted(row for row in rows if 0 <= row < len(fleet.tags)))
    return (installed,), (len(fleet.tags) in rows,)


def _installed(q: Quantities, tag: str, known: Sequence[str], path: KeyPath, fleet: Fleet) -> int:
    """Return the row of a pump that may run; one that the new pump replaces may not."""
    row = lookup(q, tag, known, path, "pump")
    if row >= 0 and row == fleet.replaced:
        q.bad(path, f"{tag!r} leaves the header: the new pump replaces it", "leave it out")
    return row


def _check_speed(q: Quantities, path: KeyPath, running: Combinations, fleet: Fleet) -> None:
    """Where the pumps hold the flow by their speed, one that can must run in every combination."""
    for rows, new in zip(*running, strict=True):
        places = [0] * new + [1 + row for row in rows]
        if places and not any(fleet.varies[place] for place in places):
            who = ", ".join(fleet.names[place] for place in places)
            what = f"control is by speed, but no pump has a speed range when these run: {who}"
            q.bad((*path, "control"), what, "speed_range of one of them, or another control")
            return


def _bypass(
    q: Quantities, node: Node, path: KeyPath, running: Combinations, fleet: Fleet, *, sure: bool
) -> tuple[float, ...]:
    """Return the flow taken back at each place [m3/s]; sure : whether `running` could be read."""
    runs = {0 for new in running[1] if new} | {1 + row for rows in running[0] for row in rows}
    flows = [0.0] * (1 + len(fleet.tags))
    for name, given in node.get("bypass", {}).items():
        at = (*path, "bypass", name)
        flow = q.value(given, "flow", at)
        place = lookup(q, name, fleet.names, at, "pump")
        if place < 0:
            continue
        if sure and place not in runs:
            q.bad(at, f"{name!r} does not run in this duty", "a bypass of a pump that runs")
        if flow < 0:
            q.bad(at, f"the bypass of {name!r} is {given}", "0 or more")
        if flow >= fleet.end[place]:
            end = f"{units.from_si(fleet.end[place], fleet.flow):.4g} {fleet.flow}"
            q.bad(at, f"{name!r} takes back {given}", f"below {end}, where its curve ends")
        flows[place] = flow
    return tuple(flows) if any(flows) else ()


def _once(q: Quantities, given: Sequence[str], path: KeyPath) -> None:
    for i, name in enumerate(given):
        if name in given[:i]:
            q.bad((*path, i), f"{name!r} is there twice", "name it once")


def _rated(
    q: Quantities, nodes: Sequence[Node], flows: Sequence[float], new: Sequence[bool], *, sure: bool
) -> int:
    """Return the row of the rated duty: as stated, else the largest flow with the new pump running.

    sure : whether all of `running` could be read; else that no new pump runs may be a slip of the pen
    """
    stated = [row for row, node in enumerate(nodes) if node.get("rated")]
    for row in stated[1:]:
        q.bad(("duty", row, "rated"), f"duty {nodes[stated[0]]['name']!r} is rated already", "one rated duty")
    if stated:
        if sure and not new[stated[0]]:
            q.bad(("duty", stated[0], "running"), "the rated duty runs without the new pump", f"add {NEW!r}")
        return stated[0]
    runs = [row for row, runs in enumerate(new) if runs]
    if not runs and sure:
        q.bad(("duty",), "no duty runs the new pump", f"add {NEW!r} to `running`")
    return max(runs, key=lambda row: flows[row], default=-1)
