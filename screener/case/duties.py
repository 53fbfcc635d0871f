"""The duties of a case: what is asked of the header, and which pumps run."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from itertools import combinations

from screener.case.parts import NEW, Node, lookup, names
from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.model.case import Control, Duty

MOST_COMBINATIONS = 500
"""Combinations in one duty: a guard against a slip of the pen, far above any real header."""

HOURS_IN_A_YEAR = 8784

Combinations = tuple[tuple[tuple[int, ...], ...], tuple[bool, ...]]


def duties(
    q: Quantities,
    nodes: Sequence[Node],
    *,
    levels: Sequence[str],
    liquids: Sequence[str],
    tags: Sequence[str],
) -> tuple[Duty, ...]:
    """Return the duties; levels, liquids and installed pumps are known by name."""
    names(q, nodes, "name", "duty")
    before = len(q.problems)
    running = [_running(q, node["running"], ("duty", row, "running"), tags) for row, node in enumerate(nodes)]
    sure = len(q.problems) == before
    flows = [q.positive(node["flow"], "flow", ("duty", row, "flow")) for row, node in enumerate(nodes)]
    rated = _rated(q, nodes, flows, [any(new) for _, new in running], sure=sure)
    found = []
    for row, node in enumerate(nodes):
        path = ("duty", row)
        named = node.get("liquid", liquids[0])
        found.append(
            Duty(
                name=node["name"],
                flow=flows[row],
                levels=_levels(q, node.get("levels"), (*path, "levels"), levels),
                liquid=lookup(q, named, liquids, (*path, "liquid"), "liquid"),
                running=running[row][0],
                new=running[row][1],
                control=Control[node.get("control", "throttled").upper()],
                hours=float(node.get("hours", math.nan)),
                rated=row == rated,
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
    used = {duty.liquid for duty in found}
    for row, name in enumerate(liquids):
        if -1 not in used and liquids.index(name) not in used:
            q.bad(("liquid", row), f"no duty pumps {name!r}", f"liquid = {name!r} in a duty, or leave it out")
    return tuple(found)


def _levels(
    q: Quantities, given: Sequence[str] | None, path: KeyPath, known: Sequence[str]
) -> tuple[int, ...]:
    if given is None:
        return tuple(range(len(known)))
    _once(q, given, path)
    return tuple(lookup(q, name, known, (*path, i), "level") for i, name in enumerate(given))


def _running(q: Quantities, node: Node | Sequence[str], path: KeyPath, tags: Sequence[str]) -> Combinations:
    """Return the combinations of installed pumps, and for each whether the new pump runs."""
    if not isinstance(node, Mapping):
        return _listed(q, node, path, tags)
    count, new = int(node["any"]), node["new"]
    named = node.get("of", tags)
    _once(q, named, (*path, "of"))
    among = [lookup(q, tag, tags, (*path, "of", i), "pump") for i, tag in enumerate(named)]
    if count > len(among):
        there = "named" if "of" in node else "installed"
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


def _listed(q: Quantities, node: Sequence[str], path: KeyPath, tags: Sequence[str]) -> Combinations:
    _once(q, node, path)
    rows = [lookup(q, tag, [*tags, NEW], (*path, i), "pump") for i, tag in enumerate(node)]
    installed = tuple(sorted(row for row in rows if 0 <= row < len(tags)))
    return (installed,), (len(tags) in rows,)


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
