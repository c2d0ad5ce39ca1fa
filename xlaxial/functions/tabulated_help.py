"""Declarations of the worksheet functions on tabulated data; the code behind them is in `xlaxial.functions.tabulated`."""

from __future__ import annotations

from xlaxial.functions.registry import Function

FUNCTIONS: tuple[Function, ...] = ()
