"""Cells to and from Calc, without the office."""

from __future__ import annotations

import datetime as dt
import math
import struct
from typing import Any

import numpy as np
import pytest

from xlaxial.cells import ERROR_CODES, CellError
from xlaxial.hosts.calc.values import ERROR_NUMBERS, cell_out, cells_in, error_cell, error_value, grid_out


def _number(value: float) -> int:
    bits: int = struct.unpack("<Q", struct.pack("<d", value))[0]
    return bits & 0xFFFFFFFF


@pytest.mark.parametrize("code", ERROR_CODES)
def test_an_error_value_carries_its_number_and_comes_back(code: str) -> None:
    value = cell_out(CellError(code))
    assert math.isnan(value)
    assert _number(value) == ERROR_NUMBERS.get(code, 519)
    assert error_cell(_number(value)).code == (code if code in ERROR_NUMBERS else "#VALUE!")


@pytest.mark.parametrize(
    ("cell", "expected"),
    [
        (None, ""),
        (True, 1.0),
        (False, 0.0),
        (3, 3.0),
        (1e-300, 1e-300),
        ("text", "text"),
        (np.float64(2.5), 2.5),
        (np.bool_(True), 1.0),
        (np.int64(4), 4.0),
        (dt.date(2024, 3, 4), "2024-03-04"),
    ],
)
def test_a_cell_as_calc_takes_it(cell: Any, expected: Any) -> None:
    out = cell_out(cell)
    assert out == expected
    assert type(out) is type(expected)


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -float("inf"), np.float64("nan")])
def test_what_is_no_number_is_an_error_value(value: float) -> None:
    assert _number(cell_out(value)) == 503


def test_a_grid_is_made_rectangular_and_never_empty() -> None:
    assert grid_out([[1.0], [2.0, "a", None]]) == ((1.0, "", ""), (2.0, "a", ""))
    for empty in ([], [[]]):
        assert _number(grid_out(empty)[0][0]) == 519


def test_arguments_by_value() -> None:
    assert cells_in(None) is None
    assert cells_in(0.0) == 0.0
    assert cells_in("kN") == "kN"
    assert cells_in((("a", ""), (1.0, 2.0))) == [["a", None], [1.0, 2.0]]
    assert cells_in((("a", ""), ("", ""))) == [["a", None], [None, None]]


def test_blanks_at_the_end_of_whole_columns_and_rows_are_cut_off() -> None:
    assert cells_in((("a", ""), ("", 2.0), *[("", "")] * 2000)) == [["a", None], [None, 2.0]]
    assert cells_in((("a", "b", *[""] * 2000),)) == [["a", "b"]]
    assert cells_in((("",) * 2000,)) == [[None]]
    assert cells_in(((error_value("#N/A"), *[""] * 2000),))[0][1:] == []
