"""xlwings' real call path over stubs; test_call_path.py runs this file in a process of its own."""

from __future__ import annotations

import datetime as dt
import decimal
import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))
import com_stubs
from com_stubs import OMITTED, ComTime, Error, SheetRange, excel_call
from excel_functions import FUNCTIONS, caller

XLWINGS = com_stubs.install()
com_stubs.test_module("stubbed_functions", FUNCTIONS, caller)

NUMBERS = {
    "#NULL!": 2000,
    "#DIV/0!": 2007,
    "#VALUE!": 2015,
    "#REF!": 2023,
    "#NAME?": 2029,
    "#NUM!": 2036,
    "#N/A": 2042,
    "#GETTING_DATA": 2043,
    "#SPILL!": 2045,
    "#CONNECT!": 2046,
    "#BLOCKED!": 2047,
    "#UNKNOWN!": 2048,
    "#FIELD!": 2049,
    "#CALC!": 2050,
}


def call(name, *arguments):
    return excel_call("stubbed_functions", name, *arguments)


def echo(*arguments):
    full = [*arguments, *[OMITTED] * (4 - len(arguments))]
    # The answer of AX_ECHO is one cell of text, cut at 255 characters like any other.
    return call("AX_ECHO", *full)[0][0]


def test_the_part_that_needs_a_licence_is_off():
    assert XLWINGS.__pro__ is False


def test_a_range_brings_its_place_and_every_kind_of_cell():
    when = ComTime(2026, 5, 6, 7, 8, 9, tzinfo=dt.timezone.utc)
    cells = [["Length (mm)", 540, None], [True, decimal.Decimal("1.25"), when]]
    expected = "Odd, name!r3c2 [['Length (mm)', 540.0, None], [True, 1.25, datetime.datetime(2026, 5, 6, 7, 8, 9)]]"
    assert expected == echo(SheetRange(cells, 3, 2, "Odd, name"))


def test_a_time_of_the_day_has_no_date():
    assert echo(SheetRange([[ComTime(1899, 12, 30, 6, 30)]])) == "Sheet1!r1c1 [[datetime.time(6, 30)]]"


@pytest.mark.parametrize("code", NUMBERS)
def test_error_cells_arrive_as_error_cells(code):
    assert f"Sheet1!r1c1 [[CellError('{code}')]]" == echo(SheetRange([[Error(NUMBERS[code])]]))


def test_an_error_value_that_is_too_new_is_still_one():
    assert echo(SheetRange([[Error(2051)]])) == "Sheet1!r1c1 [[CellError('#VALUE!')]]"


def test_numbers_that_look_like_error_values_stay_numbers():
    assert echo(SheetRange([[2015, -2146826273]])) == "Sheet1!r1c1 [[2015.0, -2146826273.0]]"


def test_omitted_blank_and_empty_text_differ_only_where_they_should():
    assert echo(1, OMITTED, "kN") == "1.0 | None | 'kN'"
    assert echo(1, SheetRange([[None]], 9), "kN") == "1.0 | Sheet1!r9c1 [[None]] | 'kN'"
    assert echo(1, SheetRange([[""]], 9), "kN") == "1.0 | Sheet1!r9c1 [[None]] | 'kN'"
    assert echo(1) == "1.0"


def test_inline_arrays_have_no_place():
    assert echo([["a", 1], ["b", 2]], [1, 2]) == "[['a', 1.0], ['b', 2.0]] | [[1.0, 2.0]]"


def test_an_open_end_is_cut_at_the_last_filled_cell():
    cells = [[None, None, None], ["a", None, None], [None, None, None]]
    assert echo(SheetRange(cells, ends=1)) == "Sheet1!r1c1 [[None, None, None], ['a', None, None]]"
    assert echo(SheetRange(cells, ends=3)) == "Sheet1!r1c1 [[None], ['a']]"
    assert echo(SheetRange([[None, None], [None, None]], ends=3)) == "Sheet1!r1c1 [[None]]"
    # A range with an end of its own keeps its blanks: results stand row by row beside it.
    assert echo(SheetRange([["a"], [None]])) == "Sheet1!r1c1 [['a'], [None]]"


def test_results_are_rectangular_and_blanks_are_empty_texts():
    assert [[1.5, "", "text", True], [2.0, Error(2042), "", False]] == call("AX_GIVE", "mixed")
    assert call("AX_GIVE", "jagged") == [[1.0, 2.0], [3.0, ""]]
    assert call("AX_GIVE", "row") == [[1.0, 2.0, 3.0]]
    assert call("AX_GIVE", "column") == [[1.0], [2.0]]
    assert call("AX_GIVE", "one") == [[7.0]]


@pytest.mark.parametrize("what", ["none", "empty row", "not rows", "huge", "no such"])
def test_what_is_no_result_is_an_error_value(what):
    assert [[Error(2015)]] == call("AX_GIVE", what)


def test_error_values_go_out_as_error_values():
    assert [[Error(number) for number in NUMBERS.values()]] == call("AX_GIVE", "errors")
    assert [[Error(2036), Error(2036), Error(2036), 0.0]] == call("AX_GIVE", "not finite")
    assert [[Error(2000)]] == call("AX_SINGLE", "errors")


def test_no_number_and_no_text_turns_into_an_error_value():
    assert call("AX_GIVE", "codes as numbers") == [[2015.0, 2042.0, -2146826246.0, "#N/A", "#VALUE!"]]


def test_long_texts_are_cut():
    whole, cut, pairs = call("AX_GIVE", "long")[0]
    assert whole == "x" * 255
    assert cut == "x" * 254 + "…"
    assert pairs == "𝛼" * 127 + "…"


def test_dates_go_out_as_text():
    assert call("AX_GIVE", "dates") == [["2026-01-02T03:04:00", "2026-01-02", "06:30:00"]]


def test_a_fault_is_an_error_value(caplog):
    assert [[Error(2015)]] == call("AX_FAULT", 1)
    assert "a fault on purpose" in caplog.text


def test_a_function_without_arguments():
    assert call("AX_CLOCK") == [[12.0]]


def test_a_wrapper_that_is_not_ours_is_an_error_value_and_told_in_the_log(caplog):
    from xlwings.com_server import XLPython

    answer = XLPython().CallUDF("stubbed_functions", "AX_SINGLE", ("one",))
    assert answer == 2015  # #VALUE!: a text would pass MAX and SUM; the log says what to do
    assert "xlaxial excel install" in caplog.text


def test_xlwings_sees_raw_arguments_and_help():
    seen = sys.modules["stubbed_functions"].AX_ECHO.__xlfunc__
    assert [argument["name"] for argument in seen["args"]] == ["table", "second", "wanted", "mark", "places"]
    assert {"raw"} == {argument["options"]["convert"] for argument in seen["args"]}
    assert seen["ret"]["options"]["convert"] == "raw"
    assert seen["category"] == "xlaxial"
    assert sys.modules["stubbed_functions"].AX_CLOCK.__xlfunc__["volatile"] is True


def test_every_function_of_the_registry_can_be_called():
    from xlaxial.functions.registry import load

    for function in load().values():
        answer = excel_call("xlaxial.hosts.excel.udfs", function.name, *[OMITTED] * len(function.arguments))
        assert isinstance(answer[0][0], (Error, str)), f"{function.name} gave {answer}"


def test_the_product_answers_as_in_python():
    from xlaxial.cells import CellError
    from xlaxial.functions import AX_FORCES

    table = [["Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"]]
    table += [[540, 1100, 70, 23, 30], [820, 640, 205, 12, 30], ["TBC", 900, 110, 18, 30]]
    supports = [["Node", "Stiffness (kN/mm)"], [0, 70], [3, 150]]
    expected = AX_FORCES(table, supports, None, "kN")
    answer = excel_call(
        "xlaxial.hosts.excel.udfs",
        "AX_FORCES",
        SheetRange(table, 4, 2, "Schedule"),
        SheetRange(supports, 4, 9, "Schedule"),
        OMITTED,
        "kN",
        OMITTED,
        OMITTED,
        OMITTED,
    )
    assert [[Error(NUMBERS[c.code]) if isinstance(c, CellError) else c for c in row] for row in expected] == answer
    told = excel_call(
        "xlaxial.hosts.excel.udfs",
        "AX_FORCES",
        SheetRange(table, 4, 2, "Schedule"),
        SheetRange(supports, 4, 9, "Schedule"),
        OMITTED,
        "Problems",
        OMITTED,
        OMITTED,
        OMITTED,
    )
    assert "Schedule!B7" in str(told)  # row 4 of the table, where "TBC" stands
