"""Result words: the headings that functions answer."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class ResultWord:
    """One heading that a function answers."""

    name: str  # as documents write it: "Force max"
    dimension: str  # a key of xlaxial.units.DIMENSIONS, or "text", "count", "flag"
    help: str  # one clause: what it is and its sign
    aliases: tuple[str, ...] = ()  # other spellings that are understood
