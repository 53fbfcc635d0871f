"""Names are data: text in which no control character is left to act."""

from __future__ import annotations


def clean(text: str) -> str:
    """Text on one line, without characters that could move the cursor or hide what follows.

    >>> clean("P-1\\n\\x1b[2J")
    'P-1 �[2J'
    """
    if text.isprintable():
        return text
    return "".join(
        character if character.isprintable() else " " if character.isspace() else "\N{REPLACEMENT CHARACTER}"
        for character in text
    )
