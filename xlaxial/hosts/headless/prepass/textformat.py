"""Formats of TEXT that the engine evaluates as spreadsheets do; all others are left at their stored values."""

from __future__ import annotations

import re

_NUMBER = re.compile(r"(#,##)?[0#]*0(\.[0#]+)?%?$")
_DATE = re.compile(r"(yyyy|yy|mmmm|mmm|mm|m|dddd|ddd|dd|d|hh|h|ss|[-/.: ])+$", re.IGNORECASE)


def is_trusted(argument: str) -> bool:
    """Whether a format, as it stands in the formula, is plain decimals or a plain date.

    Literal text round a number, as in ``0.0" mm"``, is plain too; a format out of a cell is not.
    """
    text = argument.strip()
    if len(text) < 3 or not (text.startswith('"') and text.endswith('"')):
        return False
    pattern = text[1:-1].replace('""', '"')
    bare = re.sub(r'"[^"]*"', "", pattern)
    return bool(_NUMBER.match(bare.strip() if bare != pattern else bare) or (bare == pattern and _DATE.match(bare)))
