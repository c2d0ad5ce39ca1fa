"""Bad input: each has a problem that names its place and remedy, and the rest of the schedule is computed."""

from __future__ import annotations

import datetime as dt
import time
from typing import Any

import pytest

from xlaxial import CellError, CellRange
from xlaxial.functions import AX_MEMBERS, AX_REACTIONS, AX_SEGMENTS

VALUE, NUM, NA, NAME = (CellError(code) for code in ("#VALUE!", "#NUM!", "#N/A", "#NAME?"))
HEADINGS = ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)", "Preload (kN)"]


def schedule(*bad_rows: list[Any], headings: list[str] | None = None) -> CellRange:
    """A good member G, then the rows under test; both ends of every member rigid, so that G's force is -E A alpha dT."""
    rows = [headings or HEADINGS, ["G", 1000, 500, 200, 12, 10, None], *bad_rows]
    return CellRange(rows, "Bars", 1, 1)


def supports(*marks: str, ends: tuple[Any, Any] = (0, 1)) -> CellRange:
    rows: list[list[Any]] = [["Mark", "Node", "Stiffness (kN/mm)"], ["G", 0, None], ["G", 1, None]]
    rows += [[mark, end, None] for mark in marks for end in ends]
    return CellRange(rows, "Ends", 1, 1)


def check(
    answer: list[list[Any]], problems: list[list[Any]], *, code: CellError, cell: str, says: str, remedy: str
) -> None:
    assert answer[0] == [pytest.approx(-200e9 * 500e-6 * 12e-6 * 10 / 1e3)]  # restrained steel, closed form
    assert all(row == [code] for row in answer[1:])
    assert problems[0][0] == len(problems) - 1 >= 1
    found = [row for row in problems[1:] if says in row[1]]
    assert found, problems
    assert found[0][0] == cell
    assert remedy in found[0][2]


@pytest.mark.parametrize(
    ("row", "cell", "says", "remedy"),
    [
        (["B", "TBC", 500, 200, 12, 0, None], "Bars!B3", "'TBC' is not a number", "write a number"),
        (["B", -5, 500, 200, 12, 0, None], "Bars!B3", "Length is negative", "above zero"),
        (["B", 0, 500, 200, 12, 0, None], "Bars!B3", "Length is zero", "above zero"),
        (["B", 1000, 0, 200, 12, 0, None], "Bars!C3", "Area is zero", "above zero"),
        (["B", 1000, -500, 200, 12, 0, None], "Bars!C3", "Area is negative", "above zero"),
        (["B", 1000, 500, 0, 12, 0, None], "Bars!D3", "E is zero", "above zero"),
        (["B", 1000, 500, -200, 12, 0, None], "Bars!D3", "E is negative", "above zero"),
        (["B", None, 500, 200, 12, 0, None], "Bars!B3", "Length is blank", "write the segment's length"),
        (["B", 1000, None, 200, 12, 0, None], "Bars!A3", "no section", "fill in Area"),
        (["B", 1000, 500, None, 12, 0, None], "Bars!D3", "no modulus", "fill in E"),
        (["B", 1000, 500, 200, None, 30, None], "Bars!E3", "dT but no Alpha", "fill in Alpha"),
        (["B", CellError("#N/A"), 500, 200, 12, 0, None], "Bars!B3", "the cell is #N/A", "mend the formula"),
        (["B", True, 500, 200, 12, 0, None], "Bars!B3", "TRUE stands where a number is due", "write a number"),
        (["B", dt.datetime(2026, 3, 4), 500, 200, 12, 0, None], "Bars!B3", "into a date", "type the value again"),
        (["B", "1,234", 500, 200, 12, 0, None], "Bars!B3", "in two ways", "Decimal mark"),
        (["B", "12 kN", 500, 200, 12, 0, None], "Bars!B3", "unit of force, not of length", "write a unit of length"),
        (["B", "3/4", 500, 200, 12, 0, None], "Bars!B3", "fraction", "decimal"),
        (
            ["Total", 1000, 500, 200, 12, 0, None],
            "Bars!A3",
            "'Total' stands in the column of marks",
            "end the range above",
        ),
        ([None, 1000, 500, 200, 12, 0, None], "Bars!A3", "the row has no mark", "Blank mark"),
        ([dt.datetime(2026, 3, 4), 1000, 500, 200, 12, 0, None], "Bars!A3", "into a date", "type the label again"),
        ([0.75, 1000, 500, 200, 12, 0, None], "Bars!A3", "become the number 0.75", "format the cell as text"),
    ],
)
def test_a_bad_segment_row_fails_alone(row: list[Any], cell: str, says: str, remedy: str) -> None:
    tables = (schedule(row), supports("B"))
    check(
        AX_SEGMENTS(*tables, None, "kN"),
        AX_SEGMENTS(*tables, None, "Problems"),
        code=VALUE,
        cell=cell,
        says=says,
        remedy=remedy,
    )
    status = [r[0] for r in AX_SEGMENTS(*tables, None, "Status")]
    assert status[0].startswith("ok")
    assert says in status[1]


def test_every_word_is_an_error_where_no_member_can_be_solved() -> None:
    from xlaxial.functions.registry import load

    table = [HEADINGS, ["B", "TBC", 500, 200, 12, 0, None]]
    for word in load()["AX_SEGMENTS"].words:
        unit = {"force": " (kN)", "stress": " (MPa)", "length": " (mm)", "strain": " (-)"}.get(word.dimension, "")
        answer = AX_SEGMENTS(table, [["Node"], [0]], None, word.name + unit)
        assert answer == [[VALUE]] if word.name != "Status" else "not a number" in answer[0][0]
    assert AX_MEMBERS(table, [["Node"], [0]], None, "Redundants") == [[VALUE]]


def test_every_row_of_a_failing_member_fails_and_says_where() -> None:
    tables = (
        schedule(["B", 1000, 500, 200, 12, 5, None], ["B", "TBC", 500, 200, 12, 5, None]),
        supports("B", ends=(0, 2)),
    )
    assert [row[0] for row in AX_SEGMENTS(*tables, None, "kN")][1:] == [VALUE, VALUE]
    assert all("Bars!B4" in row[0] for row in AX_SEGMENTS(*tables, None, "Status")[1:])
    assert AX_MEMBERS(*tables, None, [["Mark", "Force max (kN)"]])[1] == ["B", VALUE]
    assert [row[0] for row in AX_REACTIONS(*tables, None, "kN")][2:] == [VALUE, VALUE]


@pytest.mark.parametrize(
    ("support_rows", "cell", "says", "remedy", "code"),
    [
        ([], "Bars!A3", "has no support", "one node held", NUM),
        ([["B", 7, None]], "Ends!B4", "no node '7'", "write 0 to 1", VALUE),
        ([["B", None, 5]], "Ends!B4", "stands nowhere", "Node", VALUE),
        (
            [["B", 0, None], ["B", 0, None]],
            "Ends!C5",
            "a rigid support stands at this place already",
            "Stiffness",
            VALUE,
        ),
        ([["B", 0, 0]], "Ends!C4", "Stiffness is zero", "leave the cell blank", VALUE),
        ([["B", 0, -4]], "Ends!C4", "Stiffness is negative", "leave the cell blank", VALUE),
        ([["B", 0, "soft"]], "Ends!C4", "'soft' is not a number", "write a number", VALUE),
    ],
)
def test_bad_supports(support_rows: list[list[Any]], cell: str, says: str, remedy: str, code: CellError) -> None:
    segments = schedule(["B", 1000, 500, 200, 12, 5, None])
    held = CellRange([*supports()[:3], *support_rows], "Ends", 1, 1)
    answer, problems = AX_SEGMENTS(segments, held, None, "kN"), AX_SEGMENTS(segments, held, None, "Problems")
    check(answer, problems, code=code, cell=cell, says=says, remedy=remedy)


def test_a_support_of_an_unknown_mark_is_a_problem_that_every_status_mentions() -> None:
    held = supports("b")
    problems = AX_SEGMENTS(schedule(), held, None, "Problems")
    assert [problems[1][0], problems[1][1]] == ["Ends!A4", "no segment has the mark 'b'"]
    assert "name no member" in AX_SEGMENTS(schedule(), held, None, "Status")[0][0]
    assert AX_REACTIONS(schedule(), held, None, "kN")[2:] == [[VALUE], [VALUE]]


@pytest.mark.parametrize(
    ("load", "cell", "says", "remedy"),
    [
        (["B", None, 1.5, None, 8, None], "Acts!C2", "x lies outside the member", "from 0 to its length, 1 m"),
        (["B", None, -0.5, None, 8, None], "Acts!C2", "x lies outside the member", "from 0 to its length"),
        (["B", 0, 0.5, None, 8, None], "Acts!C2", "Node and x are both given", "clear one"),
        (["B", 9, None, None, 8, None], "Acts!B2", "no node '9'", "write 0 to 1"),
        (["B", None, None, None, 8, None], "Acts!E2", "a Force needs Node or x", "write the Node"),
        (["B", None, None, None, None, 8], "Acts!F2", "needs Segment", "write the segment's number"),
        (["B", None, None, 4, None, 8], "Acts!D2", "no segment of that number", "number of its rows"),
        (["B", None, None, 1.5, None, 8], "Acts!D2", "not a whole number", "1, 2, 3"),
        (["B", 0, None, None, None, None], "Acts!A2", "the row has no action", "fill in"),
    ],
)
def test_bad_loads(load: list[Any], cell: str, says: str, remedy: str) -> None:
    loads = CellRange([["Mark", "Node", "x (m)", "Segment", "Force (kN)", "q (kN/m)"], load], "Acts", 1, 1)
    tables = (schedule(["B", 1000, 500, 200, 12, 5, None]), supports("B"), loads)
    cell = cell.replace("Acts!F2", "Acts!D2") if says == "needs Segment" else cell
    check(AX_SEGMENTS(*tables, "kN"), AX_SEGMENTS(*tables, "Problems"), code=VALUE, cell=cell, says=says, remedy=remedy)


def test_unlike_preloads_in_one_run() -> None:
    tables = (schedule(["B", 1000, 500, 200, 12, 0, 50], ["B", 1000, 500, 200, 12, 0, 60]), supports("B", ends=(0, 2)))
    answer, problems = AX_SEGMENTS(*tables, None, "kN"), AX_SEGMENTS(*tables, None, "Problems")
    check(
        answer, problems, code=VALUE, cell="Bars!G4", says="preloads in one unbranched run differ", remedy="one preload"
    )


def test_a_preload_that_nothing_holds() -> None:
    held = CellRange([*supports()[:3], ["B", 0, None]], "Ends", 1, 1)
    tables = (schedule(["B", 1000, 500, 200, 12, 0, 50]), held)
    answer, problems = AX_SEGMENTS(*tables, None, "kN"), AX_SEGMENTS(*tables, None, "Problems")
    check(answer, problems, code=VALUE, cell="Bars!G3", says="nothing can hold this preload", remedy="both sides")


NETWORK = ["Mark", "From", "To", "Length (mm)", "Area (mm2)", "E (GPa)"]


def network(*rows: list[Any]) -> CellRange:
    return CellRange([NETWORK, ["G", "a", "b", 1000, 500, 200], *rows], "Net", 1, 1)


def held_at(*ends: tuple[str, Any]) -> CellRange:
    return CellRange([["Mark", "Node"], ["G", "a"], *map(list, ends)], "Ends", 1, 1)


def test_disconnected_bar_and_mechanism_are_named() -> None:
    loads = [["Mark", "Node", "Force (kN)"], ["G", "b", 3]]
    bars = network(["B", 1, 2, 1000, 500, 200], ["B", 3, 4, 1000, 500, 200])
    for ends, says, code in ((("B", 1),), "mechanism: nodes 3, 4", NUM), ((("B", 1), ("B", 3)), "is in pieces", VALUE):
        tables = (bars, held_at(*ends), loads)
        assert [row[0] for row in AX_SEGMENTS(*tables, "kN")] == [pytest.approx(3.0), code, code]
        assert any(says in row[1] for row in AX_SEGMENTS(*tables, "Problems")[1:])


def test_x_is_refused_on_a_branched_member_and_the_same_node_twice() -> None:
    loads = CellRange([["Mark", "Node", "x (m)", "Force (kN)"], ["G", "b", None, 3], ["B", None, 0.2, 5]], "Acts", 1, 1)
    bars = network(["B", 1, 2, 1000, 500, 200], ["B", 1, 2, 1000, 500, 200], ["C", 1, 1, 10, 20, 200])
    tables = (bars, held_at(("B", 1), ("C", 1)), loads)
    assert [row[0] for row in AX_SEGMENTS(*tables, "kN")] == [pytest.approx(3.0), VALUE, VALUE, VALUE]
    problems = AX_SEGMENTS(*tables, "Problems")
    assert ["Acts!C3", "x has no meaning on a branched member"] in [row[:2] for row in problems]
    assert ["Net!C5", "From and To name the same node"] in [row[:2] for row in problems]


@pytest.mark.parametrize(
    ("heading", "says", "remedy"),
    [
        ("Length", "has no unit", 'such as "Length (mm)"'),
        ("Length (kN)", "unit of force, not of length", "unit of length such as mm"),
        ("Length (furlong)", "'furlong' is not understood", "unit of length such as mm"),
        ("Reach (mm)", "no heading Length", "Heading: Length"),
    ],
)
def test_headings_that_cannot_be_used(heading: str, says: str, remedy: str) -> None:
    table = schedule(headings=["Mark", heading, *HEADINGS[2:]])
    assert AX_SEGMENTS(table, supports(), None, "kN") == [[VALUE]]
    problems = AX_SEGMENTS(table, supports(), None, "Problems")
    assert any(says in row[1] and remedy in row[2] for row in problems[1:]), problems


def test_headings_that_occur_twice_name_both_cells() -> None:
    table = CellRange([["Length (mm)", "Area (mm2)", "E (GPa)", "L (m)"], [1, 2, 3, 4]], "S", 5, 2)
    problems = AX_SEGMENTS(table, [["Node"], [0]], None, "Problems")
    assert problems[1][0] == "S!E5"
    assert "S!B5" in problems[1][1]


@pytest.mark.parametrize("table", [[], [[None]], [["Length (mm)"]], [[None, None], [None, None]], [[5.0]]])
def test_empty_and_one_cell_ranges(table: list[list[Any]]) -> None:
    answer = AX_SEGMENTS(table, [["Node"], [0]], None, "kN")
    assert answer == [[VALUE]]
    assert AX_SEGMENTS(table, [["Node"], [0]], None, "Problems")[0][0] >= 0
    assert AX_MEMBERS(table, [["Node"], [0]], None, "kN") != []


def test_whole_columns_and_every_column_are_quick_and_keep_their_rows() -> None:
    rows = [HEADINGS, ["G", 1000, 500, 200, 12, 10, None]]
    tall = CellRange([*rows, *([[None] * 7] * 1_048_574)], "Bars", 1, 1)
    wide = CellRange([[*row, *([None] * (16_384 - 7))] for row in rows], "Bars", 1, 1)
    expected = [[pytest.approx(-12.0)]]
    small_start = time.perf_counter()
    assert AX_SEGMENTS(CellRange(rows, "Bars", 1, 1), supports(), None, "kN") == expected
    small = time.perf_counter() - small_start
    for table in (tall, wide):
        start = time.perf_counter()
        assert AX_SEGMENTS(table, supports(), None, "kN") == expected
        assert time.perf_counter() - start < max(10.0, 2000 * small)  # a hang is a failure; no time is asserted


def test_laws_that_are_not_linear_are_refused_not_passed_over() -> None:
    headings = [*HEADINGS, "Gap (mm)", "Works in"]
    table = CellRange(
        [headings, ["G", 1000, 500, 200, 12, 10, None, None, "both"], ["B", 1000, 500, 200, 12, 10, None, 2, None],
         ["C", 1000, 500, 200, 12, 10, None, None, "tension"]], "Bars", 1, 1,
    )  # fmt: skip
    answer = AX_SEGMENTS(table, supports("B", "C"), None, "kN")
    assert answer == [[pytest.approx(-12.0)], [VALUE], [VALUE]]


def test_settings_and_combinations_that_are_not_understood_stop_the_call() -> None:
    tables = (schedule(), supports(), None)
    assert AX_SEGMENTS(*tables, "kN", None, [["Strenght factor", 0.9]]) == [[VALUE]]
    said = AX_SEGMENTS(*tables, "Problems", None, [["Strenght factor", 0.9]])
    assert "write Strength factor" in said[1][2]
    assert AX_SEGMENTS(*tables, "kN", [["Combination", "D"], ["C1", 1.35]]) == [[VALUE]]
    assert AX_SEGMENTS(*tables, "kN", None, [["Strength factor", -1]]) == [[VALUE]]


@pytest.mark.parametrize(
    "wanted", ["Torque (kN)", "Force", "Force (mm)", [["Force max (kN)", 5]], [[CellError("#REF!")]]]
)
def test_wanted_headings_that_are_not_understood(wanted: Any) -> None:
    answer = AX_SEGMENTS(schedule(), supports(), None, wanted)
    assert answer[0][-1] == NAME


def test_no_exception_reaches_a_cell() -> None:
    for argument in (None, 5, "x", CellError("#N/A"), [[object()]], [[]], [[], [1]], ()):
        assert isinstance(AX_SEGMENTS(argument, argument), list)
        assert isinstance(AX_REACTIONS(argument, argument, argument), list)


def test_a_row_that_holds_for_every_member_fails_every_member_that_it_concerns() -> None:
    """Without a Mark column the first member's failure must not let the row drop out of the others in silence."""
    segments = [HEADINGS, ["G", 1000, 500, 200, 12, 10, None], ["B", 1000, 500, 200, 12, 10, None]]
    ends = [["Node", "Stiffness (kN/mm)"], [0, None], [1, 40]]
    loads = [["Segment", "q (kN/m)"], [2, 5]]
    assert AX_SEGMENTS(segments, ends, loads, "kN") == [[VALUE], [VALUE]]
    nowhere = [*ends, [None, 70]]
    assert AX_SEGMENTS(segments, nowhere, None, "kN") == [[VALUE], [VALUE]]


def test_a_segment_row_that_names_no_member_is_said_in_every_status_and_only_then() -> None:
    whole = AX_SEGMENTS(schedule([None, 1000, 500, 200, 12, 0, None]), supports(), None, "Status")
    assert "rows of the segments table name no member" in whole[0][0]
    totals = AX_SEGMENTS(schedule(["Total", 1000, 500, 200, 12, 0, None]), supports(), None, "Status")
    assert "name no member" not in totals[0][0]
    held = CellRange([*supports("B")[:4], ["B", 1, "soft"]], "Ends", 1, 1)
    wrong = AX_SEGMENTS(schedule(["B", 1000, 500, 200, 12, 0, None]), held, None, "Status")
    assert "name no member" not in wrong[0][0]
    assert "'soft' is not a number" in wrong[1][0]


def test_status_says_which_wanted_heading_is_not_understood() -> None:
    [[good, bad, status]] = AX_SEGMENTS(schedule(), supports(), None, [["Force (kN)", "Colour", "Status"]])
    assert bad == NAME
    assert "'Colour' is not understood" in status and isinstance(good, float)


def test_hardening_may_be_a_modulus_or_a_ratio() -> None:
    for heading, value in (("Hardening (GPa)", 2.1), ("Hardening", 0.01), ("Et/E (%)", 1)):
        table = [[*HEADINGS, heading], ["G", 1000, 500, 200, 12, 10, None, value]]
        assert AX_SEGMENTS(table, supports(), None, "kN") == [[pytest.approx(-12.0)]]
