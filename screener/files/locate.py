"""Line and column of a key path in the text of a TOML or JSON file; loaded only when there is a problem."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterator
from functools import lru_cache
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tree_sitter import Node

KeyPath = tuple[str | int, ...]


def position(text: str, suffix: str, path: KeyPath) -> tuple[int, int]:
    """Line and column, in characters from 1, of the value at a key path.

    text   : of a file that was parsed without error
    suffix : ".json" or ".toml"
    path   : keys and list rows from the top; the nearest parent stands in for a path that is not there
    A TOML table is at its header, or at the first key that implies it.
    """
    return (_toml if suffix == ".toml" else _json)(text).find(path)


def repeated_keys(text: str) -> list[tuple[str, tuple[int, int]]]:
    """Keys that an object in JSON text gives again, with the line and column of each repetition."""
    places = _json(text)
    found: list[tuple[str, tuple[int, int]]] = []
    waiting = [places.root]
    while waiting:
        node = waiting.pop()
        waiting.extend(reversed(node.named_children))
        seen = set()
        for pair in _pairs(node) if node.type == "object" else ():
            key = json.loads(_text(pair.named_children[0]))
            if key in seen:
                found.append((key, places.place(pair)))
            seen.add(key)
    return sorted(found, key=lambda item: item[1])


class _Places:
    """A syntax tree with the way from a key path to a node; subclasses say how one language is walked."""

    def __init__(self, text: str, language: Any) -> None:
        from tree_sitter import Language, Parser

        self.source = text.encode()
        self.root: Node = Parser(Language(language)).parse(self.source).root_node

    def find(self, path: KeyPath) -> tuple[int, int]:
        raise NotImplementedError

    def place(self, node: Node) -> tuple[int, int]:
        """Line and column of a node, counted in characters; the parser itself counts bytes."""
        row, column = node.start_point
        line_start = self.source[node.start_byte - column : node.start_byte]
        return row + 1, len(line_start.decode()) + 1


class _Json(_Places):
    """JSON is walked from the top, and only along the paths asked for: a catalog may be large."""

    def __init__(self, text: str) -> None:
        import tree_sitter_json

        if (
            "NaN" in text or "Infinity" in text
        ):  # Python reads them, the grammar does not: same length, a number
            text = re.sub(r'"(?:[^"\\]|\\.)*"|-?Infinity|NaN', _as_number, text)
        super().__init__(text, tree_sitter_json.language())
        self.known: dict[int, dict[str | int, Node]] = {}

    def find(self, path: KeyPath) -> tuple[int, int]:
        node = next(iter(self.root.named_children), self.root)
        for key in path:
            inner = self.inner(node).get(key)
            if inner is None:
                break
            node = inner
        return self.place(node)

    def inner(self, node: Node) -> dict[str | int, Node]:
        """Values inside an object or a list, by key or row; kept, as problems come in crowds."""
        if node.id not in self.known:
            if node.type == "object":
                pairs = (pair.named_children for pair in _pairs(node))
                self.known[node.id] = {json.loads(_text(key)): value for key, value in pairs}
            else:
                self.known[node.id] = dict(enumerate(node.named_children)) if node.type == "array" else {}
        return self.known[node.id]


class _Toml(_Places):
    """TOML scatters a table over its headers, so that every place is noted in one pass."""

    def __init__(self, text: str) -> None:
        import tree_sitter_toml

        super().__init__(text, tree_sitter_toml.language())
        self.nodes: dict[KeyPath, Node] = {}
        self.rows: dict[KeyPath, int] = {}  # last row so far of each [[list]]
        for node in self.root.named_children:
            if node.type == "pair":
                self.note_pair((), node)
            elif node.type in ("table", "table_array_element"):
                self.note_table(node)

    def find(self, path: KeyPath) -> tuple[int, int]:
        known = (path[:length] for length in range(len(path), 0, -1) if path[:length] in self.nodes)
        nearest = next(known, None)
        return (1, 1) if nearest is None else self.place(self.nodes[nearest])

    def note_table(self, node: Node) -> None:
        *parents, last = _keys(node.named_children[0])
        path: KeyPath = (*self.current(parents), last)
        if node.type == "table_array_element":
            self.rows[path] = self.rows.get(path, -1) + 1
            self.nodes.setdefault(path, node)
            path = (*path, self.rows[path])
        self.note(path, node)
        for pair in _pairs(node):
            self.note_pair(path, pair)

    def current(self, keys: list[str]) -> KeyPath:
        """Path that a header's keys mean: inside a [[list]], its last row."""
        path: KeyPath = ()
        for key in keys:
            path = (*path, key)
            if path in self.rows:
                path = (*path, self.rows[path])
        return path

    def note_pair(self, table: KeyPath, pair: Node) -> None:
        """Note the value of a pair and every value inside it."""
        waiting = [(table, pair)]
        while waiting:
            path, node = waiting.pop()
            if node.type == "pair":
                key, node = node.named_children[:2]  # a comment may follow
                path = (*path, *_keys(key))
            self.note(path, node)
            if node.type == "inline_table":
                waiting.extend((path, inner) for inner in _pairs(node))
            elif node.type == "array":
                values = (inner for inner in node.named_children if inner.type != "comment")
                waiting.extend(((*path, row), inner) for row, inner in enumerate(values))

    def note(self, path: KeyPath, node: Node) -> None:
        self.nodes[path] = node
        for length in range(1, len(path)):
            self.nodes.setdefault(path[:length], node)


_json = lru_cache(maxsize=2)(_Json)
_toml = lru_cache(maxsize=2)(_Toml)


def _pairs(node: Node) -> Iterator[Node]:
    return (child for child in node.named_children if child.type == "pair")


def _keys(node: Node) -> list[str]:
    """Parts of a TOML key, which the grammar nests to the left."""
    if node.type == "dotted_key":
        return [part for child in node.named_children for part in _keys(child)]
    if node.type == "quoted_key":
        return list(tomllib.loads(f"{_text(node)} = 0"))
    return [_text(node)]


def _text(node: Node) -> str:
    return (node.text or b"").decode()


def _as_number(found: re.Match[str]) -> str:
    return found[0] if found[0].startswith('"') else "0".ljust(len(found[0]))
