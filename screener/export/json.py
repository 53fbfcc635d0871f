"""Results as JSON: the whole of a result, the same bytes for the same input."""

from __future__ import annotations

from screener.view.blocks import Screen

NAME = "json"
SUFFIX = ".json"

_INVISIBLE = "[\x7f-\x9f\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff]"
"""What json leaves as it is, and a terminal may act on; written as an escape, it is the same text."""


def render(screen: Screen) -> str:
    """The data of a screen."""
    import json
    import re

    text = json.dumps(screen.data, indent=2, ensure_ascii=False, allow_nan=False)
    return re.sub(_INVISIBLE, lambda found: f"\\u{ord(found[0]):04x}", text) + "\n"
