"""What one of our functions is given by a formula, and what becomes of its answer."""

from __future__ import annotations

import datetime as dt
import time
from typing import Any

import pytest

from xlaxial import CellError, CellRange
from xlaxial.hosts.headless.recalculate import recalculate


class Spy:
    """A worksheet function that keeps its arguments."""

    def __init__(self, answer: Any = 1.0) -> None:
        self.answer = answer
        self.calls: list[tuple[Any, ...]] = []

    def __call__(self, *arguments: Any) -> Any:
        self.calls.append(arguments)
        return self.answer


CELLS: dict[str, Any] = {
    "My Ties!B2": "Mark", "My Ties!C2": "Length", "My Ties!D2": "Size", "My Ties!E2": "Held",
    "My Ties!B3": "a", "My Ties!C3": 5, "My Ties!D3": dt.datetime(2026, 3, 4), "My Ties!E3": True,
    "My Ties!B4": "b", "My Ties!D4": "=1/0", "My Ties!E4": "=NA()",
}  # fmt: skip


def called(make_book: Any, formula: str, **more: Any) -> tuple[Any, ...]:
    spy = Spy()
    recalculate(make_book(CELLS | {"Calc!A3": formula}, **more), {"AX_SPY": spy})
    assert len(spy.calls) == 1
    return spy.calls[0]


@pytest.mark.parametrize(
    "formula",
    [
        "=AX_SPY('My Ties'!B2:E4)",
        "=ax_spy('My Ties'!$B$2:$E$4)",
        "=_xll.AX_SPY('My Ties'!B2:E4)",
        "=_xldudf_AX_SPY('My Ties'!B2:E4)",
        "=[1]!AX_SPY('My Ties'!B2:E4)",
        "=[0]!AX_SPY('My Ties'!B2:E4)",
        "='axial.xlam'!AX_SPY('My Ties'!B2:E4)",
        "=_xlfn.AX_SPY('My Ties'!B2:E4)",
        "=AX_SPY(block)",
    ],
)
def test_a_block_arrives_with_its_place_and_types(make_book: Any, formula: str) -> None:
    (block,) = called(make_book, formula, names={"block": "'My Ties'!$B$2:$E$4"})
    assert isinstance(block, CellRange)
    assert (block.sheet, block.row, block.column) == ("My Ties", 2, 2)
    assert list(map(list, block)) == [
        ["Mark", "Length", "Size", "Held"],
        ["a", 5.0, dt.datetime(2026, 3, 4), True],
        ["b", None, CellError("#DIV/0!"), CellError("#N/A")],
    ]
    assert type(block[1][1]) is float
    assert block[1][3] is True


def test_a_table_arrives_with_its_headings(make_book: Any) -> None:
    spy = Spy()
    cells = {
        "S!B2": "Mark",
        "S!C2": "Length (mm)",
        "S!B3": "a",
        "S!C3": 5,
        "S!E9": "=AX_SPY(T[[#Headers],[#Data],[Mark]:[Length (mm)]])",
    }
    recalculate(make_book(cells, tables={"T": "S!B2:C3"}), {"AX_SPY": spy})
    (block,) = spy.calls[0]
    assert (block.sheet, block.row, block.column) == ("S", 2, 2)
    assert list(map(list, block)) == [["Mark", "Length (mm)"], ["a", 5.0]]


@pytest.mark.parametrize("name", ["Ties[#All]", "S!$B$2:$C$3", "S!$B:$C", "S!$2:$3", "other"])
def test_a_name_of_any_kind_of_range_arrives_with_its_place(make_book: Any, name: str) -> None:
    spy = Spy()
    cells = {"S!B2": "Mark", "S!C2": "Length (mm)", "S!B3": "a", "S!C3": 5, "S!C4": "=AX_SPY(block)+0*ROWS(block)"}
    names = {"block": name, "other": "(S!$B$2:$C$3)"}
    recalculate(make_book(cells, names=names, tables={"Ties": "S!B2:C3"}), {"AX_SPY": spy})
    if name == "S!$B:$C":  # the formula stands in its own columns
        assert spy.calls == []
        return
    (block,) = spy.calls[0]
    assert isinstance(block, CellRange)
    assert (block.sheet, block.row) == ("S", 2)
    assert block.column == (1 if name == "S!$2:$3" else 2)
    assert "Length (mm)" in block[0]
    assert len(block) == 2


def test_omitted_arguments_are_none_wherever_they_stand(make_book: Any) -> None:
    assert called(make_book, '=AX_SPY(,2,,"x",)') == (None, 2.0, None, "x")
    assert called(make_book, "=AX_SPY()") == ()


def test_an_empty_text_is_no_omitted_argument(make_book: Any) -> None:
    assert called(make_book, '=AX_SPY("",1=1,2+3)') == ("", True, 5.0)


def test_a_computed_argument_has_no_place(make_book: Any) -> None:
    (block,) = called(make_book, "=AX_SPY('My Ties'!C3:C4*2)")
    assert not isinstance(block, CellRange)
    assert block == [[10.0], [0.0]]


def test_one_blank_cell_is_none(make_book: Any) -> None:
    (block,) = called(make_book, "=AX_SPY('My Ties'!C4)")
    assert list(map(list, block)) == [[None]]
    assert (block.sheet, block.row, block.column) == ("My Ties", 4, 3)


def test_whole_columns_and_rows_end_with_the_sheet(make_book: Any) -> None:
    columns, rows = called(make_book, "=AX_SPY('My Ties'!B:E,'My Ties'!3:4)")
    assert len(columns) == 4
    assert list(columns[1]) == ["Mark", "Length", "Size", "Held"]
    assert (columns.row, columns.column) == (1, 2)
    assert [len(row) for row in rows] == [5, 5]


def test_what_a_call_reads_is_followed(make_book: Any) -> None:
    total = lambda block: sum(row[0] for row in block)  # noqa: E731 - the whole function is one sum
    cells = {"S!A1": 1, "S!A2": "=A1+1", "S!A3": "=C1*10", "S!B1": "=AX_T(A1:A3)", "S!C1": "=A2+1"}
    new = {r.cell: r.new for r in recalculate(make_book(cells), {"AX_T": total}).results}
    assert new["B1"] == 1 + 2 + 30


def test_one_call_at_a_time(make_book: Any) -> None:
    inside: list[int] = []
    most: list[int] = []

    def slow(*_: Any) -> float:
        inside.append(1)
        most.append(len(inside))
        time.sleep(0.0005)
        inside.pop()
        return 1.0

    cells = {f"S!A{i}": i for i in range(1, 101)} | {f"S!B{i}": f"=AX_SLOW(A{i})" for i in range(1, 101)}
    recalculate(make_book(cells), {"AX_SLOW": slow})
    assert most == [1] * 100


@pytest.mark.parametrize(
    ("answer", "value"),
    [
        (2.5, 2.5),
        (True, True),
        ("text", "text"),
        (None, ""),
        (float("nan"), CellError("#NUM!")),
        (float("inf"), CellError("#NUM!")),
        (CellError("#N/A"), CellError("#N/A")),
        ([[1.5, 2.5], [3.5, 4.5]], 1.5),
        ([[CellError("#VALUE!")]], CellError("#VALUE!")),
        ([[None]], ""),
    ],
)
def test_answers_in_one_cell(make_book: Any, answer: Any, value: Any) -> None:
    done = recalculate(make_book({"S!A1": "=AX_SPY(B1)", "S!B2": "=1+1"}), {"AX_SPY": Spy(answer)})
    new = {r.cell: r.new for r in done.results}["A1"]
    assert type(new) is type(value)
    assert new == value


def test_answers_inside_formulas(make_book: Any) -> None:
    spy = Spy([["node", 2.0], [None, 3.5], [CellError("#N/A"), 1.0]])
    formulas = [
        "=SUM(INDEX(AX_SPY(),0,2))",
        "=INDEX(AX_SPY(),2,2)",
        "=IFERROR(INDEX(AX_SPY(),3,1),9)",
        '=MATCH("node",INDEX(AX_SPY(),0,1),0)',
    ]
    done = recalculate(make_book({f"S!A{i}": f for i, f in enumerate(formulas, 1)}), {"AX_SPY": spy})
    assert [r.new for r in done.results] == [6.5, 3.5, 9.0, 1.0]
