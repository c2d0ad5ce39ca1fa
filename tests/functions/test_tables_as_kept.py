"""Tables as their users keep them give the same answer as the plain one."""

from __future__ import annotations

from typing import Any

import pytest

from xlaxial import CellError, CellRange
from xlaxial.functions import AX_MEMBERS, AX_PROFILE, AX_REACTIONS, AX_SEGMENTS

PLAIN = [
    ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"],
    ["T1", 1200, 600, 205, 12, 15],
    ["T1", 800, 450, 205, 12, 15],
    ["T2", 900, 500, 70, 23, -8],
]
ENDS = [["Mark", "Node", "Stiffness (kN/mm)"], ["T1", 0, None], ["T1", 2, 40], ["T2", 0, None], ["T2", 1, 25]]
WANTED = [["Force (kN)", "Displacement end (mm)"]]


def expected() -> list[list[float]]:
    """Restrained bars by their flexibilities (closed form): N = -sum(alpha dT L) / (sum L/EA + 1/k)."""
    f1, f2 = 1.2 / (205e9 * 600e-6), 0.8 / (205e9 * 450e-6)
    n1 = -12e-6 * 15 * 2.0 / (f1 + f2 + 1 / 40e6)
    n2 = 23e-6 * 8 * 0.9 / (0.9 / (70e9 * 500e-6) + 1 / 25e6)
    moved = [f1 * n1 + 12e-6 * 15 * 1.2, -n1 / 40e6, -n2 / 25e6]
    return [[pytest.approx(n / 1e3), pytest.approx(u * 1e3)] for n, u in zip((n1, n1, n2), moved, strict=True)]


def test_plain() -> None:
    assert AX_SEGMENTS(PLAIN, ENDS, None, WANTED) == expected()


def test_title_rows_units_row_extra_columns_blank_and_note_rows_keep_their_rows() -> None:
    table = [
        ["Ties of the north wall", None, None, None, None, None, None],
        [None] * 7,
        ["Member", "Checked by", "L", "A", "E", "α", "ΔT"],
        [None, None, "[mm]", "mm²", "kN/mm²", "µm/m·K", "°C"],
        ["T1", "AB", 1200, 600, 205, 12, 15],
        [None, "see drawing", None, None, None, None, None],
        ["T1", None, 800.0, 450, 205, 12, 15],
        ["Upper level", None, None, None, None, None, None],
        [None] * 7,
        ["T2", "CD", 900, 500, 70, 23, -8],
        [None] * 7,
    ]
    rows = AX_SEGMENTS(table, ENDS, None, WANTED)
    blank = [None, None]
    first, second, third = expected()
    assert rows == [first, blank, second, blank, blank, third]
    assert AX_SEGMENTS(table, ENDS, None, "Problems") == [[0, None, None]]


@pytest.mark.parametrize(
    "headings",
    [
        ["Ref", "Length, mm", "Area, mm2", "E, GPa", "Alpha, 1e-6/K", "dT, K"],
        ["REF.", "LENGTH / mm", "area/mm^2", "Young's modulus / GPa", "CTE / (10^-6/K)", "delta T / K"],
        ["Tag", "Len [mm]", "A [mm²]", "E [kN/mm2]", "α [ppm/°C]", "Temperature change [°C]"],
        ["ID", "Length\n(mm)", "Cross-sectional area\u00a0(sq mm)", "E (GPa)", "αT (10⁻⁶/K)", "∆T (C)"],
    ],
)
def test_spellings_of_headings(headings: list[str]) -> None:
    assert AX_SEGMENTS([headings, *PLAIN[1:]], ENDS, None, WANTED) == expected()


def test_numbers_as_text_and_cells_with_their_own_units() -> None:
    rows = [["T1", "1.2 m", "600", "205", 12, "27 °F"], ["T1", " 800 ", "4.5 cm2", 205, "12", "15 K"], PLAIN[3]]
    assert AX_SEGMENTS([PLAIN[0], *rows], ENDS, None, WANTED) == expected()


def test_decimal_mark_by_setting() -> None:
    rows = [["T1", "1.200,0", "600,0", "205", 12, 15], *PLAIN[2:]]
    assert AX_SEGMENTS([PLAIN[0], *rows], ENDS, None, WANTED, None, [["Decimal mark", ","]]) == expected()
    without = AX_SEGMENTS([PLAIN[0], *rows], ENDS, None, "kN")
    assert [row[0] for row in without[:2]] == [CellError("#VALUE!")] * 2
    assert without[2] == [expected()[2][0]]


def test_own_headings_by_settings() -> None:
    headings = ["Mark", "c/c of plates (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"]
    settings = [["Setting", "Value"], ["Heading: Length", "c/c of plates"]]
    assert AX_SEGMENTS([headings, *PLAIN[1:]], ENDS, None, WANTED, None, settings) == expected()
    both = [[*headings, "Length (mm)"], *([*row, 1] for row in PLAIN[1:])]
    assert AX_SEGMENTS(both, ENDS, None, WANTED, None, settings) == expected()


def test_blank_marks_as_above() -> None:
    rows = [PLAIN[1], [None, *PLAIN[2][1:]], PLAIN[3]]
    assert AX_SEGMENTS([PLAIN[0], *rows], ENDS, None, WANTED, None, [["Blank mark", "as above"]]) == expected()
    assert AX_SEGMENTS([PLAIN[0], *rows], ENDS, None, "kN")[1] == [CellError("#VALUE!")]


def test_order_column_frees_the_rows() -> None:
    headings = [*PLAIN[0], "Order"]
    rows = [[*PLAIN[3], 1], [*PLAIN[2], 2], [*PLAIN[1], 1]]
    first, second, third = expected()
    assert AX_SEGMENTS([headings, *rows], ENDS, None, WANTED) == [third, second, first]
    assert "rows' order" not in AX_SEGMENTS([headings, *rows], ENDS, None, "Status")[1][0]
    assert "rows' order" in AX_SEGMENTS(PLAIN, ENDS, None, "Status")[0][0]
    twice = AX_SEGMENTS([headings, [*PLAIN[1], 1], [*PLAIN[2], 1]], ENDS, None, "Problems")
    assert any("same Order" in row[1] for row in twice[1:])


def test_node_labels_two_and_two_point_zero_and_text_are_one() -> None:
    for label in (2, 2.0, "2", " 2 "):
        ends = [ENDS[0], ENDS[1], ["T1", label, 40], *ENDS[3:]]
        assert AX_SEGMENTS(PLAIN, ends, None, WANTED) == expected()


def test_a_supports_table_without_marks_holds_for_every_member_and_says_so() -> None:
    one_each = [PLAIN[0], PLAIN[1], PLAIN[3]]
    ends = [["Node", "Stiffness (kN/mm)"], [0, None], [1, 25]]
    rows = AX_SEGMENTS(one_each, ends, None, [["Force (kN)", "Status"]])
    assert rows[1][0] == expected()[2][0]
    assert all("held for every member" in row[1] for row in rows)
    assert AX_REACTIONS(one_each, ends, None, "kN") == [[CellError("#N/A")]] * 2


def test_blank_stiffness_is_rigid_and_status_says_so() -> None:
    assert "rigid at 0" in AX_SEGMENTS(PLAIN, ENDS, None, "Status")[0][0]
    assert [row[0] for row in AX_REACTIONS(PLAIN, ENDS, None, "State")] == ["rigid", "elastic"] * 2


def test_the_answer_follows_its_headings_and_their_units() -> None:
    wanted = [["Displacement end", None, "Force max", "Remark"], ["in", None, "lbf", None]]
    first = AX_SEGMENTS(PLAIN, ENDS, None, wanted)[0]
    force, moved = AX_SEGMENTS(PLAIN, ENDS, None, WANTED)[0]
    assert first == [
        pytest.approx(moved / 25.4),
        None,
        pytest.approx(force * 1e3 / 4.4482216152605),
        CellError("#NAME?"),
    ]


def test_standard_set_comes_with_its_headings_in_the_tables_units() -> None:
    rows = AX_SEGMENTS(PLAIN, ENDS)
    assert rows[0][:2] == ["Force max (kN)", "Force min (kN)"]
    assert len(rows) == len(PLAIN)
    inches = [["Length (in)", "Area (in2)", "E (ksi)"], [48, 1.2, 29000]]
    assert AX_SEGMENTS(inches, [["Node"], [0]])[0][:3] == ["Force max (kip)", "Force min (kip)", "Stress max (ksi)"]


def test_utilisation_pass_and_what_is_not_known() -> None:
    table = [[*PLAIN[0], "Yield (MPa)", "Net area (mm2)", "Buckling resistance (kN)"]]
    table += [[*PLAIN[1], 355, None, 100], [*PLAIN[2], 355, 300, None], [*PLAIN[3], None, None, None]]
    rows = AX_SEGMENTS(
        table, ENDS, None, [["Force (kN)", "Utilisation", "Pass", "Status"]], None, [["Strength factor", 0.9]]
    )
    force = rows[0][0]
    assert rows[0][1] == pytest.approx(max(-force / 100, -force * 1e3 / 600 / (355 * 0.9)))
    assert rows[1][1] == pytest.approx(-force * 1e3 / 300 / (355 * 0.9))
    assert rows[0][2] == 1
    assert "buckling not checked" in rows[1][3]
    assert "buckling not checked" not in rows[0][3]
    assert "strength factor 0.9" in rows[0][3]
    assert rows[2][1:3] == [CellError("#N/A")] * 2
    assert "no Yield" in rows[2][3]
    governing = AX_MEMBERS(table, ENDS, None, [["Mark", "Segment", "Pass"]], None, [["Strength factor", 0.9]])
    assert governing == [["T1", 2, 1], ["T2", CellError("#N/A"), CellError("#N/A")]]
    assert AX_MEMBERS(table, ENDS, None, "Segment")[0] == [1]  # with the whole yield stress buckling governs


def test_a_stress_beyond_yield_is_said() -> None:
    table = [[*PLAIN[0], "Yield (MPa)"], ["T1", 1000, 100, 205, 12, 200, 235]]
    [[utilisation, passes, status]] = AX_SEGMENTS(
        table, [["Node"], [0], [1]], None, [["Utilisation", "Pass", "Status"]]
    )
    assert utilisation == pytest.approx(205e3 * 12e-6 * 200 / 235)
    assert passes == 0
    assert "beyond yield" in status


def test_material_fills_what_the_row_leaves_blank() -> None:
    table = [
        ["Mark", "Length (mm)", "Diameter (mm)", "Material", "E (GPa)", "dT (K)"],
        ["T1", 1000, 20, "S355", None, 50],
        ["T2", 1000, 20, "S355", 200, 50],
        ["T3", 1000, 20, "S535", None, 50],
    ]
    rows = AX_SEGMENTS(table, [["Node"], [0], [1]], None, [["Stress (MPa)", "Utilisation"]])
    assert rows[0] == [pytest.approx(-210e3 * 12e-6 * 50), pytest.approx(210e3 * 12e-6 * 50 / 345)]
    assert rows[1][0] == pytest.approx(-120.0)  # restrained steel, 200 GPa, 12e-6/K, 50 K: handbook value
    assert rows[2] == [CellError("#VALUE!")] * 2
    assert "did you mean" in AX_SEGMENTS(table, [["Node"], [0], [1]], None, "Problems")[1][2]


def test_cases_are_summed_and_status_says_so() -> None:
    loads = [["Mark", "Case", "Node", "Segment", "Force (kN)", "dT (K)"], ["T1", "D", 1, None, 10, None]]
    loads += [["T1", "L", 1, None, 5, None], ["T1", "T", None, 2, None, 4]]
    together = AX_SEGMENTS(PLAIN, ENDS, loads, WANTED)
    summed = [["Mark", "Node", "Segment", "Force (kN)", "dT (K)"], ["T1", 1, None, 15, None], ["T1", None, 2, None, 4]]
    assert together == [[pytest.approx(v) for v in row] for row in AX_SEGMENTS(PLAIN, ENDS, summed, WANTED)]
    assert "cases D, L, T summed" in AX_SEGMENTS(PLAIN, ENDS, loads, "Status")[0][0]


def test_settlement_in_the_loads_table_moves_the_support_there() -> None:
    ends = [["Mark", "Node", "Stiffness (kN/mm)", "Settlement (mm)"], ["T2", 0, None, 0.4], ["T2", 1, None, None]]
    loads = [["Mark", "Node", "Settlement (mm)"], ["T2", 0, 0.4]]
    table = [PLAIN[0], PLAIN[3]]
    by_loads = AX_SEGMENTS(table, [row[:3] for row in ends], loads, "kN")
    assert by_loads == [[pytest.approx(AX_SEGMENTS(table, ends, None, "kN")[0][0])]]
    lost = AX_SEGMENTS(
        [PLAIN[0], PLAIN[1], PLAIN[2]], ENDS[:3], [["Mark", "Node", "Settlement (mm)"], ["T1", 1, 0.4]], "kN"
    )
    assert lost == [[CellError("#VALUE!")]] * 2


def test_one_row_calls_agree_with_the_whole_table() -> None:
    headings, rows = PLAIN[0], [PLAIN[1], PLAIN[3]]
    ends = [["Mark", "Node", "Stiffness (kN/mm)"], ["T1", 0, None], ["T1", 1, 40], *ENDS[3:]]
    whole = AX_SEGMENTS([headings, *rows], ends, None, WANTED)
    for row, expected_row in zip(rows, whole, strict=True):
        assert AX_SEGMENTS([row], ends, None, WANTED, None, None, [headings]) == [expected_row]
    assert AX_SEGMENTS([rows[0]], ends, None, "Problems", None, None, [headings]) == [[0, None, None]]


def test_profile_has_both_sides_of_each_jump_and_reaches_both_ends() -> None:
    loads = [["Mark", "x (m)", "Force (kN)"], ["T1", 0.5, 20]]
    rows: list[list[Any]] = AX_PROFILE(
        PLAIN, ENDS, loads, "T1", [["x (m)", "Force (kN)", "Displacement (mm)"]], None, None, 3
    )
    assert len(rows) == 3 * 3
    assert [rows[2][0], rows[3][0], rows[-1][0]] == [pytest.approx(0.5), pytest.approx(0.5), pytest.approx(2.0)]
    assert rows[2][1] - rows[3][1] == pytest.approx(20.0)
    last = AX_SEGMENTS(PLAIN, ENDS, loads, "Displacement end (mm)")[1][0]
    assert rows[-1][2] == pytest.approx(last)
    assert AX_PROFILE(PLAIN, ENDS, loads, "T9", "kN") == [[CellError("#VALUE!")]]
    assert AX_PROFILE(PLAIN, ENDS, loads, "T1", "kN", None, None, 1) == [[CellError("#VALUE!")]]


def test_the_same_tables_are_solved_once_and_an_edit_is_seen() -> None:
    from xlaxial.functions.bars.worksheet import SOLVED

    SOLVED.clear()
    first = AX_SEGMENTS(CellRange(PLAIN, "S", 1, 1), ENDS, None, "kN")
    AX_REACTIONS(CellRange(PLAIN, "S", 1, 1), ENDS, None, "kN")
    AX_MEMBERS(CellRange(PLAIN, "S", 1, 1), ENDS, None, "-")
    assert (SOLVED.hits, SOLVED.misses) == (2, 1)
    edited = [PLAIN[0], ["T1", 1200, 600, 205, 12, 16], *PLAIN[2:]]
    assert AX_SEGMENTS(CellRange(edited, "S", 1, 1), ENDS, None, "kN")[0] != first[0]
    assert AX_SEGMENTS(CellRange(PLAIN, "S", 1, 1), ENDS, None, "kN") == first
    assert SOLVED.misses == 2


def test_units_that_are_signs_alone_are_units() -> None:
    """A percentage is never taken for a number without dimension, nor a dash for nothing."""
    strains = {
        "Imposed strain (%)": 0.05,
        "Imposed strain, %": 0.05,
        "Imposed strain [‰]": 0.5,
        "Imposed strain (-)": 5e-4,
    }
    strains |= {"Imposed strain, -": 5e-4, "ε0 / %": 0.05, "Imposed strain (µε)": 500}
    for heading, value in strains.items():
        table = [["L (mm)", "A (mm2)", "E (GPa)", "Yield (MPa)", heading], [1000, 500, 200, 250, value]]
        rows = AX_SEGMENTS(
            table, [["Node"], [0], [1]], None, [["Stress (MPa)", "Utilisation (%)", "Utilisation", "Utilisation (-)"]]
        )
        assert rows == [[pytest.approx(-100), pytest.approx(40), pytest.approx(0.4), pytest.approx(0.4)]], heading


def test_a_tube_of_a_steel_graded_by_diameter_takes_its_outside_diameter() -> None:
    """42CrMo4 by EN ISO 683-2: 40 to 100 mm 650 MPa, 16 to 40 mm 750 MPa; the wall of a tube is not its ruling section."""
    table = [["L (mm)", "OD (mm)", "Wall (mm)", "Material", "dT (K)"], [1000, 90, 10, "42CrMo4", 50]]
    [[stress, utilisation]] = AX_SEGMENTS(table, [["Node"], [0], [1]], None, [["Stress (MPa)", "Utilisation"]])
    assert utilisation == pytest.approx(-stress / 650)
    unknown = [["L (mm)", "A (mm2)", "Material", "dT (K)"], [1000, 90, "42CrMo4", 50]]
    [[utilisation, status]] = AX_SEGMENTS(unknown, [["Node"], [0], [1]], None, [["Utilisation", "Status"]])
    assert utilisation == CellError("#N/A")
    assert "fill in Yield" in status or "Yield, " in status


def test_reactions_of_rows_that_a_one_row_call_passes_over_are_not_applicable() -> None:
    ends = [["Mark", "Node", "Stiffness (kN/mm)"], ["T2", 0, None], ["T2", 1, 25], [None, None, None], ["T1", 0, None]]
    answer = AX_REACTIONS([PLAIN[3]], ends, None, "kN", None, None, [PLAIN[0]])
    force = expected()[2][0]
    assert answer[0] == [pytest.approx(-float(force.expected))]
    assert answer[2:] == [[None], [CellError("#N/A")]]
