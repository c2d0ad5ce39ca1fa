"""Prefixes that programs put before function names when they store a formula."""

from __future__ import annotations

import re

_PREFIX = re.compile(
    r"^(?:'[^']*'!|\[\d+\]!|[^!'\[\]()]+\.xla[mx]?!|_xll\.|_xldudf_|_xludf\.|_xlfn\.|_xlws\.|@|\+)+", re.IGNORECASE
)


def bare_name(name: str) -> str:
    """Return a function's name in upper case without the prefixes of add-ins and newer functions."""
    return _PREFIX.sub("", name).upper()
