"""A function of the check's own, which tells what the office's Python is and whether it can load the packages."""

from __future__ import annotations

import sys
from collections.abc import Callable
from importlib import import_module
from typing import Any

from xlaxial.functions.registry import Function
from xlaxial.hosts.calc.extension import REQUIRES

NAME = "AX_HOSTPROBE"
FUNCTION = Function(
    NAME,
    "The Python inside the office.",
    (),
    "Rows of a name, a version, and what keeps it from loading.",
    "xlaxial.hosts.calc.probe:packages",
    f"={NAME}()",
)


def packages() -> list[list[Any]]:
    """Return rows of a name, its version, and what keeps it from loading (blank where nothing does)."""
    rows: list[list[Any]] = [["Python", ".".join(map(str, sys.version_info[:3])), None]]
    for name in REQUIRES:
        try:
            rows.append([name, str(import_module(name).__version__), None])
        except Exception as fault:  # noqa: BLE001 - a library built for another Python may fail in any way
            rows.append([name, None, " ".join(str(fault).split())[:200] or type(fault).__name__])
    return rows


def caller(name: str) -> Callable[..., Any]:
    """Return the callable of the check's function."""
    return {NAME: packages}[name]
