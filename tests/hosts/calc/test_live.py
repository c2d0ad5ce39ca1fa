"""A workbook open in the office: editing, recalculation, the function wizard."""

from __future__ import annotations

from typing import Any

import calc_functions
import pytest
from calc_live import LiveOffice

from xlaxial.hosts.calc.extension import argument_help, kinds

pytestmark = pytest.mark.office

_TABLE: list[list[Any]] = [
    ["set", "Sheet1", "A1", "Mark"],
    ["set", "Sheet1", "B1", "Length (mm)"],
    ["set", "Sheet1", "A2", "T1"],
    ["set", "Sheet1", "B2", 1200],
    ["set", "Sheet1", "A3", "T2"],
    ["formula", "Sheet1", "B3", "=B2/2"],
    ["array", "Sheet1", "D2:D3", "=AX_ROWS(A1:B3)"],
]


def test_an_edited_input_updates_every_answer(live: LiveOffice) -> None:
    read = ["read", "Sheet1", "D2:D3"]
    seen = live.steps(*_TABLE, read, ["set", "Sheet1", "B2", 1000], read, ["set", "Sheet1", "B2", "TBC"], read)
    assert seen[len(_TABLE)] == [[1200], [600]]
    assert seen[len(_TABLE) + 2] == [[1000], [500]]
    assert seen[len(_TABLE) + 4] == [[["error", 519]], [["error", 519]]]


def test_an_answer_that_feeds_a_table_updates_the_next_answer(live: LiveOffice) -> None:
    chain = [
        ["set", "Sheet1", "F1", "Length (mm)"],
        ["formula", "Sheet1", "F2", "=D2+1"],
        ["formula", "Sheet1", "F3", "=D3+1"],
        ["array", "Sheet1", "G2:G3", "=AX_ROWS(F1:F3)"],
    ]
    read = ["read", "Sheet1", "G2:G3"]
    edit = ["set", "Sheet1", "B2", 2000]
    seen = live.steps(*_TABLE, *chain, read, edit, read, ["recalculate"], read)
    assert seen[len(_TABLE) + 4] == [[1201], [601]]
    assert seen[len(_TABLE) + 6] == [[2001], [1001]]
    assert seen[len(_TABLE) + 8] == [[2001], [1001]]


def test_without_automatic_calculation_a_hard_recalculation_updates_the_answer(live: LiveOffice) -> None:
    read = ["read", "Sheet1", "D2:D3"]
    seen = live.steps(*_TABLE, ["pause"], ["set", "Sheet1", "B2", 500], ["recalculate"], read)
    assert seen[-1] == [[500], [250]]


def test_cells_as_typed_reach_the_function(live: LiveOffice) -> None:
    """A size typed as 3/4 that the program has made a date is recognisable, and so is TRUE."""
    typed = [
        ["type", "A1", "2024-03-04"],
        ["type", "A2", "TRUE"],
        ["type", "A3", "=A1"],
        ["type", "A4", "12%"],
        ["type", "A5", "'007"],
        ["formula", "Sheet1", "C1", "=AX_ECHO(A1:A6;)"],
    ]
    told = live.steps(*typed, ["read", "Sheet1", "C1"])[-1][0][0]
    moment = "datetime.datetime(2024, 3, 4, 0, 0)"
    assert f"Sheet1!r1c1 [[{moment}], [True], [{moment}], [0.12], ['007'], [None]] | None | None | None" == told


def test_the_function_wizard_tells_names_arguments_and_help(live: LiveOffice) -> None:
    seen = live.wizard([function.name for function in calc_functions.FUNCTIONS])
    assert {function.name for function in calc_functions.FUNCTIONS} == set(seen)
    assert len({entry["category"] for entry in seen.values()}) == 1
    for function in calc_functions.FUNCTIONS:
        entry = seen[function.name]
        assert f"{function.summary} Example: {function.example} {function.returns}" == entry["text"]
        told = [
            [argument.name, argument_help(argument, kind)]
            for argument, kind in zip(function.arguments, kinds(function), strict=True)
        ]
        assert told == [argument[:2] for argument in entry["arguments"]]
