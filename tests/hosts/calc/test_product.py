"""The product's own functions in the live program: the acceptance examples of the job, edited in place.

The expected numbers are the acceptance examples of the order for this product; they were recomputed independently with
the closed form of a chain of springs (from memory): N = -(sum of alpha dT L) / (sum of L/EA + 1/kA + 1/kB).
"""

from __future__ import annotations

from typing import Any

import pytest
from calc_live import LiveOffice

from xlaxial.functions.registry import load
from xlaxial.hosts.calc.extension import argument_help, kinds

pytestmark = pytest.mark.office

_SHEET = "Sheet1"
_SEGMENTS: list[list[Any]] = [
    ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"],
    ["S1", 540, 1100, 70, 23, 30],
    ["S1", 820, 640, 205, 12, 30],
    ["S1", 370, 900, 110, 18, 30],
]
_SUPPORTS: list[list[Any]] = [["Mark", "Node", "Stiffness (kN/mm)"], ["S1", 0, 70], ["S1", 3, 150]]
_SECOND: list[list[Any]] = [["S2", 540, 1100, 70, 23, 30], ["S2", "TBC", 640, 205, 12, 30]]
_SECOND_SUPPORTS: list[list[Any]] = [["S2", 0, 70], ["S2", 2, 150]]


def _fill(column: str, row: int, rows: list[list[Any]]) -> list[list[Any]]:
    first = ord(column)
    return [
        ["set", _SHEET, f"{chr(first + m)}{row + n}", value]
        for n, cells in enumerate(rows)
        for m, value in enumerate(cells)
    ]


def _set(cell: str, value: Any) -> list[Any]:
    return ["set", _SHEET, cell, value]


def _read(area: str) -> list[Any]:
    return ["read", _SHEET, area]


_BLOCK = ["array", _SHEET, "K2:L4", "=AX_SEGMENTS(A1:F4;H1:J3;;K1:L1)"]
_REACTIONS = ["array", _SHEET, "N2:N3", '=AX_REACTIONS(A1:F4;H1:J3;;"kN")']
_WANTED = '{"Displacement start (mm)";"Displacement end (mm)"}'
_ENDS = ["array", _SHEET, "P2:Q4", f"=AX_DISPLACEMENTS(A1:F4;H1:J3;;{_WANTED})"]
_2A = [
    *_fill("A", 1, _SEGMENTS),
    *_fill("H", 1, _SUPPORTS),
    _set("K1", "Force (kN)"),
    _set("L1", "Stress (MPa)"),
    _BLOCK,
    _REACTIONS,
    _ENDS,
]


def test_a_heated_chain_between_springs(product: LiveOffice) -> None:
    """Example 2a."""
    block, reactions, ends = product.steps(*_2A, _read("K2:L4"), _read("N2:N3"), _read("P2:Q4"))[-3:]
    assert [row[0] for row in block] == pytest.approx([-22.860009] * 3, abs=5e-7)
    assert [row[1] for row in block] == pytest.approx([-20.781826, -35.718763, -25.400010], abs=5e-7)
    assert [row[0] for row in reactions] == pytest.approx([22.860009, -22.860009], abs=5e-7)
    assert [ends[0][0], ends[2][1]] == pytest.approx([-0.326572, 0.152400], abs=5e-7)


def test_editing_one_input_updates_every_answer(product: LiveOffice) -> None:
    """Examples 2a in degrees Fahrenheit, and 2b."""
    warmer = [_set(f"F{row}", 31) for row in (2, 3, 4)]
    back = [_set(f"F{row}", 30) for row in (2, 3, 4)]
    rigid = [_set("J2", ""), _set("J3", ""), _set("L1", "Status")]
    fahrenheit = [_set("F1", "dT (°F)"), *[_set(f"F{row}", 54) for row in (2, 3, 4)]]
    seen = product.steps(
        *_2A,
        *fahrenheit,
        _read("K2"),
        *[_set("F1", "dT (K)"), *warmer],
        _read("K2"),
        *[*back, _set("K1", "Force (lbf)")],
        _read("K2"),
        *[_set("K1", "Force (kN)"), *rigid],
        _read("K2:L2"),
    )
    found = [value[0] for value in seen if isinstance(value, list)]
    assert [value[0] for value in found] == pytest.approx([-22.860009, -23.622009, -5139.134362, -51.034211], abs=5e-7)
    assert "rigid" in found[-1][1].lower()


@pytest.mark.parametrize("wrong", ["TBC", "#N/A"])
def test_a_wrong_member_fails_alone_and_no_summary_passes_over_it(product: LiveOffice, wrong: str) -> None:
    """Example 2c: a text, then an error value, in a length of a second member."""
    entry = ["formula", _SHEET, "B6", "=NA()"] if wrong == "#N/A" else _set("B6", wrong)
    seen = product.steps(
        *_fill("A", 1, [*_SEGMENTS, *_SECOND]),
        *_fill("H", 1, [*_SUPPORTS, *_SECOND_SUPPORTS]),
        entry,
        _set("K1", "Force (kN)"),
        _set("L1", "Status"),
        ["array", _SHEET, "K2:L6", "=AX_SEGMENTS(A1:F6;H1:J5;;K1:L1)"],
        ["formula", _SHEET, "N1", "=MAX(K2:K6)"],
        ["formula", _SHEET, "N2", "=AGGREGATE(14;6;K2:K6;1)"],
        _read("K2:L6"),
        _read("N1:N2"),
    )
    block, summary = seen[-2:]
    assert [row[0] for row in block[:3]] == pytest.approx([-22.860009] * 3, abs=5e-7)
    assert [row[0] for row in block[3:]] == [["error", 519]] * 2
    assert all(f"{_SHEET}!B6" in row[1] for row in block[3:])
    assert summary[0] == [["error", 519]]
    assert summary[1][0] == pytest.approx(-22.860009, abs=5e-7)


@pytest.mark.parametrize("wrong", ["=NA()", "=DATE(2026;4;3)"])
def test_a_wrong_load_fails_its_member_alone(product: LiveOffice, wrong: str) -> None:
    """An error cell in the loads, and a force typed as 3/4 that the program has made a date."""
    loads = [["Mark", "Node", "Force (kN)"], ["S1", 1, 0], ["S2", 1, 5]]
    second = [["S2", 540, 1100, 70, 23, 30], ["S2", 400, 640, 205, 12, 30]]
    seen = product.steps(
        *_fill("A", 1, [*_SEGMENTS, *second]),
        *_fill("H", 1, [*_SUPPORTS, *_SECOND_SUPPORTS]),
        *_fill("S", 1, loads),
        ["formula", _SHEET, "U3", wrong],
        _set("K1", "Force (kN)"),
        _set("L1", "Status"),
        ["array", _SHEET, "K2:L6", "=AX_SEGMENTS(A1:F6;H1:J5;S1:U3;K1:L1)"],
        _read("K2:L6"),
    )
    block = seen[-1]
    assert [row[0] for row in block[:3]] == pytest.approx([-22.860009] * 3, abs=5e-7)
    assert [row[0] for row in block[3:]] == [["error", 519]] * 2
    assert all(f"{_SHEET}!U3" in row[1] for row in block[3:])


def test_one_call_a_row_gives_what_the_block_gives(product: LiveOffice) -> None:
    row = ["formula", _SHEET, "R2", '=AX_FORCES($A2:$F2;$H$1:$J$3;;"kN";;;$A$1:$F$1)']
    one = [["S1", 540, 1100, 70, 23, 30]]
    supports = [["Mark", "Node", "Stiffness (kN/mm)"], ["S1", 0, 70], ["S1", 1, 150]]
    table = [*_fill("A", 1, [_SEGMENTS[0], *one]), *_fill("H", 1, supports)]
    block = ["formula", _SHEET, "S2", '=AX_FORCES(A1:F2;H1:J3;;"kN")']
    seen = product.steps(*table, row, block, _read("R2:S2"))[-1][0]
    # 540 mm heated by 30 K between springs of 70 and 150 kN/mm: alpha dT L / (L/EA + 1/kA + 1/kB)
    force = -23e-6 * 30 * 540 / (540 / (70 * 1100) + 1 / 70 + 1 / 150)
    assert seen == pytest.approx([force, force], rel=1e-9)


def test_every_function_is_in_the_wizard_with_its_help(product: LiveOffice) -> None:
    seen = product.wizard(list(load()))
    assert set(seen) == set(load())
    for name, function in load().items():
        assert seen[name]["text"].startswith(function.summary)
        assert function.example in seen[name]["text"]
        told = [
            [argument.name, argument_help(argument, kind)]
            for argument, kind in zip(function.arguments, kinds(function), strict=True)
        ]
        assert [argument[:2] for argument in seen[name]["arguments"]] == told
