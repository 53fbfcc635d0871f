"""What several tables of a case share: names that refer to one another, losses, branches."""

from __future__ import annotations

import difflib
import math
from collections.abc import Mapping, Sequence
from typing import Any

from screener.files.document import KeyPath
from screener.files.quantities import Quantities
from screener.model.case import Branch, Loss

Node = Mapping[str, Any]

NEW = "new"
"""What a duty calls the new pump."""


def names(q: Quantities, nodes: Sequence[Node], key: str, table: str) -> list[str]:
    """Return the names of a list of tables, in order; a name used twice is a problem."""
    found: list[str] = []
    for row, node in enumerate(nodes):
        if node[key] in found:
            q.bad((table, row, key), f"{key} {node[key]!r} is there twice", "each needs its own")
        found.append(node[key])
    return found


def lookup(q: Quantities, name: str, known: Sequence[str], path: KeyPath, kind: str) -> int:
    """Return the row of a name; -1 where it is not known, which is a problem."""
    if name in known:
        return known.index(name)
    close = difflib.get_close_matches(name, known, n=1)
    few = f"one of {', '.join(dict.fromkeys(known))}" if 0 < len(known) <= 12 else ""
    q.bad(path, f"there is no {kind} {name!r}", f"did you mean {close[0]!r}?" if close else few)
    return -1


def not_negative(q: Quantities, node: float | str | None, quantity: str, path: KeyPath) -> float:
    """Return a value in SI that must not be below 0."""
    value = q.value(node, quantity, path)
    if value < 0:
        q.bad(path, f"{path[-1]} is {node}", "0 or more")
        return math.nan
    return value


def head_or_zero(q: Quantities, node: Node, key: str, path: KeyPath) -> float:
    """Return a head [m] of any sign, 0 where it is not stated."""
    return q.value(node[key], "head", (*path, key)) if key in node else 0.0


def loss(q: Quantities, node: Node | Sequence[Node] | None, path: KeyPath) -> Loss:
    """Return a head loss from one term or a list of terms; no loss where it is not stated."""
    if node is None:
        return Loss()
    terms = (
        [(path, node)] if isinstance(node, Mapping) else [((*path, i), term) for i, term in enumerate(node)]
    )
    coefficients, exponents = [], []
    for at, term in terms:
        exponent = float(term.get("exponent", 2))
        head = not_negative(q, term["head"], "head", (*at, "head"))
        flow = q.positive(term["at_flow"], "flow", (*at, "at_flow"))
        coefficients.append(head / flow**exponent)
        exponents.append(exponent)
    return Loss(tuple(coefficients), tuple(exponents))


def branch(q: Quantities, node: Node, path: KeyPath) -> Branch:
    """Return the way of one pump from the common suction to the header."""
    return Branch(
        suction=loss(q, node.get("suction_branch_loss"), (*path, "suction_branch_loss")),
        discharge=loss(q, node.get("discharge_branch_loss"), (*path, "discharge_branch_loss")),
        suction_head=head_or_zero(q, node, "suction_head", path),
    )
